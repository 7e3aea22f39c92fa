# The survey, from one config to a dataset with its evidence.
#
#   config ──> search ──> cell (depth × precision) ─┐
#                    ├──> witness ──────────────────┼─> dataset ──> figures ──> provenance
#                    └──> proofs ───────────────────┘
#
# Run `snakemake` for config/config.yaml, `snakemake --configfile FILE` for another survey.


include: "workflow/rules/common.smk"


wildcard_constraints:
    window=r"\d+(_\d+)?",
    point=r"[a-z]+-l\d+-[a-z0-9_-]+",
    depth=r"\d+",
    precision=r"\d+",
    extent=r"modes|windows",


# Too quick to be worth a cluster's queue.
localrules:
    all,
    resolve_config,
    provenance,


rule all:
    input:
        CONFIG.cell_files(),
        dataset_file(),
        figure_files(),
        provenance_file(),


include: "workflow/rules/search.smk"
include: "workflow/rules/cells.smk"
include: "workflow/rules/witness.smk"
include: "workflow/rules/proofs.smk"
include: "workflow/rules/dataset.smk"
include: "workflow/rules/figures.smk"
include: "workflow/rules/provenance.smk"
