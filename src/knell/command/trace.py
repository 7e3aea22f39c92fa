"""``knell trace``: how a file was made, back to the config."""

from __future__ import annotations

import argparse

from knell.record.trace import describe, trace

DESCRIPTION = (
    "Print the chain from a file of the survey back to the config, whether every link still holds, and the one "
    "command that makes the file again. The exit code is 1 when a hash no longer matches."
)


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("file", help="such as results/survey.nc or a figure")


def run(arguments: argparse.Namespace) -> int:
    chain = trace(arguments.file)
    print(describe(chain))
    return 1 if chain.problems else 0
