"""``knell modes``: the quasinormal modes of one black hole, in seconds and without files."""

from __future__ import annotations

import argparse
import json
from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any

from knell.command.options import rational, whole
from knell.errors import InputError
from knell.physics.field import FIELDS, LOWEST_ELL
from knell.survey.config_schema import EXCLUDED_SQUARE, LEAST_PRECISION
from knell.survey.points import Point

DESCRIPTION = (
    "Print quasinormal modes of one power-law deformed black hole: Mω (M the ADM mass, time dependence exp(-iωt)), "
    "the digits on which independent runs agree, and the verdict. Only settled and proven modes are to be relied on."
)
OVERTONES = 3
DIGITS = 12
PRINCIPAL = "principal"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--exponent", type=whole(2), help="n of the power law, 2 or more; not needed for coupling 0")
    parser.add_argument("--coupling", type=rational, required=True, help="κ, at most 1; 0.9 means exactly 9/10")
    parser.add_argument("--field", choices=FIELDS, default="axial", help="default: %(default)s")
    parser.add_argument("--ell", type=int, help="ℓ; default: the field's lowest")
    extent = parser.add_mutually_exclusive_group()
    extent.add_argument("--overtones", type=whole(1), help=f"how many, from 0 on; default: {OVERTONES}")
    extent.add_argument("--window", type=rational, help="every mode with |Im Mω| up to this, such as 1.5")
    parser.add_argument("--digits", type=whole(1), default=DIGITS, help="digits to reach; default: %(default)s")
    parser.add_argument("--depth", type=whole(1), help="iteration depth; default: as deep as --digits needs")
    parser.add_argument("--precision", type=whole(LEAST_PRECISION), help="decimal digits of the arithmetic")
    parser.add_argument("--json", action="store_true", help="print a list of objects")


def run(arguments: argparse.Namespace) -> None:
    point = _point(arguments)
    if arguments.window is not None and arguments.window <= EXCLUDED_SQUARE:
        raise InputError(f"--window {arguments.window}: must be above {float(EXCLUDED_SQUARE)}, such as 1.5")

    from knell.survey import one_hole

    modes = one_hole.modes(
        point,
        overtones=None if arguments.window is not None else arguments.overtones or OVERTONES,
        window_depth=arguments.window,
        digits=arguments.digits,
        depth=arguments.depth,
        precision=arguments.precision,
    )
    print(as_json(modes) if arguments.json else as_table(modes, point, arguments.window is not None))


def _point(arguments: argparse.Namespace) -> Point:
    exponent, coupling, field = arguments.exponent, arguments.coupling, arguments.field
    if exponent is None and coupling:
        raise InputError("--exponent: is missing; it must be a whole number, 2 or more, such as 4")
    if coupling > 1:
        raise InputError(f"--coupling {_plain(coupling)}: must be at most 1; above 1 there is no horizon")
    ell = LOWEST_ELL[field] if arguments.ell is None else arguments.ell
    if ell < LOWEST_ELL[field]:
        raise InputError(f"--ell {ell}: must be {LOWEST_ELL[field]} or more for the {field} field")
    return Point.canonical(field, exponent, coupling, ell)


def as_json(modes: Sequence[Mapping[str, Any]]) -> str:
    """A list of objects. ``overtone`` is null for a near-axis mode, which has an index of its own."""
    return json.dumps(
        [
            {
                "family": mode["family"],
                "overtone": mode["index"] if mode["family"] == PRINCIPAL else None,
                "index": mode["index"],
                "frequency_re": mode["re"],
                "frequency_im": mode["im"],
                "digits": mode["digits"],
                "verdict": mode["verdict"],
            }
            for mode in modes
        ],
        indent=1,
        ensure_ascii=False,
    )


def as_table(modes: Sequence[Mapping[str, Any]], point: Point, families: bool) -> str:
    """One line for each mode under a heading; ``families`` adds the family, for a window that holds several."""
    heads = ["overtone", "Re Mω", "Im Mω", "digits", "verdict"]
    rows = [
        [
            str(mode["index"]) if mode["family"] == PRINCIPAL else f"{mode['family']} {mode['index']}",
            mode["re"] or "-",
            mode["im"] or "-",
            f"{mode['digits']:.1f}",
            mode["verdict"],
        ]
        for mode in modes
    ]
    if families:
        heads[0] = "mode"
    widths = [max(len(row[i]) for row in [heads, *rows]) for i in range(len(heads))]
    lines = ["  ".join(text.ljust(width) for text, width in zip(row, widths, strict=True)) for row in [heads, *rows]]
    return "\n".join([_title(point), *(line.rstrip() for line in lines)])


def _title(point: Point) -> str:
    hole = "Schwarzschild" if point.is_schwarzschild else f"exponent {point.exponent}, coupling {point.coupling}"
    return f"{point.field} modes, ℓ = {point.ell}, {hole}"


def _plain(value: Fraction) -> str:
    from knell.survey.exact_yaml import show_value

    return show_value(value)
