"""Paths: exact vertices, no root of f between the path and the real segment, the right sector at irregular ends."""

from __future__ import annotations

from cmath import rect
from fractions import Fraction

import pytest
from flint import acb, arb, ctx
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.methods.enclosure.effort import Effort, lands, prepare
from knell.methods.enclosure.path import (
    Stride,
    check_homotopy,
    exact_vertices,
    foreign_roots,
    plan,
    winding,
)
from knell.methods.enclosure.problem import MATCH_POINT, Problem, check_structure
from knell.methods.enclosure.refusal import BadStructure, ForeignPath, InexactVertex
from knell.methods.enclosure.taylor import exact_point
from knell.physics.background import PowerLaw
from knell.physics.equation import regularised

SIDES = (False, True)


def vertices_of(problem, sigma):
    return [plan(land, at, sigma, 30, Stride()) for land, at in zip(lands(problem), SIDES, strict=True)]


def check(problem, infinity, horizon, sigma):
    with ctx.workprec(128):
        points = exact_vertices(infinity, False), exact_vertices(horizon, True)
        check_homotopy(problem.equation(128), *points, exact_point(sigma))


@settings(max_examples=60, deadline=None)
@given(data=st.data(), sigma=st.builds(complex, st.floats(-1.5, 2.2), st.floats(0.02, 1.5)))
def test_planned_paths_pass_the_check(problems, data, sigma):
    # Growing modes (Re σ < 0) too; σ near 0 is left out by every window.
    if abs(sigma) < 0.1:
        sigma += 0.2
    problem = data.draw(problems)
    infinity, horizon = vertices_of(problem, sigma)
    check(problem, infinity, horizon, sigma)
    assert infinity[-1] == MATCH_POINT == 1 - horizon[-1]


@pytest.mark.parametrize(
    ("n", "q"), [(22, Fraction(1, 21)), (22, Fraction(19, 420)), (28, Fraction(1, 60)), (40, Fraction(1, 39))]
)
def test_a_horizon_side_that_rounds_a_root_outside_the_disc_is_foreign(n, q):
    problem, sigma = Problem(PowerLaw.from_q(n, q), "axial", 2), 0.13 + 0.55j
    infinity, horizon = vertices_of(problem, sigma)
    check(problem, infinity, horizon, sigma)
    # Straight up from u = 1 to 1 + 0.6i, over the root (1.04 + 0.38i at n = 22), and back down on the left.
    over = (-0.02 - 0.05j, -0.12 - 0.35j, -0.1 - 0.5j, 0.3 - 0.5j, 1 - MATCH_POINT)
    with pytest.raises(ForeignPath):
        check(problem, infinity, over, sigma)


def test_a_path_over_the_upper_half_plane_is_on_another_sheet():
    problem, sigma = Problem(PowerLaw(4, Fraction(1, 2)), "axial", 2), 0.13 + 0.55j
    infinity, horizon = vertices_of(problem, sigma)
    mirrored = tuple(v.conjugate() for v in infinity[:-1])
    for wrong in (
        (*mirrored, 0.5 + 0.1j, MATCH_POINT),
        (-0.1 - 0.01j, -0.1 + 0.1j, 0.1 + 0.1j, MATCH_POINT),
        (-0.1 + 0j, -0.1j, MATCH_POINT),
    ):
        with pytest.raises(ForeignPath):
            check(problem, wrong, horizon, sigma)


def test_vertices_are_exact_and_end_at_the_match_point():
    with ctx.workprec(128):
        assert exact_vertices((0.1j, MATCH_POINT), False)[0].is_exact()
        for wrong in ((0.1j, 0.5 - 0.19j), (0.1j, complex(0.5, -0.1875 - 2**-50)), (), (complex("nan"), MATCH_POINT)):
            with pytest.raises(InexactVertex):
                exact_vertices(wrong, False)


def test_winding_numbers():
    with ctx.workprec(100):
        square = [acb(1, 1), acb(-1, 1), acb(-1, -1), acb(1, -1)]
        assert winding(square, acb(0.5)) == 1
        assert winding(square[::-1], acb(0.5)) == -1
        assert winding(square, acb(3)) == 0
        assert winding(square * 2, acb(0)) == 2
        for on_it in (acb(1), acb(1, 1), acb(arb(1, 0.1), arb(0))):
            with pytest.raises(ForeignPath):
                winding(square, on_it)


def test_the_roots_of_f_other_than_the_horizon_are_all_enclosed():
    for n, k in ((2, 1), (4, 1), (4, Fraction(1, 2)), (9, Fraction(-3)), (22, 1), (4, 0)):
        equation = Problem(PowerLaw(n, Fraction(k)), "axial", 2).equation(200)
        with ctx.workprec(200):
            roots = foreign_roots(equation)
            assert len(roots) == (0 if k == 0 else n - (2 if k == 1 else 1))
            for root in roots:
                value = sum((c * root**i for i, c in enumerate(equation.f)), acb(0))
                assert value.contains(0) and not (root - 1).contains(0)


def test_structural_zeros_are_demanded():
    with ctx.workprec(128):
        third = arb(1) / 3
        good = [arb(1), -(1 + third), arb(0), arb(0), third]
        # κ = 1 means q = 1/3 for n = 4: degenerate, and only then.
        check_structure(regularised(good, "axial", 2, True))
        with pytest.raises(BadStructure, match="degenerate"):
            check_structure(regularised(good, "axial", 2, False))
        plain = [arb(1), arb(-1)]
        with pytest.raises(BadStructure, match="degenerate"):
            check_structure(regularised(plain, "axial", 2, True))
        with pytest.raises(BadStructure, match="not the horizon"):
            check_structure(regularised([arb(1), arb(-1), arb(0.001)], "axial", 2, False))
        with pytest.raises(BadStructure, match="not positive"):
            check_structure(regularised([arb(1), arb(-3), arb(2)], "axial", 2, False))


@settings(max_examples=40, deadline=None)
@given(data=st.data(), angle=st.floats(0.02, 1.5), size=st.floats(0.15, 2.0))
def test_a_run_is_planned_for_every_damped_frequency(problems, data, angle, size):
    problem, sigma = data.draw(problems), rect(size, angle)
    run = prepare(problem, exact_point(sigma), 0.0, Effort(20, 0, Stride(0.4, 10.0)))
    assert run.bits > 100 and len(run.infinity.vertices) > 2
