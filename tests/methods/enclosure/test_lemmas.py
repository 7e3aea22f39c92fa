"""Each lemma alone: where its inequalities are equalities the bound is sharp, and a weaker one would be false."""

from __future__ import annotations

import mpmath
import pytest
from flint import acb, arb
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.methods.enclosure import lemmas
from knell.methods.enclosure.lemmas import Piece
from knell.methods.enclosure.refusal import LostPrecision, WeakBound

CASES = (30, pytest.param(250, marks=pytest.mark.slow))


def _series(first: int, recurrence, terms: int = 150):
    """``Σ a_k`` and ``Σ k a_k`` of the positive series ``a_k``, from its first coefficient and a recurrence."""
    a, value, slope = {first: recurrence(first, {})}, mpmath.mpf(0), mpmath.mpf(0)
    for k in range(first, first + terms):
        if k > first:
            a[k] = recurrence(k, a)
        value, slope = value + a[k], slope + k * a[k]
    return value, slope


@pytest.mark.parametrize("cases", CASES)
def test_transport_is_attained_without_source(cases):
    @settings(max_examples=cases, deadline=None)
    @given(
        r=st.floats(0.1, 3),
        c=st.floats(0.05, 4),
        drift=st.floats(-0.5, 0.5),
        start=st.tuples(st.floats(0.1, 1), st.floats(0.1, 1)),
    )
    def holds(r, c, drift, start):
        # e' = λe + z, z' = rz + ce with positive data is its own majorant: exp(A) exactly, to the 2^-20 added to c.
        pieces = [Piece(acb(drift), acb(0), arb(r), arb(c), arb(1))] * 4
        value, slope = lemmas.transport((arb(start[0]), arb(start[1])), arb(0), pieces, arb(0.25))
        excess = start[1] + abs(drift) * start[0]
        exact = mpmath.expm(mpmath.matrix([[drift, 1], [c, r]])) * mpmath.matrix([start[0], excess])
        exact_slope = exact[1] + abs(drift) * exact[0]
        assert exact[0] * (1 - 1e-12) <= float(value) <= exact[0] * (1 + 1e-5)
        assert exact_slope * (1 - 1e-12) <= float(slope) <= exact_slope * (1 + 1e-5)

    holds()


@pytest.mark.parametrize("cases", CASES)
def test_transport_holds_and_is_sharp_with_a_source(cases):
    @settings(max_examples=cases, deadline=None)
    @given(r=st.floats(-6, 3), c=st.floats(0.01, 4), drift=st.floats(-1, 1), least=st.floats(0.1, 10))
    def holds(r, c, drift, least):
        rho, count = 0.7, 64
        pieces = [Piece(acb(drift), acb(0), arb(r), arb(c), arb(least))] * count
        value, slope = lemmas.transport((arb(0), arb(0)), arb(rho), pieces, arb(1) / count)
        # y' = Ay + (0, ρ/P) from 0, as the exponential of the system with its source as a third unknown.
        system = mpmath.matrix([[drift, 1, 0], [c, r, rho / least], [0, 0, 0]])
        exact = mpmath.expm(system) * mpmath.matrix([0, 0, 1])
        exact_slope = exact[1] + abs(drift) * exact[0]
        # Short pieces make the bound of the source sharp: per piece it is off by a factor 1 + O(|A| / 64).
        assert exact[0] * (1 - 1e-12) <= float(value) <= exact[0] * 1.2
        assert exact_slope * (1 - 1e-12) <= float(slope) <= exact_slope * 1.2

    holds()


@pytest.mark.parametrize("cases", CASES)
def test_changing_the_exponent_between_pieces_costs_its_jump(cases):
    @settings(max_examples=cases, deadline=None)
    @given(slow=st.floats(-2, 2), bend=st.floats(0, 0.5), other=st.floats(-2, 2))
    def holds(slow, bend, other):
        # Pieces of no length: only the change of variable z = e' - λe is left, |z| grows by |Δλ||e|.
        pieces = [Piece(acb(x), acb(y), arb(-1), arb(1), arb(1)) for x, y in ((slow, bend), (other, 0.0))]
        value, slope = lemmas.transport((arb(1), arb(0)), arb(0), pieces, arb(0))
        expected = (abs(slow) + bend) + (abs(slow - other) + bend) + abs(other)
        assert float(value) == pytest.approx(1)
        assert expected * (1 - 1e-12) <= float(slope) <= expected * (1 + 1e-9)

    holds()


