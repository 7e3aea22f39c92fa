"""Spectral method in double precision: the whole spectrum as one eigenvalue problem.

On every side ``u = c + hx`` of a polygonal path (`spectral_path`) the regularised equation, in
its self-adjoint form and times ``h²``,

    (p φ)'' - (p' φ)' + σh [2 (Hφ)' - H'φ] - h² (σ²Q + W) φ = 0        (primes: d/dx),

is integrated twice in Chebyshev coefficients of ``φ``. What is left is multiplication by polynomials and integration,
both banded; there is no differentiation matrix, hence no loss of digits with resolution. The two constants of
integration take the rows 0 and 1 away. A side keeps one row more for each singular end (there the equation itself is
the boundary condition: ``φ`` is smooth), and ``φ`` and ``dφ/du`` are continuous at the corners. The result is the
quadratic pencil ``(A0 + σA1 + σ²A2) v = 0``, ``σ = iω``, units ``r_h = 1``.

The rows of the corners make ``A2`` singular, so the pencil is linearised about a target ``σ₀``: with
``μ = 1/(σ - σ₀)``, ``B0 = A(σ₀)`` and ``B1 = A'(σ₀)`` it reads ``(μ² + μ B0⁻¹B1 + B0⁻¹A2) v = 0``, a standard problem
of twice the size. Collocation with ``Q`` divided out needs no target and has the same roots, but its second
derivatives cost digits (*measured*, n = 6, κ = 3/4: overtone 4 to 3 digits; here to 14).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import Any

import numpy as np

from knell.methods import chebyshev
from knell.methods.spectral_path import OTHER_TILT, TILT, Path, bent_path, orders
from knell.physics import polynomial
from knell.physics.equation import Equation


@dataclass(frozen=True)
class Side:
    """Chebyshev series of ``p/h²``, its derivative, ``H/h``, its derivative, ``Q`` and ``W`` on one side."""

    p: list[Any]
    dp: list[Any]
    H: list[Any]
    dH: list[Any]
    Q: list[Any]
    W: list[Any]
    half: Any
    degree: int
    rows: int

    def map(self, convert: Callable[[Any], Any]) -> Side:
        """The same side with every number passed through ``convert``."""
        series = ([convert(x) for x in part] for part in (self.p, self.dp, self.H, self.dH, self.Q, self.W))
        return Side(*series, convert(self.half), self.degree, self.rows)


@dataclass(frozen=True)
class Pencil:
    """``(A0 + σA1 + σ²A2) v = 0`` over complex doubles."""

    A0: np.ndarray
    A1: np.ndarray
    A2: np.ndarray

    def value(self, sigma: complex) -> np.ndarray:
        return self.A0 + sigma * self.A1 + sigma**2 * self.A2

    def slope(self, sigma: complex) -> np.ndarray:
        return self.A1 + 2 * sigma * self.A2


def sides(equation: Equation, path: Path, degrees: Sequence[int], number: Any = complex) -> list[Side]:
    """The equation's series on every side, over ``number`` (``complex`` or `flint.acb`)."""
    last = len(degrees) - 1
    return [
        _side(equation, number(left), number(right), degree, (k == 0) + (k == last))
        for k, ((left, right), degree) in enumerate(zip(path.sides, degrees, strict=True))
    ]


def _side(equation: Equation, left: Any, right: Any, degree: int, singular_ends: int) -> Side:
    centre, half = (left + right) / 2, (right - left) / 2

    def on_side(part: Sequence[Any], scale: Any) -> tuple[list[Any], list[Any]]:
        monomials, power = [], scale
        for c in polynomial.shift(part, centre):
            monomials.append(c * power)
            power = power * half
        return chebyshev.from_monomials(monomials), chebyshev.from_monomials(polynomial.derivative(monomials))

    p, dp = on_side(equation.p, 1 / (half * half))
    H, dH = on_side(equation.H, 1 / half)
    Q, _ = on_side(equation.Q, 1 + 0 * half)
    W, _ = on_side(equation.W, 1 + 0 * half)
    return Side(p, dp, H, dH, Q, W, half, degree, degree - 1 + singular_ends)


