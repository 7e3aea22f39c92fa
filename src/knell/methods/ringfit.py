"""The ringing in a time-domain signal: frequencies by the matrix pencil, with an error from windows and step sizes.

A sum of damped exponentials ``Σ c_j z_j^k`` makes the Hankel matrix of its samples have a shift-invariant row space;
the ``z_j = exp(-iω_j Δt)`` are the eigenvalues of the shift on its leading singular vectors (Y. Hua and T. Sarkar, IEEE
Trans. Acoust. Speech Signal Process. 38, 814, 1990). No eigenvalue condition of the wave equation enters.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product
from math import sqrt

import numpy as np
from numpy.typing import NDArray

from knell.methods.original import OriginalEquation, original_equation
from knell.methods.timedomain import Pulse, Signal, evolve, potential_peak
from knell.physics.background import PowerLaw

# The fit is made for all combinations of these. Starts (after the arrival of the ringing) are in M: they answer
# to the damping, which hardly depends on ℓ, as do the distances of pulse and observer from the peak of V.
# The width of the pulse, the step and the sampling interval answer to the frequency and are in units of 1/√V_max.
_STARTS = (15.0, 20.0, 25.0)
_SAMPLES = (36, 48)
_ORDERS = (8, 9, 10)
_SOURCE, _OBSERVER = 3.0, 18.0
_WIDTH, _STEP, _SAMPLING = 0.6, 0.04, 0.9
_LONGEST_WIDTH, _LONGEST_INTERVAL = 1.5, 1.3
_OVERTONE_LIMIT = 0.02

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Estimate:
    """A frequency ``Mω`` and an absolute error."""

    value: complex
    error: float


@dataclass(frozen=True)
class Ringing:
    """What the signal says.

    ``fundamental``, and ``overtone`` where its error stays below 2 % (else ``None``). The error of each is the largest
    deviation from the median over all windows and orders, plus the change of the median when the finest lattice is
    left out.
    ``signal`` is the finer one, ``start`` the time from which it was fitted.
    """

    fundamental: Estimate
    overtone: Estimate | None
    signal: Signal
    start: float


def ringing(background: PowerLaw, field: str, ell: int) -> Ringing:
    """Fundamental and first overtone of a background, field and ``ℓ`` from its signal, in units of M.

    Raises `ValueError` for an unknown field or too low an ``ℓ``, `ArithmeticError` when no window rings.
    """
    return ringing_of(original_equation(background, field, ell))


def ringing_of(equation: OriginalEquation) -> Ringing:
    """`ringing` for an `OriginalEquation` given as such."""
    scale = 1 / sqrt(potential_peak(equation)[1])
    pulse = Pulse(_SOURCE, min(_WIDTH * scale, _LONGEST_WIDTH), _OBSERVER)
    flight = _SOURCE + _OBSERVER
    interval = min(_SAMPLING * scale, _LONGEST_INTERVAL)
    duration = flight + max(_STARTS) + (max(_SAMPLES) + 1) * interval
    signal = evolve(equation, pulse, duration, _STEP * scale)
    stride = round(interval / signal.interval)
    precise, rough = (
        _ensemble(values, signal.interval, flight, stride) for values in (signal.values, signal.values - signal.error)
    )
    fundamental = _estimate(precise[0], rough[0])
    overtone = _estimate(precise[1], rough[1])
    clear = overtone.error < _OVERTONE_LIMIT * abs(overtone.value)  # false for NaN
    return Ringing(fundamental, overtone if clear else None, signal, flight + min(_STARTS))


def _estimate(precise: Array, rough: Array) -> Estimate:
    value = _median(precise)
    return Estimate(value, float(np.max(np.abs(precise - value))) + abs(value - _median(rough)))


def _median(values: Array) -> complex:
    return complex(np.median(values.real), np.median(values.imag))


def _ensemble(values: Array, step: float, flight: float, stride: int) -> Array:
    """Fundamentals and overtones, an array of shape (2, windows x orders)."""
    found = []
    for start, samples, order in product(_STARTS, _SAMPLES, _ORDERS):
        first = round((flight + start) / step)
        found.append(two_loudest(values[first : first + samples * stride : stride], stride * step, order))
    return np.array(found).T


def two_loudest(samples: Array, interval: float, order: int) -> tuple[complex, complex]:
    """The oscillating frequency of largest amplitude at the first sample, and the loudest of the more damped ones.

    The second is NaN where there is none. Raises `ArithmeticError` when nothing oscillates.
    """
    by_loudness = _by_loudness(samples, interval, order)
    if not by_loudness.size:
        raise ArithmeticError("the signal does not ring in the window")
    loudest = complex(by_loudness[0])
    return loudest, next((complex(omega) for omega in by_loudness if omega.imag < loudest.imag), complex("nan"))


def _by_loudness(samples: Array, interval: float, order: int) -> NDArray[np.complex128]:
    """The frequencies of the samples with ``Re ω > 0``, by falling amplitude."""
    omega = matrix_pencil(samples, interval, order)
    waves = np.exp(-1j * interval * np.outer(np.arange(samples.size), omega))
    amplitudes = np.linalg.lstsq(waves, samples.astype(complex), rcond=None)[0]
    ordered = omega[np.argsort(-np.abs(amplitudes))]
    return ordered[ordered.real > 1e-3 / interval]


def matrix_pencil(samples: Array, interval: float, order: int) -> NDArray[np.complex128]:
    """The ``order`` complex ``ω_j`` in ``Σ c_j exp(-iω_j t)``, ``t = 0, interval, …``, nearest to the samples."""
    half = samples.size // 2
    hankel = np.lib.stride_tricks.sliding_window_view(samples, half + 1)
    basis = np.linalg.svd(hankel, full_matrices=False)[2][:order].T
    shift = np.linalg.lstsq(basis[:-1], basis[1:], rcond=None)[0]
    return 1j * np.log(np.linalg.eigvals(shift).astype(complex)) / interval
