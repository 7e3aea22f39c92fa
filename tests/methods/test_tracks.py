"""Tracks along q: the crossings of the axis, the checks of the whole window, and what may not happen."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from knell.methods.continuation import Track, TrackLost, follow, separation
from knell.methods.match.search import search
from knell.methods.tracks import Family, crossings, trace
from knell.physics.background import PowerLaw
from knell.physics.landmarks import window

FAMILY = Family(4, "axial", 2)
# κ of the crossings of the near-axis mode nearest the origin, n = 4, axial ℓ = 2: five digits are quoted, found
# before by other means; 343/432 is exact (q = 1/7), where 2|Im ω|/f'(r_h) is 4.
PAIR = ((0.78645, 4.0721), (343 / 432, 4.0))


def test_a_near_axis_mode_crosses_the_axis_in_a_pair() -> None:
    nodes = [FAMILY.q(Fraction(78, 100)), FAMILY.q(Fraction(80, 100))]
    found = search(FAMILY.equation(nodes[0]), window(PowerLaw(4, Fraction(78, 100)), 2))
    start = found.zeros[np.argmin(np.abs(found.zeros + 0.7j) + 10 * (np.abs(found.zeros.real) > 0.01))]
    (track,) = follow(FAMILY.equation, nodes, np.asarray([start]))
    met = crossings(FAMILY, track)
    assert len(met) == 2
    for crossing, (coupling, order) in zip(met, PAIR, strict=True):
        # Half a unit of the fifth digit; Re ω is known to 1e-12 and changes by 1e-3 a unit of κ.
        assert abs(FAMILY.coupling(crossing.q) - coupling) < 6e-6
        assert abs(crossing.order - order) < 6e-5


def test_following_back_leads_to_where_it_started() -> None:
    nodes = [0.0, FAMILY.q(Fraction(1, 4))]
    zeros = search(FAMILY.equation(0.0), window(PowerLaw(4, Fraction(0)), 2, Fraction(1))).zeros
    there = follow(FAMILY.equation, nodes, zeros)
    back = follow(FAMILY.equation, nodes[::-1], np.asarray([track.omega[-1] for track in there]))
    # Newton stops at steps of 1e-10 and converges quadratically.
    assert np.allclose([track.omega[-1] for track in back], zeros, rtol=0, atol=1e-9)
    assert np.min(separation(np.asarray([track.omega[-1] for track in there]))) > 0.1


def test_a_track_that_leaves_says_why() -> None:
    nodes = [0.0, FAMILY.q(Fraction(1, 10)), FAMILY.q(Fraction(1, 4))]
    zeros = search(FAMILY.equation(0.0), window(PowerLaw(4, Fraction(0)), 2, Fraction(1, 2))).zeros
    tracks = follow(FAMILY.equation, nodes, zeros, lambda omega: "slow" if omega.imag > -0.0885 else "")
    assert [track.ended for track in tracks] == ["slow", "", ""]
    assert tracks[0].q[-1] < nodes[-1] == tracks[1].q[-1]


def test_extrapolation_is_exact_for_cubics() -> None:
    q = [0.0, 0.1, 0.25, 0.4]
    track = Track(q, [complex(1 + 2 * x - x**3, x**2) for x in q])
    assert abs(track.predict(0.7) - complex(1 + 1.4 - 0.343, 0.49)) < 1e-14


def test_two_tracks_on_one_zero_are_refused() -> None:
    zeros = search(FAMILY.equation(0.0), window(PowerLaw(4, Fraction(0)), 2, Fraction(1, 2))).zeros
    with pytest.raises(TrackLost):
        follow(FAMILY.equation, [0.0, 0.01], np.asarray([zeros[0], zeros[0]]))


@pytest.mark.slow
def test_every_mode_of_the_window_lies_on_one_track() -> None:
    tracks = trace(4, "axial", 2, Fraction(3, 2))
    assert len(tracks.checks) >= 8
    assert all(check.found == check.counted == check.on_track for check in tracks.checks)
    # Overtones 0 to 6 reach the extremal hole; 7 goes beside the axis, to the near-axis mode nearest the origin.
    end = 1 / 3
    assert [track.q[-1] == end for track in tracks.principal[:8]] == [True] * 7 + [False]
    assert abs(tracks.principal[7].omega[-1].real) < 1e-6
    met = [FAMILY.coupling(crossing.q) for crossing in crossings(FAMILY, tracks.principal[7])]
    for coupling in (0.69135, 0.70199, 0.78645, 343 / 432):
        assert min(abs(coupling - k) for k in met) < 1e-5
