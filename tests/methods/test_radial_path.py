"""Paths of the direct integration: steps inside the circles of convergence, no root passed on the wrong side."""

from fractions import Fraction
from itertools import pairwise

import numpy as np
import pytest

from knell.methods.original import horizon_roots, original_equation
from knell.methods.radial_path import Geometry, PathError, Route, paths
from knell.physics.background import PowerLaw

ROUTE = Route(tilt=0.1, stretch=1.3, entry=0.4, ratio=0.4, meeting=complex(-0.1, 0.5))


@pytest.mark.parametrize(
    "background", [PowerLaw(2, Fraction(0)), PowerLaw(6, Fraction(99, 100)), PowerLaw(5, Fraction(1))], ids=str
)
@pytest.mark.parametrize("omega", [0.4 - 0.1j, 1e-6 - 0.6j, 0.05 - 2.3j])
def test_steps_stay_inside_the_circles_of_convergence_and_meet(background, omega):
    equation = original_equation(background, "axial", 2)
    geometry = Geometry.of(horizon_roots(equation, 64), equation.exponent)
    chosen = paths(geometry, omega, 100, ROUTE)
    ends = []
    for centre, spiral in ((0.0, chosen.outer), (geometry.horizon, chosen.inner)):
        points = centre + np.exp(np.array(spiral.knots))
        ends.append(points[-1])
        for here, there in pairwise(points):
            # 0.4, and the 40 bisections of the planner: no slack is needed beyond rounding
            assert abs(there - here) <= 0.4 * geometry.distance(here) * (1 + 1e-9)
    assert abs(ends[0] - ends[1]) < 1e-12 * abs(ends[0])
    outer = np.exp(np.array(chosen.outer.knots))
    assert np.all(np.abs(outer) > geometry.horizon)


def test_a_root_outside_the_horizon_radius_is_refused():
    equation = original_equation(PowerLaw(4, Fraction(1, 2)), "axial", 2)
    roots = horizon_roots(equation, 64)
    swapped = type(roots)(roots.others[0], False, (roots.horizon,))
    with pytest.raises(PathError, match="outside"):
        Geometry.of(swapped, equation.exponent)


def test_a_path_that_winds_about_a_root_is_refused():
    # a degenerate horizon with a root so near that the turn next to the horizon encloses it
    geometry = Geometry(1.5, (1.5 - 0.03j, 1.5 + 0.03j), 4, True)
    assert abs(geometry.others[0]) > 1.5  # as only a made-up background can have it
    with pytest.raises(PathError, match="winds"):
        paths(geometry, 0.1 - 3.0j, 30, Route(0.0, 1.3, 0.9, 0.4, complex(-0.1, 0.5)))
