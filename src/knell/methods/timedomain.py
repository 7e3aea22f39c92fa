"""Time domain: characteristic evolution of the original equation in ``(t, r*)``.

With ``u = t - r*``, ``v = t + r*`` the equation is ``∂_u ∂_v Ψ = -V Ψ/4``. Integrated over a cell of the double-null
lattice, a diamond with corners N (later), S (earlier), E and W at distance ``h`` from its centre C, it reads

    Ψ_N = (1 - h² V_C/2) (Ψ_E + Ψ_W) - Ψ_S + O(h⁴)

(C. Gundlach, R. Price, J. Pullin, Phys. Rev. D 49, 883, 1994). The step is stable for ``h² V < 4``: a plane wave has
``cos ωh = (1 - h²V/2) cos kh``. (The fourth-order rule that also uses ``Ψ_C`` is not: it amplifies ``kh = π`` like
``exp(t √(V/3))``.) The scheme is symmetric in time, so its error is a series in ``h²`` and step sizes ``h, h/2, h/4``
extrapolate to sixth order.

The lattice is cut along constant ``t``, one array operation a step, and holds the whole past of the observer, so that
it needs no boundary. Initial data: ``Ψ = 0``, ``∂_t Ψ`` a Gaussian (static data ring as well, but their tail falls
faster by one power of ``t``).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from knell.methods.original import OriginalEquation
from knell.methods.tortoise import Tortoise

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Pulse:
    """Initial ``∂_t Ψ = exp(-(r* - centre)²/(2 width²))`` and the observer, ``r*`` in M from the peak of ``V``."""

    centre: float
    width: float
    observer: float


@dataclass(frozen=True)
class Signal:
    """``Ψ(t)`` at the observer: ``values`` at ``t = 0, interval, 2 interval, …`` (in M) and the ``error`` of each.

    The error, an absolute one, is the change that the finest lattice made to the extrapolated value.
    """

    interval: float
    values: Array
    error: Array

    @property
    def times(self) -> Array:
        """``t`` of each value, in M."""
        return self.interval * np.arange(self.values.size)


def evolve(equation: OriginalEquation, pulse: Pulse, duration: float, step: float) -> Signal:
    """The signal until ``t = duration``, extrapolated from lattices of spacing ``step``, ``step/2`` and ``step/4``.

    Its values are ``2 step`` apart. Raises `ValueError` when the step is too long for the potential to be stable.
    """
    coarse, middle, fine = (march(equation, pulse, duration, step / k)[::k] for k in (1, 2, 4))
    once, again = (4 * middle - coarse) / 3, (4 * fine - middle) / 3
    return Signal(2 * step, (16 * again - once) / 15, np.abs(again - once))


def march(equation: OriginalEquation, pulse: Pulse, duration: float, step: float) -> Array:
    """``Ψ`` at the observer at ``t = 0, 2 step, 4 step, …`` on one lattice, second order in ``step``."""
    count = 2 * int(duration / (2 * step) + 1e-9)
    r_star = pulse.observer + step * np.arange(-count, count + 1)
    potential = potential_on(equation, r_star + potential_peak(equation)[0])
    if step**2 * np.max(potential) >= 4:
        raise ValueError(f"step {step} M: too long for a potential of {np.max(potential):.3g}/M² (unstable)")
    rate = np.exp(-(((r_star - pulse.centre) / pulse.width) ** 2) / 2)
    # Ψ is odd in t, so what Ψ(h) = h Ψ_t leaves out is one more series in h²
    factor = 1 - step**2 * potential / 2
    parity = factor[0::2].copy(), factor[1::2].copy()
    before, now = np.zeros(count + 1), step * rate[1::2]
    values = np.zeros(count // 2 + 1)
    for k in range(2, count + 1):
        trim = k // 2
        weights = parity[k % 2]
        later = now[1:] + now[:-1]
        later *= weights[trim : weights.size - trim]
        later -= before[1:-1]
        before, now = now, later
        if k % 2 == 0:
            values[k // 2] = now[now.size // 2]
    return values


def potential_on(equation: OriginalEquation, r_star: Array) -> Array:
    """``V`` on a grid of ``r*``, in units of ``1/M²``; the zero of ``r*`` is that of `Tortoise`."""
    tortoise = Tortoise.of(equation)
    return _potential(equation, tortoise, tortoise.log_x(r_star))


def potential_peak(equation: OriginalEquation) -> tuple[float, float]:
    """``r*`` and ``V`` of the highest point of the potential, to the accuracy of a grid: they only place the pulse."""
    tortoise = Tortoise.of(equation)
    log_x = np.linspace(np.log(1e-3), np.log(20.0), 1001)
    potential = _potential(equation, tortoise, log_x)
    highest = int(np.argmax(potential))
    return float(tortoise.r_star(log_x)[highest]), float(potential[highest])


def _potential(equation: OriginalEquation, tortoise: Tortoise, log_x: Array) -> Array:
    return tortoise.f(log_x) * equation.potential_over_f(tortoise.horizon + np.exp(log_x))
