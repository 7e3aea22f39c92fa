"""Spectral method in high precision: one eigenpair of the pencil, refined to any number of digits.

The pencil of `spectral` is banded, so ``A(σ)v`` costs a few short polynomial products over FLINT numbers. It is
well conditioned too, on a path that tells the two solutions apart, so Newton's method on

    A(σ) v = 0,   wᵀv = 1

runs with high-precision residuals and one *double-precision* inverse of the bordered matrix ``[[A, A'v], [wᵀ, 0]]``:
each round gains as many digits as the inverse has (*measured*: 12 to 15, so two rounds for 25 digits). Where
that does not contract, for deep modes beside a nearly degenerate horizon, the same system is solved in high precision
(`spectral_blocks`). No line is shared with the asymptotic iteration or the match.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from flint import acb, ctx

from knell.methods.spectral import Pencil, Side, frequency_range, pencil, sides
from knell.methods.spectral_blocks import solve_bordered
from knell.methods.spectral_path import TILT, bent_path, orders
from knell.methods.spectral_residual import residual, slope
from knell.physics.background import PowerLaw
from knell.physics.equation import Equation, equation_balls

_GUARD_DIGITS = 30
_ROUNDS = 12
_NEWTON_STEPS = 8
_LEVELS = 6
_MOST_COEFFICIENTS = 1000
_SETTLED = 1e-9
_NEIGHBOURHOOD = 1e-3
_LEAST_AGREEMENT = 1e-8


@dataclass(frozen=True)
class SpectralRun:
    """One mode by the spectral method: ``status`` (``ok``, ``failed``), ``frequency`` as ``Mω``, ``reason``.

    ``error`` is the distance in ``Mω`` of the same mode at the coarser of two resolutions.
    """

    status: str
    frequency: acb | None = None
    error: float = math.inf
    reason: str = ""


class NotConverged(ArithmeticError):
    """Newton's method did not settle on an eigenvalue; the message says how."""


@dataclass(frozen=True)
class Discretisation:
    """One resolution: the sides over ``acb`` numbers and their pencil over doubles."""

    parts: list[Side]
    matrices: Pencil


def working_bits(digits: int) -> int:
    """Precision for ``digits`` digits: rounding is amplified by the pencil's condition, up to about ``10^20``."""
    return math.ceil((digits + _GUARD_DIGITS) * math.log2(10))


class SpectralProblem:
    """One equation on one path, for any number of modes to ``digits`` digits.

    ``resolution(k)`` truncates at ``digits + 2 + 6k`` digits and is built when first asked for. Raises `PathError` when
    the path encloses a root of ``f``.
    """

    def __init__(self, equation: Equation, digits: int = 20, tilt: float = TILT) -> None:
        """``equation`` over balls of at least `working_bits` bits."""
        self.equation = equation
        self.digits = digits
        self.bits = working_bits(digits)
        doubles = equation.map(float)
        self.path = bent_path(doubles, tilt)
        self.frequencies = frequency_range(doubles)
        self._levels: list[Discretisation] = []

    @classmethod
    def of(cls, background: PowerLaw, field: str, ell: int, digits: int = 20, tilt: float = TILT) -> SpectralProblem:
        """The problem of a background, a field and ``ℓ``."""
        return cls(equation_balls(background, field, ell, working_bits(digits)), digits, tilt)

    def resolution(self, level: int) -> Discretisation:
        """Raises `NotConverged` where it would take too many coefficients: the horizon is too nearly degenerate."""
        while len(self._levels) <= level:
            degrees = orders(self.path, self.digits + 2 + 6 * len(self._levels), self.frequencies)
            if sum(degrees) > _MOST_COEFFICIENTS:
                raise NotConverged(f"{sum(degrees)} coefficients needed: the horizon is too nearly degenerate")
            with ctx.workprec(self.bits):
                parts = [side.map(acb.mid) for side in sides(self.equation, self.path, degrees, acb)]
            self._levels.append(Discretisation(parts, pencil(parts)))
        return self._levels[level]


def refine(problem: SpectralProblem, seed: complex | acb) -> SpectralRun:
    """The mode next to ``seed`` (``Mω``; three digits will do) to the problem's digits.

    The resolution is raised until two in a row agree to those digits, at most to the sixth; the value is
    that of the finer one. ``failed`` when Newton's method leaves the seed's neighbourhood (one part in a
    thousand) or does not contract, and when the last two resolutions agree to fewer than eight digits.
    """
    with ctx.workprec(problem.bits):
        mass = problem.equation.mass.mid()
        sigma = acb(0, 1) * acb(seed) / mass
        previous, error = None, math.inf
        for level in range(_LEVELS):
            try:
                sigma = _eigenvalue(problem.resolution(level), sigma, problem.digits)
            except NotConverged as failure:
                return SpectralRun("failed", reason=str(failure))
            if previous is not None:
                error = float(abs(sigma - previous).mid())
                if error <= 10.0**-problem.digits * abs(complex(sigma)):
                    break
            previous = sigma
        frequency, distance = (-acb(0, 1) * sigma * mass).mid(), error * float(mass)
        if error > _LEAST_AGREEMENT * abs(complex(sigma)):
            return SpectralRun("failed", frequency, distance, f"two resolutions differ by {distance:.1e}")
        return SpectralRun("ok", frequency, distance)


