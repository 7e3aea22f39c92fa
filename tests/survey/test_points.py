"""Points and their slugs: one slug for each hole, and back."""

from __future__ import annotations

import json
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from knell.physics.background import BackgroundError, PowerLaw
from knell.physics.field import LOWEST_ELL
from knell.survey.points import Point, grid


@st.composite
def points(draw: st.DrawFn) -> Point:
    field = draw(st.sampled_from(sorted(LOWEST_ELL)))
    ell = draw(st.integers(min_value=LOWEST_ELL[field], max_value=300))
    exponent = draw(st.integers(min_value=2, max_value=60))
    return Point.canonical(field, exponent, draw(st.fractions(min_value=-50, max_value=1)), ell)


@given(points())
def test_slug_and_document_read_back(point: Point) -> None:
    assert Point.from_slug(point.slug) == point
    assert Point.from_document(json.loads(json.dumps(point.document()))) == point


@given(points())
def test_a_slug_is_a_plain_file_name(point: Point) -> None:
    assert point.slug.isascii()
    assert set(point.slug) <= set("abcdefghijklmnopqrstuvwxyz0123456789_-")


@given(points(), points())
def test_different_points_have_different_slugs(a: Point, b: Point) -> None:
    assert (a == b) == (a.slug == b.slug)


def test_slugs_as_documented() -> None:
    assert Point("axial", 4, Fraction(9, 10), 2).slug == "axial-l2-n4-k9_10"
    assert Point("scalar", 3, Fraction(-1, 2), 0).slug == "scalar-l0-n3-km1_2"
    assert Point.canonical("axial", 7, Fraction(0), 3).slug == "axial-l3-schwarzschild"


@pytest.mark.parametrize(
    "slug",
    [
        "axial-l2-n4-k18_20",  # not in lowest terms: a second name for 9/10
        "axial-l2-n4-k0",  # Schwarzschild has no exponent
        "axial-l02-n4-k1",
        "axial-l2-n1-k1_2",
        "axial-l2-n4-k6_5",
        "axial-l1-schwarzschild",
        "quark-l2-schwarzschild",
        "axial-l2-n4",
        "axial-l2-n4-k9/10",
        "../axial-l2-schwarzschild",
        "",
    ],
)
def test_other_slugs_are_refused(slug: str) -> None:
    with pytest.raises(ValueError):
        Point.from_slug(slug)


def test_schwarzschild_has_no_exponent_and_every_exponent_gives_it() -> None:
    references = {Point.canonical("axial", n, Fraction(0), 2) for n in range(2, 9)}
    assert references == {Point("axial", None, Fraction(0), 2)}
    with pytest.raises(ValueError, match="only coupling 0"):
        Point("axial", 4, Fraction(0), 2)
    with pytest.raises(ValueError, match="only coupling 0"):
        Point("axial", None, Fraction(1, 2), 2)


@pytest.mark.parametrize(("exponent", "coupling"), [(1, "1/2"), (4, "6/5"), (0, "0"), (2.5, "1/2")])
def test_a_point_refuses_what_the_background_refuses(exponent: int, coupling: str) -> None:
    """`Point` repeats the checks of `PowerLaw` to stay free of its imports: both must say no."""
    with pytest.raises(BackgroundError):
        PowerLaw(exponent, Fraction(coupling))
    with pytest.raises(ValueError):
        Point.canonical("axial", exponent, Fraction(coupling), 2)


def test_background_of_a_point() -> None:
    point = Point("axial", 4, Fraction(9, 10), 2)
    assert point.background() == PowerLaw(4, Fraction(9, 10))
    assert point.reference.background().is_schwarzschild


def test_grid_has_each_point_once_and_schwarzschild_for_each_field_and_ell() -> None:
    couplings = [Fraction(0), Fraction(1, 2), Fraction(1)]
    points = grid({"axial": [2, 3], "scalar": [0]}, [3, 4], couplings)
    assert len(points) == len(set(points)) == 3 * (1 + 2 * 2)
    assert {p.reference for p in points} == {p for p in points if p.is_schwarzschild}
    assert [p.slug for p in points[:2]] == ["axial-l2-schwarzschild", "axial-l2-n3-k1_2"]
