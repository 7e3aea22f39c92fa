"""One zero: proofs that agree with independent values, and everything that must be refused."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest
from flint import acb, arb, ctx
from hypothesis import assume, given, reject, settings
from hypothesis import strategies as st

from knell.methods import radial
from knell.methods.enclosure.certificate import prove_zero
from knell.methods.enclosure.effort import Effort, cleared_factors, mass, prepare
from knell.methods.enclosure.one_zero import (
    enclose_zero,
    find_uniqueness,
    model_root,
    shrink,
    uniqueness,
    value_effort,
)
from knell.methods.enclosure.path import Stride
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import InexactVertex, LostPrecision, NotAMode, Refusal, WeakBound
from knell.methods.enclosure.statement import state, state_mode
from knell.methods.enclosure.taylor import exact_point
from knell.physics.background import PowerLaw

CASES = (6, pytest.param(220, marks=pytest.mark.slow))
SCHWARZSCHILD = Problem(PowerLaw(2, Fraction(0)), "axial", 2)
FUNDAMENTAL = 0.3736716844180418 - 0.0889623156889357j
VALUE = Effort(20, 0, Stride(0.4, 10.0))


def sigma_of(problem, omega):
    return 1j * omega / mass(problem)


def proven(problem, omega, digits=30):
    one = prove_zero(problem, omega, digits)
    return one, Fraction(one.statement.frequency_re), Fraction(one.statement.frequency_im)


# E. W. Leaver, Proc. R. Soc. A 402, 285 (1985), table 1, 2Mω; quoted from memory, recomputed: ±1e-6.
LEAVER = {
    2: (
        *((".747343", ".177925"), (".693422", ".547830"), (".602107", ".956554"), (".503010", "1.410296")),
        *((".415029", "1.893690"), (".338599", "2.391216"), (".266505", "2.895822")),
        *((".126527", "4.605289"), (".153107", "5.121653"), (".165196", "5.630885")),
    ),
    3: ((".1198887e1", ".185406"), (".1165288e1", ".562596"), (".578768", "5.299159")),
}


@pytest.mark.parametrize(
    ("ell", "row"),
    [(2, 0), (2, 3), (3, 0), *[pytest.param(2, i, marks=pytest.mark.slow) for i in (1, 2, 4, 5, 6, 7, 8, 9)]]
    + [pytest.param(3, i, marks=pytest.mark.slow) for i in (1, 2)],
)
def test_schwarzschild_modes_of_leaver(ell, row):
    re, im = (Fraction(text) / 2 for text in LEAVER[ell][row])
    problem = Problem(PowerLaw(2, Fraction(0)), "axial", ell)
    one, found_re, found_im = proven(problem, complex(re, -im))
    assert one.statement.is_mode
    assert abs(found_re - re) < Fraction(1, 10**6) and abs(found_im + im) < Fraction(1, 10**6)
    assert Fraction(one.statement.proven_radius) < Fraction(1, 10**30)


INDEPENDENT = [
    (4, Fraction(9, 10), "axial", 2, 0.3872591 - 0.0798796j),
    pytest.param(4, Fraction(1), "axial", 2, 0.0496643606 - 2.3196682080j, marks=pytest.mark.slow),
    pytest.param(3, Fraction(99, 100), "axial", 2, 1.0404e-6 - 0.4234850j, marks=pytest.mark.slow),
    pytest.param(3, Fraction(99, 100), "axial", 2, 4.7446e-6 - 0.4949192j, marks=pytest.mark.slow),
    pytest.param(
        4, PowerLaw.from_q(4, Fraction(3, 20)).coupling, "axial", 2, 6.26e-5 - 0.604206j, marks=pytest.mark.slow
    ),
    pytest.param(4, Fraction(-3), "axial", 2, None, marks=pytest.mark.slow),
    (2, Fraction(1), "scalar", 0, 0.13346 - 0.095844j),
    pytest.param(2, Fraction(0), "electromagnetic", 1, 0.2483 - 0.0925j, marks=pytest.mark.slow),
    # Paths that wind about a root of f gave 0.368557 - 0.081078i at n = 22, q = 1/21.
    pytest.param(
        22, PowerLaw.from_q(22, Fraction(1, 21)).coupling, "axial", 2, 0.372365 - 0.089388j, marks=pytest.mark.slow
    ),
    pytest.param(
        22, PowerLaw.from_q(22, Fraction(19, 420)).coupling, "axial", 2, 0.372366 - 0.089387j, marks=pytest.mark.slow
    ),
    pytest.param(
        28, PowerLaw.from_q(28, Fraction(1, 60)).coupling, "axial", 2, 0.372943 - 0.089517j, marks=pytest.mark.slow
    ),
]


@pytest.mark.parametrize(("n", "k", "field", "ell", "omega"), INDEPENDENT)
def test_proven_discs_hold_the_values_of_direct_integration(n, k, field, ell, omega):
    # The original equation in the complex r-plane shares no line with the enclosures.
    problem = Problem(PowerLaw(n, k), field, ell)
    if omega is None:
        omega = complex(radial.solve(problem.background, field, ell, 0.36 - 0.1j, 15).frequency)
    one, re, im = proven(problem, omega, 24)
    other = radial.solve(problem.background, field, ell, omega, 22)
    assert other.status == "ok", other.reason
    with ctx.workprec(200):
        centre = acb(arb(re.numerator) / re.denominator, arb(im.numerator) / im.denominator)
        off = float(abs(other.frequency - centre))
    assert off <= float(Fraction(one.statement.proven_radius)) + 3 * other.error
    assert other.error < 1e-20
    assert one.statement.is_mode


@pytest.mark.parametrize("n", [22, pytest.param(28, marks=pytest.mark.slow)])
def test_large_exponents_stay_on_the_sheet_of_the_real_segment(n):
    # Values found by two unrelated methods; a path on the wrong side gave 0.368557 - 0.081078i at n = 22.
    q, expected, others = {
        22: (Fraction(1, 21), 0.372365 - 0.089388j, [0.368557 - 0.081078j]),
        28: (Fraction(1, 60), 0.3729433070 - 0.0895169038j, []),
    }[n]
    problem = Problem(PowerLaw.from_q(n, q), "axial", 2)
    for seed in (expected, *others):
        _, re, im = proven(problem, seed, 12)
        assert abs(complex(float(re), float(im)) - expected) < 1e-6


def test_extremal_scalar_modes():
    # H. Onozawa et al., Phys. Rev. D 53, 7033 (1996): ℓ = 1 fundamental of n = 2, all digits agree.
    problem = Problem(PowerLaw(2, Fraction(1)), "scalar", 1)
    _, re, im = proven(problem, 0.37764 - 0.089384j, 20)
    assert abs(complex(float(re), float(im)) - (0.37764 - 0.089384j)) < 6e-6


@pytest.mark.slow
@pytest.mark.parametrize("k", ["99/100", "999/1000", "99999/100000"])
def test_near_extremal_fundamentals(k):
    problem = Problem(PowerLaw(4, Fraction(k)), "axial", 2)
    seed = complex(radial.solve(PowerLaw(4, Fraction(97, 100)), "axial", 2, 0.3883 - 0.0783j, 12).frequency)
    steps = [step for step in ("98/100", "99/100", "999/1000", "9999/10000") if Fraction(step) < Fraction(k)]
    for coupling in (*steps, k):
        seed = complex(radial.solve(PowerLaw(4, Fraction(coupling)), "axial", 2, seed, 12).frequency)
    one, *_ = proven(problem, seed)
    assert one.statement.is_mode and Fraction(one.statement.proven_radius) < Fraction(1, 10**30)


@pytest.mark.slow
def test_two_hundred_digits():
    one, *_ = proven(SCHWARZSCHILD, FUNDAMENTAL, 200)
    rough, re, im = proven(SCHWARZSCHILD, FUNDAMENTAL, 40)
    assert Fraction(one.statement.proven_radius) < Fraction(1, 10**200)
    assert abs(Fraction(one.statement.frequency_re) - re) < Fraction(rough.statement.proven_radius)
    assert abs(Fraction(one.statement.frequency_im) - im) < Fraction(rough.statement.proven_radius)


@pytest.mark.parametrize("cases", CASES)
def test_values_and_models_of_the_mismatch_agree_whatever_the_effort(cases, problems, sigmas):
    # D depends on σ alone: another path, other orders and bits, a model about another centre give the same number.
    @settings(max_examples=cases, deadline=None)
    @given(
        problem=problems,
        sigma=sigmas,
        offset=st.builds(lambda a, b: complex(a, b) / 1024, st.integers(-9, 9), st.integers(-9, 9)),
        digits=st.floats(4, 14),
        reach=st.floats(0.25, 0.45),
    )
    def holds(problem, sigma, offset, digits, reach):
        R = 1 / 64
        cleared = cleared_factors(problem, sigma, R, 6.0)
        effort = Effort(digits, int(digits), Stride(reach, 3.5))
        try:
            rough, _ = prepare(problem, exact_point(sigma), R, effort, cleared).evaluate(problem)
        except InexactVertex:
            # Too few bits for the path is a refusal, not a disagreement.
            reject()
        with ctx.workprec(200):
            z = exact_point(sigma) + exact_point(offset)
        fine, _ = prepare(problem, z, 0.0, Effort(40, 0, Stride(0.4, 10.0)), cleared).evaluate(problem)
        with ctx.workprec(400):
            off = (rough.value(exact_point(offset * 64)) - fine.value).abs_upper()
            assert bool(off <= rough.error + fine.error)
            assert bool(fine.error <= rough.error)

    holds()


@pytest.mark.parametrize("cases", [2, pytest.param(60, marks=pytest.mark.slow)])
def test_more_digits_lie_inside_fewer(cases, problems):
    @settings(max_examples=cases, deadline=None)
    @given(problem=problems, more=st.integers(16, 40))
    def holds(problem, more):
        seed = radial.solve(problem.background, problem.field, problem.ell, start_of(problem), 12)
        assume(seed.status == "ok" and complex(seed.frequency).real > 0.02)
        rough, re, im = proven(problem, complex(seed.frequency), 10)
        fine, fine_re, fine_im = proven(problem, complex(seed.frequency), more)
        radius = Fraction(rough.statement.proven_radius) + Fraction(fine.statement.proven_radius)
        assert (re - fine_re) ** 2 + (im - fine_im) ** 2 <= radius**2
        assert Fraction(fine.statement.proven_radius) < Fraction(2, 10**more)

    holds()


def start_of(problem):
    """The light ring's estimate of the fundamental."""
    from knell.physics.landmarks import light_ring

    ring = light_ring(problem.background)
    return ring.frequency * (problem.ell + 0.5) - 0.5j * ring.exponent


