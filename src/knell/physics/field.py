"""Fields: the potential ``V = f u² W(u)`` of each perturbation, in units ``r_h = 1``.

    axial gravitational   W = ℓ(ℓ+1) + 2(f-1) + u f_u     ℓ >= 2
    electromagnetic       W = ℓ(ℓ+1)                      ℓ >= 1
    scalar                W = ℓ(ℓ+1) - u f_u              ℓ >= 0

For ``f = 1 - 2M/r`` the first is the Regge-Wheeler potential. On a deformed background
it assumes that the effective source is not perturbed in the axial sector.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from knell.physics import polynomial

LOWEST_ELL = {"axial": 2, "electromagnetic": 1, "scalar": 0}
FIELDS = tuple(LOWEST_ELL)


def check_field(field: str, ell: int) -> None:
    """Raise `ValueError` for an unknown field or an ``ℓ`` below the field's lowest."""
    if field not in LOWEST_ELL:
        raise ValueError(f"field {field!r}: must be one of {', '.join(FIELDS)}")
    if isinstance(ell, bool) or not isinstance(ell, int) or ell < LOWEST_ELL[field]:
        raise ValueError(f"ell {ell} for the {field} field: must be a whole number, {LOWEST_ELL[field]} or more")


def effective_w(f: Sequence[Any], field: str, ell: int) -> list[Any]:
    """Coefficients of ``W(u)`` for the coefficients of ``f(u)``, lowest power first."""
    check_field(field, ell)
    angular = ell * (ell + 1) + 0 * f[0]
    u_slope = [k * x for k, x in enumerate(f)]
    if field == "axial":
        return polynomial.add(polynomial.add(polynomial.scale(f, 2), [angular - 2]), u_slope)
    if field == "scalar":
        return polynomial.add([angular], polynomial.scale(u_slope, -1))
    return [angular]
