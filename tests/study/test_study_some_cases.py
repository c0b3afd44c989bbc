"""Some cases have an operating point and some have not: the others keep their figures, to the last bit."""

import json
import math

import numpy as np
import pytest
from msgspec.structs import replace
from study_layouts import changed, drawing, line, meshed_town, town, two_nodes
from unlike_layouts import feeder, street

from app.__main__ import main
from app.model.drawing import Case, Limits, Own
from app.model.file import save
from app.model.kinds import Busbar, Generator, Load, Motor, Supply, Transformer
from app.printed import printed
from app.study import run, starts, tap_curve
from app.study.outcome import Verdict
from app.study.record import record
from app.study.solved_cases import HOLDS_THERE
from solver.status import Status

PEAK, NIGHT = Case(name="Peak", supply_percent=98.0), Case(name="Night", load_percent=10.0)
HEAVY = Case(name="Heavy", load_percent=1e5)
FAR = {"length_m": 1200.0}
UNIT = {"regulates": "winding 2", "bandwidth_percent": 0.2, "tap": 0}


def ringed(*cases):
    """Two transformers side by side whose taps do not agree, a motor, generation with a limit on its rise."""
    return drawing(
        cases or (PEAK,),
        Limits(rise_percent=3.0, start_step_percent=10.0, drop_percent=8.0),
        B1=Busbar(),
        S1=Supply(node="B1", nominal_v=11000.0, fault_level_min_mva=40.0),
        T1=Transformer(start="B1", end="B2", rating_kva=160.0, tap=1),
        T2=Transformer(start="B1", end="B2", rating_kva=160.0, tap=-1),
        B2=Busbar(),
        C1=line("B2", "B3"),
        B3=Busbar(),
        L1=Load(node="B3", demand_kva=60.0),
        M1=Motor(node="B3", rated_kw=11.0),
        G1=Generator(node="B3", output_kw=20.0),
    )


def long_feeder():
    """The same with a cable that cannot carry nine times the load."""
    return changed(ringed(PEAK, replace(HEAVY, load_percent=900.0), NIGHT), C1=line("B2", "B3", **FAR))


LAYOUTS = {
    "two nodes": two_nodes(),
    **{f"town {seed}": town(seed) for seed in (3, 7, 11)},
    "ring": ringed(),
    "street": street(),
    "feeder": feeder(),
}


MESHED = {seed: meshed_town(seed) for seed in (4, 7)}


def with_cases(base, *cases):
    return replace(base, cases=cases)


def figures(outcome, case):
    """Every figure of one case, as bytes; what knows no case as it is."""
    tables = [outcome.nodes, outcome.branches, outcome.attachments]
    tables += [outcome.starts] if outcome.starts is not None else []
    wires = outcome.wires
    tables += [wires.nodes, wires.branches, wires.attachments] if wires is not None else []
    told = {
        (number, name): (column if column.ndim == 1 else column[:, case]).tobytes()
        for number, table in enumerate(tables)
        for name, column in table.columns.items()
    }
    balance = outcome.balance
    return told | {name: float(getattr(balance, name)[case]).hex() for name in balance.__dataclass_fields__}


@pytest.mark.parametrize("at", [0, 1, 2])
@pytest.mark.parametrize("base", LAYOUTS.values(), ids=LAYOUTS)
def test_the_others_are_those_of_a_drawing_without_it_to_the_last_bit(base, at):
    cases = [PEAK, NIGHT]
    cases.insert(at, HEAVY)
    outcome = run(with_cases(base, *cases))
    assert outcome.case_status[at] is Status.NO_OPERATING_POINT
    assert outcome.status is Status.NO_OPERATING_POINT
    assert outcome.solved_cases == tuple(k for k in range(3) if k != at)
    for case in outcome.solved_cases:
        assert figures(outcome, case) == figures(run(with_cases(base, cases[case])), 0)
    tables = (outcome.nodes, outcome.branches, outcome.attachments)
    for column in (c for t in tables for c in t.columns.values() if c.ndim == 2 and c.dtype.kind == "f"):
        assert np.isnan(column[:, at]).all()
    assert not any(t.at(id, at).live for t in tables for id in t.ids)
    assert math.isnan(outcome.balance.supply_kw[at])


