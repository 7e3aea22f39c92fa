"""The variables of ``survey.nc``: dimensions, types and what each says of itself (CF conventions).

Three groups of modes share one set of variables: the principal family (overtones), the
near-axis family, and Schwarzschild, the reference of every difference. Flags are bytes that
start at 0 for "not surveyed", so they stay whole numbers when read; missing numbers are NaN.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from knell.survey.verdict import BASES, MEANINGS, ROLES, Verdict

POINT = ("field", "exponent", "coupling", "ell")
HOLE = ("exponent", "coupling")
NOT_SURVEYED = 0
BASIS_FLAGS = {basis: flag for flag, basis in enumerate(BASES, start=1)}
ROLE_FLAGS = {role: flag for flag, role in enumerate(ROLES)}
STATUS_FLAGS = {status: flag for flag, status in enumerate(("ok", "starved", "refused", "failed", "absent"), start=1)}
# Not asked is 0 here, the flag of points that are not surveyed.
COMPLETE_FLAGS = {"not_asked": 0, "not_proven": 1, "proven": 2}
GROWING_FLAGS = {"not_asked": 0, "none": 1, "count": 2, "energy": 3}
SEARCH_FLAGS = {"ok": 1, "failed": 2}


@dataclass(frozen=True)
class Variable:
    """One variable: its dimensions, its NumPy type (`str` for text) and its attributes."""

    dims: tuple[str, ...]
    dtype: type
    attributes: dict[str, Any] = field(default_factory=dict)

    @property
    def fill(self) -> Any:
        """What a place without a value holds."""
        if self.dtype is str:
            return ""
        return np.nan if self.dtype is np.float64 else NOT_SURVEYED


def number(dims: tuple[str, ...], long_name: str, units: str = "1", **more: Any) -> Variable:
    return Variable(dims, np.float64, {"long_name": long_name, "units": units, **more})


def whole(dim: str, long_name: str) -> Variable:
    """A coordinate of whole numbers."""
    return Variable((dim,), np.int32, {"long_name": long_name, "units": "1"})


def text(dims: tuple[str, ...], long_name: str) -> Variable:
    return Variable(dims, str, {"long_name": long_name})


def flags(dims: tuple[str, ...], long_name: str, meanings: Iterable[str], **more: Any) -> Variable:
    """A byte that stands for one of the ``meanings``, counted from 0."""
    meanings = tuple(meanings)
    values = np.arange(len(meanings), dtype=np.int8)
    attributes = {"long_name": long_name, "flag_values": values, "flag_meanings": " ".join(meanings), **more}
    return Variable(dims, np.int8, attributes)


def mode_variables(prefix: str, dims: tuple[str, ...], whose: str) -> dict[str, Variable]:
    """The variables every mode has. Overtones carry the plain names ``digits``, ``verdict``, …"""
    value = prefix or "frequency_"
    agreements = (*dims, "agreement")
    verdicts = " ".join(f"{verdict.name}: {MEANINGS[verdict]}." for verdict in reversed(Verdict))
    return {
        f"{value}re": number(dims, f"real part of M omega, {whose}", ancillary_variables=f"{prefix}verdict"),
        f"{value}im": number(
            dims, f"imaginary part of M omega, {whose}; negative is damped", ancillary_variables=f"{prefix}verdict"
        ),
        f"{value}re_text": text(dims, f"real part of M omega, {whose}, to the agreed digits"),
        f"{value}im_text": text(dims, f"imaginary part of M omega, {whose}, to the agreed digits"),
        f"{prefix}digits": number(
            dims, f"digits, {whose}: the smallest agreement that counts", comment="relative to the modulus of omega"
        ),
        f"{prefix}basis": flags(dims, f"method whose value stands, {whose}", ("not_surveyed", *BASIS_FLAGS)),
        f"{prefix}verdict": flags(
            dims,
            f"what the evidence says, {whose}",
            ("not_surveyed", *(verdict.name for verdict in Verdict)),
            comment=verdicts,
        ),
        f"{prefix}agreement_digits": number(agreements, f"digits two runs share, {whose}"),
        f"{prefix}agreement_role": flags(agreements, f"part the agreement plays in the digits, {whose}", ROLE_FLAGS),
        f"{prefix}proven_re_text": text(dims, f"real part of the centre of the proven disc, {whose}"),
        f"{prefix}proven_im_text": text(dims, f"imaginary part of the centre of the proven disc, {whose}"),
        f"{prefix}proven_radius": number(dims, f"the mode is proven to be this close to the centre, {whose}"),
        f"{prefix}unique_radius": number(dims, f"proven: no other mode is this close to the centre, {whose}"),
    }


def window_proof_variables(prefix: str, dims: tuple[str, ...]) -> dict[str, Variable]:
    """What is proven of a whole window."""
    return {
        f"{prefix}window_count_proven": number(
            dims,
            "zeros proven to be in the window, a strip beyond the imaginary axis included",
            comment="modes, zeros of the continued sheet and of cleared factors",
        ),
        f"{prefix}complete": flags(
            dims,
            "whether the list of the window is proven complete",
            COMPLETE_FLAGS,
            comment="proven: the modes of the search are all those of the window, each in a proven disc of its own",
        ),
        f"{prefix}no_growing_mode": flags(
            dims,
            "whether it is proven that no mode grows",
            ("not_asked", "not_proven", "proven_by_count", "proven_by_energy"),
            comment=(
                "by energy: the potential is nowhere negative outside the horizon, which excludes every growing mode; "
                "by count: no zero in the growing half-plane outside the square that the window leaves out, up to "
                "the largest growth that the potential allows"
            ),
        ),
    }


def variables() -> dict[str, Variable]:
    """Every data variable, in the order they are stored."""
    overtones, ladder = (*POINT, "overtone"), (*POINT, "overtone", "depth", "precision")
    statuses = ("not_surveyed", *STATUS_FLAGS)
    relative = "relative difference from Schwarzschild, same field, ell and overtone:"
    return {
        **mode_variables("", overtones, "overtones of the principal family"),
        "shift_re": number(overtones, f"{relative} Re omega / Re omega_0 - 1", "percent"),
        "shift_im": number(overtones, f"{relative} Im omega / Im omega_0 - 1", "percent"),
        "ladder_re": number(ladder, "real part of M omega in one cell of the asymptotic iteration method"),
        "ladder_im": number(ladder, "imaginary part of M omega in one cell of the asymptotic iteration method"),
        "ladder_digits": number(
            ladder,
            "digits one cell shares with another method",
            comment="with the match, or with the spectral method where the match is not ok",
        ),
        "ladder_status": flags(ladder, "status of one cell", statuses),
        **mode_variables("near_axis_", (*POINT, "near_axis"), "modes beside the imaginary axis, by damping"),
        **mode_variables("schwarzschild_", ("field", "ell", "overtone"), "Schwarzschild, the reference"),
        "search_status": flags(POINT, "status of the search", ("not_surveyed", *SEARCH_FLAGS)),
        "window_count": number(POINT, "zeros counted in the window by winding, the continued sheet included"),
        "window_found": number(POINT, "zeros found in the window, the continued sheet included"),
        "window_continued": number(POINT, "zeros of the continued sheet in the window: Re M omega below 0, no modes"),
        "window_undetermined": number(POINT, "zeros so close to the axis that their side could not be decided"),
        **window_proof_variables("", POINT),
        **window_proof_variables("schwarzschild_", ("field", "ell")),
        "window_re_max": number(POINT, "right edge of the window in Re M omega"),
        "window_depth": number((), "depth of the window: the largest -Im M omega"),
        "window_excluded": number((), "half-side of the square about M omega = 0 that the window leaves out"),
        "horizon_radius": number(HOLE, "horizon radius", "M"),
        "light_ring_radius": number(HOLE, "radius of the light ring, the unstable circular orbit of light", "M"),
        "surface_gravity": number(HOLE, "surface gravity", "M-1"),
    }


def coordinates() -> dict[str, Variable]:
    """The coordinates that label the dimensions."""
    return {
        "field": text(("field",), "perturbation"),
        "exponent": whole("exponent", "exponent n of the mass function"),
        "coupling": number(("coupling",), "coupling kappa: 0 is Schwarzschild, 1 the extremal hole"),
        "coupling_exact": text(("coupling",), "coupling kappa as an exact ratio"),
        "ell": Variable(("ell",), np.int32, {"long_name": "angular number ell", "units": "1"}),
        "overtone": Variable(("overtone",), np.int32, {"long_name": "overtone, by damping from 0", "units": "1"}),
        "near_axis": Variable(("near_axis",), np.int32, {"long_name": "near-axis mode, by damping", "units": "1"}),
        "depth": Variable(("depth",), np.int32, {"long_name": "iteration depth", "units": "1"}),
        "precision": Variable(
            ("precision",), np.int32, {"long_name": "decimal digits of the arithmetic", "units": "1"}
        ),
        "agreement": text(("agreement",), "the two runs that are compared"),
    }


LIMITS = (
    "Non-rotating holes only; real remnants rotate. The axial sector assumes that the effective source of a deformed "
    "background is not perturbed. Nothing here is a claim of detection or of a deviation. Values whose verdict is "
    "neither settled nor proven are to be shown with a mark or not at all."
)
