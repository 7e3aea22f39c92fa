"""Zeros of ``D`` followed along a parameter of the background, all together.

The parameter is one in which the background is smooth up to the extremal end: ``q`` for the power
law, never ``κ``. D is analytic across the negative imaginary axis, so a track does not end there: it
goes on to the continued sheet, where it is no mode, and may come back.

Every step predicts each zero by extrapolation and corrects it by Newton. It is accepted only when no
zero moved from its prediction by more than a small length and by more than a fraction of the distance
to the next one; else the step is halved. So no two tracks come to lie on one zero, and a close pass of
two zeros shortens the steps instead of exchanging them.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from knell.methods.match.geometry import MAIN_ROUTE, MatchRoute
from knell.methods.match.solutions import Matcher
from knell.physics.equation import Equation

Complexes = NDArray[np.complex128]

_OFFSET = 1e-5
_CONVERGED = 1e-10
_NEWTON_ROUNDS = 6
# A corrected zero may lie this far (in Mω) from its prediction, and this part of the way to its neighbour.
_SURPRISE = 2e-3
_NEIGHBOURLY = 0.1
_SHORTEST = 1e-7
_POINTS = 4


class TrackLost(ArithmeticError):
    """A step could not be made short enough: two zeros meet, or doubles do not resolve D."""


@dataclass
class Track:
    """One zero along the parameter: nodes ``q`` and ``omega`` (Mω), in the order they were made.

    ``began`` and ``ended`` say why the track starts or stops where it does; empty when it reached the
    end asked for.
    """

    q: list[float] = field(default_factory=list)
    omega: list[complex] = field(default_factory=list)
    ended: str = ""
    began: str = ""

    def predict(self, q: float) -> complex:
        """Extrapolation through the last few nodes."""
        nodes = np.asarray(self.q[-_POINTS:])
        values = np.asarray(self.omega[-_POINTS:])
        weights = [np.prod((q - np.delete(nodes, i)) / (nodes[i] - np.delete(nodes, i))) for i in range(len(nodes))]
        return complex(np.dot(weights, values))


def newton(matcher: Matcher, omega: Complexes, rounds: int = _NEWTON_ROUNDS) -> tuple[Complexes, NDArray[np.float64]]:
    """Zeros next to ``omega`` (Mω) by Newton with central differences, and the size of the last step."""
    to_sigma = 1j / float(matcher.equation.mass)
    size = np.full(omega.shape, np.inf)
    for _ in range(rounds):
        points = np.concatenate([omega, omega + _OFFSET, omega - _OFFSET])
        middle, right, left = np.split(matcher.wronskian(points * to_sigma, np.tile(omega, 3) * to_sigma), 3)
        step = middle * 2 * _OFFSET / (right - left)
        omega, size = omega - step, np.abs(step)
        if np.max(size) < _CONVERGED:
            break
    return omega, size


def separation(omega: Complexes, others: Complexes | None = None) -> NDArray[np.float64]:
    """Distance of each zero to the nearest other one (of ``omega`` itself, and of ``others``)."""
    gaps = np.abs(omega[:, None] - omega[None, :]) + np.where(np.eye(len(omega), dtype=bool), np.inf, 0.0)
    nearest = np.min(gaps, axis=1, initial=np.inf)
    if others is not None and len(others):
        nearest = np.minimum(nearest, np.min(np.abs(omega[:, None] - others[None, :]), axis=1))
    return nearest


def follow(
    equation_at: Callable[[float], Equation],
    nodes: Sequence[float],
    zeros: Complexes,
    leaves: Callable[[complex], str] = lambda omega: "",
    route: MatchRoute = MAIN_ROUTE,
) -> list[Track]:
    """Follow ``zeros`` of the background ``nodes[0]`` through all ``nodes`` (monotone), one track each.

    ``equation_at(q)`` gives the equation over doubles. A track for which ``leaves(ω)`` gives a
    reason ends there with it. The nodes are all hit exactly. Raises `TrackLost` with the place when
    the steps become too short.
    """
    start = float(nodes[0])
    tracks = [Track([start], [complex(z)]) for z in zeros]
    step = (nodes[-1] - start) / 200
    q = start
    for node in nodes[1:]:
        while q != node:
            active = [track for track in tracks if not track.ended]
            if not active:
                return tracks
            target = node if abs(node - q) <= 1.01 * abs(step) else q + step
            corrected, worst = _attempt(equation_at, active, target, route)
            if corrected is None:
                step /= 2
                if abs(step) < _SHORTEST:
                    raise TrackLost(f"at parameter {q:.8f}: {worst}")
                continue
            for track, omega in zip(active, corrected, strict=True):
                track.q.append(target)
                track.omega.append(complex(omega))
                track.ended = leaves(complex(omega))
            q = target
            step *= 1.5 if float(worst) < 0.2 else 1.0
    return tracks


def _attempt(
    equation_at: Callable[[float], Equation], tracks: list[Track], q: float, route: MatchRoute
) -> tuple[Complexes | None, str | float]:
    """Corrected zeros at ``q`` and the largest surprise in units of the allowed one, or None and the reason."""
    predicted = np.asarray([track.predict(q) for track in tracks])
    matcher = Matcher(equation_at(q), route)
    corrected, size = newton(matcher, predicted)
    if not np.all(size < 1e-6):
        return None, "Newton does not converge"
    surprise = np.abs(corrected - predicted)
    allowed = np.minimum(_SURPRISE, _NEIGHBOURLY * separation(corrected))
    if not np.min(allowed) > 0:
        return None, "two tracks on one zero"
    ratio = float(np.max(surprise / allowed))
    return (corrected, ratio) if ratio <= 1 else (None, f"zeros near {corrected[np.argmax(surprise / allowed)]:.6f}")
