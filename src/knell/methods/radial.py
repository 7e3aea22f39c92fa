"""Direct integration: one mode of the original equation in the complex plane of the areal radius.

The outgoing tail series is summed far out on the ray ``arg r = π/2 - arg ω``, where the outgoing wave is
recessive, the ingoing series next to the horizon, and both are carried by Taylor steps to one matching
point. There ``D = f (Ψ_∞ Ψ_h' - Ψ_∞' Ψ_h)`` must vanish: the Wronskian in ``r*``, which does not depend on
the point or on the paths. These stay on the sheet of the real axis: outside ``|r| = r_h`` or, next to the
horizon, winding about no other root of ``f``. At a degenerate horizon the ingoing wave is recessive along
``arg (r - r_h) = arg ω - π/2``, where its path begins.

Nothing is taken from the regularised equation or its solvers. Any number of digits; the error is measured
by one more value of ``D`` on other paths, with other step lengths, another matching point and more bits.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

from flint import acb, ctx

from knell.methods.original import HorizonRoots, OriginalEquation, horizon_roots, original_equation
from knell.methods.radial_path import Geometry, PathError, Paths, Route, paths
from knell.methods.radial_series import Jet, RadialSeries
from knell.methods.recurrence import SeriesError
from knell.physics.background import PowerLaw

_GUARD_BITS = 24
_ITERATIONS = 16
_ATTEMPTS = 4
_FALL, _NOISY = 1e-3, 4
_FIRST = Route(tilt=0.0, stretch=1.3, entry=0.4, ratio=0.4, meeting=complex(-0.1, 0.5))
_SECOND = Route(tilt=-0.35, stretch=1.6, entry=0.29, ratio=0.31, meeting=complex(0.15, -0.25))
_SECOND_EXTRA_BITS = 32


@dataclass(frozen=True)
class RadialRun:
    """One frequency by direct integration.

    ``status`` is ``ok``, ``failed`` (no convergence, or the error is above ``10^-digits |Mω|``) or ``refused``
    (the roots of ``f`` do not allow the paths); ``reason`` says why. ``frequency`` is ``Mω`` as an exact
    complex number and ``error`` the measured absolute error; both are ``None`` where no value was reached.
    """

    status: str
    frequency: Any | None
    error: float | None
    reason: str = ""


@dataclass(frozen=True)
class _Setting:
    """One way of evaluating ``D``: roots, paths, and the bits each side works with, fixed during a secant iteration."""

    equation: OriginalEquation
    roots: HorizonRoots
    paths: Paths
    outer_bits: int
    inner_bits: int

    @classmethod
    def of(cls, equation: OriginalEquation, omega: complex, bits: int, route: Route) -> _Setting:
        """Raises `PathError` when the roots of ``f`` do not allow the paths."""
        geometry = Geometry.of(horizon_roots(equation, 64), equation.exponent)
        chosen = paths(geometry, omega, bits, route)
        inner_bits = bits + chosen.lost_bits
        return cls(equation, horizon_roots(equation, 2 * inner_bits), chosen, bits, inner_bits)

    def wronskian(self, omega: Any) -> Any:
        """``D(ω)``; raises `SeriesError` when a series does not reach the working precision."""
        inner, outer = self.paths.inner.knots, self.paths.outer.knots
        with ctx.workprec(self.inner_bits):
            series = RadialSeries(self.equation, self.roots, omega, self.inner_bits)
            points = [series.r_h + acb(knot).exp().mid() for knot in inner]
            near = _carry(series, points, series.horizon(acb(inner[0])))
            meeting = points[-1]
        with ctx.workprec(self.outer_bits):
            series = RadialSeries(self.equation, self.roots, omega, self.outer_bits)
            points = [acb(knot).exp().mid() for knot in outer[:-1]] + [meeting]
            far = _carry(series, points, series.infinity(acb(outer[0])))
            f = series.g(meeting) / meeting**self.equation.exponent
            return (f * (far.value * near.slope - far.slope * near.value)).mid()


def _carry(series: RadialSeries, points: list[Any], jet: Jet) -> Jet:
    for here, there in pairwise(points):
        jet = series.taylor(here, jet, there - here)
    return jet


def solve(background: PowerLaw, field: str, ell: int, seed: Any, digits: int = 25) -> RadialRun:
    """The mode next to ``seed`` (``Mω``, complex or acb), good to ``digits`` significant digits of ``|Mω|``.

    Raises `ValueError` for an unknown field or too low an ``ℓ``; everything numerical is in the status.
    """
    return solve_equation(original_equation(background, field, ell), seed, digits)


def solve_equation(equation: OriginalEquation, seed: Any, digits: int = 25) -> RadialRun:
    """`solve` for an `OriginalEquation` given as such."""
    extra = 0
    for _ in range(_ATTEMPTS):
        run, missing = _attempt(equation, acb(seed).mid(), digits, extra)
        if not missing:
            break
        extra += missing + 16
    return run


def _attempt(equation: OriginalEquation, seed: Any, digits: int, extra: int) -> tuple[RadialRun, int]:
    """One run, and by how many bits it missed the target (0: met, or more bits will not help)."""
    bits = math.ceil(digits * math.log2(10)) + _GUARD_BITS + extra
    try:
        first = _Setting.of(equation, complex(seed), bits, _FIRST)
        second = _Setting.of(equation, complex(seed), bits + _SECOND_EXTRA_BITS, _SECOND)
    except PathError as refusal:
        return RadialRun("refused", None, None, str(refusal)), 0
    try:
        omega, slope = _secant(first, seed, digits)
        if slope is None:
            return RadialRun("failed", None, None, f"no convergence in {_ITERATIONS} secant steps"), 0
        check = second.wronskian(omega)
    except SeriesError as stall:
        return RadialRun("failed", None, None, str(stall)), 64
    size = float(abs(omega))
    error = max(2 * float(abs(check / slope)), size * 2.0**-bits)
    if error <= size * 10.0**-digits:
        return RadialRun("ok", omega, error), 0
    reason = f"two paths differ by {error:.1e}, more than 1e-{digits} of the value"
    return RadialRun("failed", omega, error, reason), math.ceil(math.log2(error / size) + digits * math.log2(10))


def _secant(setting: _Setting, seed: Any, digits: int) -> tuple[Any, Any | None]:
    """The zero of ``D`` near ``seed`` and ``D'`` there (``None``: no convergence).

    It stops when the error left after the last step, of the order of the product of the last two steps, is negligible
    and ``D`` has fallen along with the steps. If it has not, its values are rounding noise, whose steep slopes make
    small steps as well, and `SeriesError` says so.
    """
    with ctx.workprec(setting.inner_bits):
        enough = 10.0 ** -(digits + 4)
        before, here = seed, (seed * (1 + acb(2**-40, 2**-41))).mid()
        value_before, value = setting.wronskian(before), setting.wronskian(here)
        small_steps = 0
        for _ in range(_ITERATIONS):
            if value == value_before:
                break
            slope = (value - value_before) / (here - before)
            step = value / slope
            product = float(abs(step)) * max(float(abs(here - before)), float(abs(step))) / float(abs(here)) ** 2
            if product < enough:
                if bool(abs(value) < abs(value_before) * _FALL):
                    return (here - step).mid(), slope
                small_steps += 1
                if small_steps == _NOISY:
                    raise SeriesError("the Wronskian is rounding noise at this precision")
            before, value_before, here = here, value, (here - step).mid()
            value = setting.wronskian(here)
        return here, None
