"""Judging: unrounded, worst case named, signed margins, near before failed."""

import msgspec
import pytest
from study_layouts import changed, drawing, line, two_nodes

from app.model.drawing import Case, Limits
from app.model.kinds import Busbar, Cable, Generator, Load, Supply, Switch, Transformer
from app.study import run
from app.study.checking import apart
from app.study.outcome import Finding, Verdict
from app.study.words import tally_words
from solver.status import Status


def of(outcome, check):
    return [f for f in outcome.findings if f.check == check]


def limited(base, **limits):
    return msgspec.structs.replace(base, limits=Limits(**limits))


def test_every_check_names_its_worst_element_and_case_even_where_all_hold():
    cases = (Case(name="Peak"), Case(name="Light", load_percent=10.0, supply_percent=105.0))
    outcome = run(msgspec.structs.replace(two_nodes(), cases=cases))
    (low,), (high,) = of(outcome, "voltage low"), of(outcome, "voltage high")
    assert (low.verdict, low.ids, low.case) == (Verdict.HOLDS, ("B2",), "Peak")
    assert (high.verdict, high.ids, high.case) == (Verdict.HOLDS, ("B1",), "Light")
    assert low.margin == low.value - low.limit
    assert high.margin == high.limit - high.value
    assert high.value == pytest.approx(105.0, rel=1e-12)
    assert "in case Peak" in low.sentence
    assert low.sentence.endswith("the lowest allowed is 94.0 % (the limit set for this drawing).")


def test_every_case_is_judged_though_only_the_worst_is_told():
    loads = (100.0, 90.0, 1.0)
    cases = tuple(Case(name=f"{p:g}", load_percent=p) for p in loads)
    far = changed(two_nodes(), C1=line("B1", "B2", length_m=2000.0))
    base = msgspec.structs.replace(far, cases=cases)
    level = run(base).nodes.column("percent")[1]
    outcome = run(limited(base, low_percent=level[1] + 0.01))
    (low,) = of(outcome, "voltage low")
    assert (low.verdict, low.case) == (Verdict.FAILS, "100")
    assert low.by_case == (Verdict.FAILS, Verdict.FAILS, Verdict.HOLDS)
    assert [outcome.verdict(case) for case in range(3)] == list(low.by_case)
    assert outcome.verdict_of("B2", 1, ("voltage low",)) is Verdict.FAILS
    assert outcome.verdict_of("B2", 1, ("loading",)) is None
    assert outcome.verdicts(1)["B2"] is Verdict.FAILS


def test_what_stands_in_every_case_counts_in_every_case():
    base = changed(two_nodes(), B3=Busbar(), L3=Load(node="B3"))
    cases = (Case(name="Peak"), Case(name="Light", load_percent=10.0))
    outcome = run(msgspec.structs.replace(base, cases=cases))
    assert [outcome.verdict(case) for case in range(2)] == [Verdict.FAILS, Verdict.FAILS]
    assert outcome.verdicts(1)["B3"] is Verdict.FAILS


def test_one_case_is_not_named_in_the_sentence():
    (low,) = of(run(two_nodes()), "voltage low")
    assert "case" not in low.sentence
    assert low.case == "As drawn"


@pytest.mark.parametrize(
    ("below", "verdict"),
    [(1e-8, Verdict.FAILS), (0.0, Verdict.NEAR), (-0.999, Verdict.NEAR), (-1.001, Verdict.HOLDS)],
)
def test_voltage_is_near_within_one_percent_of_nominal_and_judged_unrounded(below, verdict):
    lowest = run(two_nodes()).nodes.at("B2").percent
    outcome = run(limited(two_nodes(), low_percent=lowest + below))
    found = [f for f in of(outcome, "voltage low") if f.ids == ("B2",)]
    assert found[0].verdict is verdict
    assert found[0].margin == pytest.approx(-below, abs=1e-12)


def test_a_supply_held_exactly_at_the_limit_is_on_it():
    for held, limit in ((110.0, "voltage high"), (94.0, "voltage low")):
        base = drawing(B1=Busbar(), S1=Supply(node="B1", nominal_v=11000.0, held_percent=held))
        (finding,) = of(run(base), limit)
        assert (finding.verdict, finding.margin) == (Verdict.NEAR, 0.0)


def test_a_fail_that_rounding_would_hide_is_printed_with_enough_digits():
    lowest = run(two_nodes()).nodes.at("B2").percent
    outcome = run(limited(two_nodes(), low_percent=lowest + 2e-4))
    (finding,) = (f for f in outcome.findings if f.verdict is Verdict.FAILS)
    shown, allowed = apart(finding.value, finding.limit)
    assert shown != allowed
    assert shown in finding.sentence
    assert allowed in finding.sentence


