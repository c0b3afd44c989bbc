"""A batch is nothing but its single runs; what is remembered from run to run changes no bit."""

import subprocess
import sys
from dataclasses import fields

import msgspec
import numpy as np
import pytest
from study_layouts import changed, town, two_nodes
from study_nodal import Nodal

from app.model import taps
from app.model.drawing import Case
from app.model.kinds import Busbar, Load, Supply, Switch, Transformer
from app.study import path, run, tap_curve
from solver.status import Status

CASES = (
    Case(name="Peak", supply_percent=97.0),
    Case(name="Night", supply_percent=105.0, load_percent=12.0),
    Case(name="Noon", supply_percent=101.0, load_percent=40.0, generation_percent=300.0),
)
TABLES = ("nodes", "branches", "attachments")


def alone(base, case):
    return msgspec.structs.replace(base, cases=(base.cases[case],))


def same(one, other):
    """Bit for bit, with nan equal to nan."""
    return np.array_equal(np.asarray(one), np.asarray(other), equal_nan=np.asarray(one).dtype.kind == "f")


def assert_same_outcome(one, other):
    for name in TABLES:
        left, right = getattr(one, name), getattr(other, name)
        assert left.ids == right.ids
        for column in left.columns:
            assert same(left.column(column), right.column(column)), column
    for f in fields(one.balance):
        assert same(getattr(one.balance, f.name), getattr(other.balance, f.name))
    for name in ("status", "findings", "assumptions", "upstream", "zones", "fed_from", "sentence"):
        assert getattr(one, name) == getattr(other, name), name


@pytest.mark.parametrize("seed", range(6))
def test_cases_as_a_batch_are_the_separate_runs_bit_for_bit(seed):
    base = town(seed, cases=CASES)
    together = run(base)
    assert together.status is Status.SOLVED
    for case in range(len(CASES)):
        single = run(alone(base, case))
        for name in TABLES:
            for column, values in getattr(together, name).columns.items():
                other = getattr(single, name).column(column)
                if values.ndim == 2:
                    assert same(values[:, case], other[:, 0]), column
                else:
                    assert same(values, other), column
        assert together.balance.loss_kw[case] == single.balance.loss_kw[0]


@pytest.mark.parametrize("seed", range(6))
def test_a_town_equals_an_independent_nodal_solution(seed):
    base = town(seed, cases=CASES)
    outcome = run(base)
    for case in range(len(CASES)):
        for id, volts in Nodal(base, case).solve().items():
            assert outcome.nodes.at(id, case).voltage_v == pytest.approx(abs(volts), rel=1e-9)
    assert (outcome.balance.closure < 1e-9).all()


def test_the_balance_closes_by_its_own_columns():
    b = run(town(3, cases=CASES)).balance
    np.testing.assert_allclose(b.supply_kw + b.generation_kw, b.load_kw + b.loss_kw, rtol=1e-9)
    np.testing.assert_allclose(b.loss_kw, b.line_kw + b.copper_kw + b.iron_kw, rtol=1e-9)
    assert (b.generation_kw[2], b.generation_kw[0]) == pytest.approx((9.0, 3.0))


def test_what_is_remembered_changes_no_bit():
    base = town(1, cases=CASES)
    unit = next(i for i, e in base.elements.items() if isinstance(e, Transformer))
    moved = changed(base, **{unit: msgspec.structs.replace(base.elements[unit], tap=2)})
    opened = changed(base, W99=Switch(start="N0", end="N1", closed=False), N99=Busbar())
    first = run(moved)
    for other in (base, opened, moved, town(5), two_nodes()):
        run(other)
    assert_same_outcome(run(moved), first)
    fresh = msgspec.structs.replace(  # equal, yet not one object the same
        moved, elements={i: msgspec.structs.replace(e) for i, e in moved.elements.items()}
    )
    assert_same_outcome(run(fresh), first)


