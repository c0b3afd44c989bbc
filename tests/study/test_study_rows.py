"""Rows by hand: what each element is to the solver, in SI units per phase or between two wires."""

import math

import msgspec
import numpy as np
import pytest
from study_layouts import changed, drawing, line, town, two_nodes

from app.model.drawing import Case
from app.model.kinds import Busbar, Capacitor, Generator, Load, Supply, Switch, Transformer
from app.model.levels import nominal_levels
from app.study import run
from app.study.layout import lay_out
from app.study.rows import rows_of
from app.study.zones import zones_of
from solver.status import Status


def network(base):
    layout = lay_out(base)
    return rows_of(base, layout, zones_of(base, layout)).network


def test_a_three_phase_tree_is_solved_per_phase():
    net = network(two_nodes())
    assert net.source_voltage.ravel() == pytest.approx(400 / math.sqrt(3))
    assert net.line_z.ravel() == pytest.approx(0.2 * (0.125 + 0.072j))
    assert net.load_power.ravel() == pytest.approx(10e3 / 3 * (0.95 + 1j * math.sin(math.acos(0.95))))
    assert net.load_reference.ravel() == pytest.approx(400 / math.sqrt(3))
    assert net.load_mix.tolist() == [[1.0, 0.0, 0.0]]


def test_a_two_wire_tree_counts_out_and_back_and_whole_powers():
    base = changed(
        two_nodes(),
        S1=Supply(node="B1", nominal_v=230.0, wires="two-wire", angle_deg=30.0),
        C1=line("B1", "B2", capacitance_uf_per_km=0.3),
    )
    net = network(base)
    assert net.source_voltage.ravel() == pytest.approx(230 * np.exp(1j * math.pi / 6))
    assert net.line_z.ravel() == pytest.approx(2 * 0.2 * (0.125 + 0.072j))
    assert net.line_y.ravel() == pytest.approx(1j * 2 * math.pi * 50 * 0.3e-6 * 0.2 / 2)
    assert abs(net.load_power.ravel()[0]) == pytest.approx(10e3)
    assert net.load_reference.ravel() == pytest.approx(230.0)


def test_a_two_wire_drop_by_hand():
    """U⁴ + (2(PR + QX) − Us²)U² + (P² + Q²)(R² + X²) = 0, R and X of the way out and back."""
    base = drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=230.0, wires="two-wire"),
        B2=Busbar(), C1=line("B1", "B2", length_m=80.0, resistance_ohm_per_km=1.15,
        reactance_ohm_per_km=0.08),
        L1=Load(node="B2", demand_kva=None, demand_kw=5.0, power_factor=0.9),
    )  # fmt: skip
    r, x, p = 2 * 0.08 * 1.15, 2 * 0.08 * 0.08, 5000.0
    q = p * math.tan(math.acos(0.9))
    middle = 230.0**2 / 2 - (p * r + q * x)
    level = math.sqrt(middle + math.sqrt(middle**2 - (p * p + q * q) * (r * r + x * x)))
    state = run(base).branches.at("C1")
    assert run(base).nodes.at("B2").voltage_v == pytest.approx(level, rel=1e-11)
    assert state.end_a == pytest.approx(5000 / 0.9 / level, rel=1e-11)
    assert state.loss_kw == pytest.approx((5000 / 0.9 / level) ** 2 * r / 1e3, rel=1e-10)


def test_parallel_runs_heat_and_switches():
    base = changed(
        two_nodes(),
        C1=line("B1", "B2", side_by_side=3, temperature_degc=90.0, conductor="Cu", capacitance_uf_per_km=0.2),
        B3=Busbar(), W1=Switch(start="B2", end="B3"), W2=Switch(start="B1", end="B3", closed=False),
    )  # fmt: skip
    net = network(base)
    assert net.line_z[:, 0, 0, 0] == pytest.approx([0.2 * (0.125 * (1 + 0.00393 * 70) + 0.072j) / 3, 0.0])
    assert net.line_y[:, 0, 0, 0] == pytest.approx([3 * 1j * 2 * math.pi * 50 * 0.2e-6 * 0.2, 0.0])
    state = run(base).branches.at("W1")
    assert (state.loss_kw, state.drop_percent, state.live) == (0.0, 0.0, True)


def test_frequency_counts_in_the_charging():
    base = changed(two_nodes(), C1=line("B1", "B2", capacitance_uf_per_km=0.2))
    at_60 = network(msgspec.structs.replace(base, frequency_hz=60.0))
    assert at_60.line_y.ravel() == pytest.approx(network(base).line_y.ravel() * 1.2)


