"""Verdicts from invented evidence whose true errors are known, injected faults included."""

from __future__ import annotations

from dataclasses import replace
from decimal import Decimal, localcontext

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from knell.survey.agreement import Frequency
from knell.survey.enclosed import Enclosure
from knell.survey.evidence import ABSENT, AGREEMENTS, AimRun, Evidence, Run, compare
from knell.survey.verdict import ROLES, Verdict, judge

REQUIRED = 10
TRUE = (Decimal("0.37367168441804183579349200298"), Decimal("-0.08896231568893569828046092718"))
GRAVITY = 0.25


def off(digits: float, by: int = 1, base: tuple[Decimal, Decimal] = TRUE) -> Run:
    """A run that is wrong by ``by 10^-digits`` of itself, written to 50 places."""
    with localcontext(prec=60):
        factor = 1 + by * Decimal(10) ** -Decimal(digits)
        re, im = (x * factor for x in base)
        return Run("ok", Frequency(f"{re:.50f}", f"{im:.50f}"))


def ladder(
    convergence: dict[int, float], tilted: float = 0.5, base: tuple[Decimal, Decimal] = TRUE
) -> tuple[AimRun, ...]:
    """AIM at two precisions; ``convergence`` gives the digits of each depth."""
    return tuple(
        AimRun(depth, precision, off(digits, 1, base), off(digits - tilted, 1, base))
        for depth, digits in convergence.items()
        for precision in (40, 80)
    )


def disc(centre: tuple[Decimal, Decimal], proven: str = "1e-22", unique: str = "3e-2") -> Enclosure:
    re, im = centre
    return Enclosure(Frequency(f"{re:.50f}", f"{im:.50f}"), proven, unique)


WITNESSES = {
    "match": off(25),
    "match_other_path": off(25, -1),
    "match_more_precise": off(35),
    "spectral": off(20),
    "spectral_tilted": off(19),
}
CONVERGED = {100: 8.0, 200: 12.0, 400: 16.0}
UNCONVERGED = {100: 3.0, 200: 4.5, 400: 6.0}


def evidence(convergence: dict[int, float] | None = None, **changes: object) -> Evidence:
    aim = ladder(convergence) if convergence else ()
    return replace(Evidence(search=off(9).value, aim=aim, **WITNESSES), **changes)


def test_converged_aim_is_settled_on_its_smallest_agreement() -> None:
    judgement = judge(evidence(CONVERGED), REQUIRED, GRAVITY)
    assert (judgement.verdict, judgement.basis) == (Verdict.settled, "aim")
    # The two deepest: 12 digits against 16, a difference of 1e-12.
    assert judgement.digits == judgement.agreements["aim_depth"] == pytest.approx(12, abs=0.02)
    assert judgement.value == off(16).value
    assert set(judgement.agreements) == set(AGREEMENTS) == set(judgement.roles)
    assert set(judgement.roles.values()) <= set(ROLES)


def test_without_aim_the_match_settles_a_mode() -> None:
    judgement = judge(evidence(), REQUIRED, GRAVITY)
    assert (judgement.verdict, judgement.basis, judgement.value) == (Verdict.settled, "match", off(35).value)
    assert judgement.digits == judgement.agreements["match_spectral"] == pytest.approx(20, abs=0.02)


def test_refused_and_starved_runs_take_no_part() -> None:
    aim = tuple(AimRun(depth, 40, Run(status), Run("failed")) for depth, status in ((100, "refused"), (200, "starved")))
    assert judge(evidence(aim=aim), REQUIRED) == judge(evidence(), REQUIRED)


def test_aim_that_has_not_got_there_is_excused() -> None:
    judgement = judge(evidence(UNCONVERGED), REQUIRED, GRAVITY)
    assert (judgement.verdict, judgement.basis) == (Verdict.settled, "match")
    assert judgement.digits == pytest.approx(20, abs=0.02)
    assert judgement.roles["aim_match"] == "excused"
    # Nothing is hidden: all agreements are stored.
    assert judgement.agreements["aim_depth"] == pytest.approx(4.5, abs=0.02)
    assert judgement.agreements["aim_match"] == pytest.approx(6, abs=0.02)


def test_a_spectral_value_that_has_not_got_there_is_excused() -> None:
    weak = evidence(CONVERGED, spectral=off(6), spectral_tilted=off(5.5))
    judgement = judge(weak, REQUIRED, GRAVITY)
    assert (judgement.verdict, judgement.basis) == (Verdict.settled, "aim")
    assert judgement.roles["aim_spectral"] == "excused"


def test_a_spectral_value_of_unknown_convergence_is_not_excused() -> None:
    judgement = judge(evidence(CONVERGED, spectral=off(6), spectral_tilted=ABSENT), REQUIRED, GRAVITY)
    assert judgement.verdict is Verdict.drifting
    assert judgement.digits == pytest.approx(6, abs=0.02)


def shifted(error: float) -> tuple[Decimal, Decimal]:
    """The frequency a method converges to whose potential is wrong by about ``error``."""
    return TRUE[0] * (1 + Decimal(error)), TRUE[1]


