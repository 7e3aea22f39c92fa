# The config as it was understood, and the dataset: every mode with its verdict.


rule resolve_config:
    input:
        config_file(),
    output:
        result=config_json(),
        record=record_path(config_json()),
    log:
        f"{CONFIG.results}/logs/config.log",
    benchmark:
        f"{CONFIG.results}/benchmarks/config.tsv"
    params:
        overrides=[word for entry in show_overrides(OVERRIDES) for word in ("--set", entry)],
        source=source.source_hash("knell.survey.config"),
    shell:
        "logged {log:q} knell config {input:q} {params.overrides:q} --output {output.result:q}"


rule dataset:
    input:
        CONFIG.cell_files(),
        config=config_json(),
    output:
        result=dataset_file(),
        record=record_path(dataset_file()),
    log:
        f"{CONFIG.results}/logs/dataset.log",
    benchmark:
        f"{CONFIG.results}/benchmarks/dataset.tsv"
    params:
        solver=SOLVER,
        prover=PROVER if CONFIG.proofs != "none" else "",
        source=source.source_hash(source.DATASET),
    shell:
        "logged {log:q} knell merge --config {input.config:q} --output {output.result:q}"
