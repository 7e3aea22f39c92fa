"""Piecewise Chebyshev series against functions that are known in closed form."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import pairwise
from time import process_time

import numpy as np
import pytest
from flint import acb

from knell.methods.surrogate import DEGREE, NEAREST, NotResolved, Piece, Surrogate, fit

TOLERANCE = 1e-12
EXACT = np.finfo(float).eps


class Recorded:
    """A closed form, sampled as `fit` asks, that remembers where."""

    def __init__(self, function: Callable[[np.ndarray], np.ndarray]) -> None:
        self.function, self.asked = function, set[float]()

    def __call__(self, couplings: Sequence[float]) -> list[acb]:
        self.asked |= set(couplings)
        return [acb(complex(value)) for value in self.function(np.asarray(couplings))]


def smooth(x: np.ndarray) -> np.ndarray:
    return np.exp(-x) * (0.4 - 0.1j) + 0.02j * x**3


def near_pole(x: np.ndarray) -> np.ndarray:
    return 0.01 / (x - (0.62 + 0.05j))


def oscillating(x: np.ndarray) -> np.ndarray:
    """What an overtone does next to the extremal hole: ``exp(-c/s)`` with a phase that runs like ``1/s``."""
    s = np.sqrt(np.maximum(1 - x, 1e-300))
    return smooth(x) + np.exp((-1.9 + 6j) / s)


@pytest.mark.parametrize("function", [smooth, near_pole, oscillating])
def test_the_function_is_reproduced(function: Callable[[np.ndarray], np.ndarray]) -> None:
    surrogate = fit(Recorded(function), TOLERANCE)
    couplings = np.random.default_rng(1).uniform(0, 1, 4000)
    # Coefficients beyond the last fall on geometrically from at most the tolerance, by no less than 0.9 each.
    assert np.abs(surrogate(couplings) - function(couplings)).max() < 10 * TOLERANCE


def test_a_smooth_function_needs_one_piece_and_a_pole_several() -> None:
    assert len(fit(Recorded(smooth), TOLERANCE).pieces) == 1
    pieces = fit(Recorded(near_pole), TOLERANCE).pieces
    assert len(pieces) > 2
    shortest = min(pieces, key=lambda piece: piece.high - piece.low)
    assert shortest.low - 0.1 < 0.62 < shortest.high + 0.1


def test_pieces_meet() -> None:
    surrogate = fit(Recorded(oscillating), TOLERANCE)
    edges = [piece.high for piece in surrogate.pieces[:-1]]
    assert [piece.low for piece in surrogate.pieces[1:]] == edges
    assert len(edges) > 1
    below, at, above = (surrogate(np.nextafter(edges, side) if side else np.array(edges)) for side in (0, None, 1))
    # Both polynomials pass through the sample at the edge: the sum of 33 terms below one, each rounded once or twice.
    assert np.abs(np.stack([below, above]) - at).max() < 100 * EXACT


def test_no_node_but_the_extremal_hole_comes_nearer_than_allowed() -> None:
    sample = Recorded(oscillating)
    fit(sample, TOLERANCE)
    distances = sorted(np.sqrt(1 - np.array(sorted(sample.asked))))
    assert distances[0] == 0
    # A node at 1 - s² is rounded by one part in 1e16, which moves s by 5e-15 here.
    assert distances[1] > NEAREST * (1 - 1e-9)


def test_given_edges_are_kept() -> None:
    pieces = fit(Recorded(smooth), TOLERANCE, (0.0, 0.3, 0.9)).pieces
    assert [(piece.low, piece.high) for piece in pieces] == [(0.0, 0.3), (0.3, 0.9)]


def test_the_slope_is_the_derivative() -> None:
    surrogate = fit(Recorded(smooth), TOLERANCE)
    x = np.array([0.0, 0.2, 0.77, 1.0])
    expected = -np.exp(-x) * (0.4 - 0.1j) + 0.06j * x**2
    # Differentiating multiplies an error of the tolerance by at most degree², Markov's inequality.
    assert np.abs(surrogate.slope(x) - expected).max() < 2 * DEGREE**2 * TOLERANCE


def test_a_jump_is_refused_with_its_place() -> None:
    with pytest.raises(NotResolved, match=r"between couplings 0\.[34]\d* and 0\.[34]"):
        fit(Recorded(lambda x: np.where(x < 0.4, 0.4 - 0.1j, 0.3 - 0.1j)), TOLERANCE)


@pytest.mark.parametrize("outside", [-1e-9, 1 + 1e-9, np.nan, np.inf])
def test_nothing_is_extrapolated(outside: float) -> None:
    surrogate = fit(Recorded(smooth), TOLERANCE)
    with pytest.raises(ValueError, match="lies outside 0 … 1"):
        surrogate(np.array([0.5, outside]))
    with pytest.raises(ValueError, match="lies outside 0 … 1"):
        surrogate.slope(outside)


def test_shapes_are_kept() -> None:
    surrogate = fit(Recorded(near_pole), TOLERANCE)
    table = np.linspace(0, 1, 12).reshape(3, 4)
    assert surrogate(table).shape == (3, 4)
    assert surrogate(0.25).shape == ()
    assert surrogate(table)[1, 2] == surrogate(table[1, 2])
    assert surrogate(np.empty(0)).size == 0


def test_a_million_couplings_a_second() -> None:
    """Ten pieces of the full degree, couplings in no order; the best of five, in processor time."""
    edges = np.linspace(0, 1, 11)
    series = tuple(complex(1 / (k + 1) ** 2, -0.1) for k in range(DEGREE + 1))
    surrogate = Surrogate(tuple(Piece(a, b, series) for a, b in pairwise(edges)))
    couplings = np.random.default_rng(2).uniform(0, 1, 1_000_000)
    seconds = []
    for _ in range(5):
        begin = process_time()
        surrogate(couplings)
        seconds.append(process_time() - begin)
    assert min(seconds) < 1