def test_apart_stops_at_one_digit_where_that_tells():
    assert apart(97.04, 94.0) == ("97.0 %", "94.0 %")
    assert apart(93.611, 93.617) == ("93.61 %", "93.62 %")
    assert apart(100.0, 100.0) == ("100.0 %", "100.0 %")


def test_drop_is_judged_only_where_a_limit_is_set():
    assert not of(run(two_nodes()), "voltage drop")
    drop = run(two_nodes()).nodes.at("B2").drop_percent
    fails = of(run(limited(two_nodes(), drop_percent=drop * 0.999)), "voltage drop")
    near = of(run(limited(two_nodes(), drop_percent=drop / 0.95)), "voltage drop")
    holds = of(run(limited(two_nodes(), drop_percent=drop / 0.85)), "voltage drop")
    assert [f[0].verdict for f in (fails, near, holds)] == [Verdict.FAILS, Verdict.NEAR, Verdict.HOLDS]
    assert fails[0].ids == ("B2",)


@pytest.mark.parametrize(("share", "verdict"), [(1.01, "FAILS"), (0.95, "NEAR"), (0.89, "HOLDS")])
def test_line_loading_counts_all_parallel_runs(share, verdict):
    amps = run(changed(two_nodes(), C1=line("B1", "B2", side_by_side=2))).branches.at("C1").current_a
    rated = changed(two_nodes(), C1=line("B1", "B2", side_by_side=2, rating_a=amps / 2 / share))
    (finding,) = of(run(rated), "loading")
    assert finding.verdict is Verdict[verdict]
    assert finding.value == pytest.approx(100 * share)


def test_a_switch_is_judged_by_its_rating_and_an_unrated_branch_is_not():
    base = changed(
        two_nodes(), B3=Busbar(), W1=Switch(start="B2", end="B3", rating_a=10.0), L2=Load(node="B3")
    )
    (finding,) = of(run(base), "loading")
    assert (finding.ids, finding.verdict) == (("W1",), Verdict.FAILS)
    assert not of(run(two_nodes()), "loading")


def transformer(**fields):
    plate = dict(v1_v=11000.0, v2_v=400.0, rating_kva=100.0, load_loss_w=1250.0, no_load_loss_w=130.0)
    return drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=11000.0, held_percent=fields.pop("held", 100.0)),
        B2=Busbar(), T1=Transformer(start="B1", end="B2", **{**plate, **fields}),
        L1=Load(node="B2", demand_kva=fields.pop("kva", 80.0)),
    )  # fmt: skip


def test_transformer_loading_is_the_larger_of_both_windings_over_their_rated_current():
    state = run(transformer()).branches.at("T1")
    first = state.start_a / (100e3 / 3**0.5 / 11000)
    second = state.end_a / (100e3 / 3**0.5 / 400)
    assert state.loaded_percent == pytest.approx(100 * max(first, second), rel=1e-12)
    assert run(transformer(side_by_side=2)).branches.at("T1").loaded_percent == pytest.approx(
        state.loaded_percent / 2, rel=0.05
    )


def test_over_excitation_is_advice_at_load_and_at_no_load():
    (advice,) = of(run(transformer(held=106.0)), "over-excitation")
    assert advice.verdict is Verdict.ADVICE
    assert "advised for continuous running: at most 105.0 % (advice after IEC 60076-1)." in advice.sentence
    assert advice.whose.endswith("from memory")
    assert advice.value == pytest.approx(106.0)
    assert advice.margin == pytest.approx(-1.0)
    assert "IEC 60076-1" in advice.sentence
    assert not of(run(transformer(held=105.0)), "over-excitation")
    idle = msgspec.structs.replace(transformer(held=109.0), cases=(Case(load_percent=0.0),))
    assert not of(run(idle), "over-excitation")
    idle = msgspec.structs.replace(transformer(held=111.0), cases=(Case(load_percent=0.0),))
    assert "at no load" in of(run(idle), "over-excitation")[0].sentence


def test_over_excitation_counts_from_the_tap_of_the_fed_winding():
    assert not of(run(transformer(held=106.0, tap=1)), "over-excitation")
    (lower,) = of(run(transformer(held=103.0, tap=-1)), "over-excitation")
    assert lower.value == pytest.approx(103.0 / 0.975)


