"""Whatever is drawn, a run answers: it never raises, and says what it found in whole sentences."""

import json
import random
import warnings
from dataclasses import replace as replaced

import msgspec
import numpy as np
import pytest
from unlike_drawings import sound, turned, uneven

from app.model import edits
from app.model.drawing import Case, Drawing
from app.model.kinds import (
    Busbar,
    Cable,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    OverheadLine,
    Regulator,
    Supply,
    Switch,
    Transformer,
)
from app.printed import printed
from app.study import path, run, tap_curve
from app.study.outcome import Verdict
from app.study.record import record
from solver.status import Status


def anything(seed):
    """Nodes joined at random: loops, dead parts, several supplies, odd values, wrong levels."""
    dice = random.Random(seed)
    count = dice.randint(1, 9)
    elements = {
        f"N{i}": dice.choice([Busbar, Joint])(nominal_v=dice.choice([None] * 12 + [400.0, 11000.0, 0.4]))
        for i in range(count)
    }
    for i in range(dice.randint(0, count + 2)):
        ends = dict(zip(("start", "end"), (f"N{dice.randrange(count)}" for _ in "12"), strict=True))
        if ends["start"] == ends["end"]:
            continue
        elements[f"X{i}"] = dice.choice([_line, _line, _switch, _transformer, _moving])(dice, ends)
    for i in range(dice.randint(0, 9)):
        elements[f"Y{i}"] = _attachment(dice, f"N{dice.randrange(count)}")
    for i in range(dice.choice([0, 1, 1, 1, 2])):
        elements[f"S{i}"] = Supply(
            node=f"N{dice.randrange(count)}", nominal_v=dice.choice([400.0, 400.0, 11000.0, 230.0]),
            held_percent=dice.choice([1.0, 100.0]),
            wires=dice.choice(["three-phase", "three-phase", "two-wire"]),
        )  # fmt: skip
    cases = [
        Case(name=f"case {i}", load_percent=dice.choice([0.0, 100.0]), motor_percent=dice.choice([None, 0.0]))
        for i in range(dice.randint(1, 3))
    ]
    return msgspec.structs.replace(edits.put(Drawing(), elements), cases=tuple(cases))


def _line(dice, ends):
    return dice.choice([Cable, OverheadLine])(
        **ends, length_m=dice.choice([0.0, 50.0, 1e6]), resistance_ohm_per_km=dice.choice([0.0, 0.3]),
        capacitance_uf_per_km=dice.choice([None, 0.3, 100.0]), rating_a=dice.choice([None, 1e-3, 200.0]),
    )  # fmt: skip


def _switch(dice, ends):
    return Switch(**ends, closed=dice.random() < 0.7, rating_a=dice.choice([None, 400.0]))


def _transformer(dice, ends):
    return Transformer(
        **ends, v1_v=dice.choice([400.0, 11000.0, 230.0]), v2_v=dice.choice([400.0, 11000.0]),
        uk_percent=dice.choice([0.0, 4.0, 40.0]), load_loss_w=dice.choice([None, 0.0, 1200.0]),
        no_load_loss_w=dice.choice([None, 0.0, 130.0]), no_load_current_percent=dice.choice([None, 0.0, 2.0]),
        vector_group=dice.choice(["Dyn11", "Ii0"]), rating_kva=dice.choice([1e-3, 100.0]),
    )  # fmt: skip


def _moving(dice, ends):
    """A regulator, or a transformer whose tap changer steps by itself."""
    band = dice.choice([None, None, 0.1, 3.0])
    if dice.random() < 0.6:
        mode = dice.choice(["forward", "with the power", "idle in reverse"])
        return Regulator(**ends, mode=mode, bandwidth_percent=band, rating_a=dice.choice([None, 100.0]))
    side, drop = dice.choice(["winding 1", "winding 2"]), dice.choice([None, 0.1])
    unit = _transformer(dice, ends)
    return msgspec.structs.replace(unit, regulates=side, bandwidth_percent=band, drop_r_ohm=drop)


def _attachment(dice, node):
    return dice.choice(
        [
            Motor(
                node=node,
                rated_kw=dice.choice([4.0, 1e6]),
                rated_v=dice.choice([None, 400.0, 1.0]),
                state=dice.choice(["running", "starting", "off"]),
                starter=dice.choice(["direct", "soft starter", "drive"]),
            ),  # fmt: skip
            Generator(
                node=node, output_kw=dice.choice([0.0, 30.0]), hold_percent=dice.choice([100.0, 150.0])
            ),
            Load(node=node, demand_kva=dice.choice([0.0, 5.0, 1e6]), power_factor=dice.choice([0.0, 0.9])),
            Load(node=node, demand_kva=None, demand_kw=0.0, power_factor=0.0),
            Load(node=node, constant_current_percent=60.0, constant_impedance_percent=40.0),
            Generator(
                node=node, output_kw=dice.choice([0.0, 40.0, 1e6]), output_kvar=dice.choice([0.0, -5.0])
            ),
            Capacitor(node=node, rating_kvar=dice.choice([0.0, 20.0, 1e6]), rated_v=dice.choice([None, 1.0])),
        ]
    )


@pytest.mark.parametrize("start", range(0, 200, 20))
def test_a_run_answers_whatever_is_drawn(start):
    for seed in range(start, start + 20):
        base = anything(seed)
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            outcome = run(base)
            json.dumps(record(base, outcome, "0"), allow_nan=False)
            assert printed(base, outcome).endswith("\n")
            for id, element in base.elements.items():
                if isinstance(element, Transformer):
                    curve = tap_curve(base, id)
                    assert curve.loss_kw.shape == (len(curve.notches), len(base.cases))
        assert_sound(base, outcome)


