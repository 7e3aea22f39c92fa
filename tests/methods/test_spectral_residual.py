"""The pencil over FLINT numbers against the pencil in doubles, and solves against their own residual."""

from fractions import Fraction
from random import Random

import numpy as np
import pytest
from flint import acb, ctx

from knell.methods.spectral import frequency_range, pencil, sides
from knell.methods.spectral_blocks import solve_bordered
from knell.methods.spectral_path import bent_path, orders
from knell.methods.spectral_residual import residual, slope
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_balls

BITS = 160


def discretised(exponent, coupling, digits):
    equation = equation_balls(PowerLaw(exponent, Fraction(coupling)), "axial", 2, BITS)
    doubles = equation.map(float)
    path = bent_path(doubles)
    with ctx.workprec(BITS):
        return [s.map(acb.mid) for s in sides(equation, path, orders(path, digits, frequency_range(doubles)), acb)]


def vector(random, size):
    return [acb(random.uniform(-1, 1), random.uniform(-1, 1)) for _ in range(size)]


def as_complex(numbers):
    return np.array([complex(x) for x in numbers])


@pytest.mark.parametrize(("exponent", "coupling"), [(3, "1/4"), (4, "99/100"), (6, "1")])
def test_residual_and_slope_agree_with_the_pencil_in_doubles(exponent, coupling):
    parts = discretised(exponent, coupling, 8)
    matrices = pencil(parts)
    v, sigma = vector(Random(1), len(matrices.A0)), acb(0.3, 0.7)
    with ctx.workprec(BITS):
        exact, exact_slope = as_complex(residual(parts, sigma, v)), as_complex(slope(parts, sigma, v))
    plain = as_complex(v)
    for exactly, matrix in ((exact, matrices.value(0.3 + 0.7j)), (exact_slope, matrices.slope(0.3 + 0.7j))):
        # each entry of a row is right to some ulp of the largest
        scale = abs(matrix).sum(axis=1).max()
        assert abs(exactly - matrix @ plain).max() < 1e-14 * scale


@pytest.mark.parametrize(("exponent", "coupling"), [(3, "1/4"), (4, "99/100"), (6, "1")])
def test_bordered_solves_leave_no_residual(exponent, coupling):
    parts = discretised(exponent, coupling, 8)
    size, rows = sum(s.degree + 1 for s in parts), sum(s.rows for s in parts)
    random = Random(2)
    right, weight, last = vector(random, size), vector(random, size), acb(0.4, -0.1)
    border = vector(random, rows) + [acb(0)] * (size - rows)
    sigma = acb(0.3, 0.7)
    with ctx.workprec(BITS):
        x, y = solve_bordered(parts, sigma, right, border, weight, last)
        remainder = [a + y * b - c for a, b, c in zip(residual(parts, sigma, x), border, right, strict=True)]
        product = sum((w * a for w, a in zip(weight, x, strict=True)), acb(0))
        # elimination leaves some ulp (1e-48) of matrix (up to 50) times solution (up to 4e3), in sums of 150 terms
        assert abs(as_complex(remainder)).max() < 1e-40
        assert abs(complex(product - last)) < 1e-40
