"""Options that several commands share, and the making of one result file."""

from __future__ import annotations

import argparse
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from knell.errors import DamagedFile, StaleError
from knell.physics.exact import from_slug, parse_rational
from knell.record.provenance import Making
from knell.record.source import SOLVER, source_hash
from knell.survey import jsonfile
from knell.survey.points import Point


def rational(text: str) -> Fraction:
    """An exact number for argparse: ``0.9`` or ``9/10``."""
    try:
        return parse_rational(text)
    except ValueError as error:
        raise argparse.ArgumentTypeError(str(error)) from None


def whole(least: int) -> Callable[[str], int]:
    """A whole number of at least ``least`` for argparse."""

    def convert(text: str) -> int:
        if not text.isascii() or not text.isdigit() or int(text) < least:
            raise argparse.ArgumentTypeError(f"{text} must be a whole number, {least} or more")
        return int(text)

    return convert


def add_result_arguments(parser: argparse.ArgumentParser) -> None:
    """The options of every step that computes for one point."""
    parser.add_argument("--point", required=True, type=_point, help="such as axial-l2-n4-k9_10")
    parser.add_argument("--window", required=True, type=_slug, help="depth of the window, such as 3_2")
    parser.add_argument("--solver", help="content hash that the solver must have; refused if it has another")
    parser.add_argument("--output", required=True, help="the JSON file to write")


def _point(text: str) -> Point:
    try:
        return Point.from_slug(text)
    except ValueError as error:
        raise argparse.ArgumentTypeError(str(error)) from None


def _slug(text: str) -> Fraction:
    try:
        return from_slug(text)
    except ValueError as error:
        raise argparse.ArgumentTypeError(str(error)) from None


@dataclass(frozen=True)
class Task:
    """One result file to make: its options, the solver's hash, and what is written of its making."""

    point: Point
    window: Fraction
    output: str
    solver: str
    making: Making

    @classmethod
    def begin(cls, kind: str, arguments: argparse.Namespace, inputs: tuple[str, ...] = (), **parameters: Any) -> Task:
        """Hash the inputs and the solver. Raises `StaleError` if the solver is not the one that was asked for."""
        solver = source_hash(SOLVER)
        if arguments.solver and arguments.solver != solver:
            raise StaleError(f"the solver's source is {solver} now, not {arguments.solver}; run snakemake again")
        point, window = arguments.point, arguments.window
        stated = {"point": point.document(), "window": str(window), "solver": solver, **parameters}
        return cls(point, window, arguments.output, solver, Making.begin(kind, inputs, stated))

    def finish(self, document: dict[str, Any], timings: Mapping[str, Any] | None = None) -> None:
        """Write the result and its record, each whole or not at all; seconds of parts go to the record alone."""
        kind = self.making.rule
        jsonfile.write(self.output, {**document, "kind": kind, "format": jsonfile.FORMAT, "solver": self.solver})
        self.making.finish(self.output, timings)


def read_search(path: str, task: Task) -> dict[str, Any]:
    """The search of the task's point. Raises `DamagedFile` or `StaleError`, naming the file, for any other."""
    search = jsonfile.read(path, "search")
    if search["point"] != task.point.document():
        raise DamagedFile(f"{path}: belongs to another point than {task.point.slug}; delete it and run snakemake again")
    if search["solver"] != task.solver:
        raise StaleError(f"{path}: was made by another state of the solver; run snakemake --force {path}")
    return search
