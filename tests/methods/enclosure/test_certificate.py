"""Counts, complete lists, records of both, and what must not pass."""

from __future__ import annotations

import copy
import json
from dataclasses import replace
from fractions import Fraction

import pytest
from flint import acb, arb

from knell.methods.enclosure import record
from knell.methods.enclosure.certificate import Proven, certify_window, complete, prove_zero
from knell.methods.enclosure.count import Count, count_zeros, region_factors, total
from knell.methods.enclosure.problem import Problem
from knell.methods.enclosure.refusal import BadRecord, BadStructure, Incomplete, NoCount, Refusal
from knell.methods.enclosure.region import Region
from knell.methods.enclosure.seeds import proposals
from knell.physics.background import PowerLaw
from knell.physics.landmarks import Window, window

SCHWARZSCHILD = Problem(PowerLaw(2, Fraction(0)), "axial", 2)
PAST = Fraction(1, 20)


def region(re_max, depth, excluded="1/10", past=PAST):
    return Region(Fraction(re_max), Fraction(depth), Fraction(excluded), Fraction(past))


@pytest.fixture(scope="module")
def small():
    """A complete list of a small window that holds the two least damped Schwarzschild modes."""
    box = Window(Fraction(1, 2), Fraction(7, 20))
    return certify_window(SCHWARZSCHILD, box, 20, [0.3736717 - 0.0889623j, 0.346711 - 0.273915j])


@pytest.fixture(scope="module")
def small_document(small):
    return json.loads(json.dumps(record.certificate_document(small)))


def test_a_small_window_is_complete(small):
    assert small.count.number == 2 and len(small.modes) == 2
    assert [one.statement.frequency_im[:9] for one in small.zeros] == ["-0.088962", "-0.273914"]


@pytest.mark.slow
def test_known_counts_of_small_regions():
    assert count_zeros(SCHWARZSCHILD, region("3/5", "1/5")).number == 1
    assert count_zeros(SCHWARZSCHILD, region("3/10", "2/5")).number == 0


@pytest.mark.slow
@pytest.mark.parametrize(
    ("n", "k", "number"), [(4, "0", 7), (4, "1/2", 7), (4, "3/4", 9), (4, "9/10", 12), (4, "1", 7), (4, "99/100", 31)]
)
def test_counts_of_the_default_window(n, k, number):
    # Counted before by an unrelated winding in doubles; 31 = 28 modes and 3 zeros of the continued sheet.
    problem = Problem(PowerLaw(n, Fraction(k)), "axial", 2)
    box = window(problem.background, 2)
    assert count_zeros(problem, Region(box.re_max, box.depth, box.excluded, PAST)).number == number


@pytest.mark.slow
def test_zeros_of_the_clearing_and_the_continued_sheet_are_told_apart():
    certificate = certify_window(SCHWARZSCHILD, Window(Fraction(1, 2), Fraction(11, 5)), 20)
    kinds = [one.statement.kind for one in certificate.zeros]
    # Eight overtones, the algebraically special -2i, and -0.0153 - 1.9984i of the continued sheet.
    assert (kinds.count("mode"), kinds.count("clearing"), kinds.count("continued")) == (8, 1, 1)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("n", "k", "field", "ell"),
    [(3, "-3", "axial", 2), (6, "-1/2", "axial", 3), (2, "1", "scalar", 0), (5, "97/100", "electromagnetic", 1)],
)
def test_certificates_of_other_holes_and_fields(n, k, field, ell):
    problem = Problem(PowerLaw(n, Fraction(k)), field, ell)
    certificate = certify_window(problem, window(problem.background, ell), 20)
    assert len(certificate.zeros) == certificate.count.number > 0


def test_cleared_factors_cover_the_region():
    # Schwarzschild: w_j vanishes at Mω = -ij/4; the region reaches to 3/2 and more are cleared beyond.
    assert set(region_factors(SCHWARZSCHILD, region("3/5", "3/2"))) >= set(range(1, 7))
    assert region_factors(Problem(PowerLaw(4, Fraction(1)), "axial", 2), region("3/5", "3/2")) == ()


@pytest.mark.slow
def test_a_zero_on_an_edge_leaves_no_count():
    problem = Problem(PowerLaw.from_q(4, Fraction(1, 7)), "axial", 2)
    # The exact zero of the clearing, -32i/49, lies on the lower edge.
    with pytest.raises(NoCount, match="not resolved"):
        count_zeros(problem, region("1/5", "32/49"))


def test_outlines_are_closed_and_regions_make_sense():
    outline = region("3/5", "3/2").outline()
    area = sum(a[0] * b[1] - a[1] * b[0] for a, b in zip(outline, (*outline[1:], outline[0]), strict=True)) / 2
    # 0.65 × 1.5 less the square's part in the region: (1/10 + 1/20) × 1/10, all to the right of -δ.
    assert area == Fraction(13, 20) * Fraction(3, 2) - Fraction(3, 20) * Fraction(1, 10)
    mirrored = replace(region("3/5", "3/2"), growing=True).outline()
    assert {(x, -y) for x, y in mirrored} == set(outline)
    for wrong in (("1/20", "3/2"), ("3/5", "1/20")):
        with pytest.raises(BadStructure):
            region(*wrong)
    with pytest.raises(BadStructure):
        region("3/5", "3/2", past="1/5")


