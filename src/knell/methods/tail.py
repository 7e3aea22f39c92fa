"""The late-time tail of a time-domain signal and its local exponent ``-d ln|Ψ|/d ln t`` at fixed radius.

After the ringing the signal falls like ``t^-(2ℓ+3)`` (R. Price, Phys. Rev. D 5, 2419, 1972), whatever the short-range
part of the potential (E. Ching et al., gr-qc/9507035), and it comes to that slowly: ``ℓ = 0`` shows 3.016 at 1000 M, so
a value means nothing without its time and error.

A degenerate horizon has a tail of its own. There ``V → ℓ'(ℓ'+1)/r*²`` with ``ℓ'(ℓ'+1) = U(r_h)/F₀`` (``f = F₀x² + …``),
and an inverse square that is not of a whole ``ℓ'`` scatters waves back by itself: ``t^-(2ℓ'+2)``, which in the end
outlasts Price's tail. Axial ``ℓ = 2``, ``n = 6``: ``ℓ' = 0.758``, exponent 3.517. Near the extremal end it shows until
the time ``1/κ_s``.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from knell.methods.original import OriginalEquation, original_equation
from knell.methods.timedomain import Pulse, Signal, evolve
from knell.physics.background import PowerLaw

# A wide pulse allows long steps. For ℓ >= 1 the tail sinks below the rounding of doubles before 1000 M.
_PULSE = Pulse(centre=4.0, width=4.0, observer=8.0)
_STEP = 0.8
_TIME, _EARLIER_TIME = 1000.0, 500.0
_HALF_WIDTH = 0.1


@dataclass(frozen=True)
class Tail:
    """The local ``exponent`` at ``time`` (M) with its absolute ``error``, and the ``signal`` it was read from."""

    time: float
    exponent: float
    error: float
    signal: Signal


def tail(background: PowerLaw, field: str, ell: int) -> Tail:
    """The local exponent at 1000 M for ``ℓ = 0``, at 500 M for larger ``ℓ``.

    Doubles carry it for ``ℓ <= 2``; beyond, the error is of the order of the exponent and says so.
    Raises `ValueError` for an unknown field or too low an ``ℓ``.
    """
    return tail_of(original_equation(background, field, ell), _TIME if ell == 0 else _EARLIER_TIME)


def tail_of(equation: OriginalEquation, time: float) -> Tail:
    """`tail` for an `OriginalEquation` and a time."""
    signal = evolve(equation, _PULSE, time * (1 + _HALF_WIDTH) + 2 * _STEP, _STEP)
    exponent, error = local_exponent(signal, time)
    return Tail(time, exponent, error, signal)


def local_exponent(signal: Signal, time: float) -> tuple[float, float]:
    """``-d ln|Ψ|/d ln t`` by a straight line through the logarithms within 10 % of ``time``, and its error.

    The error is what the errors of the values can make of it, all conspiring, plus the scatter about the line.
    """
    times = signal.times
    near = np.abs(times - time) <= _HALF_WIDTH * time
    log_t, log_size = np.log(times[near]), np.log(np.abs(signal.values[near]))
    centred = log_t - log_t.mean()
    weights = centred / np.sum(centred**2)
    slope = float(weights @ log_size)
    residual = log_size - log_size.mean() - slope * centred
    scatter = np.sqrt(np.mean(residual**2) / np.sum(centred**2))
    return -slope, float(np.abs(weights) @ (signal.error[near] / np.abs(signal.values[near])) + 2 * scatter)
