"""Series of one segment: what is computed with few terms and bits holds what is computed with many."""

from __future__ import annotations

from itertools import pairwise

import pytest
from flint import acb, arb, ctx
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from knell.methods.enclosure.effort import lands
from knell.methods.enclosure.path import continuous_phase, horner
from knell.methods.enclosure.problem import side
from knell.methods.enclosure.refusal import BadStructure, Refusal, WeakBound
from knell.methods.enclosure.segment import Segment, covering, ordinary_pieces, singular_suprema
from knell.methods.enclosure.series import Cut, State, factors, ordinary_step, singular_start
from knell.methods.enclosure.taylor import Models, Values, exact_point, upper

CASES = (25, pytest.param(220, marks=pytest.mark.slow))
LOW, HIGH = 90, 500
FINE = Cut(arb(10) ** -60)
POINTS = (0j, 0.9 + 0j, -0.6 + 0.7j, 0.3 - 0.9j)


def gap(exact: State, value, slope) -> tuple[arb, arb]:
    return upper(exact.value - value), upper(exact.slope - slope)


def assert_holds(rough: State, fine: State) -> None:
    """``|rough - fine|`` within the rough error and the (tiny) fine one."""
    off, steep = gap(fine, rough.value, rough.slope)
    assert bool(off <= rough.value_error + fine.value_error)
    assert bool(steep <= rough.slope_error + fine.slope_error)


def singular_segment(problem, sigma, at_horizon, bits):
    """The first segment of a side, short enough for 60 digits of the asymptotic series."""
    end, land = side(problem, bits, at_horizon), lands(problem)[at_horizon]
    if land.irregular:
        angle = continuous_phase(sigma) - 2.4
        size = 2 * abs(sigma) / (2.303 * 66 + 10) / land.lead
    else:
        angle, size = 0.3, 0.4 * min(1.0, land.gap)
    x1 = exact_point(size * complex(exact_unit(angle)))
    return Segment.at_singular_end(end, x1)


def exact_unit(angle: float) -> complex:
    from cmath import rect

    return rect(1.0, angle)


@pytest.mark.parametrize("at_horizon", [False, True], ids=["infinity", "horizon"])
@pytest.mark.parametrize("cases", CASES)
def test_a_singular_start_of_few_terms_holds_the_full_one(cases, at_horizon, problems, sigmas):
    @settings(max_examples=cases, deadline=None)
    @given(problem=problems, sigma=sigmas, order=st.integers(2, 20), cleared=st.sets(st.integers(1, 3)))
    def holds(problem, sigma, order, cleared):
        z = exact_point(sigma)
        irregular = problem.degenerate or not at_horizon
        factors_ = () if irregular else tuple(cleared)
        results = []
        for bits, cut in ((LOW, Cut(arb(1), order)), (HIGH, FINE)):
            with ctx.workprec(bits):
                segment = singular_segment(problem, sigma, at_horizon, bits)
                try:
                    results.append(singular_start(segment, Values(z), cut, irregular, factors_))
                except WeakBound:
                    assume(False)
        with ctx.workprec(HIGH):
            assert bool(results[1].value_error < arb(10) ** -40)
            assert_holds(*results)

    holds()