FAULTS = {
    "aim": {"aim": ladder(CONVERGED, base=shifted(1e-6))},
    "match": {
        "match": off(25, 1, shifted(1e-6)),
        "match_other_path": off(25, -1, shifted(1e-6)),
        "match_more_precise": off(35, 1, shifted(1e-6)),
    },
    "spectral": {"spectral": off(20, 1, shifted(1e-6)), "spectral_tilted": off(19, 1, shifted(1e-6))},
}


@pytest.mark.parametrize("method", FAULTS)
def test_an_error_in_one_method_drops_the_verdict(method: str) -> None:
    judgement = judge(evidence(CONVERGED, **FAULTS[method]), REQUIRED, GRAVITY)
    assert judgement.verdict is Verdict.drifting
    # The fault is 1e-6 in Re ω, which is 0.97 of |ω|: six digits.
    assert judgement.digits == pytest.approx(6, abs=0.05)
    assert "contradiction" in judgement.roles.values()


@pytest.mark.parametrize("method", ["match", "spectral"])
def test_an_error_in_a_witness_drops_the_verdict_where_aim_has_not_got_there(method: str) -> None:
    judgement = judge(evidence(UNCONVERGED, **FAULTS[method]), REQUIRED, GRAVITY)
    assert judgement.verdict is Verdict.drifting


@pytest.mark.parametrize("cell", [(400, 80), (400, 40), (200, 80)])
def test_a_cell_that_had_less_precision_than_it_says_drops_the_verdict(cell: tuple[int, int]) -> None:
    """Eight digits, as of a run in doubles, in any cell the agreements rest on."""
    poor = tuple(
        replace(run, plain=off(8, 3), tilted=off(8, -3)) if (run.depth, run.precision) == cell else run
        for run in ladder(CONVERGED)
    )
    judgement = judge(evidence(aim=poor), REQUIRED, GRAVITY)
    assert judgement.verdict is Verdict.drifting
    assert judgement.digits < REQUIRED
    assert "contradiction" in judgement.roles.values()


def test_the_depth_error_hides_no_fault_that_is_larger() -> None:
    """AIM admits 4.5 digits; agreeing with the match to 2 is not explained by that."""
    wrong = ladder(UNCONVERGED, base=shifted(1e-2))
    judgement = judge(evidence(aim=wrong), REQUIRED, GRAVITY)
    assert judgement.verdict is Verdict.drifting
    assert judgement.roles["aim_match"] == "contradiction"


def test_a_moving_root_is_an_artefact() -> None:
    aim = tuple(AimRun(depth, 40, off(2 + depth / 400), off(1)) for depth in (100, 200))
    assert judge(Evidence(search=off(9).value, aim=aim), REQUIRED).verdict is Verdict.artefact
    paths = {"match": off(2), "match_other_path": off(2, -1), "match_more_precise": off(30)}
    assert judge(Evidence(search=off(9).value, **paths), REQUIRED).verdict is Verdict.artefact


def test_a_root_the_match_holds_is_no_artefact_though_aim_has_not_converged() -> None:
    aim = (AimRun(100, 40, off(2), off(1)), AimRun(200, 40, off(2.5), off(1)))
    assert judge(evidence(aim=aim), REQUIRED).verdict is Verdict.settled


def test_a_root_of_the_surface_gravity_is_special() -> None:
    # Schwarzschild, ℓ = 2: -2i is the eighth.
    special = Frequency("0.00000000", "-2.00000000")
    assert judge(Evidence(search=special), REQUIRED, GRAVITY).verdict is Verdict.special
    assert judge(Evidence(search=special), REQUIRED, 0.0).verdict is not Verdict.special
    beside = Frequency("0.00001", "-2.00000000")
    assert judge(Evidence(search=beside), REQUIRED, GRAVITY).verdict is Verdict.drifting


def near_axis(re: str, digits: float) -> Evidence:
    base = (Decimal(re), Decimal("-0.604206"))
    runs = {
        "match": off(digits, 1, base),
        "match_other_path": off(digits, -1, base),
        "match_more_precise": off(40, 1, base),
    }
    # The error of the invented runs lies along ω; the side needs one across it.
    turned = Run("ok", replace(runs["match"].value, re=f"{base[0] + Decimal(10) ** -Decimal(digits):.50f}"))
    return Evidence(search=Frequency(re, "-0.604206"), **(runs | {"match": turned}))


def test_a_mode_closer_to_the_axis_than_its_error_drifts() -> None:
    assert judge(near_axis("0.0000626", 12), REQUIRED).verdict is Verdict.settled
    assert judge(near_axis("0.0000000000001", 12), REQUIRED).verdict is Verdict.drifting
    assert judge(near_axis("0.0000000000001", 20), REQUIRED).verdict is Verdict.settled


def test_a_zero_of_the_continued_sheet_is_no_mode() -> None:
    assert judge(near_axis("-0.0000626", 12), REQUIRED).verdict is Verdict.artefact


