"""``knell witness``: the modes of a point by the spectral method and by the match in high precision."""

from __future__ import annotations

import argparse

from knell.command.options import Task, add_result_arguments, read_search

DESCRIPTION = "Compute the modes of a search by methods other than asymptotic iteration."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_result_arguments(parser)
    parser.add_argument("--search", required=True, help="the search of the point")


def run(arguments: argparse.Namespace) -> None:
    from knell.survey import solve

    task = Task.begin("witness", arguments, (arguments.search,))
    search = read_search(arguments.search, task)
    task.finish(solve.witness(task.point, search))
