"""What the solvers cost, from one run on one core: run by hand, prints ratios and seconds, asserts nothing.

    OPENBLAS_NUM_THREADS=1 python tests/benchmarks/solvers.py

CPU seconds of this process, so that a busy machine disturbs them less; compare lines of one run.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from fractions import Fraction
from typing import Any

from knell.methods.match.search import search
from knell.physics.equation import equation_floats
from knell.physics.landmarks import window
from knell.survey import solve
from knell.survey.points import Point

COUPLINGS = ("0", "1/2", "3/4", "9/10", "19/20", "97/100", "99/100", "199/200", "1")
LADDER = ((100, 60), (200, 60), (200, 120), (400, 120))


def seconds(function: Callable[[], Any]) -> tuple[float, Any]:
    start = time.process_time()
    value = function()
    return time.process_time() - start, value


def main() -> None:
    print("search of one window with polish, axial ℓ = 2, n = 4, |Im Mω| <= 1.5")
    first = 0.0
    for text in COUPLINGS:
        point = Point.canonical("axial", 4, Fraction(text), 2)
        background = point.background()
        equation, region = equation_floats(background, "axial", 2), window(background, 2)
        spent, result = seconds(lambda equation=equation, region=region: search(equation, region))
        first = first or spent
        found = len(result.zeros)
        growth = f"{spent / first:5.1f} times κ = 0"
        print(
            f"  κ = {text:8s} {spent:6.2f} s, {growth}, found {found}, counted {result.counted}, {found / spent:.0f}/s"
        )

    for text in ("1/2", "9/10", "1"):
        point = Point.canonical("axial", 4, Fraction(text), 2)
        document = solve.search(point, Fraction(3, 2))
        modes = len(document["modes"])
        spent, _ = seconds(lambda point=point, document=document: solve.witness(point, document))
        print(f"κ = {text}: {modes} modes, witness {spent:.2f} s, {spent / modes:.3f} s a mode")
        for depth, precision in LADDER:
            spent, body = seconds(lambda p=point, d=document, n=depth, m=precision: solve.cell(p, d, n, m))
            ok = sum(mode["status"] == "ok" for mode in body["modes"])
            print(f"  cell N = {depth}, P = {precision}: {spent:.2f} s, {spent / modes:.3f} s a mode, {ok} ok")


if __name__ == "__main__":
    main()
