"""The asymptotic iteration method (AIM) at linear cost.

The textbook AIM writes ``φ'' = λ_0 φ' + s_0 φ``, differentiates to ``φ^(k+2) = λ_k φ' + s_k φ`` and quantises with
``λ_N s_(N-1) = λ_(N-1) s_N`` at one point (H. Ciftci, R. Hall, N. Saad, J. Phys. A 36, 11807, 2003; improved form:
H. T. Cho et al., Class. Quantum Grav. 27, 155004, 2010). So ``s_k`` and ``λ_k`` at the point are ``(k+2)!`` times the
Taylor coefficients ``a``, ``b`` of the solutions with data (1, 0) and (0, 1), and the condition at depth ``N`` is

    a_(N+1) b_(N+2) - a_(N+2) b_(N+1) = 0.

On a contour of `knell.methods.contour` these follow a recurrence of fixed length: one evaluation costs ``O(N)``
instead of ``O(N³)``. Frequencies are ``Mω``; precision is decimal digits of the arithmetic.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from typing import Any

from flint import acb, acb_mat, ctx

from knell.methods.aim_recurrence import Columns, columns, taylor_pair
from knell.methods.aim_rounding import determinant_error
from knell.methods.contour import Contour, obstacle, pull_back
from knell.physics.equation import Equation

GOAL_DIGITS = 32
REQUIRED_DIGITS = 14
_EVALUATIONS = 12
_SECOND_POINT = 1e-9
# AIM sees the mode at this depth if it has a root this near to the seed, relative.
_NEIGHBOURHOOD = 0.02
_SMALL = 1e-6


@dataclass(frozen=True)
class AimRun:
    """One mode by AIM on one contour.

    ``status``: ``ok``; ``starved``, rounding leaves fewer digits than required; ``refused``, the contour's
    nearest-singularity condition fails; ``failed``, no root near the seed. ``frequency`` is ``Mω`` where ``ok``, else
    ``None`` with a ``reason``. ``error`` estimates its error: the largest of ``rounding``, a bound to first order, of
    the secant's own error, and of the change since three quarters of the depth.
    """

    status: str
    frequency: acb | None = None
    error: float = math.inf
    rounding: float = math.inf
    reason: str = ""


@dataclass(frozen=True)
class Determinant:
    """The determinant at one ``σ``, at the full depth and at three quarters of it, and what it was made of."""

    sigma: Any
    full: Any
    shallow: Any
    a: list[Any]
    b: list[Any]


@dataclass(frozen=True)
class Arithmetic:
    """A number type the recurrence runs over: its complex numbers, its matrices, what is carried from term to term."""

    number: Callable[[Any], Any]
    matrix: Callable[[list[list[Any]]], Any]
    rounded: Callable[[Any], Any]


BALLS = Arithmetic(acb, acb_mat, acb.mid)


def mpmath_arithmetic() -> Arithmetic:
    """mpmath's numbers at its current working precision: the check of the arithmetic."""
    import mpmath

    return Arithmetic(mpmath.mpc, mpmath.matrix, lambda x: x)


def bits_for(digits: int) -> int:
    """Binary digits of ``digits`` decimal ones."""
    return math.ceil(digits * math.log2(10))


