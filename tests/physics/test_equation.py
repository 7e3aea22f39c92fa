"""The regularised equation against the wave equation it came from, and the divisibilities it rests on."""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction

import mpmath
import pytest
from flint import arb
from hypothesis import given, settings
from hypothesis import strategies as st
from mpmath import mp, mpc, mpf

from knell.physics import polynomial
from knell.physics.background import PowerLaw
from knell.physics.equation import Equation, equation_balls, equation_floats, local, regularised
from knell.physics.field import FIELDS

DIGITS = 50
BITS = 220
# mpmath's difference quotients double the working precision, the quadrature is of 50 digits over a short path, and
# the factors of the identity stay within 1e±6 of 1: 50 digits less a generous 15.
TOLERANCE = mpf(10) ** -35

Mass = Callable[[mpc], mpc]

small = st.fractions(min_value=-2, max_value=2, max_denominator=20)


def to_mpf(x: object) -> mpf:
    """A `Fraction` or the midpoint of a ball at the working precision."""
    if isinstance(x, Fraction):
        return mpf(x.numerator) / x.denominator
    mantissa, exponent = x.mid().man_exp()  # type: ignore[attr-defined]
    return mp.ldexp(mpf(int(mantissa)), int(exponent))


def potential(mass: Mass, field: str, ell: int, r: mpc) -> mpc:
    """``V(r)`` from the mass function alone: ``f/r²`` times ``ℓ(ℓ+1) - 6m/r + 2m'`` (axial), and so on."""
    m, slope = mass(r), mp.diff(mass, r)
    extra = {"axial": -6 * m / r + 2 * slope, "electromagnetic": 0, "scalar": 2 * m / r - 2 * slope}[field]
    return (1 - 2 * m / r) / r**2 * (ell * (ell + 1) + extra)


def smooth(u: mpc) -> mpc:
    """An arbitrary smooth ``φ``."""
    return mp.exp(u / 3 - u**2) + u**3 / (4 + u)


def wave_operator(equation: Equation, mass: Mass, field: str, ell: int, omega: mpc, r_h: mpf, r: mpc) -> mpc:
    """``Ψ'' + (ω² - V)Ψ`` at ``r``, primes ``d/dr*``, for ``Ψ = exp(iω r_h ∫h du) φ``; the integral starts at ``r``."""
    start = r_h / r

    def slope(u: mpc) -> mpc:
        return polynomial.evaluate(equation.H, u) / polynomial.evaluate(equation.p, u)

    def psi(radius: mpc) -> mpc:
        u = r_h / radius
        # The difference quotients stay near the start, where twelve Gauss nodes are exact to all digits.
        return mp.exp(1j * omega * r_h * mp.quad(slope, [start, u], method="gauss-legendre", maxdegree=2)) * smooth(u)

    lapse = 1 - 2 * mass(r) / r
    value, first, half_second = mp.taylor(psi, r, 2)
    lapse_slope = -2 * mp.diff(mass, r) / r + 2 * mass(r) / r**2
    second = lapse * (lapse_slope * first + lapse * 2 * half_second)
    return second + (omega**2 - potential(mass, field, ell, r)) * value


def regular_operator(equation: Equation, sigma: mpc, u: mpc) -> mpc:
    """``p φ'' + (2σH + p') φ' + [σH' - σ²Q - W] φ``, in units ``r_h = 1``."""
    p, H, Q, W = (polynomial.evaluate(part, u) for part in (equation.p, equation.H, equation.Q, equation.W))
    p_u, H_u = (polynomial.evaluate(polynomial.derivative(part), u) for part in (equation.p, equation.H))
    phi, phi_u, half_phi_uu = mp.taylor(smooth, u, 2)
    return 2 * p * half_phi_uu + (2 * sigma * H + p_u) * phi_u + (sigma * H_u - sigma**2 * Q - W) * phi


def check_at_random_points(equation: Equation, mass: Mass, field: str, ell: int, r_h: mpf, seed: object) -> None:
    """The two operators agree up to the factor ``p / r_h²`` that the derivation predicts."""
    chance = random.Random(str(seed))
    for _ in range(2):
        omega = mpc(chance.uniform(-2, 2), chance.uniform(-2, 2))
        u = mpc(chance.uniform(0.2, 0.8), chance.uniform(-0.5, 0.5))
        wave = wave_operator(equation, mass, field, ell, omega, r_h, r_h / u)
        regular = polynomial.evaluate(equation.p, u) / r_h**2 * regular_operator(equation, 1j * omega * r_h, u)
        assert abs(wave - regular) < TOLERANCE * (abs(wave) + abs(regular))


