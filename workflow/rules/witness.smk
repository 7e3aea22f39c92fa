# The same modes by other means: the spectral method and the match in high precision.


rule witness:
    input:
        f"{CELLS}/window-{{window}}/{{point}}/search.json",
    output:
        result=f"{CELLS}/window-{{window}}/{{point}}/witness.json",
        record=record_path(f"{CELLS}/window-{{window}}/{{point}}/witness.json"),
    log:
        "results/logs/window-{window}/{point}/witness.log",
    benchmark:
        "results/benchmarks/window-{window}/{point}/witness.tsv"
    # The longest jobs first: none is left alone at the end.
    priority: 1
    params:
        solver=SOLVER,
    shell:
        "logged {log} knell witness --point {wildcards.point} --window {wildcards.window} --search {input}"
        " --solver {params.solver} --output {output.result}"
