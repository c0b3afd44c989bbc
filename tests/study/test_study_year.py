"""A year against single solves, against closed forms, in halves, stopped, and where hours have no answer."""

import json
import math
from dataclasses import fields
from pathlib import Path

import msgspec
import numpy as np
import pytest
from study_layouts import changed, drawing, line, meshed_town, town, two_nodes
from unlike_layouts import pole

from app.__main__ import main
from app.model import edits
from app.model.drawing import Case, Drawing, Limits
from app.model.file import load, save
from app.model.kinds import Busbar, Generator, Joint, Load, Motor, Regulator, Supply, Transformer
from app.model.profiles import Profile
from app.model.shapes import shape
from app.study import run
from app.study.outcome import Verdict
from app.study.year import run_year
from app.study.year_points import date, points_of, when
from app.study.year_record import course_text
from solver.status import Status


def profile(*values, hours=1.0):
    return Profile(percent=tuple(map(float, values)), hours=hours)


def wavy(count=8760, seed=3, hours=1.0):
    return profile(*np.random.default_rng(seed).uniform(5, 100, count), hours=hours)


def following(base, **profiles):
    """The drawing with these profiles; `loads` is what loads follow, the rest are ids."""
    for name, one in profiles.items():
        base = edits.put_profile(base, name, one)
        if name == "loads":
            base = edits.set_year(base, load_profile=name)
        elif name == "makers":
            base = edits.set_year(base, generation_profile=name)
        else:
            base = edits.follow(base, (name,), name)
    return base


def at_point(base, point):
    """The drawing as it stands at one point of its year, by plain edits and one neutral case."""
    points, made = points_of(base), base
    for id, one in base.elements.items():
        named = getattr(one, "profile", None)
        if named is None:
            continue
        default = {Load: "load_profile", Motor: "load_profile", Generator: "generation_profile"}
        name = named or getattr(base.year, default.get(type(one), "money"))
        share = points.values[name][point] / 100 if name in points.values else 1.0
        if isinstance(one, Load):
            field = "demand_kw" if one.demand_kva is None else "demand_kva"
            made = edits.change(made, id, **{field: getattr(one, field) * share})
        elif isinstance(one, Supply):
            made = edits.change(made, id, held_percent=one.held_percent * share)
        elif isinstance(one, Generator):
            scaled = {"output_kw": one.output_kw * share, "output_kvar": one.output_kvar * share}
            made = edits.change(made, id, **scaled)
        elif isinstance(one, Motor):
            made = edits.change(made, id, rated_kw=one.rated_kw * share)
    return run(msgspec.structs.replace(made, cases=(Case(),)))


def full_town():
    return following(
        town(5, nodes=14),
        loads=wavy(),
        G1=shape("daylight"),
        S1=profile(*(100 + 3 * math.sin(h / 5) for h in range(24))),
        L3=profile(30, 60, 90, hours=2.5),
    )


@pytest.mark.parametrize("make", [full_town, lambda: following(meshed_town(3), loads=wavy())])
def test_a_year_is_its_single_hours(make):
    """Sampled: whatever point of the year, solving the drawing as it then stands gives the same."""
    base = make()
    year, points = run_year(base), points_of(base)
    assert year.status is Status.SOLVED
    sampled = [int(year.points.count * k / 9) for k in range(9)]
    low = year.nodes.column("lowest_at_h")
    sampled += [int(np.searchsorted(points.begin, low[-1])), int(np.nanargmax(year.course.loaded_percent))]
    for point in sampled:
        one = at_point(base, point)
        for name in ("supply_kw", "generation_kw", "load_kw", "line_kw", "copper_kw", "iron_kw"):
            want = getattr(one.balance, name)[0]
            assert getattr(year.course, name)[point] == pytest.approx(want, rel=1e-9, abs=1e-9)
        percent, loaded = one.nodes.column("percent")[:, 0], one.branches.column("loaded_percent")[:, 0]
        assert year.course.lowest_percent[point] == pytest.approx(np.nanmin(percent), rel=1e-10)
        assert percent[year.course.lowest_row[point]] == pytest.approx(np.nanmin(percent), rel=1e-10)
        assert year.course.loaded_percent[point] == pytest.approx(np.nanmax(loaded), rel=1e-9)
        assert np.nanmin(percent - year.nodes.column("lowest_percent")) > -1e-9
        assert np.nanmax(percent - year.nodes.column("highest_percent")) < 1e-9
        assert np.nanmax(loaded - year.branches.column("most_loaded_percent")) < 1e-7


