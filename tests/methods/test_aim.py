"""AIM at linear cost against the textbook form, mpmath, known values and itself."""

from __future__ import annotations

from fractions import Fraction
from functools import partial

import mpmath
import pytest
from flint import acb, ctx
from hypothesis import given, settings
from hypothesis import strategies as st
from mpmath import mp, mpc, mpf

from knell.methods.aim import BALLS, bits_for, determinant, mpmath_arithmetic, secant, solve
from knell.methods.aim_recurrence import columns, taylor_pair
from knell.methods.aim_rounding import determinant_error
from knell.methods.contour import Contour, PulledBack, pull_back
from knell.methods.contour_choice import choose
from knell.physics import polynomial
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_balls, equation_floats, regularised

SCHWARZSCHILD = PowerLaw(4, Fraction(0))


def schwarzschild_mp(field="axial", ell=2):
    return regularised([mpf(1), mpf(-1)], field, ell)


def textbook(pulled: PulledBack, sigma: mpc, depth: int) -> tuple[mpc, ...]:
    """``λ_N, s_N, λ_(N-1), s_(N-1)`` at ``y = 0`` by the improved AIM, straight from its definition.

    ``c_n^i = (i+1) c_(n-1)^(i+1) + d_(n-1)^i + Σ_k c_0^k c_(n-1)^(i-k)``,
    ``d_n^i = (i+1) d_(n-1)^(i+1) + Σ_k d_0^k c_(n-1)^(i-k)`` (Cho et al. 2010, equations 2.14 f.).
    """

    def at(part, i):
        return part[i] if i < len(part) else mpf(0)

    terms = depth + 1
    R = [at(pulled.R[0], i) + sigma * at(pulled.R[1], i) for i in range(terms)]
    S = [at(pulled.S[0], i) + sigma * at(pulled.S[1], i) + sigma**2 * at(pulled.S[2], i) for i in range(terms)]

    def quotient(numerator):
        out = []
        for i in range(terms):
            known = sum((out[k] * at(pulled.P, i - k) for k in range(i)), mpf(0))
            out.append((-numerator[i] - known) / pulled.P[0])
        return out

    c0, d0 = quotient(R), quotient(S)
    c, d = c0, d0
    previous = (c, d)
    for _ in range(depth):
        previous = (c, d)
        width = len(c) - 1
        c, d = (
            [(i + 1) * c[i + 1] + d[i] + sum(c0[k] * c[i - k] for k in range(i + 1)) for i in range(width)],
            [(i + 1) * d[i + 1] + sum(d0[k] * c[i - k] for k in range(i + 1)) for i in range(width)],
        )
    return c[0], d[0], previous[0][0], previous[1][0]


sigmas = st.builds(complex, st.floats(-1, 3), st.floats(-2, 2))
shapes = st.sampled_from([Contour(), Contour.turned(0.6, 40), Contour.turned(0.8, 10, 0.7, 30)])


@given(sigmas, shapes, st.integers(1, 12))
@settings(max_examples=25, deadline=None)
def test_identity_with_the_textbook_form(sigma, contour, depth):
    """``λ_N s_(N-1) - λ_(N-1) s_N = (N+1)! (N+2)! (a_(N+1) b_(N+2) - a_(N+2) b_(N+1))`` for every ``σ``."""
    with mp.workdps(60):
        pulled = pull_back(schwarzschild_mp(), contour, mpc)
        lam, s, lam_before, s_before = textbook(pulled, mpc(sigma), depth)
        value = determinant(columns(pulled), mpc(sigma), depth, mpmath_arithmetic()).full
        expected = lam * s_before - lam_before * s
        scale = abs(lam * s_before) + abs(lam_before * s)
        factor = mpmath.factorial(depth + 1) * mpmath.factorial(depth + 2)
        # 60 digits, sums of up to 150 terms that cancel by less than 10^15 at these depths
        assert abs(expected - factor * value) <= mpf(10) ** -40 * (scale + 1)


def about(equation, centre):
    """The equation itself (no contour) about a point ``u``: for expansion points no contour has."""

    def shifted(part, factor=1):
        return tuple(factor * x for x in polynomial.shift([acb(c) for c in part], centre))

    slopes = polynomial.derivative(equation.p), polynomial.derivative(equation.H)
    return PulledBack(
        shifted(equation.p),
        (shifted(slopes[0]), shifted(equation.H, 2)),
        (shifted(equation.W, -1), shifted(slopes[1]), shifted(equation.Q, -1)),
    )


def test_finite_depth_value_of_the_literature():
    """Scalar ℓ = 0 after 15 iterations about the potential's peak: .1103 - .1046i (H. T. Cho et al., Class. Quantum
    Grav. 27, 155004, 2010; value quoted from memory, recomputed). The mode is .1105 - .1049i."""
    with ctx.workprec(200):
        equation = equation_balls(SCHWARZSCHILD, "scalar", 0, 200)
        brackets = columns(about(equation, acb(3) / 4))  # V = (1-u) u³
        trail = secant(partial(determinant, brackets, depth=15), acb(0.1105 - 0.1049j) * 2j, BALLS, 20)
        omega = complex(trail.root / 2j)
    assert trail.reason == ""
    assert abs(omega.real - 0.1103) < 5e-5 and abs(omega.imag + 0.1046) < 5e-5


