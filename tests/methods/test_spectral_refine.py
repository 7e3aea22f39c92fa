"""Modes refined to many digits: against published values, other paths, other resolutions, and where it must fail."""

from dataclasses import replace
from fractions import Fraction

import pytest
from flint import acb, ctx

from knell.methods import spectral_refine
from knell.methods.spectral import persistent_roots
from knell.methods.spectral_path import OTHER_TILT
from knell.methods.spectral_refine import NotConverged, SpectralProblem, refine, working_bits
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_balls, equation_floats

SCHWARZSCHILD = PowerLaw(2, Fraction(0))


def distance(one, other):
    with ctx.workprec(400):
        return float(abs(one - other).mid())


@pytest.mark.parametrize(
    ("ell", "quoted"),
    [
        (2, 0.747343 - 0.177925j),
        (2, 0.415029 - 1.893690j),
        (2, 0.126527 - 4.605289j),
        (2, 0.165196 - 5.630885j),
        (3, 1.198887 - 0.185406j),
        (3, 0.578768 - 5.299159j),
    ],
)
def test_schwarzschild_axial_modes_of_leaver(ell, quoted):
    # E. W. Leaver, Proc. R. Soc. A 402, 285 (1985), table 1, 2Mω; quoted from memory, recomputed, ±1e-6
    run = refine(SpectralProblem.of(SCHWARZSCHILD, "axial", ell), quoted / 2)
    assert run.status == "ok"
    difference = 2 * complex(run.frequency) - quoted
    assert max(abs(difference.real), abs(difference.imag)) < 1.5e-6


@pytest.mark.parametrize(
    ("ell", "quoted"),
    [
        (0, 0.13346 - 0.095844j),
        (0, 0.075081 - 0.58833j),
        (1, 0.34818 - 0.27614j),
        (2, 0.62657 - 0.088748j),
    ],
)
def test_extremal_scalar_modes_of_onozawa(ell, quoted):
    # H. Onozawa et al., Phys. Rev. D 53, 7033 (1996), extremal n = 2; quoted from memory, recomputed
    run = refine(SpectralProblem.of(PowerLaw(2, Fraction(1)), "scalar", ell), quoted)
    assert run.status == "ok"
    assert abs(complex(run.frequency) - quoted) < 1e-5


@pytest.mark.parametrize(
    ("q", "quoted"),
    [((22, "19/420"), 0.3723659152 - 0.0893868321j), ((28, "1/60"), 0.3729433070 - 0.0895169038j)],
)
def test_steep_backgrounds_whose_roots_crowd_round_the_horizon(q, quoted):
    # ten decimals of an earlier computation with unrelated methods
    background = PowerLaw.from_q(q[0], Fraction(q[1]))
    run = refine(SpectralProblem.of(background, "axial", 2), quoted)
    assert run.status == "ok"
    assert abs(complex(run.frequency) - quoted) < 1e-10


@pytest.mark.parametrize(
    ("exponent", "coupling", "field", "ell"),
    [(3, "3/4", "axial", 2), (6, "9/10", "axial", 3), (4, "1", "axial", 2), (4, "9/10", "electromagnetic", 1)],
)
def test_tilts_and_doubles_agree_with_the_refined_modes(exponent, coupling, field, ell):
    background = PowerLaw(exponent, Fraction(coupling))
    plain = equation_floats(background, field, ell)
    problem, tilted = (SpectralProblem.of(background, field, ell, tilt=t) for t in (1.25, OTHER_TILT))
    found = [root for root in persistent_roots(plain) if root.digits > 10 and root.sigma.imag > 1e-6]
    assert len(found) >= 4
    for root in found:
        seed = -1j * root.sigma * plain.mass
        # the seed is moved, so that agreement with the doubles is not inherited
        run, other = refine(problem, seed * (1 + 1e-6)), refine(tilted, seed * (1 - 1e-6j))
        assert (run.status, other.status) == ("ok", "ok")
        assert distance(run.frequency, other.frequency) < run.error + other.error + 1e-24
        assert distance(run.frequency, acb(seed)) < 10.0 ** (1 - root.digits) * abs(seed)


@pytest.mark.parametrize(("exponent", "coupling"), [(3, "1/4"), (6, "9/10"), (4, "1"), (4, "99/100")])
def test_the_error_bounds_what_more_digits_change(exponent, coupling):
    background = PowerLaw(exponent, Fraction(coupling))
    plain = equation_floats(background, "axial", 2)
    few, many = (SpectralProblem.of(background, "axial", 2, digits) for digits in (12, 24))
    oscillating = [root for root in persistent_roots(plain) if root.sigma.imag > 1e-2]
    for root in oscillating[:4]:
        seed = -1j * root.sigma * plain.mass
        run, better = refine(few, seed), refine(many, seed)
        assert run.error <= 1e-12 and better.error <= 1e-24
        assert distance(run.frequency, better.frequency) <= run.error


