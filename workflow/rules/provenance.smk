# Every file checked against its record, and the records merged into one log.


rule provenance:
    input:
        products(),
        records(products()),
        config=config_json(),
        made=[dataset_file(), *figure_files()],
    output:
        provenance_file(),
    log:
        f"{CONFIG.results}/logs/provenance.log",
    benchmark:
        f"{CONFIG.results}/benchmarks/provenance.tsv"
    shell:
        "logged {log:q} knell record --config {input.config:q} --output {output:q} {input.made:q}"