def test_loads_generators_and_capacitors():
    base = changed(
        two_nodes(),
        L1=Load(
            node="B2", demand_kva=None, demand_kw=9.0, power_factor=0.9, leading=True, reference_v=415.0,
            constant_current_percent=30.0, constant_impedance_percent=20.0,
        ),
        G1=Generator(node="B2", output_kw=6.0, output_kvar=-1.5),
        K1=Capacitor(node="B2", rating_kvar=3.0, rated_v=440.0),
        K2=Capacitor(node="B2", rating_kvar=3.0),
        K3=Capacitor(node="B2", rating_kvar=3.0, connected=False),
    )  # fmt: skip
    net = network(base)
    assert net.load_power[0, 0, 0] == pytest.approx(3e3 * (1 - 1j * math.tan(math.acos(0.9))))
    assert net.load_power[1, 0, 0] == pytest.approx(-2e3 + 500j)
    assert net.load_reference[:, 0, 0] == pytest.approx([415 / math.sqrt(3), 400 / math.sqrt(3)])
    assert net.load_mix[0] == pytest.approx([0.5, 0.3, 0.2])
    assert net.shunt_y[:, 0, 0, 0] == pytest.approx([1j * 3e3 / 440**2, 1j * 3e3 / 400**2])
    off = run(base).attachments.at("K3")
    assert (off.kw, off.kvar, off.current_a, off.live) == (0.0, 0.0, 0.0, True)


def test_what_attachments_draw_and_feed_in():
    base = changed(
        two_nodes(), G1=Generator(node="B2", output_kw=4.0, output_kvar=1.0), K1=Capacitor(node="B2")
    )
    outcome = run(base)
    level = outcome.nodes.at("B2").voltage_v
    load, generator, capacitor = (outcome.attachments.at(i) for i in ("L1", "G1", "K1"))
    assert (load.kw, load.kvar) == pytest.approx((9.5, 10 * math.sqrt(1 - 0.95**2)))
    assert load.current_a == pytest.approx(10e3 / (math.sqrt(3) * level))
    assert (generator.kw, generator.kvar) == pytest.approx((4.0, 1.0))
    assert (capacitor.kw, capacitor.kvar) == pytest.approx((0.0, 10.0 * (level / 400) ** 2))
    assert outcome.attachments.at("S1").kw == pytest.approx(
        load.kw - generator.kw + outcome.balance.loss_kw[0], rel=1e-10
    )


def test_cases_scale_supply_loads_and_generation_each_by_its_own():
    cases = (Case(supply_percent=97.0), Case(load_percent=50.0), Case(generation_percent=200.0))
    base = changed(
        two_nodes(cases=cases),
        S1=Supply(node="B1", held_percent=103.0), G1=Generator(node="B2", output_kw=3.0),
    )  # fmt: skip
    net = network(base)
    assert np.abs(net.source_voltage[0, 0]) * math.sqrt(3) == pytest.approx([399.64, 412.0, 412.0])
    assert np.abs(net.load_power[0, 0]) == pytest.approx([10e3 / 3, 5e3 / 3, 10e3 / 3])
    assert net.load_power[1, 0].real == pytest.approx([-1e3, -1e3, -2e3])


def test_transformer_rows_at_the_tap_of_either_winding():
    plate = dict(
        start="B2", end="B3", v1_v=400.0, v2_v=11000.0, rating_kva=160.0, uk_percent=4.0, load_loss_w=1750.0,
        no_load_loss_w=189.0, no_load_current_percent=0.7, vector_group="Dyn11", tap=2, side_by_side=2,
    )  # fmt: skip
    base = changed(two_nodes(), B3=Busbar())
    first = network(changed(base, T1=Transformer(**plate, tapped="winding 1")))
    second = network(changed(base, T1=Transformer(**plate, tapped="winding 2")))
    clock = np.exp(1j * math.pi / 6 * 11)
    assert first.transformer_ratio[0, 0] == pytest.approx(400 * 1.05 / 11000 * clock)
    assert second.transformer_ratio[0, 0] == pytest.approx(400 / (11000 * 1.05) * clock)
    r, size = 1750 * (11000 / 160e3) ** 2, 0.04 * 11000**2 / 160e3
    z = complex(r, math.sqrt(size**2 - r**2)) / 2
    assert first.transformer_z[0, 0] == pytest.approx(z)
    assert second.transformer_z[0, 0] == pytest.approx(z * 1.05**2)
    y = 2 * complex(189, -math.sqrt((0.007 * 160e3) ** 2 - 189**2)) / 11000**2
    assert first.transformer_y[0, :, 0] == pytest.approx([0, y])
    assert second.transformer_y[0, :, 0] == pytest.approx([0, y / 1.05**2])