def determinant(brackets: Columns, sigma: Any, depth: int, arithmetic: Arithmetic = BALLS) -> Determinant:
    """``a_(N+1) b_(N+2) - a_(N+2) b_(N+1)`` at ``N = depth`` (midpoints; its own radius alone is kept)."""
    a, b = taylor_pair(brackets, sigma, depth + 2, arithmetic.matrix, arithmetic.rounded)

    def minor(n: int) -> Any:
        a1, a2, b1, b2 = (arithmetic.rounded(x) for x in (a[n + 1], a[n + 2], b[n + 1], b[n + 2]))
        return a1 * b2 - a2 * b1

    return Determinant(sigma, minor(depth), minor(max(1, 3 * depth // 4)), a, b)


def solve(
    equation: Equation,
    contour: Contour,
    depth: int,
    digits: int,
    seed: complex,
    required: int = REQUIRED_DIGITS,
    goal: int = GOAL_DIGITS,
) -> AimRun:
    """The root of the quantisation condition nearest to ``seed`` (``Mω``), by the secant method.

    ``equation`` is over balls good to ``digits``. The iteration aims at ``goal`` digits; fewer than ``required`` left
    by rounding is ``starved``. Raises `ValueError` for a depth below 1.
    """
    if depth < 1:
        raise ValueError(f"depth {depth}: must be 1 or more")
    blocked = obstacle(equation, contour)
    if blocked:
        return AimRun("refused", reason=blocked)
    bits = bits_for(digits)
    with ctx.workprec(bits):
        to_sigma = (acb(0, 1) / acb(equation.mass)).mid()
        brackets = columns(pull_back(equation, contour, acb))
        trail = secant(partial(determinant, brackets, depth=depth), (acb(seed) * to_sigma).mid(), BALLS, goal)
        last = trail.values[-1]
        slope = trail.slope
        if slope == 0:
            return AimRun("starved", reason=_starved(digits, depth))
        error = determinant_error(brackets, last.sigma, last.a, last.b, bits) + last.full.rad()
        scale = float(abs(to_sigma).mid())
        rounding = float((error / abs(slope)).mid()) / scale
        if not rounding < abs(seed) * 10.0**-required:
            return AimRun("starved", rounding=rounding, reason=_starved(digits, depth))
        if trail.reason:
            return AimRun("failed", rounding=rounding, reason=f"{trail.reason} at depth {depth}")
        error = max(rounding, trail.step_error / scale, trail.change / scale)
        return AimRun("ok", (trail.root / to_sigma).mid(), error, rounding)


def _starved(digits: int, depth: int) -> str:
    return f"{digits} digits are too few for depth {depth}: rounding swamps the determinant"


@dataclass(frozen=True)
class Trail:
    """A secant iteration: determinants in order, the next point ``root``, a ``reason`` where it failed.

    ``step_error`` is the expected error of the root as a zero of the determinant, ``change`` how far it moved since
    the shallower depth.
    """

    values: list[Determinant]
    root: Any
    slope: Any
    step_error: float
    change: float
    reason: str = ""


def secant(evaluate: Callable[[Any], Determinant], seed: Any, arithmetic: Arithmetic, goal: int) -> Trail:
    """Secant steps from ``seed`` until the next would be below ``10^-goal``, relative, or rounding stops them."""
    rounded, size = arithmetic.rounded, float(abs(seed))
    values = [evaluate(seed), evaluate(rounded(seed * (1 + arithmetic.number(_SECOND_POINT))))]
    earlier, reason = size, f"no convergence in {_EVALUATIONS} evaluations"
    while True:
        previous, last = values[-2:]
        slope = rounded((last.full - previous.full) / (last.sigma - previous.sigma))
        if slope == 0:
            return Trail(values, last.sigma, slope, math.inf, math.inf, "the determinant does not change")
        root = rounded(last.sigma - last.full / slope)
        step = float(abs(root - last.sigma))
        if not abs(complex(root - seed)) < _NEIGHBOURHOOD * size:
            reason = f"no root within {_NEIGHBOURHOOD:.0%} of the seed"
            break
        step_error = step * earlier / size
        if step_error < size * 10.0**-goal or (step > 0.5 * earlier and step < _SMALL * size):
            reason = ""
            break
        if len(values) == _EVALUATIONS:
            break
        earlier = step
        values.append(evaluate(root))
    return Trail(values, root, slope, step * min(1.0, earlier / size), _change(values, root), reason)


def _change(values: list[Determinant], root: Any) -> float:
    """How far the root moved since three quarters of the depth, to first order."""
    previous, last = values[-2:]
    rise = last.shallow - previous.shallow
    if complex(rise) == 0:
        return math.inf
    return float(abs(last.sigma - last.shallow * (last.sigma - previous.sigma) / rise - root))