def test_a_switch_that_moves_is_noticed():
    base = changed(
        two_nodes(), B3=Busbar(), W1=Switch(start="B2", end="B3"), L2=Load(node="B3", demand_kva=5.0)
    )
    closed = run(base)
    opened = run(changed(base, W1=Switch(start="B2", end="B3", closed=False)))
    assert closed.nodes.at("B3").live
    assert not opened.nodes.at("B3").live
    assert_same_outcome(run(base), closed)


def test_two_processes_agree_to_the_last_bit():
    code = (
        "import sys; sys.path.insert(0, 'tests/study');"
        "from study_layouts import town; from app.study import run;"
        "print(run(town(4)).nodes.column('voltage_v').tobytes().hex())"
    )
    told = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert told.stdout.strip() == run(town(4)).nodes.column("voltage_v").tobytes().hex()


@pytest.mark.parametrize("seed", [1, 2, 4])
def test_a_tap_curve_is_the_separate_runs_bit_for_bit(seed):
    base = town(seed, cases=CASES)
    for id in [i for i, e in base.elements.items() if isinstance(e, Transformer)]:
        unit, curve = base.elements[id], tap_curve(base, id)
        assert curve.notches.tolist() == list(taps.notches(unit)) == [-2, -1, 0, 1, 2]
        np.testing.assert_array_equal(curve.percent, [-5.0, -2.5, 0.0, 2.5, 5.0])
        for row, notch in enumerate(curve.notches):
            single = run(changed(base, **{id: msgspec.structs.replace(unit, tap=int(notch))}))
            fed = [single.nodes.rows[n] for n in single.nodes.ids if id in path(single, n)]
            percent = single.nodes.column("percent")[fed]
            assert same(curve.loss_kw[row], single.balance.loss_kw)
            assert curve.lowest_percent[row] == percent.min()
            assert curve.highest_percent[row] == percent.max()
            assert curve.holds[row] == ((percent >= 94) & (percent <= 110)).all()
            assert curve.nameplate_v[row] == taps.nameplate_v(unit, int(notch))


def test_a_tap_curve_of_a_layout_that_cannot_be_solved_is_blank():
    base = changed(two_nodes(), B3=Busbar(), T1=Transformer(start="B2", end="B3", v1_v=400.0, v2_v=400.0))
    barred = changed(base, S2=Supply(node="B1"))
    curve = tap_curve(barred, "T1")
    assert np.isnan(curve.loss_kw).all()
    assert curve.loss_kw.shape == (5, 1)
    assert not curve.holds.any()
    with pytest.raises(KeyError):
        tap_curve(base, "C1")


def test_notches_beyond_collapse_are_blank_and_the_others_stand():
    base = changed(
        two_nodes(), B3=Busbar(nominal_v=400.0), L1=None, L2=Load(node="B3", demand_kva=300.0),
        T1=Transformer(
            start="B2", end="B3", v1_v=400.0, v2_v=400.0, rating_kva=400.0, notch_percent=10.0, taps_up=4
        ),
    )  # fmt: skip
    curve = tap_curve(base, "T1")
    solved = [
        run(changed(base, T1=msgspec.structs.replace(base.elements["T1"], tap=int(n)))).status
        is Status.SOLVED
        for n in curve.notches
    ]
    assert solved == (~np.isnan(curve.loss_kw[:, 0])).tolist()
    assert not curve.holds[~np.array(solved)].any()


def test_the_path_runs_from_the_supply_and_adds_up_to_the_route():
    base = town(3)
    outcome = run(base)
    for id in outcome.nodes.ids:
        way = path(outcome, id)
        lengths = [getattr(base.elements[b], "length_m", 0.0) for b in way]
        assert outcome.nodes.at(id).route_m == pytest.approx(sum(lengths))
        at = "N0"
        for branch in way:
            ends = (base.elements[branch].start, base.elements[branch].end)
            assert at in ends
            at = ends[1] if at == ends[0] else ends[0]
        assert at == id
