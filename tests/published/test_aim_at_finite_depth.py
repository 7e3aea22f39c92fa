"""AIM before it has converged: scalar ℓ = 0 of Schwarzschild after 15 iterations about the potential's peak is
``Mω = .1103 - .1046i`` (H. T. Cho et al., Class. Quantum Grav. 27, 155004, 2010; quoted from memory, recomputed).

Not the mode, which is ``.1105 - .1049i``: the value belongs to the form of the equation, to the expansion point and to
the depth, so it checks that the regularised equation of Schwarzschild is the usual one, factor for factor. AIM's
condition at depth N is ``a_{N+1} b_{N+2} = a_{N+2} b_{N+1}`` for the Taylor coefficients of the two basic solutions.
"""

from __future__ import annotations

from fractions import Fraction

import pytest
from mpmath import mp, mpc

from knell.physics.equation import LocalEquation, local, regularised

PEAK = Fraction(3, 4)  # V = (1-u) u³


def taylor(at: LocalEquation, sigma: mpc, start: tuple[int, int], count: int) -> list[mpc]:
    """Coefficients of the solution of ``(pφ')' + 2σKφ' + (σK' - σ²Q - W)φ = 0`` with the first two given."""

    def coefficient(part: tuple[Fraction, ...], i: int) -> Fraction:
        return part[i] if 0 <= i < len(part) else Fraction(0)

    def number(value: Fraction) -> mpc:
        return mpc(value.numerator) / value.denominator

    a = [mpc(x) for x in start]
    for k in range(count - 2):
        total = mpc(0)
        for j, known in enumerate(a):
            i = k - j
            factor = number((k + 1) * j * coefficient(at.p, i + 2)) + sigma * (k + 1 + j) * number(
                coefficient(at.K, i + 1)
            )
            factor -= sigma**2 * number(coefficient(at.Q, i)) + number(coefficient(at.W, i))
            total += known * factor
        a.append(-total / ((k + 1) * (k + 2) * number(at.p[0])))
    return a


def root(depth: int) -> complex:
    """``Mω`` of the quantisation condition's root next to the fundamental."""
    at = local(regularised([Fraction(1), Fraction(-1)], "scalar", 0), PEAK)

    def condition(omega: mpc) -> mpc:
        a, b = (taylor(at, 2j * omega, start, depth + 3) for start in ((1, 0), (0, 1)))
        return a[depth + 1] * b[depth + 2] - a[depth + 2] * b[depth + 1]

    with mp.workdps(40):
        return complex(mp.findroot(condition, mpc("0.11", "-0.105")))


def test_fifteen_iterations() -> None:
    value = root(15)
    assert round(value.real, 4) == 0.1103
    assert round(value.imag, 4) == -0.1046


@pytest.mark.parametrize("depth", [14, 17])
def test_other_depths_give_other_digits(depth: int) -> None:
    value = root(depth)
    assert (round(value.real, 4), round(value.imag, 4)) != (0.1103, -0.1046)