@pytest.mark.parametrize(
    ("background", "seed"),
    [
        (PowerLaw.from_q(4, Fraction(3, 20)), 6.261e-5 - 0.604206j),
        (PowerLaw(3, Fraction(99, 100)), 1.0404e-6 - 0.4234850j),
    ],
)
def test_near_axis_modes_lie_off_the_axis(background, seed):
    # five significant digits each of an earlier computation with unrelated methods
    run = refine(SpectralProblem.of(background, "axial", 2), seed)
    assert run.status == "ok"
    assert abs(complex(run.frequency) - seed) < 1e-6
    assert run.error < 1e-3 * float(run.frequency.real)


def test_a_perturbed_coefficient_shows():
    background = PowerLaw(4, Fraction(3, 4))
    equation = equation_balls(background, "axial", 2, working_bits(20))
    seed = 0.3850 - 0.0821j
    plain = refine(SpectralProblem(equation), seed)
    shifts = []
    for size in (1, 2):
        with ctx.workprec(working_bits(20)):
            W = list(equation.W)
            W[1] = W[1] * (1 + acb(size) / 10**6)
        run = refine(SpectralProblem(replace(equation, W=tuple(x.real if isinstance(x, acb) else x for x in W))), seed)
        assert run.status == "ok"
        with ctx.workprec(working_bits(20)):
            shifts.append((run.frequency - plain.frequency).mid())
    assert abs(complex(shifts[0])) > 1e-8
    # the second order of a change of 1e-6 is 1e-6 of the first
    assert abs(complex(shifts[1] / shifts[0]) - 2) < 1e-4


def test_high_precision_solves_find_what_the_double_inverse_finds():
    problem = SpectralProblem.of(PowerLaw(3, Fraction(1, 2)), "axial", 2, 18)
    with ctx.workprec(problem.bits):
        level = problem.resolution(0)
        seed = (acb(0, 1) * acb(0.3891923 - 0.0858183j) / problem.equation.mass).mid()
        one = spectral_refine._with_double_inverse(level, seed, 18)
        other = spectral_refine._with_high_precision_solves(level.parts, seed, 18)
    # both stop at a last step below 1e-20 of σ
    assert distance(one, other) < 1e-19


def test_an_inverse_that_does_not_contract_is_noticed_and_replaced(monkeypatch):
    problem = SpectralProblem.of(PowerLaw(3, Fraction(1, 2)), "axial", 2, 14)
    seed = 0.3891923 - 0.0858183j
    expected = refine(problem, seed)
    genuine = spectral_refine._newton_in_doubles

    def spoilt(matrices, near):
        sigma, vector, inverse = genuine(matrices, near)
        return sigma, vector, -inverse

    monkeypatch.setattr(spectral_refine, "_newton_in_doubles", spoilt)
    with ctx.workprec(problem.bits), pytest.raises(NotConverged, match="do not contract"):
        start = (acb(0, 1) * acb(seed) / problem.equation.mass).mid()
        spectral_refine._with_double_inverse(problem.resolution(0), start, 14)
    run = refine(problem, seed)
    assert run.status == "ok"
    assert distance(run.frequency, expected.frequency) < 1e-14


def test_no_mode_beside_the_seed_is_a_failure():
    run = refine(SpectralProblem.of(PowerLaw(4, Fraction(9, 10)), "axial", 2), 0.45 - 0.15j)
    assert run.status == "failed"
    assert run.frequency is None
    assert "neighbourhood" in run.reason or "settle" in run.reason


def test_too_nearly_degenerate_a_horizon_is_a_failure():
    run = refine(SpectralProblem.of(PowerLaw(4, 1 - Fraction(1, 10**9)), "axial", 2), 0.3887 - 0.0782j)
    assert run.status == "failed"
    assert "nearly degenerate" in run.reason


@pytest.mark.slow
@pytest.mark.parametrize("coupling", ["9/10", "99/100", "999/1000"])
def test_near_extremal_modes_agree_on_two_tilts(coupling):
    background = PowerLaw(6, Fraction(coupling))
    plain = equation_floats(background, "axial", 2)
    problem, tilted = (SpectralProblem.of(background, "axial", 2, tilt=t) for t in (1.25, OTHER_TILT))
    found = [root for root in persistent_roots(plain) if root.sigma.imag > 1e-6]
    assert len(found) >= 4
    for root in found:
        seed = -1j * root.sigma * plain.mass
        run, other = refine(problem, seed), refine(tilted, seed)
        assert (run.status, other.status) == ("ok", "ok")
        assert distance(run.frequency, other.frequency) < run.error + other.error