def power_law_mass(n: int, coupling: Fraction) -> tuple[Mass, mpf]:
    """``m(r)`` at ``M = 1`` and the outermost root of ``rⁿ - 2rⁿ⁻¹ + 2κc_n = 0``, neither by way of ``q``."""
    strength = mpf(2 * n - 2) ** (n - 1) / mpf(n) ** n * to_mpf(coupling)
    # Convex and rising beyond r = 2(n-1)/n, its double root at κ = 1: Newton from the right is monotone.
    r_h = 2 + abs(2 * strength) ** (mpf(1) / n) if coupling < 1 else mpf(2 * n - 2) / n
    for _ in range(200 if coupling < 1 else 0):
        r_h -= (r_h**n - 2 * r_h ** (n - 1) + 2 * strength) / (n * r_h ** (n - 1) - 2 * (n - 1) * r_h ** (n - 2))
    return lambda r: 1 - strength / r ** (n - 1), r_h


@pytest.mark.parametrize("field", FIELDS)
@pytest.mark.parametrize(
    ("n", "coupling"),
    [(2, "1/2"), (3, "99/100"), (4, "9/10"), (5, "1"), (6, "3/10"), (7, "-100"), (8, "-1/3"), (4, "0")],
)
def test_power_law_equation_is_the_wave_equation(n: int, coupling: str, field: str) -> None:
    with mp.workdps(DIGITS):
        kappa = Fraction(coupling)
        equation = equation_balls(PowerLaw(n, kappa), field, 3, BITS).map(to_mpf)
        mass, r_h = power_law_mass(n, kappa)
        assert abs(equation.mass * r_h - 1) < TOLERANCE  # M/r_h
        check_at_random_points(equation, mass, field, 3, r_h, (n, coupling, field))


@pytest.mark.parametrize("field", FIELDS)
@pytest.mark.parametrize(
    "quotient",
    [["1", "-1/5", "1/7", "0", "-2/9", "1/4"], ["1", "3/4", "-2", "1/3"], ["1", "-1"], ["1", "-1", "1/2", "-1/2"]],
)
def test_equation_of_a_general_polynomial_is_the_wave_equation(quotient: list[str], field: str) -> None:
    """``f = (1-u) × quotient`` with several terms, degenerate ends among them; no power law of any exponent."""
    with mp.workdps(DIGITS):
        f = polynomial.multiply([Fraction(1), Fraction(-1)], [Fraction(x) for x in quotient])
        equation = regularised(f, field, 2).map(to_mpf)
        coefficients = [to_mpf(x) for x in f]
        check_at_random_points(
            equation,
            lambda r: r * (1 - polynomial.evaluate(coefficients, 1 / r)) / 2,
            field,
            2,
            mpf(1),
            (quotient, field),
        )


@pytest.mark.parametrize("part", ["H", "Q", "W"])
def test_the_comparison_sees_a_wrong_coefficient(part: str) -> None:
    with mp.workdps(DIGITS):
        equation = equation_balls(PowerLaw(4, Fraction(9, 10)), "axial", 2, BITS).map(to_mpf)
        mass, r_h = power_law_mass(4, Fraction(9, 10))
        values = list(getattr(equation, part))
        values[1] += mpf(10) ** -25
        with pytest.raises(AssertionError):
            check_at_random_points(replace(equation, **{part: tuple(values)}), mass, "axial", 2, r_h, part)


def remainder(a: list[Fraction], divisor: list[Fraction]) -> list[Fraction]:
    """Remainder of polynomial long division, lowest power first."""
    rest = list(a)
    while len(rest) >= len(divisor):
        factor = rest[-1] / divisor[-1]
        for i in range(1, len(divisor) + 1):
            rest[-i] -= factor * divisor[-i]
        rest.pop()
    return rest


def trimmed(a: list[Fraction]) -> list[Fraction]:
    """Without its highest zero coefficients."""
    rest = list(a)
    while rest and rest[-1] == 0:
        rest.pop()
    return rest


@st.composite
def black_hole_polynomials(draw: st.DrawFn) -> list[Fraction]:
    """``f = (1-u)^k × (anything that is 1 at u = 0)``, ``k`` from 1 to 3."""
    f = [Fraction(1), *draw(st.lists(small, min_size=0, max_size=5))]
    for _ in range(draw(st.integers(min_value=1, max_value=3))):
        f = polynomial.multiply(f, [Fraction(1), Fraction(-1)])
    return trimmed(f)


@settings(deadline=None, max_examples=30)
@given(black_hole_polynomials(), st.sampled_from(FIELDS))
def test_p_q_is_one_minus_h_squared_identically(f: list[Fraction], field: str) -> None:
    equation = regularised(f, field, 2)
    product = polynomial.multiply(equation.p, equation.Q)
    square = polynomial.multiply(equation.H, equation.H)
    assert trimmed(product) == trimmed([(k == 0) - x for k, x in enumerate(square)])


@settings(deadline=None, max_examples=30)
@given(black_hole_polynomials())
def test_u_squared_divides_with_zero_remainder(f: list[Fraction]) -> None:
    """``4 (1 - f₁u)(1 - f (1 - f₁u))`` multiplied out in full starts at ``u²``, and the rest of it is ``Q``."""
    factor = [Fraction(1), -f[1]]
    numerator = [-4 * x for x in polynomial.multiply(factor, polynomial.multiply(f, factor))]
    numerator = polynomial.add(numerator, [4 * x for x in factor])
    assert numerator[:2] == [0, 0]
    assert trimmed(numerator[2:]) == trimmed(list(regularised(f, "axial", 2).Q))


