"""Curves sampled from the solvers: labels, values, and what happens where a mode cannot be followed."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from knell.methods import surrogate_sampling
from knell.methods.continuation import Track
from knell.methods.match.digits import refine
from knell.methods.surrogate import Piece, Surrogate, fit
from knell.methods.surrogate_sampling import NotSampled, Sampler, measured_error, solve, trail
from knell.methods.tracks import Family
from knell.physics.background import PowerLaw

FAMILY = Family(4, "axial", 2)
# E. W. Leaver, Proc. R. Soc. A 402, 285 (1985), table 1, halved; values quoted from memory, recomputed.
LEAVER = (0.3736715 - 0.0889625j, 0.346711 - 0.273915j, 0.3010515 - 0.478277j)


@pytest.fixture(scope="module")
def tracks() -> list[Track]:
    return trail(FAMILY, [0, 2])


def test_a_trail_starts_at_its_overtone_and_reaches_the_end(tracks: list[Track]) -> None:
    starts = np.array([track.omega[0] for track in tracks])
    # Six printed decimals of 2Mω.
    assert np.abs(starts - np.array([LEAVER[0], LEAVER[2]])).max() < 3e-6
    assert [track.ended for track in tracks] == ["", ""]
    assert all(track.q[-1] == FAMILY.q(Fraction(995, 1000)) for track in tracks)


def test_samples_are_the_match(tracks: list[Track]) -> None:
    """Spectral values where the sampler uses the spectral method, and at the extremal hole."""
    sampler = Sampler(FAMILY, tracks[1])
    for coupling, value in zip((0.25, 1.0), sampler([0.25, 1.0]), strict=True):
        run = refine(PowerLaw(4, Fraction(coupling)), "axial", 2, complex(value), 20)
        assert run.status == "ok"
        # Both solvers are asked for more digits than a double holds.
        assert abs(complex(run.frequency) - complex(value)) < 2 * np.finfo(float).eps
    assert sampler.samples == 2


def test_a_coupling_is_solved_once(tracks: list[Track], monkeypatch: pytest.MonkeyPatch) -> None:
    sampler = Sampler(FAMILY, tracks[0])
    first = sampler([0.5])
    monkeypatch.setattr(surrogate_sampling, "solve", lambda *_: pytest.fail("solved again"))
    assert sampler([0.5, 0.5]) == [first[0], first[0]]


def test_there_is_no_square_root_edge(tracks: list[Track]) -> None:
    """Next to the extremal hole ``Mω`` is linear in ``1-κ``: with an edge the slopes would differ by a factor of 2."""
    at_end = complex(Sampler(FAMILY, tracks[0])([1.0])[0])
    shares = (Fraction(1, 1024), Fraction(1, 4096))
    slopes = [(complex(solve(FAMILY, 1 - share, at_end)) - at_end) / float(share) for share in shares]
    # The next term is about as large times 1-κ.
    assert abs(slopes[0] / slopes[1] - 1) < 4 / 1024


def test_a_track_that_leaves_the_modes_ends_the_curve(tracks: list[Track]) -> None:
    cut = Track(tracks[0].q[:8], tracks[0].omega[:8], ended=surrogate_sampling.BEHIND)
    sampler = Sampler(FAMILY, cut)
    assert sampler.end == FAMILY.coupling(cut.q[6])
    assert sampler.ended == surrogate_sampling.BEHIND
    surrogate = fit(sampler, 1e-9, (0.0, sampler.end))
    assert surrogate.high == sampler.end
    with pytest.raises(ValueError, match="lies outside"):
        surrogate(sampler.end + 1e-6)


def test_another_mode_is_not_taken_for_the_overtone(tracks: list[Track]) -> None:
    """A trail that points between modes: the solvers refuse or land elsewhere, and the sampler says so."""
    wrong = Track(list(tracks[0].q), [omega + 0.004 for omega in tracks[0].omega])
    with pytest.raises(NotSampled, match=r"coupling 0\.3"):
        Sampler(FAMILY, wrong)([0.3])


def test_the_error_is_what_the_match_says(tracks: list[Track]) -> None:
    """A surrogate that is off by 1e-7 is found out."""
    surrogate = fit(Sampler(FAMILY, tracks[0]), 1e-10, (0.0, 0.5))
    couplings = [Fraction(1, 7), Fraction(3, 7)]
    assert measured_error(FAMILY, surrogate, couplings) < 1e-9
    off = Surrogate(
        tuple(Piece(x.low, x.high, (x.coefficients[0] + 1e-7, *x.coefficients[1:])) for x in surrogate.pieces)
    )
    assert measured_error(FAMILY, off, couplings) == pytest.approx(1e-7, rel=0.01)


def test_an_overtone_deeper_than_any_search_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(surrogate_sampling, "_DEPTHS", (Fraction(1, 2),))
    with pytest.raises(NotSampled, match=r"overtone 9 lies deeper than 0\.5"):
        trail(FAMILY, [0, 9])