@pytest.mark.parametrize("seed", MESHED)
def test_on_rings_they_are_the_same_but_for_rounding(seed):
    """What closes rings comes of a matrix product, whose last bit hangs on how many cases there are."""
    outcome = run(with_cases(MESHED[seed], PEAK, HEAVY, NIGHT))
    assert outcome.solved_cases == (0, 2)
    for case, alone in ((0, run(with_cases(MESHED[seed], PEAK))), (2, run(with_cases(MESHED[seed], NIGHT)))):
        for name in ("nodes", "branches", "attachments"):
            now, then = getattr(outcome, name).columns, getattr(alone, name).columns
            for column in (n for n, c in now.items() if c.ndim == 2 and c.dtype.kind == "f"):
                size = np.nanmax(np.abs(then[column]), initial=1.0)
                np.testing.assert_allclose(
                    now[column][:, case], then[column][:, 0], rtol=1e-12, atol=1e-13 * size
                )


@pytest.mark.parametrize("base", [*LAYOUTS.values(), *MESHED.values()], ids=[*LAYOUTS, *MESHED])
def test_findings_are_those_of_the_solved_cases_and_say_which_is_missing(base):
    outcome, without = (run(with_cases(base, *cases)) for cases in ((PEAK, HEAVY, NIGHT), (PEAK, NIGHT)))
    (barring,) = [f for f in outcome.findings if f.verdict is Verdict.BLOCKS]
    assert barring.by_case == (Verdict.NOTE, Verdict.BLOCKS, Verdict.NOTE)
    assert "in case Heavy" in barring.sentence
    assert f"{100 * outcome.largest_share:.1f} %" in barring.sentence
    assert barring.ids == (outcome.to_blame,)
    judged = [f for f in outcome.findings if f is not barring]
    assert [(f.check, f.ids, f.verdict, f.case) for f in judged] == [
        (f.check, f.ids, f.verdict, f.case) for f in without.findings
    ]
    for now, then in zip(judged, without.findings, strict=True):
        if now.case:
            assert now.in_case(1) is Verdict.BLOCKS
            assert (now.in_case(0), now.in_case(2)) == (then.in_case(0), then.in_case(1))
        only_there = then.verdict in (Verdict.HOLDS, Verdict.NEAR) and bool(then.case)
        assert now.sentence == then.sentence + (f" {HOLDS_THERE}" if only_there else "")
    assert outcome.verdict(1) is Verdict.BLOCKS
    good = {Verdict.HOLDS, Verdict.NEAR}
    assert not good & set(outcome.verdicts(1).values())
    assert not any(outcome.verdict_of(id, 1, ("loading", "fault rating")) in good for id in outcome.nodes.ids)


def test_the_share_told_is_that_of_the_closed_form():
    """Behind R + jX a load P + jQ has an answer as long as (U²/2 − PR − QX)² ≥ (P² + Q²)(R² + X²)."""
    base = two_nodes(cases=[NIGHT, HEAVY])
    outcome = run(base)
    z = complex(outcome.branches.at("C1").resistance_ohm, outcome.branches.at("C1").reactance_ohm)
    load = base.elements["L1"]
    s = load.demand_kva * 1e3 * HEAVY.load_percent / 100
    p, q = s * load.power_factor, s * math.sqrt(1 - load.power_factor**2)
    u = base.elements["S1"].nominal_v
    most = u**2 / 2 / (p * z.real + q * z.imag + s * abs(z))
    assert outcome.largest_share == pytest.approx(most, rel=1e-3)


def test_each_unsolved_case_has_its_reason_the_heaviest_first():
    outcome = run(
        two_nodes(cases=[replace(HEAVY, name="Heavy", load_percent=5e4), NIGHT, replace(HEAVY, name="Worse")])
    )
    told = [f for f in outcome.findings if f.verdict is Verdict.BLOCKS]
    assert [f.case for f in told] == ["Worse", "Heavy"]
    assert [f.in_case(2) for f in told] == [Verdict.BLOCKS, Verdict.NOTE]
    assert outcome.sentence.startswith("No operating point in cases Heavy and Worse: ")
    assert "The other case is solved: every check holds" in outcome.sentence


def test_a_changer_that_hunts_in_one_case_leaves_the_other_its_figures():
    def make(cases):
        return drawing(
            cases,
            B1=Busbar(),
            S1=Supply(node="B1", nominal_v=11000.0),
            T1=Transformer(start="B1", end="B2", **UNIT),
            B2=Busbar(),
            L1=Load(node="B2", demand_kva=40.0),
        )

    still = Case(name="Idle", load_percent=0.0, own={"S1": Own(percent=100.0)})
    held = run(make([Case(name="Any")])).branches.at("T1")
    both = run(make([PEAK, still]))
    hunts = [case for case in (0, 1) if not both.solved(case)]
    assert len(hunts) == 1, held
    (found,) = [f for f in both.findings if f.check == "hunting"]
    assert both.cases[hunts[0]] in found.sentence
    assert found.in_case(hunts[0]) is Verdict.BLOCKS
    assert found.in_case(1 - hunts[0]) is Verdict.NOTE
    assert both.case_status[hunts[0]] is Status.NOT_SETTLED
    assert both.largest_share is None
    other = 1 - hunts[0]
    assert figures(both, other) == figures(run(make([(PEAK, still)[other]])), 0)


