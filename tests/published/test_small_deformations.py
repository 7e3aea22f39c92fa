"""``d(Mω)/dκ`` at ``κ = 0`` against published coefficients: an outside check of the whole deformed chain.

V. Cardoso, M. Kimura, A. Maselli, E. Berti, C. Macedo, R. McManus, Phys. Rev. D 99, 104077 (2019): the axial
``ℓ = 2`` potential of Schwarzschild plus ``δV = F/r_h² Σ α_k (r_h/r)^k``, ``F = 1 - r_h/r``, has the fundamental
``r_h ω = r_h ω₀ + Σ α_k e_k`` to first order. Values of ``e_k`` quoted from memory, recomputed.

A metric ``f = F (1+ζ)`` is brought to that form by ``Ψ = χ/√(1+ζ)``, which gives, to first order and with ``ζ_h``
the value at the horizon, an equation of Schwarzschild's tortoise coordinate with

    r_h ω (1 - ζ_h) = r_h ω₀ + Σ α_k e_k,
    F Σ α_k u^k = r_h² [δV - 2ζV₀ + F (Fζ'/2)'] - 2 (r_h ω₀)² (ζ_h - ζ),       ' = r_h d/dr = -u² d/du
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from fractions import Fraction
from math import hypot

import numpy as np
import pytest
from mpmath import mp, mpc

from knell.physics.background import PowerLaw

# Re and Im of e_0 … e_7 as printed.
PRINTED = (
    (".247252", ".092643"),
    (".159855", ".018208"),
    (".0966322", "-.0024155"),
    (".0584908", "-.00371786"),
    (".0366794", "-.000438698"),
    (".0240379", ".00273079"),
    (".0163427", ".00484263"),
    (".0113636", ".00601394"),
)
E = {k: complex(float(re), float(im)) for k, (re, im) in enumerate(PRINTED)}


def half_unit(text: str) -> float:
    """Half a unit of the last printed decimal."""
    return 0.5 * 10.0 ** -len(text.split(".")[1])


ROUNDING = {k: hypot(half_unit(re), half_unit(im)) for k, (re, im) in enumerate(PRINTED)}

Powers = dict[int, complex]  # Σ x_k u^k, k of either sign

LAPSE: Powers = {0: 1, 1: -1}
REGGE_WHEELER: Powers = {2: 6, 3: -9, 4: 3}  # V₀ = (1-u) (6u² - 3u³)


def total(*parts: Mapping[int, complex]) -> Powers:
    return {k: sum(a.get(k, 0) for a in parts) for k in set().union(*parts)}


def times(a: Mapping[int, complex], b: Mapping[int, complex]) -> Powers:
    return total(*({j + k: x * y for k, y in b.items()} for j, x in a.items()))


def scaled(a: Mapping[int, complex], factor: complex) -> Powers:
    return {k: factor * x for k, x in a.items()}


def slope(a: Mapping[int, complex]) -> Powers:
    """``r_h d/dr``."""
    return {k + 1: -k * x for k, x in a.items()}


def over_lapse(a: Mapping[int, complex]) -> Powers:
    """``a / (1-u)`` of a polynomial that vanishes at ``u = 1``: partial sums of its coefficients."""
    return {k: sum(a.get(j, 0) for j in range(k + 1)) for k in range(max(a))}


def shift(alpha: Mapping[int, complex], e: Mapping[int, complex]) -> complex:
    return sum(x * e[k] for k, x in alpha.items() if x)


def uncertainty(alpha: Mapping[int, complex], rounding: Mapping[int, float]) -> float:
    """The most that the rounding of the printed ``e_k`` can change `shift`."""
    return sum(abs(x) * rounding[k] for k, x in alpha.items() if x)


def relabelling(m: int, omega: complex) -> Powers:
    """``α_k`` of a mere change of the radius, ``r → r + F u^m``: ``Σ α_k e_k = 0`` whatever the ``e_k`` are.

    It is a metric change ``ζ = -F (u^m)'`` together with ``δV = F V₀' u^m``. (Identities of this kind:
    M. Kimura, Phys. Rev. D 101, 064031, 2020; derived anew here.)
    """
    eta = {m: 1}
    bend = slope(times(LAPSE, slope(times(LAPSE, slope(eta)))))
    return total(
        times(slope(REGGE_WHEELER), eta),
        scaled(times(slope(eta), REGGE_WHEELER), 2),
        scaled(bend, -0.5),
        scaled(slope(eta), -2 * omega**2),
    )


def with_next(omega: complex) -> tuple[dict[int, complex], dict[int, float]]:
    """``e_0 … e_8`` and their uncertainties, the last from the printed ones by `relabelling`."""
    alpha = relabelling(3, omega)
    rest = {k: x for k, x in alpha.items() if k != 8}
    e_8 = -shift(rest, E) / alpha[8]
    return E | {8: e_8}, ROUNDING | {8: uncertainty(rest, ROUNDING) / abs(alpha[8])}


def power_law(n: int, omega: complex) -> tuple[Powers, float]:
    """``α_k/q`` and ``ζ_h/q`` of ``f = (1-u) [1 - q (u + … + u^(n-1))]`` to first order in ``q``."""
    zeta = {k: -1.0 for k in range(1, n)}
    zeta_h = -(n - 1.0)
    deformed = times(LAPSE, zeta)  # δf
    # V = f u² W with W = 6 + 2(f-1) + u f_u = 6 + 2(f-1) - f'/u.
    delta_w = total(scaled(deformed, 2), {k - 1: -x for k, x in slope(deformed).items()})
    delta_v = total(times(zeta, REGGE_WHEELER), times(times(LAPSE, {2: 1}), delta_w))
    right = total(
        delta_v,
        scaled(times(zeta, REGGE_WHEELER), -2),
        scaled(times(LAPSE, slope(times(LAPSE, slope(zeta)))), 0.5),
        scaled(total({0: zeta_h}, scaled(zeta, -1)), -2 * omega**2),
    )
    assert abs(sum(right.values())) < 1e-12 * max(map(abs, right.values()))  # F divides it
    return over_lapse(right), zeta_h


@pytest.fixture(scope="module")
def omega_0(schwarzschild: PowerLaw, digits_of: Callable[..., mpc]) -> complex:
    """``r_h ω₀ = 2Mω₀`` of the fundamental."""
    return 2 * complex(digits_of(schwarzschild, "axial", 2, 0.3736716 - 0.0889623j, 24))


@pytest.mark.parametrize("m", [-1, 0, 1, 2])
def test_printed_coefficients_survive_relabelling(m: int, omega_0: complex) -> None:
    """A check of the recalled digits that needs no deformed hole: all of ``e_0 … e_7`` take part."""
    alpha = relabelling(m, omega_0)
    assert abs(shift(alpha, E)) <= uncertainty(alpha, ROUNDING)


@pytest.mark.parametrize("n", [2, 3, 4, 5, 6])
def test_derivative_at_schwarzschild(
    n: int, omega_0: complex, modes: Callable[..., np.ndarray], digits_of: Callable[..., mpc]
) -> None:
    e, rounding = with_next(omega_0)
    alpha, zeta_h = power_law(n, omega_0)
    c_n = PowerLaw(n, Fraction(0)).c_n
    # Mω = (1+q)/2 r_h ω, and dκ/dq = 2^(n-1)/c_n at q = 0.
    per_q = (omega_0 * (1 + zeta_h) + shift(alpha, e)) / 2
    per_coupling = float(c_n / 2 ** (n - 1))
    published = per_coupling * per_q
    bound = per_coupling * uncertainty(alpha, rounding) / 2

    # Central difference: the error is q² times a third derivative of order one, 1e-16, and 1e-24/q of rounding.
    q = Fraction(1, 10**8)
    with mp.workdps(40):
        above, below = (digits_of(PowerLaw.from_q(n, x), "axial", 2, omega_0 / 2, 24) for x in (q, -q))
        precise = complex((above - below) / (2 * mp.mpf(q.numerator) / q.denominator)) * per_coupling
    assert abs(precise - published) <= bound

    # The blind search in doubles, κ = ±1/1000: noise 1e-12/κ, and κ² times a third derivative of order one.
    step = Fraction(1, 1000)
    above, below = (modes(PowerLaw(n, k), "axial", 2, Fraction(1, 5))[0] for k in (step, -step))
    assert abs((above - below) / (2 * float(step)) - precise) < 1e-6
