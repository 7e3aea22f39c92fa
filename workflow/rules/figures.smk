# One rule for each figure, because a caption belongs to a rule.

for figure in FIGURES:

    rule:
        name:
            f"figure_{figure}"
        input:
            dataset_file(),
        output:
            png=report(
                f"{CONFIG.results}/figures/{figure}.png",
                caption=f"../report/{figure}.rst",
                category="Figures",
                labels={"figure": figure.replace("_", " ")},
            ),
            pdf=f"{CONFIG.results}/figures/{figure}.pdf",
            records=records(f"{CONFIG.results}/figures/{figure}.{suffix}" for suffix in FIGURE_FORMATS),
        log:
            f"{CONFIG.results}/logs/figure_{figure}.log",
        benchmark:
            f"{CONFIG.results}/benchmarks/figure_{figure}.tsv"
        params:
            figure=figure,
            source=source.source_hash(source.FIGURES),
        shell:
            "logged {log:q} knell figure {params.figure} --dataset {input:q} --output {output.png:q} {output.pdf:q}"
