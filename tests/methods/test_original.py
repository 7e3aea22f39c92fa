"""The original equation against its definition: V from the mass function differentiated in r*, and exact identities."""

from fractions import Fraction

import mpmath as mp
import pytest
from flint import fmpq, fmpq_poly

from knell.methods.original import horizon_roots, original_equation
from knell.physics.background import PowerLaw

BACKGROUNDS = [
    PowerLaw(3, Fraction(0)),
    PowerLaw(2, Fraction(1, 3)),
    PowerLaw(5, Fraction(9, 10)),
    PowerLaw(4, Fraction(-2)),
]


@pytest.mark.parametrize("background", BACKGROUNDS, ids=str)
@pytest.mark.parametrize(
    ("field", "ell"), [("axial", 2), ("axial", 3), ("electromagnetic", 1), ("scalar", 0), ("scalar", 2)]
)
def test_potential_is_its_definition_differentiated_in_the_tortoise_coordinate(background, field, ell):
    equation = original_equation(background, field, ell)
    n, k = background.exponent, mp.mpf(background.coupling * background.c_n)

    def f(r):
        return 1 - 2 * (1 - k * r ** (1 - n)) / r

    def second(function, r):
        """``d²/dr*²`` of a function of r."""
        return f(r) * mp.diff(lambda s: f(s) * mp.diff(function, s), r)

    with mp.workdps(60):
        k = mp.mpf(background.coupling.numerator) / background.coupling.denominator
        k *= mp.mpf(background.c_n.numerator) / background.c_n.denominator
        for r in (mp.mpf("2.5"), mp.mpf(4), mp.mpf(11)):
            angular = {"axial": (ell - 1) * (ell + 2), "electromagnetic": ell * (ell + 1), "scalar": ell * (ell + 1)}[
                field
            ]
            extra = {
                "axial": lambda s: s * second(lambda t: 1 / t, s),
                "electromagnetic": lambda s: 0,
                "scalar": lambda s: second(lambda t: t, s) / s,
            }[field](r)
            expected = angular * f(r) / r**2 + extra
            found = equation.f(float(r)) * equation.potential_over_f(float(r))
            # the double-precision side rounds, a few ulp of terms of size V; the differentiation is good to 1e-25
            assert abs(found - expected) <= 4e-15 * abs(expected) + 1e-17


@pytest.mark.parametrize("background", BACKGROUNDS, ids=str)
@pytest.mark.parametrize("field", ["axial", "electromagnetic", "scalar"])
def test_polynomials_are_the_functions_times_powers_of_r(background, field):
    equation = original_equation(background, field, 3)
    n = equation.exponent
    r = fmpq_poly([0, 1])
    g, h = equation.horizon_polynomial, equation.slope_polynomial
    assert r * g.derivative() - n * g == h  # (g/r^n)' = h/r^(n+1)
    at = Fraction(7, 2)
    mass = 1 - equation.deformation * at ** (1 - n)
    slope = (n - 1) * equation.deformation * at**-n
    f = 1 - 2 * mass / at
    U = (equation.angular + equation.mass_weight * mass / at + equation.slope_weight * slope) / at**2
    assert g(fmpq(7, 2)) == fmpq((f * at**n).numerator, (f * at**n).denominator)
    scaled = U * at ** (n + 2)
    assert equation.potential_polynomial(fmpq(7, 2)) == fmpq(scaled.numerator, scaled.denominator)


def test_horizon_is_degenerate_exactly_at_unit_coupling():
    extremal = horizon_roots(original_equation(PowerLaw(4, Fraction(1)), "axial", 2), 128)
    near = horizon_roots(original_equation(PowerLaw(4, 1 - Fraction(1, 10**12)), "axial", 2), 128)
    assert extremal.degenerate and not near.degenerate
    assert extremal.horizon.contains(fmpq(3, 2))  # r_h = 2(n-1)M/n
    assert len(extremal.others) == 2 and len(near.others) == 3


@pytest.mark.parametrize(("field", "ell"), [("axial", 1), ("electromagnetic", 0), ("polar", 2)])
def test_unknown_field_or_too_low_ell_is_an_error(field, ell):
    with pytest.raises(ValueError, match=field):
        original_equation(PowerLaw(3, Fraction(1, 2)), field, ell)
