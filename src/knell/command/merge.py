"""``knell merge``: judge the results of every point and write the dataset."""

from __future__ import annotations

import argparse

from knell.errors import FileError, StaleError
from knell.record.provenance import Making
from knell.record.source import DATASET, PROVER, SOLVER, source_hash
from knell.survey.config import read_completed
from knell.survey.config_schema import NO_PROOFS

DESCRIPTION = "Read every result of the survey, judge the modes and write the dataset."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--config", required=True, help="the completed config (JSON)")
    parser.add_argument("--output", required=True, help="the netCDF file to write")


def run(arguments: argparse.Namespace) -> None:
    from knell.survey import dataset, dataset_file

    config = read_completed(arguments.config)
    solver = source_hash(SOLVER)
    inputs = (arguments.config, *config.cell_files())
    making = Making.begin("dataset", inputs, {"solver": solver, "source": source_hash(DATASET)})
    result = dataset.assemble(config)
    if solver not in result.attrs["source"]:
        raise StaleError(
            f"the cells were made by another state of the solver ({result.attrs['source']}) than the one here, "
            f"{solver}; run snakemake --forcerun search"
        )
    prover = source_hash(PROVER)
    if config.proofs != NO_PROOFS and prover not in result.attrs["source"]:
        raise StaleError(
            f"the proofs were made by another state of their code ({result.attrs['source']}) than the one here, "
            f"{prover}; run snakemake --forcerun proofs"
        )
    result.attrs["record"] = making.id
    try:
        dataset_file.write(result, arguments.output)
    except RuntimeError as error:
        # What the netCDF library makes of a full disk.
        raise FileError(f"cannot write {arguments.output}: {error}; is there space left on the disk?") from None
    making.finish(arguments.output)