def test_the_continued_sheet_is_no_mode():
    # Re ω < 0: a zero of the analytic continuation across the axis.
    zero = enclose_zero(SCHWARZSCHILD, sigma_of(SCHWARZSCHILD, -0.01532 - 1.99841j), 20)
    assert state(zero, 20).kind == "continued"
    with pytest.raises(NotAMode, match="Re ω < 0"):
        state_mode(zero, 20)


def test_the_algebraically_special_frequency_is_no_mode():
    # S. Chandrasekhar (1984); no mode of the Regge-Wheeler equation: A. Maassen van den Brink, gr-qc/0001032.
    zero = enclose_zero(SCHWARZSCHILD, sigma_of(SCHWARZSCHILD, -2j), 20)
    assert state(zero, 20).kind == "clearing"
    with pytest.raises(NotAMode, match="cleared factor"):
        state_mode(zero, 20)


def test_the_exact_zero_on_the_axis_at_q_one_seventh():
    # n = 4, κ = 343/432, q = 1/7: Mω = -4iκ_s M with κ_s = p₁/2 = 2/7, M = 4/7: -0.6530612…i.
    problem = Problem(PowerLaw(4, Fraction(343, 432)), "axial", 2)
    zero = enclose_zero(problem, sigma_of(problem, -1j * 32 / 49), 20)
    statement = state(zero, 20)
    assert statement.kind == "clearing"
    assert abs(Fraction(statement.frequency_im) + Fraction(32, 49)) < Fraction(1, 10**20)