@pytest.mark.parametrize("start", range(0, 400, 40))
def test_a_run_answers_whatever_phases_are_drawn(start):
    for seed in range(start, start + 40):
        base = uneven(anything(seed), seed)
        with warnings.catch_warnings():
            warnings.simplefilter("error")
            outcome = run(base)
            json.dumps(record(base, outcome, "0"), allow_nan=False)
            assert printed(base, outcome).endswith("\n")
            for id, element in base.elements.items():
                if isinstance(element, Transformer):
                    assert tap_curve(base, id).loss_kw.shape[1] == len(base.cases)
        assert_sound(base, outcome)


def assert_alike(one, other, names, rel):
    """Two tables whose live figures agree; `names` says which column of the other each is, blank
    where there is none."""
    for name, column in one.columns.items():
        if column.dtype.kind == "f" and names.get(name, name):
            live = one.columns.get("live", np.ones(len(column), dtype=bool))
            column, found = column[live], other.column(names.get(name, name))[live]
            scale = np.nanmax(np.abs(column), initial=1.0)
            np.testing.assert_allclose(found, column, rtol=rel, atol=rel * scale, err_msg=name)


@pytest.mark.parametrize("start", range(0, 60, 20))
def test_phases_that_fit_are_solved_and_turn_with_their_letters(start):
    turn = {"a": "b", "b": "c", "c": "a", "n": "n"}
    shifted = {f"{a}_{what}": f"{b}_{what}" for a, b in turn.items() for what in ("v", "a", "notch")}
    shifted |= {f"{phase}_deg": "" for phase in "abc"}  # of A, however turned
    for seed in range(start, start + 20):
        base = sound(seed)
        outcome, other = run(base), run(turned(base))
        assert outcome.status is Status.SOLVED, (seed, outcome.findings[0].sentence)
        assert_sound(base, outcome)
        assert (outcome.balance.closure < 1e-9).all()
        assert (outcome.wires is None) == (other.wires is None)
        if outcome.wires is not None:
            for name in ("nodes", "branches", "attachments"):
                assert_alike(getattr(outcome.wires, name), getattr(other.wires, name), shifted, 1e-7)
        for name in ("nodes", "branches", "attachments"):
            assert_alike(getattr(outcome, name), getattr(other, name), {"angle_deg": ""}, 1e-7)  # of A


def three_phases(base, supply):
    """Nothing on one phase makes four conductors of it."""
    return base, edits.put(base, {"ZZ": Load(node=supply.node, demand_kva=0.0, phases="A")})


def two_wires(base, supply):
    """On two wires it is an electrode where the supply holds the neutral at earth anyway."""
    single = {"Transformer": {"vector_group": "Ii0"}, "Supply": {"wires": "two-wire"}}
    moved = {
        i: msgspec.structs.replace(e, **single.get(type(e).__name__, {})) for i, e in base.elements.items()
    }
    base = msgspec.structs.replace(base, elements=moved)
    held = msgspec.structs.replace(moved[supply.node], earth_ohm=5.0)
    return base, edits.put(base, {supply.node: held})


@pytest.mark.parametrize("start", range(0, 240, 60))
@pytest.mark.parametrize("both", [three_phases, two_wires])
def test_four_conductors_say_what_one_says(start, both):
    compared = 0
    for seed in range(start, start + 60):
        base = anything(seed)
        supplies = [e for e in base.elements.values() if isinstance(e, Supply)]
        if both is three_phases and {s.wires for s in supplies} != {"three-phase"}:
            continue
        if not supplies or both is two_wires and len(supplies) > 1:  # whose neutrals earth would join
            continue
        one, other = both(base, supplies[0])
        outcome, four = run(one), run(other)
        assert four.status is outcome.status, seed
        if outcome.status is Status.SOLVED:
            compared += 1
            assert four.wires is not None
            for name in ("nodes", "branches", "attachments"):
                ours, theirs = getattr(outcome, name), getattr(four, name)
                rows = [theirs.rows[id] for id in ours.ids]
                columns = {k: c[rows] for k, c in theirs.columns.items()}
                moved = replaced(theirs, ids=ours.ids, columns=columns, rows=ours.rows)
                assert_alike(ours, moved, {}, 1e-7)
    assert compared >= 5


def assert_sound(base, outcome):
    assert outcome.nodes.ids == tuple(base.nodes())
    assert outcome.branches.ids == tuple(base.branches())
    assert outcome.attachments.ids == tuple(base.attachments())
    known = set(base.elements)
    for finding in outcome.findings:
        assert set(finding.ids) <= known
        assert finding.sentence[-1] in ".?"
    blocked = any(f.verdict is Verdict.BLOCKS for f in outcome.findings)
    if outcome.status is Status.SOLVED:
        assert not blocked
        assert (outcome.balance.closure < 1e-6).all()
        live = outcome.nodes.column("live")
        assert not np.isnan(outcome.nodes.column("voltage_v")[live]).any()
        assert np.isnan(outcome.nodes.column("voltage_v")[~live]).all()
    else:
        assert blocked or not base.elements or outcome.status is Status.INVALID
        assert np.isnan(outcome.nodes.column("voltage_v")).all()
    for id in outcome.nodes.ids:
        assert len(path(outcome, id)) <= len(outcome.branches.ids)


def test_the_drawings_are_of_every_sort():
    outcomes = [run(anything(seed)) for seed in range(60)]
    ended = {outcome.status for outcome in outcomes}
    checks = {f.check for outcome in outcomes for f in outcome.findings}
    assert {Status.SOLVED, Status.INVALID, Status.NO_OPERATING_POINT} <= ended
    assert {"closed loop", "dead part", "supplies joined", "mixed levels", "no supply", "loose end"} <= checks