def test_energies_and_extremes_are_those_of_every_single_solve():
    """All points, on a day of 24 hours that begins again: sums, extremes and hours beyond the limits."""
    base = following(
        msgspec.structs.replace(town(2, nodes=10), limits=Limits(low_percent=101.7, high_percent=102.2)),
        loads=wavy(24),
        S1=profile(*(100 + 0.5 * math.cos(h / 4) for h in range(24))),
    )
    year, hours = run_year(base), [at_point(base, h) for h in range(24)]
    percent = np.array([h.nodes.column("percent")[:, 0] for h in hours])
    for name, found in (("lowest", percent.min(axis=0)), ("highest", percent.max(axis=0))):
        assert year.nodes.column(f"{name}_percent") == pytest.approx(found, rel=1e-10)
    for row, at in enumerate(year.nodes.column("lowest_at_h")):
        assert percent[int(at) % 24, row] == pytest.approx(percent[:, row].min(), rel=1e-12)
    assert year.nodes.column("hours_below") == pytest.approx(365.0 * (percent < 101.7).sum(axis=0))
    assert year.nodes.column("hours_above") == pytest.approx(365.0 * (percent > 102.2).sum(axis=0))
    assert 0 < year.nodes.column("hours_below").max() < 8760
    for mine, theirs in (("loss_kwh", "loss_kw"), ("iron_kwh", "iron_kw")):
        want = 365 * sum(h.branches.column(theirs)[:, 0] for h in hours)
        assert year.branches.column(mine) == pytest.approx(want, rel=1e-9, abs=1e-9)
    want = 365 * sum(h.attachments.column("kw")[:, 0] for h in hours)
    assert year.attachments.column("kwh") == pytest.approx(want, rel=1e-9, abs=1e-6)
    through = np.array([h.branches.column("through_kw")[:, 0] for h in hours])
    assert year.branches.column("through_kwh") == pytest.approx(365 * np.maximum(through, 0).sum(axis=0))
    assert year.branches.column("back_kwh") == pytest.approx(
        365 * np.maximum(-through, 0).sum(axis=0), abs=1e-9
    )


def test_closed_form_of_a_constant_load_and_of_iron_alone():
    base = two_nodes()
    year, one = run_year(base), run(base)
    assert year.points.count == 1
    assert year.balance.load_kwh == pytest.approx(8760 * 9.5, rel=1e-12)
    assert year.balance.loss_kwh == pytest.approx(8760 * one.balance.loss_kw[0], rel=1e-12)
    assert (year.balance.load_factor, year.balance.loss_factor) == pytest.approx((1.0, 1.0))
    idle = drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=11000.0), B2=Busbar(),
        L1=Load(node="B2", demand_kw=0.0, demand_kva=None),
        T1=Transformer(start="B1", end="B2", no_load_loss_w=130.0, no_load_current_percent=1.0),
    )  # fmt: skip
    quiet = run_year(following(idle, loads=wavy(48)))
    assert quiet.balance.iron_kwh == pytest.approx(8760 * 0.130, rel=1e-12)
    assert quiet.balance.iron_percent == pytest.approx(100, abs=1e-4)


def test_losses_follow_the_loss_load_factor_of_a_two_step_load():
    """Constant current: losses go with I², so LLF = Σ(I/Imax)²·h/n; JOB.md 3.17."""
    base = changed(two_nodes(), L1=Load(node="B2", constant_current_percent=100.0))
    base = following(base, loads=profile(100, 50, 50, 50))
    year = run_year(base)
    assert year.balance.loss_factor == pytest.approx((1 + 3 * 0.25) / 4, rel=2e-4)  # angles move a little
    assert year.attachments.at("L1").load_factor == pytest.approx(0.625, rel=3e-3)


