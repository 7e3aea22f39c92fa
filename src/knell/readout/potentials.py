"""Effective potentials outside the horizon, with their peak and the light ring marked.

    M²V(r) = f(u) u² W(u) (M/r_h)²,     u = r_h/r

One panel for each exponent of each field, at its lowest ``ℓ`` of the survey. The light ring is
where null rays circle; the peak meets it only as ``ℓ`` grows.
"""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import numpy as np
import xarray as xr
from matplotlib.axes import Axes
from matplotlib.cm import ScalarMappable
from matplotlib.colors import Normalize
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from numpy.typing import NDArray

from knell.physics import polynomial
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_floats
from knell.physics.landmarks import light_ring
from knell.readout import marks, style

_PANELS_PER_ROW = 2
_FARTHEST = 6.0
_POINTS = 600
_EDGE: dict[str, Any] = {"markeredgecolor": "black", "markeredgewidth": 0.4, "linestyle": ""}
_PEAK: dict[str, Any] = {"marker": "^", "markersize": 5, **_EDGE}
_RING: dict[str, Any] = {"marker": "o", "markersize": 4, **_EDGE}

Doubles = NDArray[np.float64]


def potential(background: PowerLaw, field: str, ell: int, radius: Doubles | float) -> Doubles:
    """``M²V`` at ``radius`` ``r/M``, on and outside the horizon."""
    equation = equation_floats(background, field, ell)
    u = 1 / (equation.mass * np.asarray(radius))
    return polynomial.evaluate(equation.f, u) * u * u * polynomial.evaluate(equation.W, u) * equation.mass**2


def peak(background: PowerLaw, field: str, ell: int) -> tuple[float, float]:
    """``r/M`` and ``M²V`` at the outermost maximum of the potential.

    From the roots of ``d(f u² W)/du`` in ``0 < u < 1``. Raises `ArithmeticError` if there is none.
    """
    equation = equation_floats(background, field, ell)
    product = polynomial.multiply(polynomial.multiply(equation.f, [0.0, 0.0, 1.0]), equation.W)
    slope = polynomial.derivative(product)
    curvature = polynomial.derivative(slope)
    roots = np.roots(slope[::-1])
    stationary = sorted(z.real for z in roots if abs(z.imag) < 1e-9 and 1e-9 < z.real < 1 - 1e-9)
    for u in stationary:
        if polynomial.evaluate(curvature, u) < 0:
            return 1 / (equation.mass * u), polynomial.evaluate(product, u) * equation.mass**2
    raise ArithmeticError("the potential has no maximum outside the horizon")


def draw(dataset: xr.Dataset) -> Figure:
    """``M²V`` against ``r/M`` for every coupling of the survey and for Schwarzschild."""
    panels = [(str(field), int(n)) for field in dataset.field.values for n in dataset.exponent.values]
    columns = min(_PANELS_PER_ROW, len(panels))
    rows = -(-len(panels) // columns)
    figure = style.new_figure(2.1 * rows + 0.6)
    grid = figure.subplots(rows, columns, squeeze=False, sharex=True, sharey="row")
    couplings = [Fraction(str(x)) for x in dataset.coupling_exact.values]
    norm = Normalize(min(0.0, *map(float, couplings)), max(1.0, *map(float, couplings)))
    for axes, (field, exponent) in zip(grid.flat, panels, strict=False):
        ell = marks.ells_of(dataset, field)[0]
        _panel(axes, field, ell, exponent, couplings, norm)
        axes.set_title(f"{field}, $\\ell = {ell}$, $n = {exponent}$")
    for axes in grid.flat[len(panels) :]:
        axes.set_axis_off()
    for axes in grid[-1]:
        axes.set_xlabel("$r/M$")
    for axes in grid[:, 0]:
        axes.set_ylabel("$M^2 V$")
    bar = figure.colorbar(ScalarMappable(norm, style.SEQUENTIAL), ax=grid, aspect=40, pad=0.01)
    bar.set_label(r"coupling $\kappa$ (1 extremal)")
    _legend(figure)
    return figure


def _panel(axes: Axes, field: str, ell: int, exponent: int, couplings: list[Fraction], norm: Normalize) -> None:
    _curve(axes, PowerLaw(exponent, Fraction(0)), field, ell, color="black", linestyle=(0, (5, 2)), linewidth=1.2)
    for coupling in couplings:
        if coupling:
            _curve(axes, PowerLaw(exponent, coupling), field, ell, color=style.SEQUENTIAL(norm(float(coupling))))
    axes.axhline(0, color=style.GREY, linewidth=0.5)
    axes.set_xlim(1, _FARTHEST)


def _curve(axes: Axes, background: PowerLaw, field: str, ell: int, **look: Any) -> None:
    """One potential from its horizon outwards, its peak and the light ring on it."""
    horizon = 1 / equation_floats(background, field, ell).mass
    # Denser near the horizon, where the potential rises.
    radius = horizon + (_FARTHEST - horizon) * np.linspace(0, 1, _POINTS) ** 2
    axes.plot(radius, potential(background, field, ell, radius), **look)
    ring = light_ring(background).radius
    ring_height = float(potential(background, field, ell, ring))
    axes.plot(*peak(background, field, ell), **_PEAK, color=look["color"])
    axes.plot(ring, ring_height, **_RING, color=look["color"])


def _legend(figure: Figure) -> None:
    entries = {
        "Schwarzschild": Line2D([], [], color="black", linestyle=(0, (5, 2)), linewidth=1.2),
        "deformed": Line2D([], [], color=style.GREY),
        "peak of the potential": Line2D([], [], color=style.GREY, **_PEAK),
        "light ring": Line2D([], [], color=style.GREY, **_RING),
    }
    figure.legend(list(entries.values()), list(entries), loc="outside lower center", ncols=4)