LEAVER = {  # 2Mω, E. W. Leaver, Proc. R. Soc. A 402, 285 (1985), table 1; quoted from memory, recomputed
    2: (0.747343 - 0.177925j, 0.693422 - 0.547830j, 0.602107 - 0.956554j, 0.503010 - 1.410296j, 0.415029 - 1.893690j),
    3: (1.198887 - 0.185406j, 1.165288 - 0.562596j, 1.103370 - 0.958186j, 1.023924 - 1.380674j, 0.940348 - 1.831299j),
}


@pytest.mark.parametrize("ell", [2, 3])
@pytest.mark.parametrize("overtone", range(5))
def test_schwarzschild(ell, overtone):
    plan, balls = (make(SCHWARZSCHILD, "axial", ell, *bits) for make, bits in _BOTH)
    seed = LEAVER[ell][overtone] / 2
    choice = choose(plan, 1j * seed / plan.mass, 120)
    main, tilted = (solve(balls, contour, 120, 60, seed) for contour in (choice.main, choice.tilted))
    assert main.status == tilted.status == "ok"
    assert abs(2 * complex(main.frequency) - LEAVER[ell][overtone]) < 1.5e-6  # ±1 in the sixth decimal
    difference = abs(complex(main.frequency - tilted.frequency))
    # Two tilts agree to their own estimates, and to the 10 digits a survey asks for.
    assert difference <= main.error + tilted.error
    assert difference < 1e-10


_BOTH = ((equation_floats, ()), (equation_balls, (220,)))


@pytest.mark.parametrize(
    ("exponent", "coupling", "seed"),
    [
        # found by the two-sided match of this package, which shares only the equation
        (3, "1/2", 0.28736443289852076 - 0.6663449088139238j),
        (4, "9/10", 0.36177139122757723 - 0.24351458854519573j),
    ],
)
def test_deformed_holes_agree_with_the_match(exponent, coupling, seed):
    from knell.methods.match.digits import refine

    hole = PowerLaw(exponent, Fraction(coupling))
    plan, balls = (make(hole, "axial", 2, *bits) for make, bits in _BOTH)
    rough = complex(round(seed.real, 8), round(seed.imag, 8))
    run = solve(balls, choose(plan, 1j * rough / plan.mass, 200).main, 200, 66, rough)
    match = refine(hole, "axial", 2, rough, 20)
    assert run.status == match.status == "ok"
    assert abs(complex(run.frequency - match.frequency)) <= run.error + match.error
    assert run.error < 1e-10


def test_published_extremal_overtone():
    """n = 4, κ = 1, overtone 10: ``0.0496643606157 - 2.3196682079836i``, measured before this code existed."""
    hole = PowerLaw(4, Fraction(1))
    plan, balls = (make(hole, "axial", 2, *bits) for make, bits in _BOTH)
    seed = 0.04966436 - 2.31966821j
    run = solve(balls, choose(plan, 1j * seed / plan.mass, 300).main, 300, 60, seed)
    assert run.status == "ok"
    assert abs(complex(run.frequency) - (0.0496643606157 - 2.3196682079836j)) < 1e-13


def test_depth_without_precision_starves():
    balls = equation_balls(SCHWARZSCHILD, "axial", 2, 400)
    seed, contour = 0.20751458 - 0.94684489j, Contour.turned(0.5, 50)
    few, many = (solve(balls, contour, 400, digits, seed) for digits in (40, 120))
    assert few.status == "starved" and few.frequency is None and "40 digits" in few.reason
    assert many.status == "ok" and many.rounding < 1e-50


@pytest.mark.parametrize("digits", [30, 40, 50])
def test_rounding_bound_holds(digits):
    """The bound covers the difference from a run with 60 more digits, and is not uselessly large."""
    contour, depth = Contour.turned(0.7, 40), 120
    with ctx.workprec(bits_for(digits + 60)):
        balls = equation_balls(SCHWARZSCHILD, "axial", 2, bits_for(digits + 60))
        sigma = acb(0.5 + 0.7j)
        brackets = columns(pull_back(balls, contour, acb))
        true = determinant(brackets, sigma, depth).full
    with ctx.workprec(bits_for(digits)):
        rough = columns(pull_back(balls, contour, acb))
        rounded = determinant(rough, sigma, depth)
        bound = float(determinant_error(rough, sigma, rounded.a, rounded.b, bits_for(digits)) + rounded.full.rad())
    with ctx.workprec(bits_for(digits + 60)):
        made = float(abs(rounded.full.mid() - true.mid()))
    assert 0 < made < bound < 1e8 * made