@pytest.mark.parametrize(
    "omega",
    [
        0.5 - 0.3j,  # nothing near
        0.01 - 0.45j,  # where the discretised cut puts roots that are none
        0.3736 - 0.0889j + 0.004,  # a badly converged centre
        0.3242 - 0.181j,  # between two modes
    ],
)
def test_what_is_no_zero_is_refused(omega):
    problem = SCHWARZSCHILD
    for radius in (0.02, 0.005):
        run = prepare(problem, exact_point(sigma_of(problem, omega)), radius / 8, Effort(13, 12, Stride(0.45, 3.5)))
        with pytest.raises(NotAMode):
            uniqueness(problem, run)


def test_a_displaced_centre_gives_a_radius_no_smaller_than_the_displacement():
    first = find_uniqueness(SCHWARZSCHILD, sigma_of(SCHWARZSCHILD, FUNDAMENTAL))
    with ctx.workprec(300):
        for size in (1e-6, 1e-12):
            moved = model_root(first) + exact_point(complex(size, 0))
            zero, _ = shrink(SCHWARZSCHILD, first, prepare(SCHWARZSCHILD, moved, 0.0, VALUE, first.run.cleared))
            # model_root is good to about 1e-12 in σ.
            assert (
                float(zero.radius) >= size * (0.999 if size == 1e-6 else 0) and float(zero.radius) < 100 * size + 1e-9
            )
        far = model_root(first) + first.r_s
        with pytest.raises(LostPrecision):
            shrink(SCHWARZSCHILD, first, prepare(SCHWARZSCHILD, far.mid(), 0.0, VALUE, first.run.cleared))


