# Every mode of a point proven in ball arithmetic, and, for `windows`, that the window holds no other.


rule proofs:
    input:
        f"{CELLS}/window-{{window}}/{{point}}/search.json",
    output:
        result=f"{CELLS}/window-{{window}}/{{point}}/proofs-{{extent}}.json",
        record=record_path(f"{CELLS}/window-{{window}}/{{point}}/proofs-{{extent}}.json"),
    log:
        "results/logs/window-{window}/{point}/proofs-{extent}.log",
    benchmark:
        "results/benchmarks/window-{window}/{point}/proofs-{extent}.tsv"
    # As long as a witness.
    priority: 1
    params:
        solver=SOLVER,
        prover=PROVER,
    shell:
        "logged {log} knell proofs --point {wildcards.point} --window {wildcards.window} --search {input}"
        " --extent {wildcards.extent} --solver {params.solver} --prover {params.prover} --output {output.result}"