def _eigenvalue(level: Discretisation, seed: acb, digits: int) -> acb:
    """The eigenvalue next to ``seed``, with the inverse in doubles where that contracts, else with exact solves."""
    try:
        return _with_double_inverse(level, seed, digits)
    except NotConverged:
        return _with_high_precision_solves(level.parts, seed, digits)


def _with_double_inverse(level: Discretisation, seed: acb, digits: int) -> acb:
    sigma, vector, inverse = _newton_in_doubles(level.matrices, complex(seed))
    exact_vector, exact_sigma = [acb(complex(x)) for x in vector], acb(sigma)
    moved = math.inf
    for _ in range(_ROUNDS):
        rest = np.array([complex(x) for x in residual(level.parts, exact_sigma, exact_vector)])
        step = inverse[:, :-1] @ -rest
        exact_vector = [(x + acb(complex(d))).mid() for x, d in zip(exact_vector, step[:-1], strict=True)]
        exact_sigma = (exact_sigma + acb(complex(step[-1]))).mid()
        last, moved = moved, float(abs(step[-1]))
        if moved <= 10.0 ** -(digits + 2) * abs(sigma):
            return exact_sigma
        if not moved < last / 4:
            raise NotConverged(f"rounds of refinement do not contract: steps {last:.1e}, {moved:.1e}")
    raise NotConverged(f"{_ROUNDS} rounds of refinement were not enough: last step {moved:.1e}")


def _with_high_precision_solves(parts: Sequence[Side], seed: acb, digits: int) -> acb:
    size = sum(side.degree + 1 for side in parts)
    rows = sum(side.rows for side in parts)
    sigma, nothing = seed.mid(), [acb(0)] * size
    # The bordered system with any border and weight has the null vector of A(σ) for its solution.
    border = [acb(1)] * rows + [acb(0)] * (size - rows)
    try:
        vector, _ = solve_bordered(parts, sigma, nothing, border, [acb(1)] * size, acb(1))
        scale = max(abs(complex(x)) for x in vector)
        vector = [x / scale for x in vector]
        squared = sum(abs(complex(x)) ** 2 for x in vector)
        weight = [acb(complex(x).conjugate() / squared) for x in vector]
        for _ in range(_NEWTON_STEPS):
            rest = [-x for x in residual(parts, sigma, vector)]
            step, moved = solve_bordered(parts, sigma, rest, slope(parts, sigma, vector), weight, acb(0))
            vector = [(x + d).mid() for x, d in zip(vector, step, strict=True)]
            sigma = (sigma + moved).mid()
            if not abs(complex(sigma - seed)) < _NEIGHBOURHOOD * abs(complex(seed)):
                raise NotConverged("Newton's method left the neighbourhood of the seed")
            if abs(complex(moved)) <= 10.0 ** -(digits + 2) * abs(complex(sigma)):
                return sigma
    except ZeroDivisionError as failure:
        raise NotConverged("the pencil is singular to the working precision") from failure
    raise NotConverged(f"Newton's method did not settle: last step {abs(complex(moved)):.1e}")


def _newton_in_doubles(matrices: Pencil, seed: complex) -> tuple[complex, np.ndarray, np.ndarray]:
    """``σ``, ``v`` and the inverse of the bordered matrix there, good to rounding."""
    size = len(matrices.A0)
    sigma = seed
    try:
        # Inverse iteration from a vector that favours no coefficient.
        inverse = np.linalg.inv(matrices.value(sigma))
        vector = np.ones(size, complex)
        for _ in range(3):
            vector = inverse @ vector
            vector /= abs(vector).max()
        weight = vector.conj() / np.vdot(vector, vector)
        for _ in range(_NEWTON_STEPS):
            bordered = np.zeros((size + 1, size + 1), complex)
            bordered[:size, :size] = matrices.value(sigma)
            bordered[:size, size] = matrices.slope(sigma) @ vector
            bordered[size, :size] = weight
            inverse = np.linalg.inv(bordered)
            step = inverse[:, :size] @ -(bordered[:size, :size] @ vector)
            vector, sigma = vector + step[:size], complex(sigma + step[size])
            if not abs(sigma - seed) < _NEIGHBOURHOOD * abs(seed):
                raise NotConverged("Newton's method left the neighbourhood of the seed")
            if abs(step[size]) < _SETTLED * abs(sigma):
                return sigma, vector, inverse
    except np.linalg.LinAlgError as failure:
        raise NotConverged("the pencil is singular to working precision") from failure
    raise NotConverged(f"Newton's method in doubles did not settle: last step {abs(step[size]):.1e}")
