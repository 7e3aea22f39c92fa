"""``knell prove``: modes of one black hole proven in ball arithmetic, alone or as a complete list."""

from __future__ import annotations

import argparse
import json
from collections.abc import Mapping, Sequence
from fractions import Fraction
from typing import Any

from knell.command.options import rational, whole
from knell.errors import DamagedFile, FileError, InputError, KnellError
from knell.physics.field import FIELDS, LOWEST_ELL
from knell.survey.config_schema import EXCLUDED_SQUARE
from knell.survey.points import Point

DESCRIPTION = (
    "Prove quasinormal modes of one power-law deformed black hole in ball arithmetic: exactly one mode lies within the "
    "unique radius of the printed Mω, and it lies within the proven radius. With --window the list is proven complete."
)
OVERTONES = 3
DIGITS = 30
_HEADS = ("mode", "Re Mω", "Im Mω", "radius", "unique", "seconds")


class NotProven(KnellError):
    """Something that was asked for could not be proven; nothing is claimed about it."""


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--exponent", type=whole(2), help="n of the power law, 2 or more; not needed for coupling 0")
    parser.add_argument("--coupling", type=rational, help="κ, at most 1; 0.9 means exactly 9/10")
    parser.add_argument("--field", choices=FIELDS, default="axial", help="default: %(default)s")
    parser.add_argument("--ell", type=int, help="ℓ; default: the field's lowest")
    extent = parser.add_mutually_exclusive_group()
    extent.add_argument("--overtones", type=whole(1), help=f"how many, from 0 on; default: {OVERTONES}")
    extent.add_argument("--window", type=rational, help="prove every mode with |Im Mω| up to this, such as 1.5")
    parser.add_argument("--digits", type=whole(1), default=DIGITS, help="decimals to prove; default: %(default)s")
    parser.add_argument("--json", action="store_true", help="print objects, each with the record of its proof")
    parser.add_argument("--recheck", metavar="FILE", help="run the proofs of a file again: from --json, or of a survey")


def run(arguments: argparse.Namespace) -> int:
    if arguments.recheck is not None:
        return _recheck(arguments)
    if arguments.coupling is None:
        raise InputError("--coupling: is missing; it must be a number, at most 1, such as 9/10")
    point = point_of(arguments)
    from knell.methods.enclosure.refusal import Refusal
    from knell.survey import proofs

    if arguments.window is None:
        modes = proofs.prove_overtones(point, arguments.overtones or OVERTONES, arguments.digits)
        print(json.dumps(modes, indent=1, ensure_ascii=False) if arguments.json else as_table(point, modes))
        return 0 if modes and all(mode["status"] == proofs.PROVEN for mode in modes) else 1
    try:
        document = proofs.prove_window(point, arguments.window, arguments.digits)
        document["growing"] = proofs.prove_no_growth(point)
    except Refusal as reason:
        raise NotProven(f"the window is not proven ({reason.reason}): {reason}") from None
    print(json.dumps(document, indent=1, ensure_ascii=False) if arguments.json else as_window(point, document))
    return 0


def point_of(arguments: argparse.Namespace) -> Point:
    """The point asked for; raises `InputError`."""
    exponent, coupling, field = arguments.exponent, arguments.coupling, arguments.field
    if exponent is None and coupling:
        raise InputError("--exponent: is missing; it must be a whole number, 2 or more, such as 4")
    if coupling > 1:
        raise InputError(f"--coupling {coupling}: must be at most 1; above 1 there is no horizon")
    ell = LOWEST_ELL[field] if arguments.ell is None else arguments.ell
    if ell < LOWEST_ELL[field]:
        raise InputError(f"--ell {ell}: must be {LOWEST_ELL[field]} or more for the {field} field")
    if arguments.window is not None and arguments.window <= EXCLUDED_SQUARE:
        raise InputError(f"--window {arguments.window}: must be above {float(EXCLUDED_SQUARE)}, such as 1.5")
    return Point.canonical(field, exponent, coupling, ell)


def _recheck(arguments: argparse.Namespace) -> int:
    from knell.methods.enclosure.refusal import Refusal
    from knell.survey import certify, proofs

    path = arguments.recheck
    try:
        with open(path, encoding="utf-8") as stream:
            document = json.load(stream)
    except OSError as error:
        raise FileError.from_os("read", path, error) from None
    except ValueError as error:
        raise DamagedFile(f"{path}: is no JSON file: {error}") from None
    try:
        print("\n".join(certify.recheck(document) if _of_survey(document) else proofs.recheck(document)))
    except Refusal as reason:
        raise NotProven(f"{path}: {reason}") from None
    return 0


def _of_survey(document: Any) -> bool:
    return isinstance(document, Mapping) and document.get("kind") == "proofs"


def as_table(point: Point, modes: Sequence[Mapping[str, Any]]) -> str:
    """A heading and one line for each mode, or the reason why it is not proven."""
    rows = []
    for mode in modes:
        name = str(mode["index"]) if mode["overtone"] is not None else f"{mode['family']} {mode['index']}"
        seconds = f"{mode['seconds']:.2f}" if "seconds" in mode else ""
        if "proven_radius" in mode:
            numbers = [mode[key] for key in ("frequency_re", "frequency_im", "proven_radius", "unique_radius")]
            rows.append([name, *numbers, seconds])
        else:
            rows.append([name, "not proven:", mode["reason"], "", "", seconds])
    widths = [max(len(row[i]) for row in [_HEADS, *rows]) for i in range(len(_HEADS))]
    lines = ["  ".join(text.ljust(width) for text, width in zip(row, widths, strict=True)) for row in [_HEADS, *rows]]
    hole = "Schwarzschild" if point.is_schwarzschild else f"exponent {point.exponent}, coupling {point.coupling}"
    title = f"{point.field} modes, ℓ = {point.ell}, {hole}, proven"
    return "\n".join([title, *(line.rstrip() for line in lines)])


def as_window(point: Point, document: Mapping[str, Any]) -> str:
    """The table of the modes, and what was counted where."""
    box = document["window"]
    others = len(document["continued"]), len(document["clearing"])
    return "\n".join(
        [
            as_table(point, document["modes"]),
            f"complete: these are all the modes with 0 < Re Mω < {_short(box['re_max'])}, "
            f"-{_short(box['depth'])} < Im Mω < 0 outside the square of half-side {_short(box['excluded'])} about 0",
            f"{document['count']} zeros counted: {len(document['modes'])} modes, {others[0]} of the continued sheet, "
            f"{others[1]} of cleared factors; {document['seconds']:.1f} s",
            f"growing modes: {document['growing']['says']}",
        ]
    )


def _short(text: str) -> str:
    return f"{float(Fraction(text)):g}"