@pytest.mark.parametrize("cases", CASES)
def test_regular_tail_is_sharp(cases):
    @settings(max_examples=cases, deadline=None)
    @given(m=st.integers(1, 40), alpha=st.floats(0, 0.95), c=st.floats(0, 0.9), g=st.floats(0.3, 3))
    def holds(m, alpha, c, g):
        # ψ = Ge'ξ, ψ' = αψ/ξ + ce + ρξ^m, all signs positive: a series of positive terms
        rho, alpha, c = 1.3, alpha * (m + 1), c * g * (m + 1) * (m + 2 - alpha * (m + 1)) / 4

        def coefficient(k, a):
            # e = Σ a_k ξ^k, ψ = G Σ k a_k ξ^k: k² G a_k = α k G a_k + c a_{k-1} + ρ [k = m+1]
            return ((rho if k == m + 1 else 0) + c * a.get(k - 1, 0)) / (g * k * (k - alpha))

        value, slope = _series(m + 1, coefficient)
        bound, bound_slope = lemmas.regular_tail(arb(rho), arb(alpha), arb(c), arb(g), m)
        # With c = 0 equality; with c the supremum replaces a decreasing sequence: at most 1/(1 - 1/4) in all.
        assert value * (1 - 1e-12) <= float(bound) <= value * 1.34
        assert slope * (1 - 1e-12) <= float(bound_slope) <= slope * 1.34
        if c == 0:
            assert float(bound) == pytest.approx(float(value), rel=1e-9)
            assert float(bound_slope) == pytest.approx(float(slope), rel=1e-9)

    holds()


@pytest.mark.parametrize("cases", CASES)
def test_irregular_tail_is_sharp_for_a_strong_rate(cases):
    @settings(max_examples=cases, deadline=None)
    @given(m=st.integers(0, 30), g=st.floats(0.3, 3), share=st.floats(0, 0.5))
    def holds(m, g, share):
        # ψ = ξ²Ge', ψ' = -γψ/ξ² + ce + ρξ^m; for γ >> m the integral of the lemma is ξ^{M+2}/γ to a part M/γ.
        rho, gamma = 0.9, 4000.0
        c = share * gamma * g * (m + 2)

        # The quasi-static solution ψ ≈ (ξ²/γ)(ce + ρξ^m): e' = (ce + ρξ^m)/(γG) to relative order (m+2)/γ.
        k = c / (gamma * g)
        e = mpmath.quad(lambda t: mpmath.e ** (k * (1 - t)) * rho * t**m / (gamma * g), [0, 1])
        slope = (c * e + rho) / (gamma * g)
        bound, bound_slope = lemmas.irregular_tail(arb(rho), arb(gamma), arb(c), arb(g), m)
        slack = 2 * (m + 3) / gamma
        assert e * (1 - slack) <= float(bound) <= e * (1.0 / (1 - share) + 1e-9)
        assert slope * (1 - slack) <= float(bound_slope) <= slope * (1.0 / (1 - share) + 1e-9)
        if share == 0:
            assert float(bound) == pytest.approx(float(e), rel=1e-9)
            assert float(bound_slope) == pytest.approx(float(slope), rel=1e-9)

    holds()


def test_the_integral_behind_the_irregular_lemma():
    # ∫₀^s exp(-γ(1/t - 1/s)) t^M dt <= s^{M+2}/γ
    for gamma in (0.3, 2, 40):
        for power in (0, 3, 11):
            for s in (0.2, 1, 2.5):
                exact = mpmath.quad(lambda t, g=gamma, p=power, s=s: mpmath.exp(-g * (1 / t - 1 / s)) * t**p, [0, s])
                assert exact <= s ** (power + 2) / mpmath.mpf(gamma)


@pytest.mark.parametrize(
    ("call", "name"),
    [
        (
            lambda: lemmas.transport((arb(0), arb(0)), arb(1), [Piece(acb(0), acb(0), arb(0), arb(1), arb(0))], arb(1)),
            "p",
        ),
        (lambda: lemmas.regular_tail(arb(1), arb(2), arb(0), arb(1), 1), "N+1-α"),
        (lambda: lemmas.regular_tail(arb(1), arb(0), arb(7), arb(1), 1), "d (regular"),
        (lambda: lemmas.regular_tail(arb(1), arb(0), arb(0), arb(0), 1), "inf|g|"),
        (lambda: lemmas.irregular_tail(arb(1), arb(0), arb(0), arb(1), 1), "γ"),
        (lambda: lemmas.irregular_tail(arb(1), arb(-1), arb(0), arb(1), 1), "γ"),
        (lambda: lemmas.irregular_tail(arb(1), arb(1), arb(3), arb(1), 1), "d (irregular"),
        (lambda: lemmas.irregular_tail(arb(1), arb(1), arb(0), arb(0, 1), 1), "inf|g|"),
    ],
)
def test_a_bound_that_is_not_positive_is_refused(call, name):
    with pytest.raises(WeakBound, match=name.replace("|", r"\|").replace("(", r"\(").replace("+", r"\+")):
        call()


def test_a_bound_that_is_not_finite_is_refused():
    nan = arb("nan")
    for call in (
        lambda: lemmas.regular_tail(nan, arb(0), arb(0), arb(1), 1),
        lambda: lemmas.irregular_tail(arb(1), nan, arb(0), arb(1), 1),
        lambda: lemmas.transport((nan, arb(0)), arb(0), [Piece(acb(0), acb(0), arb(0), arb(1), arb(1))], arb(1)),
    ):
        with pytest.raises(LostPrecision):
            call()
