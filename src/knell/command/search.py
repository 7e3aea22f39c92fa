"""``knell search``: find every mode in the window of a point."""

from __future__ import annotations

import argparse

from knell.command.options import Task, add_result_arguments

DESCRIPTION = "Find every mode in the window of a point and write them to a checksummed JSON file."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_result_arguments(parser)


def run(arguments: argparse.Namespace) -> None:
    from knell.survey import solve

    task = Task.begin("search", arguments)
    task.finish(solve.search(task.point, task.window))
