"""``knell record``: check every file of a survey against its record and merge the records."""

from __future__ import annotations

import argparse

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