def test_too_little_precision_is_said():
    first = find_uniqueness(SCHWARZSCHILD, sigma_of(SCHWARZSCHILD, FUNDAMENTAL))
    run = prepare(SCHWARZSCHILD, exact_point(complex(first.centre)), 0.0, VALUE)
    with pytest.raises(InexactVertex, match="raise the precision"):
        shrink(SCHWARZSCHILD, first, replace(run, bits=30))
    with pytest.raises(Refusal):
        shrink(
            SCHWARZSCHILD, first, replace(run, infinity=replace(run.infinity, orders=(2,) * len(run.infinity.vertices)))
        )


def test_a_and_b_must_share_the_normalisation_and_the_disc():
    seed = sigma_of(SCHWARZSCHILD, FUNDAMENTAL)
    first = find_uniqueness(SCHWARZSCHILD, seed)
    with pytest.raises(InexactVertex, match="normalisation"):
        shrink(SCHWARZSCHILD, first, prepare(SCHWARZSCHILD, model_root(first), 0.0, VALUE, (1,)))
    with pytest.raises(InexactVertex):
        shrink(SCHWARZSCHILD, first, first.run)
    with pytest.raises(WeakBound, match="r must lie"):
        uniqueness(SCHWARZSCHILD, first.run, 1.0)


def test_values_of_another_function_disagree():
    # B on another black hole: the enclosures of D at one σ do not meet.
    first = find_uniqueness(SCHWARZSCHILD, sigma_of(SCHWARZSCHILD, FUNDAMENTAL))
    other = Problem(PowerLaw(4, Fraction(1, 1000)), "axial", 2)
    with pytest.raises(Refusal, match="disagree"):
        shrink(other, first, prepare(other, model_root(first), 0.0, value_effort(20)))
