"""Random problems for the containment tests."""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache

import pytest
from hypothesis import strategies as st

from knell.methods.enclosure.problem import Problem
from knell.physics.background import PowerLaw

COUPLINGS = (-3, Fraction(-1, 2), 0, Fraction(1, 4), Fraction(3, 4), Fraction(9, 10), Fraction(97, 100), 1)
FIELDS = (("axial", 2), ("axial", 3), ("electromagnetic", 1), ("scalar", 0), ("scalar", 1))


@lru_cache(maxsize=512)
def make_problem(exponent: int, coupling: Fraction, field: str, ell: int) -> Problem:
    return Problem(PowerLaw(exponent, Fraction(coupling)), field, ell)


@pytest.fixture(scope="session")
def problems():
    """A strategy for problems: n from 2 to 8, κ from -3 to 1, all fields."""
    return st.builds(
        lambda n, k, fl: make_problem(n, Fraction(k), *fl),
        st.integers(2, 8),
        st.sampled_from(COUPLINGS),
        st.sampled_from(FIELDS),
    )


@pytest.fixture(scope="session")
def sigmas():
    """A strategy for σ = iω r_h of damped frequencies, beside the axis too, away from ω = 0."""
    return st.builds(complex, st.floats(0.15, 2.2), st.floats(0.05, 1.5))
