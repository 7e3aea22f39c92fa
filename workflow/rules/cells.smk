# Asymptotic iteration at one depth and precision, from the list of the search.


rule cell:
    input:
        f"{CELLS}/window-{{window}}/{{point}}/search.json",
    output:
        result=f"{CELLS}/window-{{window}}/{{point}}/aim-N{{depth}}-P{{precision}}.json",
        record=record_path(f"{CELLS}/window-{{window}}/{{point}}/aim-N{{depth}}-P{{precision}}.json"),
    log:
        "results/logs/window-{window}/{point}/aim-N{depth}-P{precision}.log",
    benchmark:
        "results/benchmarks/window-{window}/{point}/aim-N{depth}-P{precision}.tsv"
    params:
        solver=SOLVER,
    shell:
        "logged {log} knell cell --point {wildcards.point} --window {wildcards.window} --search {input}"
        " --depth {wildcards.depth} --precision {wildcards.precision}"
        " --solver {params.solver} --output {output.result}"
