"""The power-law family: what is refused, and the enclosure of ``q`` that every later proof leans on."""

from __future__ import annotations

from fractions import Fraction

import pytest
from flint import arb
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.physics.background import BackgroundError, PowerLaw

exponents = st.integers(min_value=2, max_value=30)
couplings = st.fractions(min_value=-100, max_value=1 - Fraction(1, 10**12), max_denominator=10**12)


def coupling_of(n: int, q: Fraction) -> Fraction:
    """``κ(q) = q n 2^n / (2 (2(n-1)/n)^(n-1) (1+q)^n)``, written out anew from the definitions of ``c_n`` and ``M``."""
    return q * n * 2**n / (2 * Fraction(2 * n - 2, n) ** (n - 1) * (1 + q) ** n)


def ends(ball: arb) -> tuple[Fraction, Fraction]:
    """The two end points of a ball as exact rationals."""

    def rational(x: arb) -> Fraction:
        mantissa, exponent = x.man_exp()
        return Fraction(int(mantissa)) * Fraction(2) ** int(exponent)

    centre, radius = rational(ball.mid()), rational(ball.rad())
    return centre - radius, centre + radius


def encloses(n: int, coupling: Fraction, low: Fraction, high: Fraction) -> bool:
    """``G(q) = q - 2c_n κ M^n`` changes sign from - to + on ``[low, high]``, inside the branch of the outer horizon.

    In rationals, so there is no rounding. Up to ``q = 1/(n-1)`` the equation has one root: ``κ(q)`` increases there.
    """

    def excess(q: Fraction) -> Fraction:
        return q - coupling * Fraction(2 * n - 2, n) ** (n - 1) * 2 * (1 + q) ** n / (n * 2**n)

    return -1 < low and high < Fraction(1, n - 1) and excess(low) < 0 < excess(high)


@settings(deadline=None, max_examples=30)
@given(exponents, couplings, st.integers(min_value=40, max_value=400))
def test_q_is_enclosed_and_tight(n: int, coupling: Fraction, bits: int) -> None:
    ball = PowerLaw(n, coupling).q(bits)
    low, high = ends(ball)
    if coupling == 0:
        assert low == high == 0
        return
    assert encloses(n, coupling, low, high)
    assert high - low < abs(low + high) / 2 * Fraction(2) ** (1 - bits)


@pytest.mark.parametrize("n", [2, 3, 4, 7, 19, 30])
@pytest.mark.parametrize(
    "coupling",
    [Fraction(-100), Fraction(-1, 10**15), Fraction(1, 10**15), *(1 - Fraction(1, 10**k) for k in (1, 3, 6, 12))],
)
def test_q_at_the_edges_of_the_family(n: int, coupling: Fraction) -> None:
    low, high = ends(PowerLaw(n, coupling).q(200))
    assert encloses(n, coupling, low, high)
    assert high - low < abs(low) * Fraction(2) ** -199


@settings(deadline=None, max_examples=30)
@given(exponents, st.fractions(min_value=0, max_value=1, max_denominator=10**6), st.booleans())
def test_a_rational_q_comes_back(n: int, fraction: Fraction, negative: bool) -> None:
    """``q(κ(q)) = q`` on both sides of Schwarzschild, up to the extremal end."""
    q = -fraction * Fraction(19, 20) if negative else fraction / (n - 1)
    background = PowerLaw.from_q(n, q)
    assert background.coupling == coupling_of(n, q)
    low, high = ends(background.q(150))
    assert low <= q <= high
    assert high - low <= abs(q) * Fraction(2) ** -149


@pytest.mark.parametrize("n", range(2, 31))
def test_the_extremal_end_is_exactly_a_double_root(n: int) -> None:
    q = Fraction(1, n - 1)
    background = PowerLaw.from_q(n, q)
    assert background == PowerLaw(n, Fraction(1))
    assert background.is_extremal
    low, high = ends(background.q(120))
    assert low <= q <= high
    # f(1) = 0 for every q; f_u(1) = -(1+q) + nq vanishes here too.
    f = background.f(120)
    for value in (sum(f, arb(0)), sum((k * x for k, x in enumerate(f)), arb(0))):
        low, high = ends(value)
        assert low <= 0 <= high
    low, high = ends(-f[1])
    assert low <= Fraction(n, n - 1) <= high  # 2M/r_h, so r_h = 2(n-1)M/n


def test_f_carries_the_balls_of_q() -> None:
    coefficients = PowerLaw(4, Fraction(9, 10)).f(100)
    assert len(coefficients) == 5
    assert coefficients[0] == 1 and coefficients[2] == 0 and coefficients[3] == 0
    low, high = ends(sum(coefficients, arb(0)))
    assert low <= 0 <= high
    assert max(float(x.rad()) for x in coefficients) < 2.0**-99


def test_linear_term_and_power_law_term_add_up_at_the_lowest_exponent() -> None:
    """n = 2 is the Reissner-Nordström form: ``f = (1-u)(1 - u r₋/r₊)``, ``r± = M (1 ± √(1-κ))``: here r₋/r₊ = 1/3."""
    for coefficient, exact in zip(
        PowerLaw(2, Fraction(3, 4)).f(100), (1, Fraction(-4, 3), Fraction(1, 3)), strict=True
    ):
        low, high = ends(coefficient)
        assert low <= exact <= high


def test_schwarzschild_for_every_exponent() -> None:
    for n in (2, 3, 12):
        background = PowerLaw(n, Fraction(0))
        assert background.is_schwarzschild and not background.is_extremal
        assert [float(x) for x in background.f(80)] == [1.0, -1.0] + [0.0] * (n - 1)


@pytest.mark.parametrize("coupling", ["6/5", "2", "1000000000001/1000000000000"])
def test_no_horizon_above_one(coupling: str) -> None:
    with pytest.raises(BackgroundError, match="at most 1; above 1 there is no horizon"):
        PowerLaw(4, Fraction(coupling))


@pytest.mark.parametrize("exponent", [1, 0, -3, 2.5, 4.0, True, "4", None, Fraction(4)])
def test_exponent_is_a_whole_number_from_two(exponent: object) -> None:
    with pytest.raises(BackgroundError, match=r"exponent .*: must be a whole number, 2 or more"):
        PowerLaw(exponent, Fraction(1, 2))  # type: ignore[arg-type]
    with pytest.raises(BackgroundError, match=r"exponent .*: must be a whole number, 2 or more"):
        PowerLaw.from_q(exponent, Fraction(1, 7))  # type: ignore[arg-type]


@pytest.mark.parametrize("coupling", [0.9, 1, "9/10", arb(1) / 2])
def test_coupling_is_exact(coupling: object) -> None:
    with pytest.raises(TypeError, match="Fraction"):
        PowerLaw(4, coupling)  # type: ignore[arg-type]


@pytest.mark.parametrize(("n", "q"), [(4, "-1"), (4, "-2"), (4, "334/1000"), (2, "11/10")])
def test_q_outside_its_range(n: int, q: str) -> None:
    with pytest.raises(BackgroundError, match=r"must lie in \(-1, 1/\(n-1\)\]"):
        PowerLaw.from_q(n, Fraction(q))
