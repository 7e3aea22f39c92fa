"""Taylor models contain the functions they stand for, after every operation."""

from __future__ import annotations

import pytest
from flint import acb, acb_poly, arb, ctx
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.methods.enclosure.refusal import InexactVertex, LostPrecision, WeakBound
from knell.methods.enclosure.taylor import Models, Values, box, exact_point, lower, upper

CASES = (50, pytest.param(400, marks=pytest.mark.slow))
COEFFICIENTS = st.lists(st.builds(complex, st.integers(-9, 9), st.integers(-9, 9)), min_size=1, max_size=9)
TAUS = st.builds(lambda a, b: complex(a, b) / 64, st.integers(-45, 45), st.integers(-45, 45))


def model(coefficients) -> acb_poly:
    return acb_poly([exact_point(c) for c in coefficients])


def holds_at(found: acb_poly, tau: complex, exact: acb) -> bool:
    """Whether the model's ball at ``τ`` holds the number."""
    return found(exact_point(tau)).contains(exact.mid())


@pytest.mark.parametrize("cases", CASES)
def test_products_sums_and_quotients_are_contained(cases):
    @settings(max_examples=cases, deadline=None)
    @given(a=COEFFICIENTS, b=COEFFICIENTS, w0=st.integers(3, 20), w1=st.integers(-9, 9), tau=TAUS, d=st.integers(0, 5))
    def holds(a, b, w0, w1, tau, d):
        with ctx.workprec(200):
            models = Models(acb(0), arb(0.25), d)
            first, second = (models.widen(*models.cut(model(c))) for c in (a, b))
            x, y, t = model(a)(exact_point(tau)), model(b)(exact_point(tau)), exact_point(tau)
            assert holds_at(first, tau, x)
            assert holds_at(models.multiply(first, second), tau, x * y)
            assert holds_at(first + second, tau, x + y)
            # w = w0 + w1 σ, σ = τ/4, |w1 σ| <= 9/4 < 3
            assert holds_at(models.divide(first, acb(w0), acb(w1)), tau, x / (w0 + w1 * t / 4))
            assert bool(upper(x) <= models.norm(model(a)))
            middle, rest = models.split(first)
            assert bool(upper(x - middle(t)) <= rest)

    holds()


def test_the_remainder_of_a_quotient_is_sharp():
    # S = 1, w = 1 - τ/2, d = 0: the series is 1, its error |τ/2|/(1 - |τ|/2) = 1 at τ = 1, and so is the remainder.
    with ctx.workprec(100):
        found = Models(acb(0), arb(1), 0).divide(acb_poly([1]), acb(1), acb(-0.5))
        assert 1 <= float(found[0].real.rad()) <= 1.0001


def test_what_may_vanish_is_not_divided_by():
    with ctx.workprec(100):
        with pytest.raises(WeakBound):
            Models(acb(0), arb(1), 3).divide(acb_poly([1]), acb(1), acb(1))
        with pytest.raises(WeakBound):
            Values(acb(2)).divide(acb(1), acb(-4), acb(2))


def test_inexact_centres_and_radii_are_refused():
    third = acb(1) / 3
    for call in (
        lambda: Values(third),
        lambda: Models(third, arb(1), 3),
        lambda: Models(acb(1), arb(1) / 3, 3),
        lambda: Models(acb(1), arb(0), 3),
        lambda: Values(acb("nan")),
    ):
        with pytest.raises(InexactVertex):
            call()


def test_balls_that_are_not_finite_have_no_bound():
    # `overlaps` is true for NaN, so finiteness is tested wherever a bound is read.
    nan = acb("nan")
    assert nan.overlaps(acb(0))
    for call in (lambda: upper(nan), lambda: lower(nan), lambda: Models(acb(0), arb(1), 2).norm(acb_poly([nan]))):
        with pytest.raises(LostPrecision):
            call()


@settings(max_examples=50, deadline=None)
@given(radius=st.floats(1e-9, 1e9), angle=st.floats(-3.2, 3.2))
def test_the_box_holds_the_disc(radius, angle):
    from cmath import rect

    assert box(arb(radius)).contains(exact_point(rect(radius * (1 - 1e-12), angle)))
