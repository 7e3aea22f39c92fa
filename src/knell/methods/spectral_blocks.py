"""Solves with the bordered pencil over FLINT numbers, side by side, for modes that defeat an inverse in doubles.

Near a degenerate horizon the second solution comes so close that the pencil's condition passes ``10^16``. Then

    [[A(σ), c], [wᵀ, 0]] [x, y] = [b, l]

is solved in high precision. On each side the equation with given values at its corners is a dense system of its own;
the values at the corners and ``y`` follow from a small system, the continuity of slopes and ``wᵀx = l``. The cost is
the sum of the cubes of the sides and not the cube of the sum.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence

from flint import acb, acb_mat

from knell.methods.spectral import Side
from knell.methods.spectral_residual import coefficients, corner_rows


def solve_bordered(
    parts: Sequence[Side], sigma: acb, right: Sequence[acb], border: Sequence[acb], weight: Sequence[acb], last: acb
) -> tuple[list[acb], acb]:
    """``x`` and ``y``. ``c = border`` is taken to vanish in the rows of the corners, as ``A'(σ)v`` does.

    Raises `ZeroDivisionError` when a system is singular to the working precision.
    """
    corners = len(parts) - 1
    conditions = len(right) - 2 * corners
    jumps, bends = right[conditions::2], right[conditions + 1 :: 2]
    local = _local_solutions(parts, sigma, right, border)

    # x = base + Σ g_j value_j - y Σ border_i, with g_j the value of x on the left of corner j.
    base: list[acb] = []
    along_border: list[acb] = []
    along_values: list[list[acb]] = [[] for _ in range(corners)]
    for i, (part, columns) in enumerate(zip(parts, local, strict=True)):
        particular, bordered, from_left, from_right = columns
        jump = jumps[i - 1] if i > 0 else acb(0)
        base += [a - jump * b for a, b in zip(particular, from_left, strict=True)]
        along_border += [-a for a in bordered]
        for j, column in enumerate(along_values):
            column += from_right if j == i else from_left if j == i - 1 else [acb(0)] * (part.degree + 1)

    directions = [*along_values, along_border]
    matrix, rest = acb_mat(corners + 1, corners + 1), acb_mat(corners + 1, 1)
    for k, direction in enumerate(directions):
        for j, value in enumerate(_joints(parts, direction, weight)):
            matrix[j, k] = value
    for j, (wanted, value) in enumerate(zip([*bends, last], _joints(parts, base, weight), strict=True)):
        rest[j, 0] = wanted - value
    shares = matrix.solve(rest, algorithm="approx").entries()
    for share, direction in zip(shares, directions, strict=True):
        base = [(a + share * b).mid() for a, b in zip(base, direction, strict=True)]
    return base, shares[-1]


def _joints(parts: Sequence[Side], vector: Sequence[acb], weight: Sequence[acb]) -> list[acb]:
    """The jump of the slope at each corner, then ``wᵀ vector``."""
    product = sum((w * x for w, x in zip(weight, vector, strict=True)), acb(0))
    return [*corner_rows(parts, vector)[1::2], product]


def _local_solutions(
    parts: Sequence[Side], sigma: acb, right: Sequence[acb], border: Sequence[acb]
) -> list[list[list[acb]]]:
    """For each side the solutions for ``right``, for ``border``, and with value 1 at its left or right corner."""
    solutions, row = [], 0
    for i, side in enumerate(parts):
        size = side.degree + 1
        matrix, columns = acb_mat(size, size), acb_mat(size, 4)
        _fill(matrix, side, sigma)
        for k in range(side.rows):
            columns[k, 0], columns[k, 1] = right[row + k], border[row + k]
        corner = side.rows
        if i > 0:
            for k in range(size):
                matrix[corner, k] = (-1) ** k
            columns[corner, 2] = 1
            corner += 1
        if i < len(parts) - 1:
            for k in range(size):
                matrix[corner, k] = 1
            columns[corner, 3] = 1
        table = matrix.solve(columns, algorithm="approx").tolist()
        solutions.append([[line[j].mid() for line in table] for j in range(4)])
        row += side.rows
    return solutions


def _fill(matrix: acb_mat, side: Side, sigma: acb) -> None:
    """The rows of the equation, column by column: three short products and two integrations of ``T_k``."""
    first, zeroth = coefficients(side, sigma)
    for k in range(side.degree + 1):
        inner = _integrated(_product(zeroth, k))
        for j, value in _product(first, k).items():
            inner[j] += value
        outer = _integrated(inner)
        for j, value in _product(side.p, k).items():
            outer[j] += value
        for j, value in outer.items():
            if 2 <= j < side.rows + 2:
                matrix[j - 2, k] = value


def _product(series: Sequence[acb], k: int) -> defaultdict[int, acb]:
    """``series * T_k`` as a sparse series."""
    out: defaultdict[int, acb] = defaultdict(acb)
    for j, a in enumerate(series):
        out[k + j] += a / 2
        out[abs(k - j)] += a / 2
    return out


def _integrated(series: defaultdict[int, acb]) -> defaultdict[int, acb]:
    """The antiderivative of a sparse series, without its constant."""
    out: defaultdict[int, acb] = defaultdict(acb)
    for j, a in series.items():
        out[j + 1] += a / (2 * (j + 1)) if j > 0 else a
        if j > 1:
            out[j - 1] -= a / (2 * (j - 1))
    return out
