"""Everything that is wrong with a config, one line each, all at once.

A line reads ``file:line: key path: problem and remedy``.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterator
from fractions import Fraction
from typing import Any

import jsonschema
from jsonschema.validators import extend

from knell.survey.config_schema import CONFIG
from knell.survey.exact_yaml import KeyPath, show_value


def _is_whole(_: object, value: object) -> bool:
    return isinstance(value, int) and not isinstance(value, bool)


def _is_number(_: object, value: object) -> bool:
    return isinstance(value, (int, Fraction)) and not isinstance(value, bool)


_EXACT = jsonschema.Draft202012Validator.TYPE_CHECKER.redefine_many({"integer": _is_whole, "number": _is_number})
_Validator = extend(jsonschema.Draft202012Validator, type_checker=_EXACT)


def problems(value: Any) -> list[tuple[KeyPath, str]]:
    """The key path and the sentence of each problem, in the order of the config."""
    errors = _Validator(CONFIG).iter_errors(value)
    found = [(path, text) for error in errors for path, text in _sentences(error)]
    order = {key: i for i, key in enumerate(value)} if isinstance(value, dict) else {}

    def place(item: tuple[KeyPath, str]) -> tuple[int, list[int]]:
        path = item[0]
        return (order.get(path[0], len(order)) if path else -1, [part for part in path if isinstance(part, int)])

    return sorted(found, key=place)


def _sentences(error: jsonschema.ValidationError) -> Iterator[tuple[KeyPath, str]]:
    path = tuple(error.absolute_path)
    value, schema = error.instance, error.schema
    if error.validator == "additionalProperties":
        known = list(schema["properties"])
        for key in value:
            if key not in known:
                yield (*path, key), _unknown(key, known)
    elif error.validator == "required":
        # iter_errors raises this once for each missing key, and names it only in the message.
        key = next(name for name in schema["required"] if error.message.startswith(repr(name)))
        yield (key,), f"is missing; it must be {schema['properties'][key]['description']}"
    elif error.validator == "uniqueItems":
        for index, item in enumerate(value):
            if item in value[:index]:
                yield (*path, index), f"{show_value(item)} is listed before; list it once"
    elif error.validator in ("minItems", "minProperties"):
        yield path, f"is empty; it must be {schema['description']}"
    else:
        yield path, f"{show_value(value)} must be {schema['description']}"


def _unknown(key: str, known: list[str]) -> str:
    near = difflib.get_close_matches(key.lower(), known, n=1, cutoff=0.6)
    return f"is no known key; did you mean {near[0]}?" if near else f"is no known key; known are {', '.join(known)}"
