"""Horizon, surface gravity, light ring and window against closed forms and against the metric in ``r``."""

from __future__ import annotations

import math
from collections.abc import Callable
from fractions import Fraction

import pytest
from mpmath import mp, mpf

from knell.physics.background import PowerLaw
from knell.physics.landmarks import horizon_radius, light_ring, surface_gravity, window

# Landmarks are rounded once from 128-bit balls, the references once from 40 digits: two roundings of 1.1e-16.
ROUNDING = 2.5e-16
DEFORMED = [(3, "1/4"), (4, "9/10"), (5, "-2"), (6, "1"), (9, "999999999999/1000000000000"), (30, "1/2"), (30, "1")]


def lapse(n: int, coupling: Fraction) -> Callable[[mpf], mpf]:
    """``f(r) = 1 - 2m(r)/r`` at ``M = 1``, from the mass function."""
    strength = mpf(2 * n - 2) ** (n - 1) / mpf(n) ** n * mpf(coupling.numerator) / coupling.denominator
    return lambda r: 1 - (2 - 2 * strength / r ** (n - 1)) / r


def close(value: float, reference: mpf) -> bool:
    return abs(value - reference) <= ROUNDING * abs(reference)


@pytest.mark.parametrize("n", range(2, 31))
def test_extremal_horizon(n: int) -> None:
    """``r_h = 2(n-1)M/n`` and no surface gravity, exactly."""
    background = PowerLaw(n, Fraction(1))
    assert horizon_radius(background) == float(Fraction(2 * (n - 1), n))
    assert surface_gravity(background) == 0.0


def test_schwarzschild() -> None:
    """``r_h = 2M``, ``Mκ_s = 1/4``, ``r_c = 3M``, ``MΩ_c = Mλ_c = 1/√27``, whatever the exponent says."""
    for n in (2, 4, 11):
        background = PowerLaw(n, Fraction(0))
        ring = light_ring(background)
        assert horizon_radius(background) == 2.0
        assert surface_gravity(background) == 0.25
        assert ring.radius == 3.0
        assert close(ring.frequency, 1 / mp.sqrt(27)) and close(ring.exponent, 1 / mp.sqrt(27))


@pytest.mark.parametrize("coupling", ["-9", "-1/3", "1/10", "3/4", "99/100", "999999/1000000", "1"])
def test_reissner_nordstrom_closed_forms(coupling: str) -> None:
    """``n = 2``: ``r± = 1 ± √(1-κ)``, ``κ_s = (r₊-r₋)/(2r₊²)``, ``r_c = (3 + √(9-8κ))/2``, ``f = 1 - 2/r + κ/r²``."""
    background = PowerLaw(2, Fraction(coupling))
    with mp.workdps(40):
        kappa = mpf(Fraction(coupling).numerator) / Fraction(coupling).denominator
        root = mp.sqrt(1 - kappa)
        outer, radius = 1 + root, (3 + mp.sqrt(9 - 8 * kappa)) / 2
        f, curvature = 1 - 2 / radius + kappa / radius**2, -4 / radius**3 + 6 * kappa / radius**4
        assert close(horizon_radius(background), outer)
        assert close(surface_gravity(background), root / outer**2)
        ring = light_ring(background)
        assert close(ring.radius, radius)
        assert close(ring.frequency, mp.sqrt(f) / radius)
        assert close(ring.exponent, mp.sqrt(f * (2 * f - radius**2 * curvature) / 2) / radius)


@pytest.mark.parametrize(("n", "coupling"), DEFORMED)
def test_horizon_and_surface_gravity_from_the_metric(n: int, coupling: str) -> None:
    """The landmark is where ``f(r)`` changes sign last, and ``κ_s = f'(r_h)/2``."""
    background = PowerLaw(n, Fraction(coupling))
    radius = horizon_radius(background)
    with mp.workdps(40):
        f = lapse(n, Fraction(coupling))
        assert all(f(radius * (1 + mpf(k) / 50)) > 0 for k in range(1, 400))
        if background.is_extremal:
            return
        # Near the extremal end the two roots lie within √(1-κ) of each other: bracket far more closely than that.
        exact = mp.findroot(
            f, (mpf(radius) * (1 - mpf(10) ** -14), mpf(radius) * (1 + mpf(10) ** -14)), solver="anderson"
        )
        assert close(radius, exact)
        assert close(surface_gravity(background), mp.diff(f, exact) / 2)


@pytest.mark.parametrize(("n", "coupling"), DEFORMED)
def test_light_ring_is_the_peak_of_f_over_r_squared(n: int, coupling: str) -> None:
    """``Ω_c² = max f/r²``, and ``λ_c² = -(r²/2f) d²(f/r²)/dr*²`` there: how fast a null ray leaves it."""
    background = PowerLaw(n, Fraction(coupling))
    ring = light_ring(background)
    with mp.workdps(40):
        f = lapse(n, Fraction(coupling))

        def barrier(r: mpf) -> mpf:
            return f(r) / r**2

        peak = mp.findroot(lambda r: mp.diff(barrier, r), ring.radius)
        second = mp.diff(barrier, peak, 2)
        assert second < 0
        assert peak > horizon_radius(background)
        assert close(ring.radius, peak)
        assert close(ring.frequency, mp.sqrt(barrier(peak)))
        # At the peak d/dr* = f d/dr twice is f² times the second derivative in r.
        assert close(ring.exponent, mp.sqrt(-(peak**2) * f(peak) * second / 2))
        assert all(barrier(peak * (1 + mpf(k) / 20)) < barrier(peak) for k in range(1, 200))


def test_window_of_schwarzschild() -> None:
    """``1.2 × 2.5/√27 + 0.1 = 0.677…``, rounded up; the default depth and the square about the branch point."""
    standard = window(PowerLaw(4, Fraction(0)), 2)
    assert (standard.re_max, standard.depth, standard.excluded) == (Fraction(68, 100), Fraction(3, 2), Fraction(1, 10))
    assert window(PowerLaw(4, Fraction(0)), 2, Fraction(3)).depth == 3


@pytest.mark.parametrize("ell", [0, 1, 2, 7])
@pytest.mark.parametrize(("n", "coupling"), DEFORMED)
def test_window_reaches_past_the_light_ring(n: int, coupling: str, ell: int) -> None:
    background = PowerLaw(n, Fraction(coupling))
    edge = 1.2 * light_ring(background).frequency * (ell + 0.5) + 0.1
    re_max = window(background, ell).re_max
    assert 100 * re_max == math.ceil(100 * edge)
    assert edge <= re_max < edge + 0.01
