"""YAML whose numbers stay exact and whose surprises are errors.

Plain scalars are read by four rules: a whole number is an `int`; a decimal (``0.9``,
``1e-3``) or a ratio (``9/10``) is a `Fraction`; ``true``, ``false`` and ``null`` (or
nothing) are what they say; everything else, and everything in quotes, is text. So 0.9 is
nine tenths, ``1e-3`` is a number, ``yes`` and ``1:30`` are text, and nothing is octal.
A key given twice is an error, because the first would be lost without a word.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any

import yaml

from knell.errors import InputError
from knell.physics.exact import parse_rational

KeyPath = tuple[str | int, ...]
_WHOLE = re.compile(r"[+-]?\d+")
_WORDS = {"": None, "~": None, "null": None, "true": True, "false": False}


@dataclass
class ExactYaml:
    """``value``: dicts, lists, `int`, `Fraction`, `bool`, `str`, None. ``lines``: key path to line, from 1."""

    value: Any = None
    lines: dict[KeyPath, int] = field(default_factory=dict)

    def line(self, path: KeyPath) -> int | None:
        """The line of a key path, or of the nearest one above it."""
        for end in range(len(path), -1, -1):
            if path[:end] in self.lines:
                return self.lines[path[:end]]
        return None


def read_scalar(text: str) -> Any:
    """The value of an unquoted scalar.

    >>> read_scalar("0.9"), read_scalar("9/10"), read_scalar("3"), read_scalar("axial")
    (Fraction(9, 10), Fraction(9, 10), 3, 'axial')
    """
    if text in _WORDS:
        return _WORDS[text]
    if _WHOLE.fullmatch(text):
        return int(text)
    try:
        return parse_rational(text)
    except ValueError:
        return text


def parse(text: str, name: str) -> ExactYaml:
    """Read one YAML document; ``name`` is the file that errors speak of.

    Raises `InputError`, with the line, for text that is not YAML, for a key given twice
    and for anchors that make a value contain itself.
    """
    try:
        root = yaml.compose(text, Loader=yaml.BaseLoader)
    except yaml.MarkedYAMLError as error:
        mark = error.problem_mark
        where = f"{name}:{mark.line + 1}" if mark else name
        raise InputError(f"{where}: is not valid YAML: {error.problem or error.context}") from None
    except yaml.YAMLError as error:
        raise InputError(f"{name}: is not valid YAML: {' '.join(str(error).split())}") from None
    result = ExactYaml()
    if root is not None:
        result.value = _plain(root, (), name, result.lines, frozenset())
    return result


def _plain(node: yaml.Node, path: KeyPath, name: str, lines: dict[KeyPath, int], open_nodes: frozenset[int]) -> Any:
    line = node.start_mark.line + 1
    lines.setdefault(path, line)
    if id(node) in open_nodes:
        raise InputError(f"{name}:{line}: a value that contains itself")
    inside = open_nodes | {id(node)}
    if isinstance(node, yaml.ScalarNode):
        return node.value if node.style else read_scalar(node.value)
    if isinstance(node, yaml.SequenceNode):
        return [_plain(item, (*path, i), name, lines, inside) for i, item in enumerate(node.value)]
    mapping: dict[str, Any] = {}
    for key_node, value_node in node.value:
        line = key_node.start_mark.line + 1
        if not isinstance(key_node, yaml.ScalarNode):
            raise InputError(f"{name}:{line}: a key must be a word, not a list or a mapping")
        key = key_node.value
        if key in mapping:
            raise InputError(f"{name}:{line}: {show_path((*path, key))}: is given twice; keep one of them")
        lines[(*path, key)] = line
        mapping[key] = _plain(value_node, (*path, key), name, lines, inside)
    return mapping


def show_path(path: KeyPath) -> str:
    """``ell.axial[0]``."""
    text = "".join(f"[{part}]" if isinstance(part, int) else f".{part}" for part in path)
    return text.removeprefix(".")


def show_value(value: Any) -> str:
    """A value as a person would write it on one line of YAML.

    >>> show_value([Fraction(9, 10), Fraction(1, 3), True])
    '[0.9, 1/3, true]'
    """
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, Fraction):
        return _decimal(value)
    if value is None:
        return "null"
    if isinstance(value, str):
        plain = read_scalar(value) == value and re.fullmatch(r"[\w./-]+", value)
        return value if plain else "'" + value.replace("'", "''") + "'"
    if isinstance(value, dict):
        return "{" + ", ".join(f"{key}: {show_value(item)}" for key, item in value.items()) + "}"
    if isinstance(value, (list, tuple)):
        return "[" + ", ".join(show_value(item) for item in value) + "]"
    return str(value)


def _decimal(value: Fraction) -> str:
    """The terminating decimal of ``value`` where there is a short one, its ratio otherwise."""
    for places in range(1, 13):
        scaled = value * 10**places
        if scaled.denominator == 1:
            sign = "-" if scaled < 0 else ""
            whole, part = divmod(abs(scaled.numerator), 10**places)
            return f"{sign}{whole}.{part:0{places}d}"
    return str(value)