def test_mpmath_and_flint_agree_to_the_working_digits():
    digits, depth, contour = 50, 60, Contour.turned(0.7, 30, 0.8, 20)
    with mp.workdps(digits), ctx.workprec(bits_for(digits)):
        ours = columns(pull_back(equation_balls(SCHWARZSCHILD, "axial", 2, bits_for(digits)), contour, acb))
        theirs = columns(pull_back(schwarzschild_mp(), contour, mpc))
        arithmetic = mpmath_arithmetic()
        a, _ = taylor_pair(ours, acb(0.2 + 0.7j), depth, BALLS.matrix, BALLS.rounded)
        c, _ = taylor_pair(theirs, mpc(0.2 + 0.7j), depth, arithmetic.matrix, arithmetic.rounded)
        largest = max(abs(x) for x in c)
        for x, y in zip(a, c, strict=True):
            real, imag = (mpf(part.mid().str(digits + 5, radius=False)) for part in (x.real, x.imag))
            # sixty steps of twenty terms: three digits of rounding, amplified by up to 10^3 along the recurrence
            assert abs(mpc(real, imag) - y) < mpf(10) ** (6 - digits) * largest


def test_mpmath_finds_the_same_mode():
    with mp.workdps(40):
        brackets = columns(pull_back(schwarzschild_mp(), Contour.turned(0.7, 40), mpc))
        evaluate = partial(determinant, brackets, depth=60, arithmetic=mpmath_arithmetic())
        trail = secant(evaluate, mpc(0.37367168 - 0.08896231j) * 2j, mpmath_arithmetic(), 25)
        other = complex(trail.root / 2j)
    balls = equation_balls(SCHWARZSCHILD, "axial", 2, bits_for(40))
    run = solve(balls, Contour.turned(0.7, 40), 60, 40, 0.37367168 - 0.08896231j)
    assert trail.reason == "" and run.status == "ok"
    assert abs(complex(run.frequency) - other) < 1e-15  # both far beyond doubles, in which they are compared


def test_an_artefact_moves_with_the_tilt_and_a_mode_does_not():
    """On the real path the cut leaves roots on the negative imaginary axis; no turned contour has them there."""
    from knell.methods.aim_roots import all_roots

    balls = equation_balls(SCHWARZSCHILD, "axial", 2, 800)
    real, turned = (all_roots(balls, contour, 20, 200) for contour in (Contour(), Contour.turned(1, 50)))
    assert real.lost == turned.lost == 0
    assert len(real.roots) == len(turned.roots) == 2 * 20 + 2

    def on_cut(found):
        return sum(abs(float(omega.real)) < 1e-6 and float(omega.imag) < 0 for omega in found.roots)

    assert on_cut(real) >= 10 and on_cut(turned) == 0
    fundamental = 0.3736717 - 0.0889623j
    for found in (real, turned):
        assert min(abs(complex(omega) - fundamental) for omega in found.roots) < 1e-4


def test_roots_say_when_bits_are_too_few():
    from knell.methods.aim_roots import all_roots

    balls = equation_balls(SCHWARZSCHILD, "axial", 2, 800)
    poor, good = (all_roots(balls, Contour(), 20, bits) for bits in (80, 200))
    assert poor.lost > 0 and good.lost == 0
    assert len(poor.roots) + poor.lost == len(good.roots)
    for omega in poor.roots:  # what is kept is right
        assert min(abs(complex(omega) - complex(other)) for other in good.roots) < 1e-8 * abs(complex(omega)) * 2


def test_root_of_the_polynomial_is_the_root_of_the_secant():
    from knell.methods.aim_roots import all_roots

    balls, contour = equation_balls(SCHWARZSCHILD, "axial", 2, 800), Contour.turned(0.8, 30)
    run = solve(balls, contour, 20, 60, 0.3736717 - 0.0889623j)
    found = all_roots(balls, contour, 20, 200).roots
    assert min(abs(complex(omega - run.frequency)) for omega in found) < 1e-15


def test_refusal_is_a_value_with_its_reason():
    hole = PowerLaw(22, Fraction(95, 100))
    run = solve(equation_balls(hole, "axial", 2, 200), Contour.turned(0.5, 60), 50, 50, 0.37 - 0.09j)
    assert run.status == "refused" and run.frequency is None and "root" in run.reason


def test_no_root_near_the_seed_fails():
    balls = equation_balls(SCHWARZSCHILD, "axial", 2, 200)
    run = solve(balls, Contour.turned(0.7, 40), 100, 60, 0.45 - 0.18j)
    assert run.status == "failed" and "seed" in run.reason and run.frequency is None


def test_depth_below_one_is_an_error():
    balls = equation_balls(SCHWARZSCHILD, "axial", 2, 200)
    with pytest.raises(ValueError, match="depth 0"):
        solve(balls, Contour(), 0, 50, 0.37 - 0.09j)


def test_error_estimate_covers_the_error():
    balls = equation_balls(SCHWARZSCHILD, "axial", 2, 400)
    seed = 0.30105345 - 0.47827698j
    exact = solve(balls, Contour.turned(0.5, 50), 300, 110, seed).frequency
    for depth in (20, 40, 80, 160):
        run = solve(balls, Contour.turned(0.7, 40), depth, 60, seed)
        assert run.status == "ok"
        assert abs(complex(run.frequency - exact)) <= run.error
