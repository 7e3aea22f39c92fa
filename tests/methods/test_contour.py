"""Contours: the map, the equation on it, and the nearest-singularity condition."""

from __future__ import annotations

import cmath
from fractions import Fraction

import numpy as np
import pytest
from flint import acb, ctx
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.methods.contour import Contour, images, obstacle, pull_back
from knell.methods.match.geometry import other_roots
from knell.physics import polynomial
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_balls, equation_floats

HOLES = [PowerLaw(4, Fraction(0)), PowerLaw(3, Fraction(9, 10)), PowerLaw(6, Fraction(1))]

moduli = st.floats(0.3, 2)
angles = st.floats(-50, 70)
contours = st.one_of(
    st.builds(Contour.turned, moduli, angles), st.builds(Contour.turned, moduli, angles, moduli, angles)
)
in_disc = st.builds(cmath.rect, st.floats(0, 0.9), st.floats(-3.2, 3.2))


@given(contours)
def test_ends_and_their_slopes(contour):
    assert contour.at(1) == 0
    assert abs(contour.at(-1) - 1) < 1e-15
    h = 1e-6  # one-sided differences: error h u''/2 of order h, here for |u''| up to some tens
    assert abs(contour.at(1 - 2 * h) / h - contour.far) < 1e-3
    assert abs((1 - contour.at(-1 + 2 * h)) / h - contour.near) < 1e-3
    assert cmath.isclose(cmath.exp(-1j * contour.tilt), contour.far / abs(contour.far), abs_tol=1e-12)


def test_real_path_is_straight():
    y = np.linspace(-1, 1, 7)
    assert np.abs(Contour().at(y) - (1 - y) / 2).max() < 1e-15
    assert Contour().is_arc


@given(contours, in_disc, st.sampled_from(HOLES), st.builds(complex, st.floats(0, 2), st.floats(-1, 1)))
@settings(deadline=None, max_examples=60)
def test_pulled_back_equation_is_the_equation(contour, y, hole, sigma):
    """``φ = u² + 1`` in ``y`` and in ``u`` give residuals with the ratio of the factors multiplied through."""
    equation = equation_floats(hole, "axial", 2)
    pulled = pull_back(equation, contour)
    P, R0, R1, S0, S1, S2 = (polynomial.evaluate(c, y) for c in (pulled.P, *pulled.R, *pulled.S))
    u, k, e = contour.at(y), contour.k, contour.e
    B = k * (1 - y) * (1 - e * y) + (1 + y) * (1 + e * y)
    v, c = 1 - e * y * y, -2 * k * (1 + e)
    u_y = c * v / B**2
    B_y = -k * (1 + e - 2 * e * y) + 1 + e + 2 * e * y
    u_yy = c * (-2 * e * y) / B**2 - 2 * u_y * B_y / B
    phi, phi_u, phi_uu = u * u + 1, 2 * u, 2.0
    phi_y, phi_yy = phi_u * u_y, phi_uu * u_y**2 + phi_u * u_yy
    in_y = P * phi_yy + (R0 + sigma * R1) * phi_y + (S0 + sigma * S1 + sigma**2 * S2) * phi
    p, H, Q, W = (polynomial.evaluate(x, u) for x in (equation.p, equation.H, equation.Q, equation.W))
    p_u, H_u = (polynomial.evaluate(polynomial.derivative(x), u) for x in (equation.p, equation.H))
    in_u = p * phi_uu + (2 * sigma * H + p_u) * phi_u + (sigma * H_u - sigma**2 * Q - W) * phi
    n = len(equation.f) - 1
    factor = c * c * v**3 * B**n
    # Doubles: each of about 3n terms of the Horner sums is rounded relative to the largest of them, and powers
    # of A and B up to n + 2 occur.
    size = abs(polynomial.evaluate([abs(x) for x in pulled.P], 1)) * (abs(phi_yy) + abs(phi_y) + abs(phi) * 40)
    assert abs(in_y - factor * in_u) < 1e-11 * (size + abs(factor * in_u))


@pytest.mark.parametrize("hole", HOLES)
@pytest.mark.parametrize("contour", [Contour(), Contour.turned(0.7, 40), Contour.turned(0.8, 20, 0.6, 30)])
def test_degree_is_what_the_docstring_says(hole, contour):
    n = hole.exponent if hole.coupling else 1
    equation = equation_floats(hole, "scalar", 0)
    n = len(equation.f) - 1
    pulled = pull_back(equation, contour)
    assert len(pulled.P) - 1 == (n + 4 if contour.is_arc else 2 * n + 10)
    assert len(pulled.R[0]) <= len(pulled.P) and len(pulled.S[2]) <= len(pulled.P) - 1


def test_balls_and_doubles_agree():
    hole, contour = PowerLaw(5, Fraction(3, 4)), Contour.turned(0.7, 30, 0.8, 20)
    with ctx.workprec(200):
        balls = pull_back(equation_balls(hole, "axial", 3, 200), contour, acb)
    doubles = pull_back(equation_floats(hole, "axial", 3), contour)
    largest = max(abs(x) for x in doubles.P)
    # one rounding for each of about 8 × 20 additions and products behind a coefficient
    assert all(abs(complex(x) - y) < 1e-13 * largest for x, y in zip(balls.P, doubles.P, strict=True))


@given(contours, st.sampled_from(HOLES))
def test_images_map_back(contour, hole):
    roots = other_roots(equation_floats(hole, "axial", 2))
    at_roots, at_infinity = images(roots, contour.k, contour.s)
    if roots.size:
        assert np.allclose(contour.at(at_roots), roots, rtol=1e-8)
    e = contour.e
    if np.isfinite(at_infinity):
        y = complex(at_infinity)
        alpha, beta = contour.k * (1 - y) * (1 - e * y), (1 + y) * (1 + e * y)
        assert abs(alpha + beta) < 1e-8 * abs(alpha)
    if abs(e) > 1e-12:
        # The other preimage is 1/(ey): not nearer.
        assert all(abs(y) <= (1 + 1e-9) / abs(e * y) for y in at_roots)


def test_obstacle_names_the_root_that_is_too_near():
    hole = PowerLaw(22, Fraction(95, 100))  # roots of f close to the unit circle
    equation = equation_floats(hole, "axial", 2)
    assert obstacle(equation, Contour()) == ""
    reason = obstacle(equation, Contour.turned(0.5, 60))
    assert "root" in reason and "from the expansion point" in reason


def test_turns_of_a_right_angle_and_more_are_no_contours():
    # u = ∞ lies at |y| = |(1+k)/(1-k)| on an arc: at 85° it is still outside.
    equation = equation_floats(PowerLaw(4, Fraction(0)), "axial", 2)
    assert obstacle(equation, Contour.turned(1, 85)) == ""
    with pytest.raises(ValueError, match="positive real part"):
        Contour.turned(1, 95)
    with pytest.raises(ValueError, match="positive real part"):
        Contour(1, -0.5)
