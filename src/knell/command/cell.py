"""``knell cell``: AIM at one depth and precision, from the list of a search."""

from __future__ import annotations

import argparse

from knell.command.options import Task, add_result_arguments, read_search, whole

DESCRIPTION = "Solve for the modes of a search by the asymptotic iteration method at one depth and precision."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_result_arguments(parser)
    parser.add_argument("--search", required=True, help="the search of the point")
    parser.add_argument("--depth", required=True, type=whole(1), help="iteration depth")
    parser.add_argument("--precision", required=True, type=whole(15), help="decimal digits of the arithmetic")


def run(arguments: argparse.Namespace) -> None:
    from knell.survey import solve

    depth, precision = arguments.depth, arguments.precision
    task = Task.begin("cell", arguments, (arguments.search,), depth=depth, precision=precision)
    search = read_search(arguments.search, task)
    task.finish(solve.cell(task.point, search, depth, precision))