def test_two_halves_add_up_to_the_year():
    values = np.random.default_rng(1).uniform(10, 100, 8760)
    base = town(5, nodes=12)
    first, second = values.copy(), values.copy()
    first[4380:], second[:4380] = 0.0, 0.0
    whole, one, two, dark = (
        run_year(following(base, loads=profile(*v))).branches.column("loss_kwh")
        for v in (values, first, second, 0 * values)
    )
    assert one + two - dark == pytest.approx(whole, rel=1e-10)


def test_half_hours_and_hours_and_days_go_together():
    base = following(two_nodes(), loads=profile(*[20, 80] * 24, hours=0.5), S1=profile(99, 101, hours=24.0))
    points = points_of(base)
    assert points.count == 17520
    assert set(points.hours) == {0.5}
    assert points.values["loads"][:4].tolist() == [20, 80, 20, 80]
    assert points.values["S1"][[0, 47, 48, 95, 96]].tolist() == [99, 99, 101, 101, 99]
    assert run_year(base).balance.load_kwh == pytest.approx(8760 * 9.5 * 0.5, rel=1e-10)


def test_a_leap_year_has_its_day_and_odd_lengths_fill_it():
    leap = points_of(following(two_nodes(), loads=profile(*[50] * 8784)))
    assert (leap.count, leap.hours.sum()) == (8784, 8784)
    odd = points_of(following(two_nodes(), loads=profile(*range(7), hours=1.7)))
    assert odd.hours.sum() == pytest.approx(8760)
    assert odd.values["loads"][-1] == (odd.count - 1) % 7
    assert when(4122.0) == "hour 4\u202f123, 21 Jun 18:00"
    assert (date(8759.5), date(59 * 24.0), date(59 * 24.0, 8784)) == (
        "31 Dec 23:30",
        "1 Mar 00:00",
        "29 Feb 00:00",
    )


def test_too_many_points_are_refused():
    base = following(two_nodes(), loads=profile(1, 2, hours=0.05), S1=profile(100, hours=0.0501))
    year = run_year(base)
    assert year.status is Status.INVALID
    assert "points, allowed are at most 200\u202f000" in year.sentence


def test_it_can_be_stopped_and_says_so():
    told = []

    def progress(done, whole):
        told.append((done, whole))
        return done < 3000

    year = run_year(full_town(), progress)
    assert year.stopped
    assert 3000 <= year.done < year.points.count == told[0][1]
    assert "Stopped before its end" in year.sentence
    assert len(told) >= 3
    assert np.isnan(year.course.supply_kw[year.done :]).all()


def test_progress_ends_at_the_whole():
    told = []
    run_year(full_town(), lambda done, whole: told.append((done, whole)) or True)
    assert told[-1][0] == told[-1][1]
    assert len(told) >= 10


def test_hours_without_an_answer_are_named_and_left_out():
    values = np.full(24, 50.0)
    base = changed(two_nodes(), L1=Load(node="B2", demand_kva=300.0))
    values[18:20] = 1000.0
    year = run_year(following(base, loads=profile(*[*values, *[50.0] * 8736])))
    assert year.status is Status.NO_OPERATING_POINT
    (gap,) = year.gaps
    assert (gap.first, gap.last, gap.hours) == (18, 19, 2.0)
    assert year.solved_h == 8758
    (finding,) = (f for f in year.findings if f.check == "no answer")
    assert finding.verdict is Verdict.FAILS
    assert "hour 19, 1 Jan 18:00 and 2 h in all from there" in finding.sentence
    (why,) = (f for f in year.findings if f.check == "no operating point")
    assert why.ids == ("C1",)
    assert (
        "Heaviest of the hours without an answer is hour 19, 1 Jan 18:00. The layout cannot carry"
        in why.sentence
    )
    assert math.isfinite(year.balance.loss_kwh)
    assert year.nodes.at("B2").lowest_at_h not in (18, 19)
    never = run_year(following(base, loads=profile(1000)))
    assert (never.solved_h, never.status) == (0, Status.NO_OPERATING_POINT)
    assert math.isnan(never.balance.load_factor)


