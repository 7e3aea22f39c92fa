"""``knell proofs``: the modes of a point proven, and that they are all of its window."""

from __future__ import annotations

import argparse
import sys
from statistics import median

from knell.command.options import Task, add_result_arguments, read_search
from knell.errors import StaleError
from knell.record.source import PROVER, source_hash
from knell.survey.config_schema import NO_PROOFS, PROOFS

DESCRIPTION = "Prove the modes of a search in ball arithmetic, and that they are all the modes of its window."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_result_arguments(parser)
    parser.add_argument("--search", required=True, help="the search of the point")
    parser.add_argument("--extent", required=True, choices=[name for name in PROOFS if name != NO_PROOFS])
    parser.add_argument("--prover", help="content hash that the code of the proofs must have")


def run(arguments: argparse.Namespace) -> None:
    from knell.survey import certify

    prover = source_hash(PROVER)
    if arguments.prover and arguments.prover != prover:
        raise StaleError(f"the source of the proofs is {prover} now, not {arguments.prover}; run snakemake again")
    task = Task.begin("proofs", arguments, (arguments.search,), extent=arguments.extent, prover=prover)
    search, timings = read_search(arguments.search, task), certify.Timings()
    document = certify.prove_point(task.point, search, arguments.extent, timings)
    task.finish({**document, "prover": prover}, timings.document())
    proven = sum(mode["status"] == certify.PROVEN for mode in document["modes"])
    each = f", median {median(timings.modes):.2f} s" if timings.modes else ""
    window = f"window {document['certificate']['status']}, {timings.certificate:.1f} s in all"
    print(f"{proven} of {len(timings.modes)} modes proven{each}; {window}", file=sys.stderr)