@pytest.mark.parametrize("group", ["Ii0", "Ii6"])
def test_a_single_phase_transformer_in_a_two_wire_tree(group):
    base = changed(
        two_nodes(), S1=Supply(node="B1", nominal_v=230.0, wires="two-wire"), B3=Busbar(),
        T1=Transformer(
            start="B2", end="B3", v1_v=230.0, v2_v=115.0, rating_kva=3.0, vector_group=group,
            load_loss_w=90.0, no_load_loss_w=30.0, no_load_current_percent=5.0,
        ),
        L1=Load(node="B3", demand_kva=1.5), C1=line("B1", "B2", length_m=20.0),
    )  # fmt: skip
    outcome = run(base)
    state = outcome.branches.at("T1")
    assert outcome.status is Status.SOLVED
    assert outcome.nodes.at("B3").percent == pytest.approx(97, abs=3)
    assert state.loaded_percent == pytest.approx(100 * state.start_a / (3000 / 230), rel=0.05)
    turned = abs(outcome.nodes.at("B3").angle_deg) > 90
    assert turned == (group == "Ii6")


def test_swapping_the_ends_of_a_line_turns_its_figures_and_nothing_else():
    base = changed(two_nodes(), C1=line("B1", "B2", capacitance_uf_per_km=0.4))
    one, other = run(base), run(changed(base, C1=line("B2", "B1", capacitance_uf_per_km=0.4)))
    there, back = one.branches.at("C1"), other.branches.at("C1")
    assert (there.forward, back.forward) == (True, False)
    assert there.start_kw == pytest.approx(-back.end_kw, rel=1e-12)
    assert there.end_kvar == pytest.approx(-back.start_kvar, rel=1e-12)
    assert (there.loss_kw, there.drop_percent) == pytest.approx((back.loss_kw, back.drop_percent), rel=1e-10)
    assert there.current_a == back.current_a


@pytest.mark.parametrize("ends", [("B1", "B2"), ("B2", "B1")])
def test_power_through_a_branch_is_told_where_it_enters(ends):
    base = changed(two_nodes(), C1=line(*ends), G2=Generator(node="B2", output_kw=60.0))
    for infeed, back in ((0.0, False), (100.0, True)):
        cases = (Case(name="One", generation_percent=infeed),)
        outcome = run(msgspec.structs.replace(base, cases=cases))
        state = outcome.branches.at("C1")
        enters = -60.0 + outcome.attachments.at("L1").kw if back else outcome.balance.supply_kw[0]
        assert state.through_kw == pytest.approx(enters, rel=1e-9)
        assert (state.through_kw < 0) is back
        sides = (state.start_kw, state.start_kvar), (state.end_kw, state.end_kvar)
        at_start = (ends[0] == "B1") is not back
        assert state.through_kva == pytest.approx(math.hypot(*sides[0 if at_start else 1]), rel=1e-12)


def test_a_transformer_fed_from_winding_2_is_the_turned_one():
    plate = dict(rating_kva=100.0, load_loss_w=1250.0, no_load_loss_w=130.0, no_load_current_percent=0.8)
    down = drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=11000.0), B2=Busbar(),
        L1=Load(node="B2", demand_kva=60.0),
        T1=Transformer(start="B1", end="B2", v1_v=11000.0, v2_v=400.0, vector_group="Dyn11", tap=1, **plate),
    )  # fmt: skip
    turned = changed(
        down,
        T1=Transformer(
            start="B2",
            end="B1",
            v1_v=400.0,
            v2_v=11000.0,
            vector_group="YNd1",
            tap=1,
            tapped="winding 2",
            **plate,
        ),
    )
    one, other = run(down), run(turned)
    assert one.nodes.at("B2").voltage_v == pytest.approx(other.nodes.at("B2").voltage_v, rel=1e-11)
    assert one.nodes.at("B2").angle_deg == pytest.approx(other.nodes.at("B2").angle_deg, rel=1e-9)
    assert one.branches.at("T1").loss_kw == pytest.approx(other.branches.at("T1").loss_kw, rel=1e-9)
    assert one.branches.at("T1").current_a == pytest.approx(other.branches.at("T1").current_a, rel=1e-9)
    assert other.branches.at("T1").resistance_ohm != one.branches.at("T1").resistance_ohm


@pytest.mark.parametrize("seed", range(4))
def test_the_card_and_the_solver_agree_on_every_level(seed):
    base = town(seed)
    outcome = run(base)
    for id, level in nominal_levels(base).items():
        assert outcome.nodes.at(id).nominal_v == level.volts


def test_an_assumed_value_is_listed_once_and_a_given_one_is_not():
    listed = {(a.id, a.field): a for a in run(two_nodes()).assumptions}
    assert ("C1", "temperature_degc") not in listed
    assert listed["C1", "capacitance_uf_per_km"].basis == "neglected"
    assert listed["L1", "reference_v"].value == 400.0
    assert len(listed) == len(run(two_nodes()).assumptions)
    renamed = run(changed(two_nodes(), S1=Supply(node="B1", nominal_v=415.0)))
    assert next(a for a in renamed.assumptions if a.field == "reference_v").value == 415.0