@settings(deadline=None, max_examples=30)
@given(black_hole_polynomials())
def test_h_is_minus_one_at_infinity_and_one_on_every_root_of_f(f: list[Fraction]) -> None:
    """``f | H - 1``: to each root's multiplicity, complex roots included."""
    H = list(regularised(f, "axial", 2).H)
    assert H[:2] == [-1, 0]
    assert not any(remainder(polynomial.add(H, [Fraction(-1)]), f))


@pytest.mark.parametrize("field", FIELDS)
def test_schwarzschild(field: str) -> None:
    equation = regularised([Fraction(1), Fraction(-1)], field, 2)
    assert equation.H == (-1, 0, 2)
    assert equation.Q == (4, 4)
    assert equation.p == (0, 0, 1, -1)
    assert equation.mass == Fraction(1, 2)


@pytest.mark.parametrize(("field", "ell"), [("axial", 1), ("electromagnetic", 0), ("scalar", -1), ("polar", 2)])
def test_unknown_field_and_too_low_ell_are_refused(field: str, ell: int) -> None:
    with pytest.raises(ValueError, match="must be"):
        equation_floats(PowerLaw(4, Fraction(1, 2)), field, ell)


@pytest.mark.parametrize("coupling", ["-3", "0", "9/10", "999999/1000000", "1"])
def test_balls_are_as_good_as_asked_and_doubles_are_their_rounding(coupling: str) -> None:
    """Coefficients are sums of products of ``q``'s ball, at most 10 in size: a dozen bits lost of the 20 in reserve."""
    background = PowerLaw(5, Fraction(coupling))
    coarse, fine = (equation_balls(background, "axial", 2, bits) for bits in (100, 300))
    doubles = equation_floats(background, "axial", 2)
    for part in ("f", "p", "H", "Q", "W"):
        for a, b, x in zip(getattr(coarse, part), getattr(fine, part), getattr(doubles, part), strict=True):
            assert a.overlaps(b)
            assert float(a.rad()) < 2.0**-92
            assert x == float(b)
    assert coarse.degenerate == fine.degenerate == doubles.degenerate == (coupling == "1")


def numbers(part: tuple[object, ...]) -> list[float]:
    return [float(x) for x in part]  # type: ignore[arg-type]


@pytest.mark.parametrize("coupling", ["-3", "0", "9/10", "999999/1000000", "1"])
def test_structural_zeros_at_both_ends_are_exact(coupling: str) -> None:
    background = PowerLaw(4, Fraction(coupling))
    for equation in (equation_balls(background, "axial", 2, 100), equation_floats(background, "axial", 2)):
        infinity, horizon = local(equation, 0), local(equation, 1, -1)
        assert infinity.p[:2] == (0, 0) and infinity.K[:2] == (-1, 0)
        assert horizon.p[0] == 0 and horizon.K[0] == -1
        if coupling == "1":
            assert horizon.p[1] == 0 and horizon.K[1] == 0
        else:
            # p = u² f, so p_x(u = 1) = -f_u(1) > 0; F has the slope of f times 1 - f₁, so K_x does not vanish either.
            assert float(horizon.p[1]) > 0 and float(horizon.K[1]) != 0


@pytest.mark.parametrize("coupling", ["-3", "9/10", "1"])
def test_imposing_the_zeros_changes_nothing_but_rounding(coupling: str) -> None:
    """The same shift without the structural zeros lands within the balls' radii of it."""
    equation = equation_balls(PowerLaw(4, Fraction(coupling)), "axial", 2, 200)
    for centre, direction in ((0, 1), (0, -1), (1, 1), (1, -1)):
        imposed, plain = local(equation, centre, direction), local(equation, arb(centre), direction)
        for part in ("p", "K", "Q", "W"):
            assert all(a.overlaps(b) for a, b in zip(getattr(imposed, part), getattr(plain, part), strict=True))


@settings(deadline=None, max_examples=25)
@given(black_hole_polynomials(), small, small, st.sampled_from([1, -1]))
def test_local_equation_is_the_equation_about_another_point(
    f: list[Fraction], centre: Fraction, x: Fraction, direction: int
) -> None:
    """``u = centre + τx``; ``K = τH`` keeps ``(pφ')' + 2σKφ' + (σK' - σ²Q - W)φ`` of the same form in ``x``."""
    equation = regularised(f, "scalar", 1)
    about = local(equation, centre, direction)
    u = centre + direction * x
    for part in ("p", "Q", "W"):
        assert polynomial.evaluate(getattr(about, part), x) == polynomial.evaluate(getattr(equation, part), u)
    assert polynomial.evaluate(about.K, x) == direction * polynomial.evaluate(equation.H, u)
    slope = polynomial.evaluate(polynomial.derivative(about.K), x)
    assert slope == polynomial.evaluate(polynomial.derivative(equation.H), u)


def test_mpmath_is_left_as_it_was() -> None:
    """Precision is changed inside contexts only."""
    assert mpmath.mp.dps == 15
