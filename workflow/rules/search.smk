# Every mode in the window of a point, found blind by the two-sided match.


rule search:
    output:
        result=f"{CELLS}/window-{{window}}/{{point}}/search.json",
        record=record_path(f"{CELLS}/window-{{window}}/{{point}}/search.json"),
    log:
        "results/logs/window-{window}/{point}/search.log",
    benchmark:
        "results/benchmarks/window-{window}/{point}/search.tsv"
    priority: 2
    params:
        solver=SOLVER,
    shell:
        "logged {log} knell search --point {wildcards.point} --window {wildcards.window}"
        " --solver {params.solver} --output {output.result}"