def pencil(parts: Sequence[Side]) -> Pencil:
    """The pencil of all sides; unknowns are their Chebyshev coefficients, side after side."""
    size = sum(side.degree + 1 for side in parts)
    A0, A1, A2 = (np.zeros((size, size), complex) for _ in range(3))
    row = column = 0
    for side in parts:
        block = slice(row, row + side.rows), slice(column, column + side.degree + 1)
        A0[block], A1[block], A2[block] = _blocks(side)
        row, column = row + side.rows, column + side.degree + 1
    column = 0
    for left, right in pairwise(parts):
        middle, end = column + left.degree + 1, column + left.degree + right.degree + 2
        k, j = np.arange(left.degree + 1), np.arange(right.degree + 1)
        sign = (-1.0) ** j
        A0[row, column:middle], A0[row, middle:end] = 1, -sign
        # T_k' = ±k² at the ends; both derivatives are divided by degree² of the left side to keep the scale.
        A0[row + 1, column:middle] = (k / left.degree) ** 2
        A0[row + 1, middle:end] = sign * (j / left.degree) ** 2 * complex(left.half / right.half)
        row, column = row + 2, middle
    return Pencil(A0, A1, A2)


def _blocks(side: Side) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """``p - I p' - I²W``, ``2I H - I² H'`` and ``-I² Q`` with the rows 0 and 1 taken away."""
    rows, columns = side.rows + 2, side.degree + 1
    once = chebyshev.integration_matrix(rows, rows + 1)
    twice = once @ chebyshev.integration_matrix(rows + 1, rows + 2)

    def times(series: Sequence[Any], count: int) -> np.ndarray:
        return chebyshev.product_matrix([complex(a) for a in series], count, columns)

    A0 = times(side.p, rows) - once @ times(side.dp, rows + 1) - twice @ times(side.W, rows + 2)
    A1 = 2 * once @ times(side.H, rows + 1) - twice @ times(side.dH, rows + 2)
    A2 = -twice @ times(side.Q, rows + 2)
    return A0[2:], A1[2:], A2[2:]


def frequency_range(equation: Equation) -> tuple[float, float]:
    """About the least ``|σ|`` of a mode and the greatest of the first overtones; ``W(0) = ℓ(ℓ+1)`` for every field."""
    angular = abs(float(equation.W[0])) ** 0.5
    return 0.2 + 0.2 * angular, 1.5 + 0.3 * angular


def spectrum(equation: Equation, path: Path, resolution: float = 14, target: complex | None = None) -> np.ndarray:
    """All eigenvalues ``σ`` on one path, artefacts and badly resolved ones included, nearest to ``target`` first.

    ``equation`` over doubles; ``resolution`` is the number of digits that truncation should leave
    (`spectral_path.orders`). The default target ``0.6 + 0.2 i (ℓ(ℓ+1))^(1/2)`` lies among the first overtones. Raises
    `numpy.linalg.LinAlgError` when the target is an eigenvalue.
    """
    centre = 0.6 + 0.2j * abs(equation.W[0]) ** 0.5 if target is None else target
    matrices = pencil(sides(equation, path, orders(path, resolution, frequency_range(equation))))
    size = len(matrices.A0)
    solved = np.linalg.solve(matrices.value(centre), np.hstack([matrices.slope(centre), matrices.A2]))
    companion = np.zeros((2 * size, 2 * size), complex)
    companion[:size] = -solved
    companion[size:, :size] = np.eye(size)
    mu = np.linalg.eigvals(companion)
    mu = mu[np.argsort(-abs(mu), kind="stable")]
    return centre + 1 / mu[mu != 0]


@dataclass(frozen=True)
class PersistentRoot:
    """``sigma`` and the relative ``digits`` to which the other spectra have it too."""

    sigma: complex
    digits: float


def persistent_roots(
    equation: Equation,
    tilts: tuple[float, float] = (TILT, OTHER_TILT),
    resolutions: tuple[float, float] = (14, 18),
    least_digits: float = 3,
) -> list[PersistentRoot]:
    """The roots that two resolutions and two tilts share to ``least_digits``, least damped first.

    Roots of the discretised branch cut and of too coarse a resolution move and are dropped. The value is that of the
    first tilt at the higher resolution; its digits are the worse of the two agreements.
    """
    first, second = (bent_path(equation, tilt) for tilt in tilts)
    best = spectrum(equation, first, resolutions[1])
    others = [spectrum(equation, first, resolutions[0]), spectrum(equation, second, resolutions[1])]
    found = []
    for sigma in best:
        distance = max(float(abs(other - sigma).min()) for other in others)
        digits = -np.log10(max(distance / abs(sigma), np.finfo(float).eps))
        if digits >= least_digits:
            found.append(PersistentRoot(complex(sigma), float(digits)))
    return sorted(found, key=lambda root: root.sigma.real)