def test_discs_inside_and_outside_a_region():
    box = region("3/5", "3/2")
    tiny = arb("1e-10")
    for re, im, inside in (
        (0.3, -0.3, True),
        (0.05, -0.3, True),
        (-0.04, -0.5, True),
        (0.05, -0.05, False),
        (0.3, 0.01, False),
        (-0.06, -0.5, False),
        (0.3, -1.6, False),
        (0.61, -0.5, False),
    ):
        centre = acb(arb(re), arb(im))
        assert box.contains(centre, tiny) is inside
        assert box.misses(centre, tiny) is not inside
    # A disc across an edge is neither proven in nor out.
    across = acb(arb(0.6), arb(-0.5))
    assert not box.contains(across, arb("0.01")) and not box.misses(across, arb("0.01"))


def test_edges_must_follow_the_outline_exactly(small):
    count, factors = small.count, small.count.cleared
    assert total(count.region, count.edges, factors).number == 2
    shorter = count.edges[1:]
    swapped = (count.edges[1], count.edges[0], *count.edges[2:])
    first = count.edges[0]
    seam = (first.end[0] + Fraction(1, 10**15), first.end[1])
    seamed = (replace(first, end=seam), *count.edges[1:])
    shifted = (replace(first, end=seam), replace(count.edges[1], start=seam), *count.edges[2:])
    twice = count.edges * 2
    for edges in (shorter, swapped, seamed, twice):
        with pytest.raises(NoCount, match="outline"):
            total(count.region, edges, factors)
    # A corner along an edge may lie anywhere on it; another region's outline is another matter.
    assert total(count.region, shifted, factors).number == 2
    wider = replace(count.region, re_max=count.region.re_max + Fraction(1, 10**9))
    with pytest.raises(NoCount, match="outline"):
        total(wider, count.edges, factors)


def test_a_list_that_falls_short_or_repeats_is_incomplete(small):
    one, other = small.zeros
    for zeros in ([one], [one, one], [one, other, other]):
        with pytest.raises(Incomplete):
            complete(SCHWARZSCHILD, small.count, list(zeros))
    deep = prove_zero(SCHWARZSCHILD, 0.3010535 - 0.478277j, 12)
    with pytest.raises(Incomplete, match="inside"):
        complete(SCHWARZSCHILD, small.count, [one, deep])


@pytest.mark.slow
def test_models_alone_propose_the_zeros():
    found = proposals(SCHWARZSCHILD, region("1/2", "7/20"))
    assert len(found) == 2
    assert abs(found[0] - (0.3736717 - 0.0889623j)) < 1e-6


def test_records_are_checked_again(small, small_document):
    again = record.recheck_certificate(small_document)
    assert [one.statement for one in again.zeros] == [one.statement for one in small.zeros]
    assert again.count.number == 2


TAMPERED = {
    "smaller radius": lambda d: d["claim"].update(proven_radius="1e-40"),
    "wider disc": lambda d: d["claim"].update(unique_radius="0.5"),
    "another centre": lambda d: d["claim"].update(frequency_re="0.37367168441804183579351"),
    "another kind": lambda d: d["claim"].update(kind="continued"),
    "another hole": lambda d: d["point"].update(coupling="1/100", exponent=4),
    "no hole": lambda d: d["point"].update(coupling="two"),
    "another match point": lambda d: d.update(match_point=[0.5, -0.2]),
    "a vertex moved": lambda d: d["value"]["infinity"]["vertices"][-1].__setitem__(1, -0.18749999),
    "an order missing": lambda d: d["value"]["horizon"]["orders"].pop(),
    "an order cut": lambda d: d["value"]["infinity"]["orders"].__setitem__(0, 2),
    "too few bits": lambda d: d["value"].update(bits=40),
    "bits that are none": lambda d: d["value"].update(bits="many"),
    "a share of one": lambda d: d["uniqueness"].update(share=1.0),
    "a centre moved": lambda d: d["value"].update(sigma=["1p-3", "3p-2"]),
    "no claim": lambda d: d.pop("claim"),
    "no run": lambda d: d.pop("uniqueness"),
}


@pytest.mark.parametrize("name", TAMPERED)
def test_a_tampered_record_is_refused(name, small_document):
    document = copy.deepcopy(small_document["zeros"][0])
    record.recheck_zero(copy.deepcopy(document))
    TAMPERED[name](document)
    with pytest.raises(Refusal):
        record.recheck_zero(document)


@pytest.mark.parametrize(
    ("change", "error"),
    [
        (lambda d: d["count"].update(number=1), BadRecord),
        (lambda d: d["zeros"].pop(), Incomplete),
        (lambda d: d["count"]["edges"].pop(), NoCount),
        (lambda d: d["count"]["region"].update(depth="3/10"), Refusal),
        (lambda d: d["point"].update(ell=3), Refusal),
        (lambda d: d["count"].pop("region"), BadRecord),
        (lambda d: d["zeros"][0]["point"].update(ell=3), Refusal),
    ],
)
def test_a_tampered_certificate_is_refused(change, error, small_document):
    document = copy.deepcopy(small_document)
    change(document)
    with pytest.raises(error):
        record.recheck_certificate(document)


def test_enclosures_of_one_zero_from_two_seeds_are_not_apart(small):
    again = prove_zero(SCHWARZSCHILD, 0.374 - 0.089j, 15)
    with pytest.raises(Incomplete, match="same zero"):
        complete(SCHWARZSCHILD, small.count, [small.zeros[0], again])
    assert isinstance(small.zeros[0], Proven) and isinstance(small.count, Count)
