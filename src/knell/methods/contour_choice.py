"""Which contour, and which second one: a rule from the geometry of the singular points.

The rule looks at what each singular point does to the Taylor coefficients about ``y = 0`` of order ``N``, the depth:
the saddle points of ``exp(-2σ ∫ H/p du) y^-N``, where the exponential is the unwanted second solution.

- Infinity, and a degenerate horizon, end with slope ``c`` (`Contour.far`, `Contour.near`) and ``g = 1`` or
  ``f''(1)/2``: saddles ``exp(±4 √(-σN/cg))``. The unwanted solution grows by the upper sign, the wanted one leaves the
  lower. A small slope makes the exponent large, a turn of the slope brings it towards the positive real axis, and
  ``|arg(-σ/c)| < π`` has to hold, beyond which the two change roles.
- At a simple horizon the unwanted solution ``(1-u)^ν``, ``ν = 2σ/|f'(1)|``, leaves ``N^-ν``. With the next real root
  at ``1 + δ`` both are the saddles ``ε = -d ± √(d² - 4σ/(gcN))``, ``d = δ/c``, ``g = |f'(1)|/δ``, of
  ``Nε - ν log(1 + 2d/ε)``. While ``|4σ/(gcNd²)| < 2`` the one near 0 is the horizon's and the other the next root's;
  beyond they are the upper and lower one of a degenerate horizon, and its condition on the angle holds. So near the
  extremal end the horizon wants the same turn as infinity, as on the S-shape; well below it any, as on the arc.
- Every other singular point leaves ``|y|^-N`` times the strength with which the unwanted solution reaches it, about
  ``10^(2|σ|)`` (*measured* on twelve modes and two thousand contours; the points' own exponents chose no better).

The error is the largest of what is left over, relative to the smaller of what the two ends let grow. Of a fixed fan
of contours the rule takes the one with the most digits at the given depth; more than `ENOUGH` count as no more. Among
equals it takes the one that loses fewest digits to rounding, the difference of the two upper saddles (an arc, which
costs less, may lose `_ARC_BONUS` more). The second contour is the best of those whose tilt differs by `TILT_STEP` or
more.

*Measured* on 210 principal modes (n = 3 … 6, κ = 0 … 1, ℓ = 2, 3, overtones 0 to 4), the fewer digits of the two
contours: at depth 120 ten or more for all but 13, at depth 200 for all but one, at depth 300 for all; the rule's choice
is within a digit of the best of its fan on average, within 3 at most.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from knell.methods.contour import Contour, images, obstacle
from knell.methods.match.geometry import other_roots
from knell.physics import polynomial
from knell.physics.equation import Equation

ENOUGH = 26.0
TILT_STEP = np.pi / 12
_LEAST = 2.0
_ARC_BONUS = 5.0
_K = (0.35, 0.5, 0.7, 0.85, 1.0, 1.2, 1.5)
_K_DEGREES = (-10, 0, 10, 20, 30, 40, 50, 60)
_S = (0.35, 0.5, 0.65, 0.8, 1.0)
_S_DEGREES = (0, 10, 20, 30, 40, 50)
# Nearer images than this make rounding errors outgrow the rule.
_CLEARANCE = 1.12
# Digits of strength of the other points for each unit of |σ|.
_STRENGTH = 2.0
_APART = 2.0

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


@dataclass(frozen=True)
class Choice:
    """The contour for a mode and a differently tilted second one, with the digits the rule expects of each.

    ``None`` in the place of a contour comes with a ``reason``.
    """

    main: Contour | None
    tilted: Contour | None
    expected: float
    expected_tilted: float
    reason: str = ""


@cache
def _fan() -> tuple[Complexes, Complexes]:
    turn = np.exp(-1j * np.pi / 180 * np.arange(-90, 91))
    pairs = [
        (k * turn[a + 90], s * turn[b + 90] if b else complex(s))
        for k in _K
        for a in _K_DEGREES
        for s in _S
        for b in _S_DEGREES
        if a + b >= 0
    ]
    k, s = zip(*pairs, strict=True)
    return np.array(k), np.array(s)


@dataclass(frozen=True)
class Expected:
    """What the rule expects of each contour: ``digits`` of ``σ``, digits of the arithmetic it ``loses``."""

    digits: Floats
    loses: Floats


def expected(equation: Equation, sigma: complex, depth: int, k: Complexes, s: Complexes) -> Expected:
    """The rule for the contours ``(k, s)`` at a depth; ``-inf`` digits where another point lies too near."""
    f = [float(x) for x in equation.f]
    roots = other_roots(equation)
    slope = polynomial.derivative(f)
    upper, lower = _irregular(sigma, depth, np.angle(k) + np.angle(s), np.abs(k * s))
    near = s / k
    if equation.degenerate:
        g = polynomial.evaluate(polynomial.derivative(slope), 1.0) / 2
        horizon = _irregular(sigma, depth, np.angle(s) - np.angle(k), np.abs(near) * g)
    else:
        horizon = _simple(sigma, depth, near, abs(polynomial.evaluate(slope, 1.0)), roots)
    at_roots, at_infinity = images(roots, k, s)
    nearest = np.minimum(np.min(np.abs(at_roots), axis=-1, initial=np.inf), np.abs(at_infinity))
    leftover = _STRENGTH * abs(sigma) * np.log(10) - depth * np.log(nearest)
    leftover = np.maximum(leftover, np.maximum(lower, horizon[1]))
    digits = (np.minimum(upper, horizon[0]) - leftover) / np.log(10)
    return Expected(np.where(nearest > _CLEARANCE, digits, -np.inf), np.abs(upper - horizon[0]) / np.log(10))


def _irregular(sigma: complex, depth: int, angle: Floats, size: Floats) -> tuple[Floats, Floats]:
    """Exponents of the upper saddle of an irregular end, ``4 √(-σN/c)`` (``-inf`` out of range), and of the lower."""
    phase = np.angle(sigma) - np.pi - angle
    value = 4 * np.sqrt(abs(sigma) * depth / size) * np.cos(phase / 2)
    return np.where(np.abs(phase) < np.pi, value, -np.inf), -value


def _simple(sigma: complex, depth: int, near: Complexes, steepness: float, roots: Complexes) -> tuple[Floats, Floats]:
    """The same of a simple horizon, together with the next real root beyond it."""
    nu = 2 * sigma / steepness
    beyond = [z.real for z in roots if abs(z.imag) < 1e-9 * abs(z) and z.real > 1]
    if not beyond:
        flat = np.full(near.shape, -nu.real * np.log(depth))
        return flat, np.full(near.shape, -np.inf)
    delta = min(beyond) - 1
    d = delta / near
    ratio = 4 * sigma * near / (steepness * depth * delta)
    root = d * np.sqrt(1 - ratio)
    first, second = ((depth * x - nu * np.log(1 + 2 * d / x)).real for x in (-d + root, -d - root))
    # From far enough the two roots are one irregular point; from near the first saddle is the horizon's own.
    valid = np.abs(np.angle(sigma) - np.pi - np.angle(near)) < np.pi
    merged = np.where(valid, np.maximum(first, second), -np.inf)
    apart = np.abs(ratio) < _APART
    return np.where(apart, first, merged), np.where(apart, second, np.minimum(first, second))


def choose(equation: Equation, sigma: complex, depth: int) -> Choice:
    """Contours for the mode at ``σ`` and the depth by the module's rule; ``equation`` over doubles."""
    k, s = _fan()
    rule = expected(equation, sigma, depth, k, s)
    tilt = -np.angle(k) - np.angle(s)
    main = _best(equation, k, s, rule.digits, rule.loses)
    if main is None:
        reason = f"no contour of the fan brings infinity and the horizon nearest for {_LEAST:g} digits at depth {depth}"
        return Choice(None, None, -np.inf, -np.inf, reason)
    # A hair less than the step, because angles of the fan are rounded.
    turned = np.where(np.abs(tilt - tilt[main]) >= 0.999 * TILT_STEP, rule.digits, -np.inf)
    second = _best(equation, k, s, turned, rule.loses)
    contours = [None if i is None else Contour(complex(k[i]), complex(s[i])) for i in (main, second)]
    reason = "" if second is not None else f"no second tilt brings infinity and the horizon nearest at depth {depth}"
    return Choice(*contours, float(rule.digits[main]), -np.inf if second is None else float(turned[second]), reason)


def _best(equation: Equation, k: Complexes, s: Complexes, digits: Floats, loses: Floats) -> int | None:
    """Index of the best contour that also keeps the roots of ``f`` on their side; ``None`` when there is none."""
    # A tenth of a digit decides nothing, so that rounding in this rule does not either.
    price = np.round(loses - _ARC_BONUS * (s == 1), 1)
    order = np.lexsort((np.arange(k.size), price, -np.round(np.minimum(digits, ENOUGH), 1)))
    for i in order:
        if not digits[i] > _LEAST:
            return None
        if not obstacle(equation, Contour(complex(k[i]), complex(s[i]))):
            return int(i)
    return None