def regulated():
    base = drawing(
        B1=Busbar(), S1=Supply(node="B1"), B2=Busbar(), B3=Busbar(), B4=Busbar(),
        C1=line("B1", "B2", length_m=500.0), V1=Regulator(start="B2", end="B3", steps_up=2),
        C2=line("B3", "B4"), L1=Load(node="B4", demand_kva=60.0),
        G1=Generator(node="B4", output_kw=5.0, hold_percent=None),
    )  # fmt: skip
    return following(base, loads=profile(*np.linspace(0, 100, 24)))


def test_what_steps_comes_to_rest_in_every_hour():
    base = regulated()
    year = run_year(base)
    notches = [at_point(base, h).branches.at("V1").notch for h in range(24)]
    state = year.branches.at("V1")
    assert len(set(notches)) == 3
    assert (state.least_notch, state.most_notch) == (min(notches), max(notches))
    assert state.hours_at_stop > 0
    assert state.hours_at_stop % 365 == 0
    assert any(f.check == "end stop" and "h of the year" in f.sentence for f in year.findings)
    assert any("come to rest in every point anew" in words for words in year.basis)
    lows = [at_point(base, h).nodes.at("B4").percent for h in range(24)]
    assert year.nodes.at("B4").lowest_percent == pytest.approx(min(lows), rel=1e-10)


def test_a_generator_that_holds_volts_does_so_in_every_hour():
    base = changed(regulated(), V1=None, B3=None, C2=line("B2", "B4"))
    base = changed(
        base, G1=Generator(node="B4", output_kw=8.0, hold_percent=99.0, q_min_kvar=-30.0, q_max_kvar=30.0)
    )
    year = run_year(base)
    for hour in (0, 7, 23):
        want = at_point(base, hour).balance.supply_kw[0]
        assert year.course.supply_kw[hour] == pytest.approx(want, rel=1e-8)
    levels = [at_point(base, hour).nodes.at("B4").percent for hour in range(24)]
    assert 3 < sum(abs(level - 99.0) < 1e-6 for level in levels) < 24  # at a limit of its kvar else
    assert year.nodes.at("B4").highest_percent == pytest.approx(max(levels), rel=1e-9)
    assert year.nodes.at("B4").lowest_percent == pytest.approx(min(levels), rel=1e-9)


def test_export_is_told_apart_from_import():
    base = changed(two_nodes(), G1=Generator(node="B2", output_kw=40.0))
    year = run_year(following(base, makers=profile(*[0] * 12, *[100] * 12)))
    supply, cable = year.attachments.at("S1"), year.branches.at("C1")
    assert supply.back_kwh > 100_000
    assert supply.kwh == pytest.approx(year.balance.supply_kwh)
    assert (cable.through_kwh > 0, cable.back_kwh > 100_000) == (True, True)
    b = year.balance
    assert b.supply_kwh + b.generation_kwh == pytest.approx(b.load_kwh + b.loss_kwh, rel=1e-10)
    assert b.closure < 1e-10


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (
            lambda: changed(two_nodes(), M1=Motor(node="B2", state="starting", name="Pump")),
            "drawn as starting",
        ),
        (lambda: changed(two_nodes(), S2=Supply(node="B1")), "S2"),
        (Drawing, "supply"),
    ],
)
def test_what_cannot_have_a_year_says_why_and_has_no_figures(make, words):
    year = run_year(make())
    assert year.status is Status.INVALID
    assert words in year.sentence or not make().elements
    assert year.solved_h == 0
    assert all(math.isnan(getattr(year.balance, f.name)) for f in fields(year.balance))
    assert not year.nodes.column("live").any()


def test_the_basis_says_which_settings_are_used_and_no_case_changes_the_year():
    base = following(two_nodes(), loads=shape("household"))
    cased = msgspec.structs.replace(base, cases=(Case(load_percent=7.0, supply_percent=80.0),))
    assert run_year(cased).balance == run_year(base).balance
    said = " ".join(run_year(base).basis)
    for words in (
        "No loading case",
        "Profile loads",
        "invented, no source",
        "Followed by L1",
        "Constant at 100 %",
    ):
        assert words in said


def test_the_price_of_losses():
    base = edits.set_year(two_nodes(), price_per_kwh=0.25, money="EUR")
    assert run_year(base).balance.cost == pytest.approx(0.25 * run_year(base).balance.loss_kwh)
    assert math.isnan(run_year(two_nodes()).balance.cost)


