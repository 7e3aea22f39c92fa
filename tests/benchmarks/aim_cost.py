"""What AIM costs, from one run on one core: run by hand, prints ratios and milliseconds, asserts nothing.

    python tests/benchmarks/aim_cost.py

The textbook form is the improved AIM written out over mpmath numbers. The recurrence is timed over mpmath numbers
(the gain of the algorithm alone) and over FLINT balls. CPU time of this process, the least of several runs.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from fractions import Fraction
from functools import partial
from typing import Any

from flint import acb, ctx
from mpmath import mp, mpc, mpf

from knell.methods.aim import bits_for, determinant, mpmath_arithmetic, solve
from knell.methods.aim_recurrence import columns
from knell.methods.aim_roots import all_roots, quantisation_polynomial
from knell.methods.contour import Contour, PulledBack, pull_back
from knell.methods.contour_choice import choose
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_balls, equation_floats, regularised

DIGITS = 60
SIGMA = 0.18 + 0.75j
SHAPES = (("real path", Contour()), ("arc", Contour.turned(0.7, 40)), ("S-shape", Contour.turned(1, 0, 0.6, 30)))


def least(function: Callable[[], Any], runs: int = 5) -> float:
    """Seconds."""
    spent = []
    for _ in range(runs):
        start = time.process_time()
        function()
        spent.append(time.process_time() - start)
    return min(spent)


def textbook(pulled: PulledBack, sigma: mpc, depth: int) -> mpc:
    """``λ_N s_(N-1) - λ_(N-1) s_N`` by the improved AIM: Taylor coefficients of every ``λ_k`` and ``s_k``."""
    terms = depth + 1
    zero = mpc(0)

    def padded(part: Any) -> list[Any]:
        return [*part, *[zero] * terms][:terms]

    P = padded(pulled.P)
    R = [a + sigma * b for a, b in zip(*map(padded, pulled.R), strict=True)]
    S = [a + sigma * b + sigma**2 * c for a, b, c in zip(*map(padded, pulled.S), strict=True)]
    length = len(pulled.P)

    def quotient(numerator: list[Any]) -> list[Any]:
        out: list[Any] = []
        for i in range(terms):
            known = sum((out[k] * P[i - k] for k in range(max(0, i - length + 1), i)), zero)
            out.append((-numerator[i] - known) / P[0])
        return out

    c0, d0 = quotient(R), quotient(S)
    c, d = c0, d0
    before = c, d
    for _ in range(depth):
        before = c, d
        width = len(c) - 1
        c, d = (
            [(i + 1) * c[i + 1] + d[i] + sum((c0[k] * c[i - k] for k in range(i + 1)), zero) for i in range(width)],
            [(i + 1) * d[i + 1] + sum((d0[k] * c[i - k] for k in range(i + 1)), zero) for i in range(width)],
        )
    return c[0] * before[1][0] - before[0][0] * d[0]


def against_textbook() -> None:
    print(f"one evaluation of the quantisation condition, Schwarzschild axial ℓ = 2, real path, {DIGITS} digits")
    with mp.workdps(DIGITS), ctx.workprec(bits_for(DIGITS)):
        theirs = pull_back(regularised([mpf(1), mpf(-1)], "axial", 2), Contour(), mpc)
        ours = pull_back(equation_balls(PowerLaw(3, Fraction(0)), "axial", 2, bits_for(DIGITS)), Contour(), acb)
        rows, balls, arithmetic = columns(theirs), columns(ours), mpmath_arithmetic()
        for depth in (50, 100, 200):
            slow = least(partial(textbook, theirs, mpc(SIGMA), depth), 1)
            same = least(partial(determinant, rows, mpc(SIGMA), depth, arithmetic), 3)
            fast = least(partial(determinant, balls, acb(SIGMA), depth))
            print(
                f"  depth {depth:4d}: textbook {slow:8.3f} s, recurrence over mpmath {1e3 * same:6.1f} ms, "
                f"{slow / same:6.0f} times cheaper; over balls {1e3 * fast:5.2f} ms, {slow / fast:7.0f} times"
            )


def growth() -> None:
    print("one evaluation over balls against depth, n = 4, κ = 9/10, 120 digits")
    bits = bits_for(120)
    equation = equation_balls(PowerLaw(4, Fraction(9, 10)), "axial", 2, bits)
    with ctx.workprec(bits):
        for name, contour in SHAPES:
            brackets = columns(pull_back(equation, contour, acb))
            spent = {n: least(partial(determinant, brackets, acb(SIGMA), n), 3) for n in (400, 800, 1600)}
            times = ", ".join(f"{n}: {1e3 * t:.1f} ms" for n, t in spent.items())
            print(
                f"  {name:9s} (length {brackets.length:2d}) {times}; "
                f"400 to 1600 costs {spent[1600] / spent[400]:.2f} times (4 is linear)"
            )


def modes() -> None:
    print("one mode from an eight-digit seed on its chosen contour: choice, secant and rounding bound")
    for exponent, coupling, seed in (
        (4, "0", 0.25150496 - 0.70514820j),
        (4, "1/2", 0.26953658 - 0.65832311j),
        (5, "9/10", 0.37976645 - 0.08123943j),
        (4, "1", 0.24302641 - 0.61558810j),
    ):
        hole = PowerLaw(exponent, Fraction(coupling))
        plan = equation_floats(hole, "axial", 2)
        for depth, digits in ((100, 60), (200, 60), (400, 120)):
            equation = equation_balls(hole, "axial", 2, bits_for(digits))
            sigma = 1j * seed / plan.mass
            contour = choose(plan, sigma, depth).main
            assert contour is not None
            chosen = least(partial(choose, plan, sigma, depth))
            solved = least(partial(solve, equation, contour, depth, digits, seed))
            run = solve(equation, contour, depth, digits, seed)
            print(
                f"  n = {exponent}, κ = {coupling:4s} depth {depth}, {digits} digits: choice {1e3 * chosen:.1f} ms, "
                f"solve {1e3 * solved:5.1f} ms, {run.status}, error {run.error:.0e}"
            )


def polynomials() -> None:
    print("quantisation polynomial and all its roots, Schwarzschild axial ℓ = 2, turned by 50°, 400 bits")
    equation = equation_balls(PowerLaw(3, Fraction(0)), "axial", 2, 800)
    for depth in (30, 60):
        made = least(partial(quantisation_polynomial, equation, Contour.turned(1, 50), depth, 400), 1)
        found = least(partial(all_roots, equation, Contour.turned(1, 50), depth, 400), 1)
        print(f"  depth {depth}: polynomial {made:.3f} s, roots {found:.2f} s")


if __name__ == "__main__":
    against_textbook()
    growth()
    modes()
    polynomials()