@pytest.mark.parametrize("cases", CASES)
def test_a_step_of_few_terms_holds_the_full_one(cases, problems, sigmas):
    @settings(max_examples=cases, deadline=None)
    @given(
        problem=problems,
        sigma=sigmas,
        place=st.builds(complex, st.floats(0.1, 0.6), st.floats(-0.5, -0.05)),
        turn=st.floats(-3.14, 3.14),
        reach=st.floats(0.05, 0.45),
        order=st.integers(2, 25),
        data=st.tuples(*[st.floats(-1, 1)] * 4),
        shift=st.tuples(*[st.floats(-1e-3, 1e-3)] * 4),
    )
    def holds(problem, sigma, place, turn, reach, order, data, shift):
        land = lands(problem)[0]
        distance = min(abs(place - w) for w in land.singular)
        drift = abs(2 * sigma * horner(land.K, place) / horner(land.p, place))
        step = min(reach * distance, 8 / max(drift, 1e-3))
        h = exact_point(step * exact_unit(turn))
        start = [acb(arb(data[0]), arb(data[1])), acb(arb(data[2]), arb(data[3]))]
        moved = [acb(arb(shift[0]), arb(shift[1])), acb(arb(shift[2]), arb(shift[3]))]
        with ctx.workprec(LOW):
            segment = Segment.at_ordinary_point(side(problem, LOW, False), exact_point(place), h)
            state = State(start[0], start[1], upper(moved[0]), upper(moved[1]), 0)
            rough = ordinary_step(segment, Values(exact_point(sigma)), state, Cut(arb(1), order))
        with ctx.workprec(HIGH):
            segment = Segment.at_ordinary_point(side(problem, HIGH, False), exact_point(place), h)
            # Data anywhere inside the bounds of the errors must stay inside them.
            true = State(start[0] + moved[0], start[1] + moved[1], arb(0), arb(0), 0)
            fine = ordinary_step(segment, Values(exact_point(sigma)), true, FINE)
            assert bool(fine.value_error < arb(10) ** -40)
            assert_holds(rough, fine)

    holds()


@pytest.mark.parametrize("cases", CASES)
def test_a_model_holds_the_values_on_its_disc(cases, problems, sigmas):
    @settings(max_examples=cases, deadline=None)
    @given(
        problem=problems,
        sigma=sigmas,
        R=st.sampled_from([1e-6, 0.01, 0.04]),
        tau=st.builds(lambda a, b: complex(a, b) / 64, st.integers(-45, 45), st.integers(-45, 45)),
        degree=st.integers(1, 8),
        at_horizon=st.booleans(),
        cleared=st.sets(st.integers(1, 3)),
    )
    def holds(problem, sigma, R, tau, degree, at_horizon, cleared):
        irregular = problem.degenerate or not at_horizon
        factors_ = () if irregular else tuple(cleared)
        with ctx.workprec(LOW):
            models = Models(exact_point(sigma), arb(R), degree)
            segment = singular_segment(problem, sigma, at_horizon, LOW)
            try:
                rough = singular_start(segment, models, Cut(arb(1), 24), irregular, factors_)
            except WeakBound:
                assume(False)
        with ctx.workprec(HIGH):
            z = exact_point(sigma) + arb(R) * exact_point(tau)
            segment = singular_segment(problem, sigma, at_horizon, HIGH)
            fine = singular_start(segment, Values(z), FINE, irregular, factors_)
            at_tau = State(
                rough.value(exact_point(tau)),
                rough.slope(exact_point(tau)),
                rough.value_error,
                rough.slope_error,
                0,
            )
            assert_holds(at_tau, fine)

    holds()


def test_the_recurrence_is_the_equation():
    # L applied to ξ^3 in two ways: through c_s(k), and by derivatives of the polynomials.
    from fractions import Fraction

    from knell.methods.enclosure.problem import Problem
    from knell.physics.background import PowerLaw

    problem, sigma = Problem(PowerLaw(5, Fraction(1, 3)), "scalar", 1), acb(arb(0.7), arb(0.4))
    with ctx.workprec(120):
        segment = Segment.at_ordinary_point(
            side(problem, 120, False), exact_point(0.4 - 0.2j), exact_point(0.1 + 0.05j)
        )
        xi, m = acb(arb(0.3), arb(0.2)), 3

        def value(part, point):
            return sum((c * point**i for i, c in enumerate(part)), acb(0))

        def slope(part, point):
            return sum((i * c * point ** (i - 1) for i, c in enumerate(part) if i), acb(0))

        flux = m * (m - 1) * xi ** (m - 2) * value(segment.P, xi) + m * xi ** (m - 1) * slope(segment.P, xi)
        rest = sigma * slope(segment.kappa, xi) - sigma**2 * value(segment.q, xi) - value(segment.w, xi)
        direct = flux + 2 * sigma * value(segment.kappa, xi) * m * xi ** (m - 1) + rest * xi**m
        rows, total = factors(segment, Values(sigma)), acb(0)
        for k, row in rows:
            s = k + 2 - m
            if s >= len(row):
                break
            if s >= 0:
                total += row[s] * xi**k
        assert (total - direct).abs_upper() < 1e-30


