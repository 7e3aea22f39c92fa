"""Paths of the spectral method: what they enclose, how they are cut, what a side costs."""

from fractions import Fraction
from math import pi

import numpy as np
import pytest

from knell.methods.spectral_path import OTHER_TILT, TILT, PathError, bent_path, bernstein, orders, singular_points
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_floats, regularised

COUPLINGS = ("-1/2", "0", "1/4", "9/10", "99/100", "1")


def equation(exponent, coupling):
    return equation_floats(PowerLaw(exponent, Fraction(coupling)), "axial", 2)


@pytest.mark.parametrize("coupling", COUPLINGS)
@pytest.mark.parametrize("tilt", [TILT, OTHER_TILT])
def test_paths_exist_and_keep_clear_of_the_singular_points(coupling, tilt):
    for exponent in (2, 3, 4, 6, 12, 28):
        path = bent_path(equation(exponent, coupling), tilt)
        assert path.corners[0] == 0 and path.corners[-1] == 1
        for left, right in path.sides:
            # ρ > 1.2 holds a side below 13 coefficients a digit: dearer ones would have been halved
            others = [z for z in path.singular if z not in (left, right)]
            assert min(bernstein(left, right, z) for z in others) > 1.2


@pytest.mark.parametrize("coupling", COUPLINGS)
def test_singular_points_are_the_roots_of_f(coupling):
    eq = equation(5, coupling)
    others = singular_points(eq)[2:]
    full = np.array([*others, 1, *([1] if eq.degenerate else [])])
    rebuilt = np.poly(full)[::-1]
    # np.poly normalises the highest power to 1; both sides are scaled to f(0) = 1
    degree = len(full)
    assert abs(rebuilt / rebuilt[0] - np.array(eq.f[: degree + 1])).max() < 1e-10


def test_a_root_between_the_path_and_the_real_segment_is_refused():
    root = 0.4 - 0.15j
    f = np.poly([1, root, root.conjugate()])[::-1].real
    with pytest.raises(PathError, match="lies between"):
        bent_path(regularised(list(f / f[0]), "axial", 2))


def test_degrees_grow_with_digits_and_with_fewer_for_greater_frequencies():
    path = bent_path(equation(4, "1"))
    few, many = (orders(path, digits, (0.7, 2.0)) for digits in (12, 24))
    assert all(a < b for a, b in zip(few, many, strict=True))
    slow, quick = (orders(path, 20, (least, 2.0)) for least in (0.3, 1.5))
    assert slow[0] > quick[0] and slow[-1] > quick[-1]


def test_bernstein_parameter_of_a_known_ellipse():
    # semi-axes (ρ ± 1/ρ)/2 on [-1, 1]: ρ = 2 passes through 5/4 and 3i/4
    assert bernstein(-1, 1, 1.25) == pytest.approx(2, rel=1e-14)
    assert bernstein(-1, 1, 0.75j) == pytest.approx(2, rel=1e-14)
    turn = np.exp(0.3j * pi)
    assert bernstein(1 - turn, 1 + turn, 1 + 0.75j * turn) == pytest.approx(2, rel=1e-13)