@pytest.mark.parametrize(
    ("verdicts", "made", "words"),
    [
        ("", 0, "Nothing is judged"),
        ("NOTE", 5, "Nothing is judged"),
        ("HOLDS", 0, "Every check holds"),
        ("HOLDS NOTE", 1, "1 check holds"),
        ("HOLDS", 11, "11 checks hold"),
        ("ADVICE", 15, "15 checks hold, 1 advice exceeded"),
        ("ADVICE ADVICE", 15, "15 checks hold, 2 pieces of advice exceeded"),
        ("ADVICE NEAR HOLDS", 0, "Every check holds, 1 advice exceeded, 1 near the limit"),
        ("NEAR", 1, "1 check holds, 1 near the limit"),
        ("NEAR NEAR HOLDS", 0, "Every check holds, 2 near the limit"),
        ("FAILS NEAR", 11, "1 check fails"),
        ("FAILS FAILS HOLDS", 11, "2 checks fail"),
    ],
)
def test_one_sentence_says_how_the_checks_came_out(verdicts, made, words):
    found = [Finding("check", Verdict[name], (), "") for name in verdicts.split()]
    assert tally_words(found, made) == words


def test_findings_stand_worst_first():
    outcome = run(limited(two_nodes(), low_percent=99.9, drop_percent=0.1))
    verdicts = [f.verdict for f in outcome.findings]
    order = [Verdict.BLOCKS, Verdict.FAILS, Verdict.NEAR, Verdict.HOLDS, Verdict.NOTE]
    assert verdicts == sorted(verdicts, key=order.index)
    assert outcome.sentence == "Solved. 2 checks fail."


def test_no_operating_point_says_how_much_could_be_carried_and_what_bars_it():
    weak = changed(
        two_nodes(),
        C1=Cable(start="B1", end="B2", name="Long lane", length_m=1150.0),
        L1=Load(node="B2", demand_kva=300.0),
    )
    outcome = run(weak)
    assert outcome.status is Status.NO_OPERATING_POINT
    assert outcome.to_blame == "C1"
    assert outcome.findings[0].verdict is Verdict.BLOCKS
    share = outcome.largest_share
    assert (
        f"only {100 * share:.1f} % of it still solves, and Long lane (C1) stands"
        in outcome.findings[0].sentence
    )
    assert not outcome.nodes.column("live").any()
    carried = run(changed(weak, L1=Load(node="B2", demand_kva=300.0 * share * 0.999)))
    too_much = run(changed(weak, L1=Load(node="B2", demand_kva=300.0 * share * 1.002)))
    assert carried.status is Status.SOLVED
    assert too_much.status is Status.NO_OPERATING_POINT


def test_infeed_that_no_load_shedding_can_cure_is_said_to_be_the_infeed():
    outcome = run(changed(two_nodes(), G1=Generator(node="B2", output_kw=1e6)))
    assert outcome.status is Status.NO_OPERATING_POINT
    assert (outcome.largest_share, outcome.to_blame) == (0.0, None)
    assert "not even with all loads off: the infeed or the charging" in outcome.findings[0].sentence


def test_the_case_that_can_carry_least_is_named():
    cases = (Case(name="Day"), Case(name="Gala", load_percent=4000.0), Case(name="Fair", load_percent=3000.0))
    outcome = run(
        msgspec.structs.replace(changed(two_nodes(), C1=line("B1", "B2", length_m=900.0)), cases=cases)
    )
    assert outcome.status is Status.NO_OPERATING_POINT
    assert "in case Gala" in outcome.findings[0].sentence


def test_each_limit_names_whose_it_is():
    base = limited(two_nodes(), name="Volts of the grid", low_percent=99.9, drop_percent=0.1)
    whose = {f.check: f.whose for f in run(base).findings}
    assert whose["voltage low"] == "Volts of the grid"
    assert whose["voltage drop"] == "the limit set for this drawing"
    named = limited(two_nodes(), name="Volts of the grid", drop_percent=0.1, drop_name="Drop of the code")
    (drop,) = of(run(named), "voltage drop")
    assert drop.whose == "Drop of the code"
    assert drop.sentence.endswith("(Drop of the code).")


def test_branches_without_a_rating_are_noted_in_one_line():
    rated = line("B3", "B4", rating_a=90.0)
    base = changed(two_nodes(), B3=Busbar(), B4=Busbar(), C2=line("B2", "B3"), C3=rated)
    (note,) = of(run(base), "not judged")
    assert (note.verdict, note.ids) == (Verdict.NOTE, ("C1", "C2"))
    assert note.sentence == "The loading of C1 and C2 is not judged: no rating is given."
    assert tally_words([note]) == "Nothing is judged"