def test_the_command_says_what_the_study_says(tmp_path, capsys):
    path, base = tmp_path / "x.farend", full_town()
    save(base, path)
    assert main(["year", str(path), "--json", "-o", str(tmp_path / "o.csv")]) in (0, 1)
    told, year = json.loads(capsys.readouterr().out), run_year(load(path))
    assert told["balance"]["loss_kwh"] == year.balance.loss_kwh
    for name in ("nodes", "branches", "attachments"):
        for id, row in told[name].items():
            for column, value in row.items():
                if column not in ("name", "kind"):
                    want = getattr(year, name).at(id)
                    want = getattr(want, column)
                    assert value == (None if want != want else want)
    assert (tmp_path / "o.csv").read_text(encoding="utf-8") == course_text(year)
    rows = course_text(year).splitlines()
    assert len(rows) == year.points.count + 1
    assert main(["year", str(path)]) in (0, 1)
    text = capsys.readouterr().out
    assert "kWh" in text
    assert year.findings[0].sentence in text


@pytest.mark.parametrize(
    ("make", "code"),
    [
        (two_nodes, 0),
        (lambda: msgspec.structs.replace(two_nodes(), limits=Limits(low_percent=99.99)), 1),
        (Drawing, 2),
        (lambda: changed(two_nodes(), L1=Load(node="B2", demand_kva=9000.0)), 3),
    ],
)
def test_exit_codes(make, code, tmp_path, capsys):
    path = tmp_path / "x.farend"
    save(make(), path)
    assert main(["year", str(path)]) == code
    assert main(["year", str(path), "--json"]) == code
    assert capsys.readouterr().err == ""


def test_extremes_do_not_hang_on_the_blocks(monkeypatch):
    base = full_town()
    whole = run_year(base)
    monkeypatch.setattr("app.study.year.BLOCKS", 97)
    monkeypatch.setattr("app.study.year.MOST", 14 * 1000)
    parted = run_year(base)
    for name in ("nodes", "branches", "attachments"):
        for column, values in getattr(whole, name).columns.items():
            got = getattr(parted, name).column(column)
            np.testing.assert_allclose(got, values, rtol=1e-9, atol=1e-6, err_msg=column)


SAMPLES = Path(__file__).parents[2] / "samples"


def test_the_estate_is_decided_by_its_load_factor():
    """No-load losses run all year: two cables lose less at 0.15, the pair at 0.45; they cross near 0.30."""
    pair, cable = load(SAMPLES / "fernhollow_year.farend"), load(SAMPLES / "fernhollow.farend")
    for id in ("C1", "C2"):
        cable = edits.change(cable, id, side_by_side=2)
    more = {}
    for factor in (0.15, 0.30, 0.45):
        home = shape("household", factor)
        lost = [
            run_year(
                edits.set_year(edits.put_profile(d, "household", home), load_profile="household")
            ).balance
            for d in (cable, pair)
        ]
        more[factor] = lost[0].loss_kwh / lost[1].loss_kwh
        assert lost[0].iron_kwh == 0
        assert lost[1].iron_kwh == pytest.approx(2840, abs=20)
    assert more[0.15] < 0.65
    assert more[0.30] == pytest.approx(1.0, abs=0.05)
    assert more[0.45] > 1.3
    year = run_year(pair)
    assert year.balance.load_factor == pytest.approx(0.30, abs=2e-4)
    assert year.balance.iron_percent == pytest.approx(65.6, abs=0.1)
    assert not [f for f in year.findings if f.verdict is Verdict.FAILS]


def test_phases_each_for_themselves_have_a_year_too():
    base = load(SAMPLES / "loonmarrow_camp.farend")
    base = edits.set_year(edits.put_profile(base, "home", shape("household")), load_profile="home")
    year = run_year(base)
    assert year.status is Status.SOLVED
    for point in (0, 306, 4000):
        case = Case(load_percent=base.profiles["home"].percent[point])
        one = run(msgspec.structs.replace(base, cases=(case,)))
        assert one.wires is not None
        assert year.course.line_kw[point] == pytest.approx(one.balance.line_kw[0], rel=1e-9)
        assert year.course.lowest_percent[point] == pytest.approx(np.nanmin(one.nodes.column("percent")))
        assert year.course.highest_percent[point] == pytest.approx(
            np.nanmax(one.nodes.column("high_percent"))
        )
    assert year.balance.closure < 1e-12
    assert {f.ids[0] for f in year.findings if f.verdict is Verdict.FAILS} == {"B4", "B5", "B6"}


