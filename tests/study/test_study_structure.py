"""What is wrong with a layout as drawn: each finding names the elements in one sentence."""

import numpy as np
import pytest
from study_layouts import changed, drawing, line, two_nodes

from app.model.drawing import Drawing
from app.model.kinds import Busbar, Capacitor, Generator, Joint, Load, Supply, Switch, Transformer
from app.study import run
from app.study.outcome import Verdict
from solver.status import Status


def told(base, check):
    """The one finding of a check."""
    found = [f for f in run(base).findings if f.check == check]
    assert len(found) == 1, [f.sentence for f in run(base).findings]
    return found[0]


def barred(base, check):
    finding = told(base, check)
    outcome = run(base)
    assert finding.verdict is Verdict.BLOCKS
    assert outcome.status is Status.INVALID
    assert outcome.nodes.ids == tuple(base.nodes())
    for table in (outcome.nodes, outcome.branches, outcome.attachments):
        assert not table.column("live").any()
    assert np.isnan(outcome.nodes.column("voltage_v")).all()
    assert np.isnan(outcome.balance.supply_kw).all()
    return finding


def test_an_empty_drawing_is_no_fault():
    outcome = run(Drawing())
    (finding,) = outcome.findings
    assert finding.verdict is Verdict.NOTE
    assert outcome.status is Status.INVALID
    assert outcome.sentence == finding.sentence == "Nothing is drawn yet. Begin with a supply."


def test_no_supply():
    finding = barred(drawing(B1=Busbar(), B2=Busbar(), C1=line("B1", "B2")), "no supply")
    assert finding.sentence.startswith("No supply: nothing feeds this layout.")


def test_an_open_switch_opens_the_loop():
    base = changed(
        two_nodes(), B3=Busbar(), C2=line("B2", "B3"), W1=Switch(start="B3", end="B1", closed=False)
    )
    outcome = run(base)
    assert outcome.status is Status.SOLVED
    assert not outcome.branches.at("W1").live
    assert np.isnan(outcome.branches.at("W1").current_a)


def test_a_branch_with_both_ends_on_one_node():
    finding = barred(changed(two_nodes(), C2=line("B2", "B2")), "closed loop")
    assert finding.sentence == "C2 begins and ends on the same node. Move one end or remove it."


def test_a_loop_in_a_dead_part_bars_nothing():
    base = changed(two_nodes(), B8=Busbar(), B9=Busbar(), C8=line("B8", "B9"), C9=line("B8", "B9"))
    assert run(base).status is Status.SOLVED


def test_several_supplies_that_each_feed_their_own_part():
    base = changed(
        two_nodes(), B3=Busbar(), B4=Busbar(), S2=Supply(node="B3", nominal_v=11000.0),
        C2=line("B3", "B4"), L2=Load(node="B4"), W1=Switch(start="B2", end="B4", closed=False),
    )  # fmt: skip
    outcome = run(base)
    assert outcome.status is Status.SOLVED
    assert outcome.nodes.at("B4").nominal_v == 11000.0
    assert outcome.attachments.at("S1").kw > outcome.attachments.at("L1").kw
    assert outcome.balance.supply_kw[0] == pytest.approx(
        outcome.attachments.at("S1").kw + outcome.attachments.at("S2").kw
    )


def test_a_dead_part_with_a_load_fails_and_has_no_figures():
    base = changed(
        two_nodes(), B3=Busbar(name="Barn"), L2=Load(node="B3", name="Dryer"),
        W1=Switch(start="B2", end="B3", closed=False),
    )  # fmt: skip
    finding, outcome = told(base, "dead part"), run(base)
    assert finding.verdict is Verdict.FAILS
    assert finding.sentence == "No supply reaches Dryer (L2): Barn (B3) and Dryer (L2) are dead."
    assert outcome.status is Status.SOLVED
    assert not outcome.nodes.at("B3").live
    assert np.isnan(outcome.nodes.at("B3").voltage_v)
    assert np.isnan(outcome.nodes.at("B3").route_m)
    assert np.isnan(outcome.attachments.at("L2").kw)
    assert not outcome.attachments.at("L2").live
    assert outcome.nodes.at("B2").live
    assert "B3" not in outcome.upstream


def test_a_dead_generator_fails_too():
    assert (
        told(changed(two_nodes(), B3=Busbar(), G1=Generator(node="B3")), "dead part").verdict is Verdict.FAILS
    )


def test_a_dead_part_with_nothing_on_it_is_noted():
    finding = told(changed(two_nodes(), B3=Busbar(), B4=Busbar(), C2=line("B3", "B4")), "dead part")
    assert finding.verdict is Verdict.NOTE
    assert finding.sentence == "No supply reaches B3, B4 and C2: dead, and nothing draws there."


def test_a_long_list_of_names_is_cut_short():
    spare = {f"X{i}": Joint() for i in range(9)}
    wires = {f"Y{i}": line(f"X{i}", f"X{i + 1}") for i in range(8)}
    finding = told(changed(two_nodes(), **spare, **wires), "dead part")
    assert "X5 and 11 more" in finding.sentence
    assert len(finding.ids) == 17


def test_a_loose_end_is_noted():
    finding = told(changed(two_nodes(), J1=Joint(), C2=line("B2", "J1", name="Stub")), "loose end")
    assert finding.verdict is Verdict.NOTE
    assert finding.sentence == "Stub (C2) ends at J1, where nothing is connected."


