"""Proposals of zeros from Taylor models of tiles: slower than the search in doubles, but of any precision.

Nothing here is proven or needs to be: a certificate counts, and encloses what is proposed.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from knell.methods.enclosure.count import Pace, cleared_of, longest
from knell.methods.enclosure.effort import mass, prepare
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import Refusal
from knell.methods.enclosure.region import Region
from knell.methods.enclosure.taylor import exact_point

_SMALLEST = 0.01


def proposals(problem: Problem, region: Region) -> list[complex]:
    """Zeros ``Mω`` of the models of tiles that cover the region, to double precision, without repetition."""
    pace, found = Pace(12.0), []
    x, y, d = float(region.re_max), float(region.depth), float(region.past)
    sign = 1 if region.growing else -1
    for omega in _tile(problem, complex((x - d) / 2, sign * y / 2), (x + d) / 2, y / 2, float(region.excluded), pace):
        inside = -d < omega.real < x and 0 < sign * omega.imag < y
        if inside and all(abs(omega - other) > 1e-7 for other in found):
            found.append(omega)
    return sorted(found, key=lambda w: (-w.imag, w.real))


def _tile(
    problem: Problem, centre: complex, half_re: float, half_im: float, excluded: float, pace: Pace
) -> Iterator[complex]:
    if abs(centre.real) + half_re <= excluded and abs(centre.imag) + half_im <= excluded:
        return
    scale = mass(problem)
    sigma, radius = 1j * centre / scale, 1.05 * abs(complex(half_re, half_im)) / scale
    if radius <= longest(problem, sigma):
        try:
            run = prepare(problem, exact_point(sigma), radius, pace.effort(), cleared_of(problem, sigma, radius))
            found, _ = run.evaluate(problem)
            pace.learn(found, [found.value(exact_point(t)) for t in (0.5, 0.5j, -0.5, -0.5j)])
            for tau in _roots([complex(c) for c in found.value.coeffs()]):
                omega = centre + tau * radius * scale / 1j
                if abs((omega - centre).real) < 1.05 * half_re and abs((omega - centre).imag) < 1.05 * half_im:
                    yield omega
            return
        except Refusal:
            pass
    if max(half_re, half_im) < _SMALLEST:
        return
    if half_re >= half_im:
        for side in (-0.5, 0.5):
            yield from _tile(problem, centre + side * half_re, half_re / 2, half_im, excluded, pace)
    else:
        for side in (-0.5, 0.5):
            yield from _tile(problem, centre + 1j * side * half_im, half_re, half_im / 2, excluded, pace)


def _roots(coefficients: list[complex]) -> list[complex]:
    """Roots of the model in its disc, by the companion matrix."""
    largest = max(abs(c) for c in coefficients)
    scaled = np.array(coefficients[::-1]) / largest if largest else np.array([])
    return [complex(z) for z in np.roots(scaled) if abs(z) < 1]
