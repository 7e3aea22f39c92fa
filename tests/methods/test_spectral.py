"""The spectrum in doubles: complete against independent counts, right against published values, blind to the cut."""

from fractions import Fraction

import numpy as np
import pytest

from knell.methods.spectral import frequency_range, pencil, persistent_roots, sides, spectrum
from knell.methods.spectral_path import OTHER_TILT, bent_path, orders
from knell.physics.background import PowerLaw
from knell.physics.equation import equation_floats

# E. W. Leaver, Proc. R. Soc. A 402, 285 (1985), table 1, 2Mω, ℓ = 2, n = 1 to 7; quoted from memory, recomputed, ±1e-6
LEAVER = (
    0.747343 - 0.177925j,
    0.693422 - 0.547830j,
    0.602107 - 0.956554j,
    0.503010 - 1.410296j,
    0.415029 - 1.893690j,
    0.338599 - 2.391216j,
    0.266505 - 2.895822j,
)
# H. Onozawa et al., Phys. Rev. D 53, 7033 (1996), scalar Mω, ℓ = 0, 1, 2; quoted from memory, recomputed
ONOZAWA = {
    0: (0.13346 - 0.095844j, 0.092965 - 0.33065j, 0.075081 - 0.58833j),
    1: (0.37764 - 0.089384j, 0.34818 - 0.27614j),
    2: (0.62657 - 0.088748j,),
}


def modes(background, field, ell, depth=1.5):
    """``Mω`` and digits of the persistent roots with ``Re ω > 0`` down to ``depth``."""
    equation = equation_floats(background, field, ell)
    found = [(-1j * root.sigma * equation.mass, root.digits) for root in persistent_roots(equation)]
    # the least Re Mω of a mode at these points is 7e-9 and its digits are 13: 1e-10 keeps modes and drops the axis
    return [(omega, digits) for omega, digits in found if omega.real > 1e-10 and -depth < omega.imag < 0]


def test_schwarzschild_overtones_of_leaver_and_no_others():
    found = modes(PowerLaw(3, Fraction(0)), "axial", 2)
    assert len(found) == len(LEAVER)
    for (omega, digits), quoted in zip(found, LEAVER, strict=True):
        assert digits > 9
        # half a unit of the last printed digit, and one unit of doubt: 1.5e-6 in each part
        assert max(abs((2 * omega - quoted).real), abs((2 * omega - quoted).imag)) < 1.5e-6


@pytest.mark.parametrize("ell", ONOZAWA)
def test_extremal_scalar_overtones_of_onozawa(ell):
    found = modes(PowerLaw(2, Fraction(1)), "scalar", ell)
    for (omega, digits), quoted in zip(found, ONOZAWA[ell], strict=False):
        assert digits > 9
        assert max(abs((omega - quoted).real), abs((omega - quoted).imag)) < 1.5e-5


@pytest.mark.parametrize(
    ("field", "ell", "quoted"),
    [
        ("electromagnetic", 1, 0.2483 - 0.0925j),
        ("electromagnetic", 2, 0.4576 - 0.0950j),
        ("scalar", 0, 0.1105 - 0.1049j),
        ("scalar", 2, 0.4836 - 0.0968j),
    ],
)
def test_schwarzschild_fundamentals_of_other_fields(field, ell, quoted):
    # E. Berti, V. Cardoso, A. Starinets, Class. Quantum Grav. 26, 163001 (2009); quoted from memory, recomputed
    omega, digits = modes(PowerLaw(2, Fraction(0)), field, ell)[0]
    assert digits > 9
    assert max(abs((omega - quoted).real), abs((omega - quoted).imag)) < 1e-4


@pytest.mark.parametrize(("coupling", "count"), [("1/2", 7), ("3/4", 9), ("9/10", 12), ("1", 7)])
def test_every_mode_of_a_window_persists(coupling, count):
    # number of modes with Re ω > 0 and Im Mω > -1.5, near-axis ones included, counted by the winding of
    # an unrelated match and of an unrelated integration in the complex radius
    found = modes(PowerLaw(4, Fraction(coupling)), "axial", 2)
    assert len(found) == count
    assert min(digits for _, digits in found) > 8


def test_roots_of_the_branch_cut_are_seen_and_dropped():
    equation = equation_floats(PowerLaw(3, Fraction(1, 4)), "axial", 2)
    one, other = (spectrum(equation, bent_path(equation, tilt)) for tilt in (OTHER_TILT, 1.3))
    # between the tilted cuts: damped, on the continued sheet, and no mode's mirror image so close to the axis
    cut = one[(one.real > 0) & (one.real < 1) & (one.imag < -1e-3) & (one.imag > -1.0)]
    assert len(cut) > 3
    assert min(abs(other - sigma).min() for sigma in cut) > 1e-3
    kept = np.array([root.sigma for root in persistent_roots(equation)])
    assert min(abs(kept - sigma).min() for sigma in cut) > 1e-3


def test_a_perturbed_coefficient_moves_the_modes_in_proportion():
    background = PowerLaw(5, Fraction(3, 4))
    plain = equation_floats(background, "axial", 2)
    seeds = np.array([root.sigma for root in persistent_roots(plain) if root.digits > 13 and root.sigma.imag > 0])
    shifts = []
    for size in (1e-6, 2e-6):
        W = list(plain.W)
        W[1] *= 1 + size
        changed = type(plain)(plain.f, plain.p, plain.H, plain.Q, tuple(W), plain.degenerate)
        roots = spectrum(changed, bent_path(changed), 18)
        shifts.append(np.array([roots[abs(roots - sigma).argmin()] - sigma for sigma in seeds]))
    assert len(seeds) >= 3
    assert (abs(shifts[0]) > 1e-8).all()
    # second order is 1e-6 of the first; rounding 1e-13 of 1e-8
    assert abs(shifts[1] / shifts[0] - 2).max() < 1e-4


def test_an_eigenvalue_leaves_the_pencil_singular():
    equation = equation_floats(PowerLaw(6, Fraction(9, 10)), "axial", 3)
    path = bent_path(equation)
    matrices = pencil(sides(equation, path, orders(path, 18, frequency_range(equation))))
    root = max(persistent_roots(equation), key=lambda root: root.digits).sigma
    # The least singular value is |A'| times the distance to the eigenvalue, or the rounding of the decomposition, at
    # most size · ε · |A|; away from the eigenvalue it is far larger.
    near, far = (np.linalg.svd(matrices.value(s), compute_uv=False) for s in (root, root * 1.05))
    assert near[-1] <= len(near) * np.finfo(float).eps * near[0]
    assert far[-1] > 1000 * near[-1]