def test_nodes_of_one_zone_that_state_different_levels():
    base = changed(two_nodes(), B2=Busbar(nominal_v=11000.0))
    finding = barred(base, "mixed levels")
    assert finding.ids == ("B2",)
    assert finding.sentence == (
        "B2 states 11000 V but is joined without a transformer to S1, which states 400 V."
    )


@pytest.mark.parametrize(
    ("stated", "hint"),
    [
        (0.4, "0.4 V is 400 V divided by 1000: were kilovolts typed as volts?"),
        (230.0, "230 V is 400 V divided by √3: is one phase to neutral, the other between phases?"),
        (415.0, "which states 400 V."),
    ],
)
def test_the_likely_slip_is_named(stated, hint):
    assert barred(changed(two_nodes(), B2=Busbar(nominal_v=stated)), "mixed levels").sentence.endswith(hint)


def unit(**fields):
    return changed(
        two_nodes(), B3=Busbar(), L2=Load(node="B3"), T1=Transformer(start="B2", end="B3", **fields)
    )


def test_a_winding_at_the_wrong_level():
    finding = barred(unit(v1_v=11000.0, v2_v=6600.0), "mixed levels")
    assert finding.ids == ("T1", "B2")
    assert finding.sentence == "Winding 1 of T1 is rated 11000 V but stands at B2, which is at 400 V."


def test_a_winding_given_in_kilovolts_or_phase_volts():
    finding = barred(changed(unit(v1_v=11.0), S1=Supply(node="B1", nominal_v=11000.0)), "mixed levels")
    assert finding.sentence.endswith("11 V is 11000 V divided by 1000: were kilovolts typed as volts?")
    assert "√3" in barred(unit(v1_v=230.0, v2_v=11000.0), "mixed levels").sentence


def test_a_transformer_turned_round_is_told_to_swap_its_ends():
    finding = barred(unit(v1_v=11000.0, v2_v=400.0), "mixed levels")
    assert finding.sentence.endswith("Its other winding fits: turn its ends round.")


def test_a_winding_somewhat_above_the_level_is_in_order():
    outcome = run(changed(unit(v1_v=433.0, v2_v=11000.0), B3=Busbar(nominal_v=11000.0)))
    assert outcome.status is Status.SOLVED


def test_the_level_behind_a_transformer_is_its_winding_or_what_a_node_states():
    assert run(unit(v1_v=400.0, v2_v=433.0)).nodes.at("B3").nominal_v == 433.0
    stated = changed(unit(v1_v=400.0, v2_v=433.0), B3=Busbar(nominal_v=400.0))
    assert run(stated).nodes.at("B3").nominal_v == 400.0
    assumed = [a for a in run(unit(v1_v=400.0, v2_v=433.0)).assumptions if a.id == "B3"]
    assert [(a.field, a.value, a.basis) for a in assumed] == [
        ("nominal_v", 433.0, "rated voltage of winding 2 of T1")
    ]


def test_a_load_stated_or_a_capacitor_rated_for_another_voltage_is_noted():
    finding = told(changed(two_nodes(), L1=Load(node="B2", reference_v=230.0)), "stated voltage")
    assert finding.verdict is Verdict.NOTE
    assert finding.sentence.startswith(
        "L1 states its demand at 230 V but hangs on B2, which is at 400 V. 230 V is 400 V divided by √3"
    )
    assert told(changed(two_nodes(), K1=Capacitor(node="B2", rated_v=230.0)), "stated voltage").ids == (
        "K1",
        "B2",
    )
    quiet = changed(
        two_nodes(), L1=Load(node="B2", reference_v=415.0), K1=Capacitor(node="B2", rated_v=525.0)
    )
    assert not [f for f in run(quiet).findings if f.check == "stated voltage"]


def test_single_phase_and_three_phase_do_not_mix():
    wired = changed(unit(v1_v=400.0, v2_v=400.0), S1=Supply(node="B1", wires="two-wire"))
    finding = barred(wired, "vector group")
    assert finding.sentence == (
        "T1 has the three-phase vector group Dyn11, but S1 is two-wire. Allowed there is Ii0 or Ii6."
    )


def test_an_unknown_vector_group():
    assert "'Dy12'" in barred(unit(v1_v=400.0, v2_v=400.0, vector_group="Dy12"), "vector group").sentence


def test_losses_that_the_plate_cannot_carry():
    finding = barred(unit(v1_v=400.0, v2_v=400.0, uk_percent=1.0, load_loss_w=5000.0), "transformer data")
    assert finding.sentence == (
        "T1: load loss Pk of 5000 W is more than its impedance uk of 1 % allows; "
        "at 100 kVA it is at most 1000 W."
    )
    quiet = unit(v1_v=400.0, v2_v=400.0, no_load_current_percent=0.1, no_load_loss_w=500.0)
    assert "no-load loss P0 of 500 W" in barred(quiet, "transformer data").sentence


def test_a_dead_transformer_does_not_bar_the_rest():
    base = changed(
        two_nodes(), B5=Busbar(), B6=Busbar(), T9=Transformer(start="B5", end="B6", vector_group="Ii0")
    )
    assert run(base).status is Status.SOLVED