def test_a_motor_is_not_said_to_fail_to_start_where_nothing_runs():
    outcome = run(ringed(PEAK, HEAVY))
    assert not any("cannot start" in f.sentence for f in outcome.findings)
    state = outcome.starts.at("M1", 1)
    assert (state.solved, math.isnan(state.motor_v)) == (False, True)
    table = starts(ringed(PEAK, HEAVY))
    for name, column in table.columns.items():
        assert column.tobytes() == outcome.starts.column(name).tobytes()
    assert starts(ringed(HEAVY)).ids == ()


def test_tap_bands_pass_over_a_case_that_no_notch_solves_and_name_it():
    heavy, light = (tap_curve(ringed(*cases), "T1") for cases in ((PEAK, HEAVY, NIGHT), (PEAK, NIGHT)))
    assert heavy.left_out == (1,)
    assert light.left_out == ()
    assert heavy.holds.any()
    for name in ("holds", "lowest_percent", "highest_percent"):
        assert getattr(heavy, name).tobytes() == getattr(light, name).tobytes()
    assert np.isnan(heavy.loss_kw[:, 1]).all()
    assert heavy.loss_kw[:, [0, 2]].tobytes() == light.loss_kw.tobytes()


def test_a_case_that_some_notch_solves_still_counts_in_the_bands():
    """Close to the nose a lower notch carries what a higher one cannot: that one is no notch that holds."""

    def weak(percent):
        return drawing(
            [NIGHT, Case(name="Nose", load_percent=percent)],
            Limits(low_percent=30.0, high_percent=130.0),
            B1=Busbar(),
            S1=Supply(node="B1", nominal_v=11000.0),
            T1=Transformer(start="B1", end="B2"),
            B2=Busbar(),
            C1=line("B2", "B3", **FAR),
            B3=Busbar(),
            L1=Load(node="B3", demand_kva=50.0),
        )

    outcome = run(weak(1000.0))
    nose = 1000.0 * outcome.largest_share
    curve = tap_curve(weak(nose), "T1")
    bears = np.isfinite(curve.loss_kw[:, 1])
    assert curve.left_out == ()
    assert 0 < bears.sum() < len(bears)
    assert (curve.holds <= bears).all()


def test_json_and_text_have_the_others_and_null_for_it(tmp_path, capsys):
    base = long_feeder()
    outcome, path = run(base), tmp_path / "x.farend"
    save(base, path)
    assert main(["results", str(path), "--json"]) == 3
    told = json.loads(capsys.readouterr().out)
    assert told["status"] == "no_operating_point"
    assert told["case_status"] == ["solved", "no_operating_point", "solved"]
    volts = told["nodes"]["B3"]["voltage_v"]
    assert volts == [outcome.nodes.at("B3", 0).voltage_v, None, outcome.nodes.at("B3", 2).voltage_v]
    assert told["balance"]["loss_kw"][1] is None
    assert told["starts"]["M1"]["motor_v"][1] is None
    assert told == json.loads(json.dumps(record(base, outcome, told["farend"]), allow_nan=False))
    assert main(["results", str(path)]) == 3
    text = capsys.readouterr().out.replace("-", "−")
    assert text == printed(base, outcome).replace("-", "−")
    heavy = text[text.index("Case: Heavy: NOT SOLVED") : text.index("Case: Night")]
    assert "cannot carry its load in case Heavy" in heavy
    assert "Nodes" not in heavy
    assert "nan" not in text
    assert text.count("Nodes\n") == 2


@pytest.mark.parametrize("suffix", [".xlsx", ".csv", ".svg"])
def test_what_is_written_is_written_and_the_exit_code_is_that_of_no_operating_point(suffix, tmp_path, capsys):
    path, out = tmp_path / "x.farend", tmp_path / f"out{suffix}"
    save(changed(long_feeder(), B9=Busbar()), path)
    assert main(["picture" if suffix == ".svg" else "sheet", str(path), "-o", str(out)]) == 3
    assert out.stat().st_size > 0
    assert capsys.readouterr().err == ""
