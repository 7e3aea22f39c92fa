"""The dataset: the results of every point, judged and laid out on the survey's grid.

Dimensions are (field, exponent, coupling, ell) and then overtone, near_axis, or overtone, depth
and precision for the ladder of cells. Combinations outside a field's list of ``ℓ`` stay
empty. Schwarzschild has its own variables and is the reference of every shift:

    shift_re = 100 (Re ω / Re ω_0 - 1),     shift_im = 100 (Im ω / Im ω_0 - 1)
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from decimal import localcontext
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import xarray as xr

from knell import __version__
from knell.errors import StaleError
from knell.physics.background import PowerLaw
from knell.physics.exact import parse_rational
from knell.physics.landmarks import horizon_radius, light_ring, surface_gravity
from knell.survey import dataset_file, jsonfile
from knell.survey import dataset_schema as schema
from knell.survey.agreement import Frequency, agreement, rounded
from knell.survey.config import Config
from knell.survey.enclosed import Enclosure
from knell.survey.evidence import AGREEMENTS
from knell.survey.layout import CELLS
from knell.survey.points import Point
from knell.survey.results import ModeKey, PointResults, read_point
from knell.survey.verdict import Judgement, Verdict, judge

Arrays = dict[str, Any]
Index = tuple[int, ...]
Judged = dict[ModeKey, Judgement]


def build(config: Config, output: str | Path, cells: str = CELLS) -> None:
    """Read every cell of the survey and write the dataset to ``output``, whole or not at all.

    Raises, with one line that names the file: `FileError` for a cell that is missing,
    `DamagedFile` for one that is damaged or misplaced, `StaleError` when cells come from
    different states of the solver.
    """
    dataset_file.write(assemble(config, cells), output)


def assemble(config: Config, cells: str = CELLS) -> xr.Dataset:
    """The dataset in memory. Raises what `build` raises."""
    results = _read(config, cells)
    first = results[config.points[0]]
    judged = {point: _judge_all(config, point, result) for point, result in results.items()}
    coordinates = _coordinates(config, max(len(_beside(modes)) for modes in judged.values()))
    sizes = {name: len(values) for name, values in coordinates.items()}
    arrays = {name: dataset_file.empty(variable, sizes) for name, variable in schema.variables().items()}
    arrays["window_depth"][()] = float(config.window)
    arrays["window_excluded"][()] = float(parse_rational(first.window["excluded"]))
    _store_holes(arrays, config)
    for place, point in _references(config):
        _store_overtones(arrays, "schwarzschild_", place, config, judged[point])
        _store_window_proof(arrays, "schwarzschild_", place, results[point], judged[point])
    for place, point in _grid(config):
        _store_point(arrays, place, results[point])
        _store_window_proof(arrays, "", place, results[point], judged[point])
        _store_overtones(arrays, "", place, config, judged[point])
        _store_beside(arrays, place, judged[point])
        _store_ladder(arrays, place, config, results[point])
        _store_shifts(arrays, place, config, judged[point], judged[point.reference])
    return dataset_file.to_xarray(
        schema.variables(), schema.coordinates(), arrays | coordinates, _attributes(config, first)
    )


def _read(config: Config, cells: str) -> dict[Point, PointResults]:
    ladder = [(depth, precision) for depth in config.depths for precision in config.precisions]
    results: dict[Point, PointResults] = {}
    for point in config.points:
        results[point] = read_point(config.folder(point, cells), ladder, config.proofs)
        if results[point].solver != results[config.points[0]].solver:
            search = config.folder(point, cells).search
            raise StaleError(f"{search}: made by another state of the solver than the first; run snakemake again")
        if _prover(results[point]) != _prover(results[config.points[0]]):
            path = config.folder(point, cells).proofs(config.proofs)
            raise StaleError(f"{path}: proven by another state of the code than the first; run snakemake again")
    return results


def _prover(result: PointResults) -> str:
    return result.proofs.prover if result.proofs else ""


def _judge_all(config: Config, point: Point, result: PointResults) -> Judged:
    gravity = surface_gravity(point.background())
    return {
        key: judge(evidence, config.required_digits, gravity, result.enclosures)
        for key, evidence in result.modes.items()
    }


def _beside(modes: Judged) -> list[Judgement]:
    """The modes that are no overtones, by damping."""
    others = [judgement for (family, _), judgement in modes.items() if family != "principal"]
    return sorted(others, key=lambda judgement: -complex(judgement.value).imag)


def _coordinates(config: Config, near_axis: int) -> Arrays:
    return {
        "field": list(config.ell),
        "exponent": config.exponents,
        "coupling": [float(x) for x in config.couplings],
        "coupling_exact": [str(x) for x in config.couplings],
        "ell": sorted({ell for ells in config.ell.values() for ell in ells}),
        "overtone": config.overtones,
        # netCDF tools stumble over a dimension of length zero.
        "near_axis": range(max(1, near_axis)),
        "depth": config.depths,
        "precision": config.precisions,
        "agreement": AGREEMENTS,
    }


def _fields(config: Config) -> Iterator[tuple[int, str, int, int]]:
    """Place and name of each field with the place and value of each of its ``ℓ``."""
    every = sorted({ell for ells in config.ell.values() for ell in ells})
    for f, (field, ells) in enumerate(config.ell.items()):
        for ell in ells:
            yield f, field, every.index(ell), ell


def _references(config: Config) -> Iterator[tuple[Index, Point]]:
    """The place (field, ell) of each Schwarzschild point, and the point."""
    for f, field, l, ell in _fields(config):
        yield (f, l), Point.canonical(field, None, Fraction(0), ell)


def _grid(config: Config) -> Iterator[tuple[Index, Point]]:
    """The place (field, exponent, coupling, ell) of each point on the grid, and the point."""
    for f, field, l, ell in _fields(config):
        for n, exponent in enumerate(config.exponents):
            for k, coupling in enumerate(config.couplings):
                yield (f, n, k, l), Point.canonical(field, exponent, coupling, ell)


def _store_holes(arrays: Arrays, config: Config) -> None:
    for n, exponent in enumerate(config.exponents):
        for k, coupling in enumerate(config.couplings):
            background = PowerLaw(exponent, coupling)
            arrays["horizon_radius"][n, k] = horizon_radius(background)
            arrays["light_ring_radius"][n, k] = light_ring(background).radius
            arrays["surface_gravity"][n, k] = surface_gravity(background)


def _store_point(arrays: Arrays, place: Index, result: PointResults) -> None:
    arrays["search_status"][place] = schema.SEARCH_FLAGS[result.status]
    arrays["window_re_max"][place] = float(parse_rational(result.window["re_max"]))
    if result.zeros is not None:
        for name in ("count", "found", "continued", "undetermined"):
            arrays[f"window_{name}"][place] = getattr(result.zeros, name)


def _store_window_proof(arrays: Arrays, prefix: str, place: Index, result: PointResults, modes: Judged) -> None:
    proofs = result.proofs
    if proofs is None:
        return
    arrays[f"{prefix}no_growing_mode"][place] = schema.GROWING_FLAGS[proofs.growing]
    if not proofs.window_asked:
        return
    complete = proofs.count is not None and _each_in_its_own(proofs.enclosures, list(modes.values()))
    arrays[f"{prefix}complete"][place] = schema.COMPLETE_FLAGS["proven" if complete else "not_proven"]
    if proofs.count is not None:
        arrays[f"{prefix}window_count_proven"][place] = proofs.count


def _each_in_its_own(enclosures: Sequence[Enclosure], modes: Sequence[Judgement]) -> bool:
    """Whether the modes and the enclosures pair up, none left over."""
    taken = {mode.enclosure for mode in modes}
    return None not in taken and len(modes) == len(taken) == len(enclosures)


def _store_overtones(arrays: Arrays, prefix: str, place: Index, config: Config, modes: Judged) -> None:
    for i, overtone in enumerate(config.overtones):
        judgement = modes.get(("principal", overtone))
        if judgement is None:
            arrays[f"{prefix}verdict"][(*place, i)] = Verdict.missing
        else:
            _store_mode(arrays, prefix, (*place, i), judgement)


def _store_beside(arrays: Arrays, place: Index, modes: Judged) -> None:
    for i, judgement in enumerate(_beside(modes)):
        _store_mode(arrays, "near_axis_", (*place, i), judgement)


def _store_mode(arrays: Arrays, prefix: str, place: Index, judgement: Judgement) -> None:
    value, agreed = complex(judgement.value), rounded(judgement.value, judgement.digits)
    name = prefix or "frequency_"
    arrays[f"{name}re"][place], arrays[f"{name}im"][place] = value.real, value.imag
    arrays[f"{name}re_text"][place], arrays[f"{name}im_text"][place] = agreed.re, agreed.im
    arrays[f"{prefix}digits"][place] = judgement.digits
    arrays[f"{prefix}basis"][place] = schema.BASIS_FLAGS[judgement.basis]
    arrays[f"{prefix}verdict"][place] = judgement.verdict
    for i, agreement_name in enumerate(AGREEMENTS):
        if agreement_name in judgement.agreements:
            arrays[f"{prefix}agreement_digits"][(*place, i)] = judgement.agreements[agreement_name]
            arrays[f"{prefix}agreement_role"][(*place, i)] = schema.ROLE_FLAGS[judgement.roles[agreement_name]]
    if judgement.enclosure is not None:
        centre = judgement.enclosure.centre
        arrays[f"{prefix}proven_re_text"][place], arrays[f"{prefix}proven_im_text"][place] = centre.re, centre.im
        arrays[f"{prefix}proven_radius"][place], arrays[f"{prefix}unique_radius"][place] = judgement.enclosure.radii


def _store_ladder(arrays: Arrays, place: Index, config: Config, result: PointResults) -> None:
    depths = {depth: i for i, depth in enumerate(config.depths)}
    precisions = {precision: i for i, precision in enumerate(config.precisions)}
    for i, overtone in enumerate(config.overtones):
        evidence = result.modes.get(("principal", overtone))
        if evidence is None:
            continue
        arrays["ladder_status"][(*place, i)] = schema.STATUS_FLAGS["absent"]
        for run in evidence.aim:
            cell = (*place, i, depths[run.depth], precisions[run.precision])
            arrays["ladder_status"][cell] = schema.STATUS_FLAGS[run.plain.status]
            if run.plain.value is not None:
                value = complex(run.plain.value)
                arrays["ladder_re"][cell], arrays["ladder_im"][cell] = value.real, value.imag
                other = evidence.best_match or evidence.spectral.value
                arrays["ladder_digits"][cell] = np.nan if other is None else agreement(run.plain.value, other)


def _store_shifts(arrays: Arrays, place: Index, config: Config, modes: Judged, reference: Judged) -> None:
    for i, overtone in enumerate(config.overtones):
        key = ("principal", overtone)
        if key in modes and key in reference:
            shift = _shift(modes[key].value, reference[key].value)
            arrays["shift_re"][(*place, i)], arrays["shift_im"][(*place, i)] = shift


def _shift(value: Frequency, reference: Frequency) -> tuple[float, float]:
    """``100 (x/x_0 - 1)`` of real and imaginary part, in decimals: small shifts cancel."""
    with localcontext(prec=60):
        re, im = (float(100 * (x / x0 - 1)) for x, x0 in zip(value.parts, reference.parts, strict=True))
    return re, im


def _attributes(config: Config, first: PointResults) -> dict[str, Any]:
    """Global attributes: what the file is, what made it, and what it does not say."""
    prover = f", prover {first.proofs.prover}" if first.proofs else ""
    return {
        "title": "Quasinormal modes of deformed, non-rotating black holes",
        "summary": (
            "Frequencies M omega of power-law deformed holes, f(r) = 1 - 2 m(r)/r with m(r) = M (1 - kappa c_n "
            "(M/r)^(n-1)), M the ADM mass, time dependence exp(-i omega t), each with the agreements between "
            "methods behind it and a verdict."
        ),
        "limits": schema.LIMITS,
        "Conventions": "CF-1.11",
        "source": f"knell {__version__}, solver {first.solver}{prover}",
        "required_digits": np.int32(config.required_digits),
        "config": jsonfile.canonical(config.document()),
    }
