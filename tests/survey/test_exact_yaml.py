"""YAML in which numbers are exact and surprises are errors."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from knell.errors import InputError
from knell.survey.exact_yaml import parse, show_value


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("0.9", Fraction(9, 10)),
        ("9/10", Fraction(9, 10)),
        ("1e-3", Fraction(1, 1000)),
        ("1.0e-3", Fraction(1, 1000)),
        ("-.5", Fraction(-1, 2)),
        ("1.0", Fraction(1)),
        ("7", 7),
        ("010", 10),  # YAML 1.1 reads this as eight
        ("1:30", "1:30"),  # and this as ninety
        ("1_000", "1_000"),
        ("yes", "yes"),
        ("true", True),
        ("null", None),
        ("", None),
        ("nan", "nan"),
        ("'0.9'", "0.9"),
        ("2020-01-01", "2020-01-01"),
        ("[0.1, [2]]", [Fraction(1, 10), [2]]),
        ("{a: 1/3, b: x}", {"a": Fraction(1, 3), "b": "x"}),
    ],
)
def test_scalars(text: str, value: Any) -> None:
    read = parse(text, "file").value
    assert read == value and type(read) is type(value)


def test_lines_of_keys_and_items() -> None:
    source = parse("a: 1\n\nb:\n  c:\n    - 5\n    - 6\n", "file")
    assert [source.line(path) for path in [("a",), ("b", "c"), ("b", "c", 1), ("b", "none")]] == [1, 4, 6, 3]


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("a: 1\nb: 2\na: 3\n", "file:3: a: is given twice"),
        ("a:\n  b: 1\n  b: 2\n", r"file:3: a\.b: is given twice"),
        ("a: [1\nb: 2\n", "file:2: is not valid YAML"),
        ("a: 1\n\tb: 2\n", "file:2: is not valid YAML"),
        ("? [1, 2]\n: 3\n", "file:1: a key must be a word"),
        ("a: &x [*x]\n", "file:1: a value that contains itself"),
        ("a: \x01\n", "file: is not valid YAML"),
    ],
)
def test_what_is_refused(text: str, says: str) -> None:
    with pytest.raises(InputError, match=f"^{says}") as caught:
        parse(text, "file")
    assert "\n" not in str(caught.value)


numbers = st.integers() | st.fractions()
nested = st.recursive(
    numbers | st.booleans() | st.none() | st.text(st.characters(codec="ascii", exclude_categories=("Cc",))),
    lambda x: st.lists(x, max_size=3) | st.dictionaries(st.from_regex(r"[a-z]+", fullmatch=True), x, max_size=3),
)


@given(nested)
def test_shown_values_read_back(value: Any) -> None:
    assert parse(show_value(value), "file").value == value
