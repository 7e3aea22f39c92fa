"""Direct integration against published values, against itself on other paths, and where it must fail."""

from dataclasses import replace
from fractions import Fraction
from random import Random

import pytest
from flint import acb, ctx

from knell.methods import radial
from knell.methods.original import original_equation
from knell.methods.radial import solve, solve_equation
from knell.methods.recurrence import SeriesError
from knell.physics.background import PowerLaw

SCHWARZSCHILD = PowerLaw(3, Fraction(0))


@pytest.mark.parametrize(
    ("ell", "re", "im"),
    [
        (2, ".747343", "-.177925"),
        (2, ".693422", "-.547830"),
        (2, ".503010", "-1.410296"),
        (3, "1.198887", "-.185406"),
        (3, ".578768", "-5.299159"),
    ],
)
def test_schwarzschild_axial_modes_of_leaver(ell, re, im):
    # E. W. Leaver, Proc. R. Soc. A 402, 285 (1985), table 1, 2Mω; quoted from memory, recomputed, ±1e-6
    quoted = complex(float(re), float(im))
    run = solve(SCHWARZSCHILD, "axial", ell, quoted / 2, 15)
    assert run.status == "ok"
    difference = 2 * complex(run.frequency) - quoted
    assert max(abs(difference.real), abs(difference.imag)) < 1.5e-6


@pytest.mark.parametrize(
    ("ell", "quoted", "unit"),
    [(0, 0.13346 - 0.095844j, 1e-5), (0, 0.075081 - 0.58833j, 1e-5), (1, 0.34818 - 0.27614j, 1e-5)],
)
def test_extremal_scalar_modes_of_onozawa(ell, quoted, unit):
    # H. Onozawa et al., Phys. Rev. D 53, 7033 (1996), extremal n = 2; quoted from memory, recomputed
    run = solve(PowerLaw(2, Fraction(1)), "scalar", ell, quoted, 15)
    assert run.status == "ok"
    assert abs(complex(run.frequency) - quoted) < unit


@pytest.mark.parametrize(
    ("background", "seed"),
    [
        (PowerLaw.from_q(4, Fraction(3, 20)), 6.261e-5 - 0.604206j),
        (PowerLaw(3, Fraction(99, 100)), 1.0404e-6 - 0.4234850j),
    ],
)
def test_near_axis_modes_lie_off_the_axis(background, seed):
    # five significant digits each of an earlier computation with unrelated methods
    run = solve(background, "axial", 2, seed, 20)
    assert run.status == "ok"
    assert abs(complex(run.frequency) - seed) < 1e-6
    assert abs(run.frequency.real - seed.real) < 1e-4 * seed.real
    assert float(run.frequency.real) > 1e6 * run.error


@pytest.mark.parametrize(
    ("background", "field", "ell", "omega"),
    [
        (SCHWARZSCHILD, "axial", 2, 0.3 - 0.5j),
        (PowerLaw(5, Fraction(9, 10)), "scalar", 0, 0.2 - 0.3j),
        (PowerLaw(3, Fraction(999, 1000)), "axial", 2, 0.3 - 0.4j),
        (PowerLaw(4, Fraction(1)), "electromagnetic", 1, 0.2 - 0.6j),
    ],
)
def test_wronskian_does_not_depend_on_the_paths(background, field, ell, omega):
    equation = original_equation(background, field, ell)
    settings = [radial._Setting.of(equation, omega, 100, route) for route in (radial._FIRST, radial._SECOND)]
    first, second = (setting.wronskian(acb(omega).mid()) for setting in settings)
    # 100 bits less what some thousand rounded operations and a ratio of solutions of size 1e3 cost: 80 bits
    with ctx.workprec(200):
        assert abs(first - second) < abs(first) * 2.0**-80


def test_more_digits_agree_with_fewer_within_the_stated_error():
    background, seed = PowerLaw(6, Fraction(1, 2)), 0.6021339422400387 - 0.08978012520599483j
    low, high = (solve(background, "axial", 3, seed, digits) for digits in (15, 45))
    assert low.status == high.status == "ok"
    with ctx.workprec(200):
        assert abs(low.frequency - high.frequency) < low.error
    assert high.error < 1e-45


def test_a_coefficient_off_by_one_part_in_a_million_is_seen():
    equation = original_equation(PowerLaw(4, Fraction(1, 2)), "axial", 2)
    disturbed = replace(equation, mass_weight=equation.mass_weight * (1 + Fraction(1, 10**6)))
    seed = 0.38101 - 0.08506j
    right, wrong = (solve_equation(e, seed, 15) for e in (equation, disturbed))
    # dω/ω ≈ δV/(2V) ≈ 5e-7; agreement to ten digits would hide it only below 1e-10
    assert 1e-8 < abs(complex(right.frequency) - complex(wrong.frequency)) < 1e-5


def test_nearly_extremal_hole_takes_the_bits_it_needs():
    # two seeds, 1e-5 off on either side: the solutions lose hundreds of bits on the way, and values of D that are
    # rounding noise would send each seed back as if it were a mode
    background = PowerLaw(2, 1 - Fraction(1, 10**5))
    runs = [solve(background, "axial", 2, 0.49013 - 0.08167j + shift, 12) for shift in (1e-5, -1e-5j)]
    assert [run.status for run in runs] == ["ok", "ok"]
    with ctx.workprec(200):
        assert abs(runs[0].frequency - runs[1].frequency) < runs[0].error + runs[1].error < 1e-12


def test_rounding_noise_is_recognised():
    class Noise:
        inner_bits = 80

        def __init__(self):
            self.random = Random(5)

        def wronskian(self, omega):
            return acb(self.random.gauss(0, 1), self.random.gauss(0, 1))

    with pytest.raises(SeriesError, match="noise"):
        radial._secant(Noise(), acb(0.4, -0.1), 12)


def test_a_seed_with_no_mode_near_it_does_not_come_back_as_a_mode_there():
    seed = 0.9 - 0.05j
    run = solve(SCHWARZSCHILD, "axial", 2, seed, 12)
    assert run.status == "failed" or abs(complex(run.frequency) - seed) > 0.1