def test_a_run_that_has_gone_to_another_mode_drops_the_verdict() -> None:
    judgement = judge(evidence(CONVERGED, search=Frequency("0.3467", "-0.2739")), REQUIRED)
    assert judgement.verdict is Verdict.drifting
    assert judgement.roles["search"] == "contradiction"


def test_one_agreement_is_not_enough() -> None:
    lone = Evidence(search=off(9).value, match=off(25), match_more_precise=off(35))
    judgement = judge(lone, REQUIRED)
    assert (judgement.verdict, judgement.basis) == (Verdict.drifting, "match")


def test_the_search_alone_has_no_digits() -> None:
    judgement = judge(Evidence(search=off(9).value), REQUIRED)
    assert (judgement.verdict, judgement.digits, judgement.value) == (Verdict.drifting, 0.0, off(9).value)


def test_an_enclosure_lifts_what_is_settled_and_nothing_else() -> None:
    enclosure = disc(TRUE)
    judgement = judge(evidence(CONVERGED), REQUIRED, GRAVITY, [disc(shifted(-0.2)), enclosure])
    assert (judgement.verdict, judgement.enclosure) == (Verdict.proven, enclosure)
    assert judgement.digits == judge(evidence(CONVERGED), REQUIRED, GRAVITY).digits
    drifting = judge(Evidence(search=off(9).value), REQUIRED, GRAVITY, [enclosure])
    assert (drifting.verdict, drifting.enclosure) == (Verdict.drifting, enclosure)
    # Without a look at its unique radius the nearest would do.
    assert judge(evidence(CONVERGED), REQUIRED, GRAVITY, [disc(shifted(-0.2))]).verdict is Verdict.settled


def test_an_enclosure_beside_the_value_takes_its_digits_away() -> None:
    # AIM converges to 16 digits of something that is wrong by a millionth of the mode, and no witness says so.
    wrong = Evidence(search=off(9).value, aim=ladder(CONVERGED))
    assert judge(wrong, REQUIRED).verdict is Verdict.settled
    enclosure = disc(shifted(1e-6))
    judgement = judge(wrong, REQUIRED, GRAVITY, [enclosure])
    assert (judgement.verdict, judgement.enclosure) == (Verdict.drifting, enclosure)
    assert judgement.digits == pytest.approx(6, abs=0.02)
    # Where a millionth is enough, the rest of the claim still goes.
    kept = judge(wrong, 5, GRAVITY, [enclosure])
    assert (kept.verdict, kept.digits) == (Verdict.proven, judgement.digits)


def test_a_value_coarser_than_the_disc_of_uniqueness_is_not_proven() -> None:
    narrow = disc(TRUE, unique="1e-13")
    assert judge(evidence(CONVERGED), REQUIRED, GRAVITY, [narrow]).verdict is Verdict.settled
    assert judge(evidence(CONVERGED), REQUIRED, GRAVITY, [disc(TRUE, unique="1e-11")]).verdict is Verdict.proven


def test_in_a_survey_of_one_depth_the_tilt_admits_the_error() -> None:
    one = ladder({100: 6.0})
    links = compare(evidence(aim=one))
    assert "aim_depth" not in links
    judgement = judge(evidence(aim=one), REQUIRED)
    assert (judgement.verdict, judgement.basis) == (Verdict.settled, "match")
    wrong = ladder({100: 16.0}, base=shifted(1e-6))
    assert judge(evidence(aim=wrong), REQUIRED).verdict is Verdict.drifting
    untilted = tuple(replace(run, tilted=ABSENT) for run in one)
    assert judge(evidence(aim=untilted), REQUIRED).verdict is Verdict.drifting


def test_a_run_that_contradicts_itself_is_refused() -> None:
    for status, value in (("ok", None), ("failed", off(9).value)):
        with pytest.raises(ValueError, match="contradicts itself"):
            Run(status, value)


ACCURACY = st.floats(0.5, 30)
RUN = st.one_of(st.just(ABSENT), ACCURACY.map(off), ACCURACY.map(lambda digits: off(digits, -1)))
LADDER = st.lists(st.tuples(RUN, RUN), max_size=4).map(
    lambda runs: tuple(AimRun((100, 200)[i // 2], (40, 80)[i % 2], *pair) for i, pair in enumerate(runs))
)


@settings(deadline=None, max_examples=60)
@given(LADDER, st.fixed_dictionaries({name: RUN for name in WITNESSES}))
def test_settled_means_at_least_two_agreements_and_all_that_count_suffice(
    aim: tuple[AimRun, ...], witnesses: dict[str, Run]
) -> None:
    judgement = judge(Evidence(search=off(9).value, aim=aim, **witnesses), REQUIRED, GRAVITY)
    counted = [judgement.agreements[x] for x, role in judgement.roles.items() if role in ("counted", "contradiction")]
    assert judgement.digits == min(counted, default=0.0)
    if judgement.verdict is Verdict.settled:
        assert len(counted) >= 2
        assert min(counted) >= REQUIRED