def test_a_changer_that_hunts_is_named_with_its_hours():
    base = changed(regulated(), V1=Regulator(start="B2", end="B3", bandwidth_percent=0.3, hold_percent=99.0))
    year = run_year(base)
    hunting = [f for f in year.findings if f.check == "hunting"]
    hours = sum(gap.hours for gap in year.gaps)
    assert 0 < hours < 8760
    assert year.status is Status.NOT_SETTLED
    assert [f.ids for f in hunting] == [("V1",)]
    assert hunting[0].value == hours
    assert year.solved_h == 8760 - hours


def each_phase():
    """A regulator that steps each phase by itself, each phase loaded otherwise."""
    base = drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=12470.0), P1=Joint(), P2=Joint(), P3=Joint(),
        O1=pole("B1", "P1", length_m=9e3), O2=pole("P2", "P3"),
        V1=Regulator(start="P1", end="P2", measures="each"),
        L1=Load(node="P3", demand_kva=900.0, phases="A"), L2=Load(node="P3", demand_kva=120.0, phases="B"),
        L3=Load(node="P3", demand_kva=300.0, phases="C"),
    )  # fmt: skip
    return following(base, loads=profile(*np.linspace(10, 190, 8), hours=1095.0))


def test_notches_of_a_year_span_all_phases_and_its_stops_are_counted_once():
    base = each_phase()
    year, singles = run_year(base).branches.at("V1"), [at_point(base, h) for h in range(8)]
    stood = [s.wires.branches.at("V1") for s in singles if s.status is Status.SOLVED]
    assert len(stood) > 4
    every = [n for s in stood for n in (s.a_notch, s.b_notch, s.c_notch)]
    assert (year.least_notch, year.most_notch) == (min(every), max(every))
    assert min(every) < max(s.b_notch for s in stood) < max(every)
    narrow = edits.change(base, "V1", steps_down=0, steps_up=1)
    ends = [at_point(narrow, h) for h in range(8)]
    at_stop = [
        any(f.check == "end stop" for f in one.findings) for one in ends if one.status is Status.SOLVED
    ]
    assert 0 < sum(at_stop) < len(at_stop)
    assert run_year(narrow).branches.at("V1").hours_at_stop == 1095 * sum(at_stop)


def test_a_generator_at_nought_percent_is_off_and_a_condenser_is_not():
    base = changed(regulated(), V1=None, B3=None, C2=line("B2", "B4"))
    plant = Generator(node="B4", output_kw=8.0, hold_percent=99.0, q_min_kvar=-90.0, q_max_kvar=90.0)
    lit = following(changed(base, G1=plant), G1=profile(*[0] * 9, *[50] * 15))
    year, dark = run_year(lit), run_year(changed(base, G1=None))
    assert year.course.lowest_percent[:9] == pytest.approx(dark.course.lowest_percent[:9], rel=1e-12)
    assert year.attachments.at("G1").kwh == pytest.approx(15 * 365 * 4.0)
    assert not any(f.check == "reactive limit" for f in year.findings)
    cases = (Case(name="Night", generation_percent=0.0), Case(name="Day", generation_percent=50.0))
    outcome = run(msgspec.structs.replace(changed(base, G1=plant), cases=cases))
    assert outcome.attachments.at("G1", 0).kvar == 0
    without = run(changed(base, G1=None))
    assert outcome.nodes.at("B4", 0).percent == pytest.approx(without.nodes.at("B4").percent, rel=1e-12)
    assert outcome.nodes.at("B4", 1).percent == pytest.approx(99.0, abs=1e-6)
    assert not any(f.check == "reactive limit" for f in outcome.findings)
    idle = run(changed(base, G1=msgspec.structs.replace(plant, output_kw=0.0, q_max_kvar=900.0)))
    assert idle.nodes.at("B4").percent == pytest.approx(99.0, abs=1e-6)
    assert any("0 % is off" in words for words in year.basis)
