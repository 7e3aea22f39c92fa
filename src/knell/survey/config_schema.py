"""The strict schema of a config: what each key must be, in words and as JSON Schema.

``description`` ends the sentence "<value> must be …" of an error line. No key beyond
those named is accepted anywhere. Numbers may be `Fraction`, see `exact_yaml`.
"""

from __future__ import annotations

from fractions import Fraction
from typing import Any

from knell.physics.field import LOWEST_ELL

Schema = dict[str, Any]
EXCLUDED_SQUARE = Fraction(1, 10)
LEAST_PRECISION = 15
# What is proven of each point: nothing, its modes, or its modes and that they are all of its window.
NO_PROOFS = "none"
PROOFS = (NO_PROOFS, "modes", "windows")


def _whole(least: int, why: str = "") -> Schema:
    return {"type": "integer", "minimum": least, "description": f"a whole number, {least} or more{why}"}


def _list(items: Schema, description: str) -> Schema:
    return {"type": "array", "minItems": 1, "uniqueItems": True, "items": items, "description": description}


def _ells(field: str, least: int) -> Schema:
    why = f" (the {field} field has no lower ℓ)"
    return _list(_whole(least, why), f"a list of whole numbers, {least} or more, such as [{least}, {least + 1}]")


CONFIG: Schema = {
    "type": "object",
    "description": "keys and values; see config/README.md",
    "additionalProperties": False,
    "required": ["ell", "exponents", "couplings", "overtones", "depths", "precisions"],
    "properties": {
        "ell": {
            "type": "object",
            "description": "fields with their lists of ℓ, such as {axial: [2, 3]}",
            "additionalProperties": False,
            "minProperties": 1,
            "properties": {field: _ells(field, least) for field, least in LOWEST_ELL.items()},
        },
        "exponents": _list(_whole(2), "a list of whole numbers, 2 or more, such as [3, 4]"),
        "couplings": _list(
            {
                "type": "number",
                "maximum": 1,
                "description": "a number, at most 1 (above 1 there is no horizon), such as 0.9 or 9/10",
            },
            "a list of numbers, at most 1, such as [0.5, 0.9] or [1/2, 9/10]",
        ),
        "overtones": {
            # A count or a list: each keyword below looks at values of its own type only.
            "type": ["integer", "array"],
            "minimum": 1,
            "minItems": 1,
            "uniqueItems": True,
            "items": _whole(0),
            "description": "a number of overtones, such as 5, or a list of their labels, such as [0, 1, 2]",
        },
        "depths": _list(_whole(1), "a list of whole numbers, 1 or more, such as [100, 200]"),
        "precisions": _list(
            _whole(LEAST_PRECISION, " (decimal digits; fewer than a double has are of no use)"),
            f"a list of whole numbers, {LEAST_PRECISION} or more, such as [40, 80]",
        ),
        "required_digits": _whole(1),
        "window": {
            "type": "number",
            "exclusiveMinimum": EXCLUDED_SQUARE,
            "description": "a number above 0.1: the depth of the window, the largest |Im Mω|, such as 1.5",
        },
        "proofs": {"enum": list(PROOFS), "description": "one of none, modes, windows"},
        "results": {"type": "string", "minLength": 1, "description": "a folder, such as results/mine"},
    },
}
