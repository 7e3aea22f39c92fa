"""``knell record``: check every file of a survey against its record and merge the records."""

from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path
from statistics import median

from knell.record.verify import merge_records
from knell.survey.config import read_completed

DESCRIPTION = "Check every file of a survey against its record and merge the records, one line of JSON for each file."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--config", required=True, help="the completed config (JSON)")
    parser.add_argument("--output", required=True, help="the JSON Lines file to write")
    parser.add_argument("files", nargs="+", help="what was made of the cells: dataset and figures")


def run(arguments: argparse.Namespace) -> None:
    config = read_completed(arguments.config)
    merge_records([arguments.config, *config.cell_files(), *arguments.files], arguments.output)
    line = seconds_of_proofs(arguments.output)
    if line:
        print(line, file=sys.stderr)


def seconds_of_proofs(log: str) -> str:
    """What the proofs of the merged records took; empty where there are none."""
    records = [json.loads(line) for line in Path(log).read_text(encoding="utf-8").splitlines()]
    timings = [record["timings"] for record in records if record["rule"] == "proofs"]
    modes = [seconds for timing in timings for seconds in timing["modes"]]
    windows = [timing["certificate"] for timing in timings if timing["certificate"]]
    said = []
    for name, seconds in (("modes", modes), ("windows", windows)):
        if seconds:
            said.append(f"{len(seconds)} {name}, {median(seconds):.2f} s each (median), {max(seconds):.2f} s at most")
    return f"proofs: {'; '.join(said)}" if said else ""
