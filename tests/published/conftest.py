"""What the comparisons share: the blind search and the high-precision match of one point, each done once."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from functools import cache

import numpy as np
import pytest
from flint import acb
from mpmath import mp, mpc, mpf

from knell.methods.match.digits import refine
from knell.methods.match.geometry import MAIN_ROUTE
from knell.methods.match.search import search
from knell.methods.match.solutions import Matcher
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_floats
from knell.physics.landmarks import window

SCHWARZSCHILD = PowerLaw(2, Fraction(0))
# A zero this near the negative imaginary axis is on it as far as doubles can say, and is no oscillating mode.
AXIS = 1e-6


def to_mpc(value: acb) -> mpc:
    """The midpoint of a ball, all its digits kept."""

    def part(x: object) -> mpf:
        mantissa, exponent = x.mid().man_exp()  # type: ignore[attr-defined]
        return mp.ldexp(mp.mpf(int(mantissa)), int(exponent))

    with mp.workdps(100):
        return mpc(part(value.real), part(value.imag))


@cache
def blind(background: PowerLaw, field: str, ell: int, depth: Fraction) -> np.ndarray:
    """``Mω`` of the modes down to ``depth``, by damping, from a search that was given no seeds and is complete."""
    equation = equation_floats(background, field, ell)
    result = search(equation, window(background, ell, depth))
    assert result.complete, f"{len(result.zeros)} zeros found, {result.counted} counted"
    return result.zeros[result.zeros.real > AXIS]


@cache
def precise(background: PowerLaw, field: str, ell: int, seed: complex, digits: int) -> mpc:
    """``Mω`` of the mode next to ``seed`` to ``digits`` digits."""
    run = refine(background, field, ell, seed, digits)
    assert run.status == "ok", run.reason
    return to_mpc(run.frequency)


def secant(background: PowerLaw, field: str, ell: int, seed: complex) -> complex:
    """``Mω`` of the zero of the search's own function next to ``seed``, in doubles: for ℓ too large to search."""
    equation = equation_floats(background, field, ell)
    matcher, to_sigma = Matcher(equation, MAIN_ROUTE), 1j / float(equation.mass)
    omega = seed
    for _ in range(8):
        h = 1e-6 * abs(omega)
        sigma = (omega + h * np.array([0, 1, -1])) * to_sigma
        value, ahead, behind = matcher.wronskian(sigma, np.full(3, sigma[0]))
        step = 2 * h * value / (ahead - behind)
        omega -= step
        if abs(step) < 1e-11:
            return complex(omega)
    raise AssertionError(f"no zero next to {seed} of {background}, {field}, ell {ell}: last step {abs(step)}")


@pytest.fixture(scope="session")
def schwarzschild() -> PowerLaw:
    return SCHWARZSCHILD


@pytest.fixture(scope="session")
def modes() -> Callable[..., np.ndarray]:
    """``modes(background, field, ell, depth)``: the blind search."""
    return blind


@pytest.fixture(scope="session")
def digits_of() -> Callable[..., mpc]:
    """``digits_of(background, field, ell, seed, digits)``: the match over balls."""
    return precise


@pytest.fixture(scope="session")
def next_to() -> Callable[..., complex]:
    """``next_to(background, field, ell, seed)``: the zero in doubles beside a seed."""
    return secant