def test_the_pieces_cover_the_segment_with_its_ends():
    for pieces in (1, 8, 16):
        cover = covering(pieces)
        assert cover[0].real.contains(0) and cover[-1].real.contains(1)
        assert all(a.real.overlaps(b.real) for a, b in pairwise(cover))


def test_suprema_bound_the_functions_at_sample_points(problems, sigmas):
    @settings(max_examples=25, deadline=None)
    @given(problem=problems, sigma=sigmas, t=st.floats(0, 1), tau=st.sampled_from(POINTS))
    def holds(problem, sigma, t, tau):
        R = 0.03
        with ctx.workprec(LOW):
            z = exact_point(sigma) + arb(R) * exact_point(tau)
            segment = Segment.at_ordinary_point(side(problem, LOW, False), exact_point(0.3 - 0.3j), exact_point(0.1j))
            piece = ordinary_pieces(segment, exact_point(sigma), arb(R))[min(int(16 * t), 15)]
            xi = acb(arb(t))

            def value(part):
                return sum((c * xi**i for i, c in enumerate(part)), acb(0))

            def slope(part):
                return sum((i * c * xi ** (i - 1) for i, c in enumerate(part) if i), acb(0))

            P = value(segment.P)
            B = (2 * z * value(segment.kappa) + slope(segment.P)) / P
            ratio = (z * slope(segment.kappa) - z * z * value(segment.q) - value(segment.w)) / P
            exponent = piece.slow + piece.bend * exact_point(tau)
            assert not bool((-(B + exponent)).real > piece.rate)
            assert not bool(((B + exponent) * exponent + ratio).abs_lower() > piece.coupling)
            assert not bool(P.abs_upper() < piece.least)
            end = side(problem, LOW, True)
            first = Segment.at_singular_end(end, exact_point(0.05 + 0.02j))
            zeros = 2 if problem.degenerate else 1
            alpha, gamma, c, least = singular_suprema(first, exact_point(sigma) + acb(arb(0, R), arb(0, R)), zeros)
            G = sum((p * xi**i for i, p in enumerate(first.P[zeros:])), acb(0))
            kappa = sum((p * xi**i for i, p in enumerate(first.kappa)), acb(0))
            rate = (2 * z * kappa / G).real
            assert not bool(-rate > alpha) and not bool(rate < gamma)
            assert not bool(G.abs_upper() < least)
            C = z * sum((i * p * xi ** (i - 1) for i, p in enumerate(first.kappa) if i), acb(0))
            C -= z * z * sum((p * xi**i for i, p in enumerate(first.q)), acb(0))
            C -= sum((p * xi**i for i, p in enumerate(first.w)), acb(0))
            assert not bool(C.abs_lower() > c)

    holds()


def test_a_step_across_a_root_and_a_missing_zero_are_refused():
    from fractions import Fraction

    from knell.methods.enclosure.problem import Problem
    from knell.physics.background import PowerLaw

    problem = Problem(PowerLaw(4, Fraction(1, 2)), "axial", 2)
    with ctx.workprec(LOW):
        end = side(problem, LOW, False)
        across = Segment.at_ordinary_point(end, exact_point(0.9 + 0j), exact_point(0.2 + 0j))
        with pytest.raises(BadStructure, match="may vanish"):
            ordinary_pieces(across, acb(1), arb(0))
        first = Segment.at_singular_end(side(problem, LOW, True), exact_point(0.1 + 0j))
        with pytest.raises(BadStructure, match="structural zero"):
            singular_suprema(first, acb(1), 2)
        with pytest.raises(Refusal):
            # Recessive nowhere: the ray points along arg σ.
            start = Segment.at_singular_end(end, exact_point(0.02 + 0j))
            singular_start(start, Values(acb(1)), Cut(arb(10) ** -10), True)
