"""Phases on the card: chips, what is folded away and hidden, and results conductor by conductor."""

import pytest
from panels_stage import fernhollow, stage
from phase_drawings import camp
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.model import edits
from app.model.drawing import Drawing
from app.model.figures import amps, percent, plain, stated, volts
from app.model.kinds import Busbar, Load, Motor, Supply, Transformer
from app.panels.asked import Asked
from app.panels.results import rows

LEFT = Qt.MouseButton.LeftButton


@pytest.fixture
def at(qtbot):
    made = stage(qtbot, camp())
    yield made
    made.solving.stop()


def page(at):
    """The page of the card that is shown."""
    return at.card._page


def row(at, name: str):
    return page(at).rows[name]


def shown(at, label: str) -> str:
    found = [r.cells[0] for r in at.card.now.rows if r.label == label]
    return found[0] if found else ""


def test_a_click_on_a_chip_puts_a_lateral_on_another_phase_and_shows_figures_at_once(at):
    at.attention.select(("N",))
    before = shown(at, "In A")
    assert before
    QTest.mouseClick(row(at, "phases").chips["B"], LEFT)
    assert at.drawing.elements["N"].phases == "B"
    assert at.session.history.count() == 1
    assert at.session.history.undoText() == "Phases of N to B"
    at.solving.settle()
    assert shown(at, "In A") == ""
    assert shown(at, "In B")
    at.session.history.undo()
    assert row(at, "phases").chips["A"].isChecked()


def test_the_chips_of_several_are_set_together_and_none_is_lit_where_they_differ(at):
    at.attention.select(("N", "W"))
    chips = row(at, "phases").chips
    assert not any(chip.isChecked() for chip in chips.values())
    QTest.mouseClick(chips["C"], LEFT)
    assert {at.drawing.elements[i].phases for i in ("N", "W")} == {"C"}
    assert chips["C"].isChecked()
    assert at.session.history.count() == 1


def test_the_keyboard_goes_from_chip_to_chip(at):
    at.attention.select(("W",))
    chips = row(at, "phases").chips
    chips["C"].setFocus()
    QTest.keyClick(chips["C"], Qt.Key.Key_Left)
    QTest.keyClick(chips["B"], Qt.Key.Key_Space)
    assert at.drawing.elements["W"].phases == "B"


def test_phases_that_do_not_reach_are_faint_and_say_so(at):
    at.attention.select(("L3",))
    chips = row(at, "phases").chips
    assert [p for p, chip in chips.items() if chip.reaches] == ["all", "A"]
    assert "does not reach" in chips["B"].toolTip()


def test_who_draws_balanced_layouts_finds_one_folded_line(qtbot):
    at = stage(qtbot, fernhollow())
    at.attention.select(("C1",))
    fold = page(at).fold
    assert not fold.page.isVisible()
    QTest.mouseClick(fold.head, LEFT)
    assert fold.page.isVisible()
    at.attention.select(("L1",))
    at.attention.select(("C1",))
    assert fold.page.isVisible()  # it stays as the person left it
    assert not any("neutral" in r.label or r.label.startswith("In ") for r in at.card.now.rows)
    at.solving.stop()


def test_a_sought_field_unfolds(qtbot):
    at = stage(qtbot, fernhollow())
    at.card.focus_field("C1", "neutral_resistance_ohm_per_km")
    assert row(at, "neutral_resistance_ohm_per_km").isVisible()
    at.solving.stop()


def test_fields_that_do_nothing_are_not_shown(at):
    at.attention.select(("L5",))  # on C alone
    assert row(at, "share_a_percent").isHidden()
    assert row(at, "connection").isHidden()
    QTest.mouseClick(row(at, "phases").chips["all"], LEFT)
    assert not row(at, "share_a_percent").isHidden()
    at.attention.select(("T1",))  # Dyn1
    assert row(at, "phases").isHidden()
    assert row(at, "earth_1_ohm").isHidden()
    assert not row(at, "earth_2_ohm").isHidden()
    at.attention.select(("W",))
    page(at)._take(row(at, "neutral").field, "none")
    assert row(at, "neutral_resistance_ohm_per_km").isHidden()


def test_a_node_tells_every_phase_how_even_they_are_and_its_neutral(at):
    at.attention.select(("LODGE",))
    state = at.solving.outcome.wires.nodes.at("LODGE")
    node = at.solving.outcome.nodes.at("LODGE")
    for letter in "abc":
        assert shown(at, f"{letter.upper()} to neutral") == volts(getattr(state, f"{letter}_v"))
    assert shown(at, "Lowest") == percent(node.percent, 2)
    assert shown(at, "Highest") == percent(node.high_percent, 2)
    assert shown(at, "Unbalance") == percent(state.unbalance_percent, 2)
    assert shown(at, "Neutral to earth") == volts(state.neutral_v)
    assert shown(at, "Volts") == ""
    for letter in "abc":
        assert shown(at, f"Angle, {letter.upper()}") == plain(getattr(state, f"{letter}_deg"), 1, "°")
    assert shown(at, "Angle") == ""
    at.attention.select(("N1",))
    assert shown(at, "Angle") == plain(at.solving.outcome.nodes.at("N1").angle_deg, 1, "°")
    assert shown(at, "Angle, A") == ""


def test_a_single_phase_node_has_one_line_of_volts(at):
    at.attention.select(("N2",))
    assert shown(at, "A to neutral")
    assert shown(at, "B to neutral") == shown(at, "Highest") == shown(at, "Unbalance") == ""


def test_a_branch_and_a_load_tell_the_amperes_of_each_conductor(at):
    wires = at.solving.outcome.wires
    at.attention.select(("C1",))
    for letter in "abcn":
        assert shown(at, f"In {letter.upper()}") == amps(getattr(wires.branches.at("C1"), f"{letter}_a"))
    at.attention.select(("L2",))
    assert shown(at, "In N") == amps(wires.attachments.at("L2").n_a)
    assert shown(at, "In B") == ""


def test_the_change_of_each_phase_is_told_while_a_tap_is_dragged(at):
    before = at.solving.outcome
    at.session.edit("tap", lambda d: edits.set_tap(d, "T1", -1))
    at.solving.settle()
    made = rows(Asked(at.drawing, at.solving.outcome, before, 0), "LODGE")
    moved = {r.label: r.change for r in made}
    assert moved["A to neutral"].startswith("▲")


def test_the_working_can_be_done_again_by_hand(at):
    at.attention.select(("N2",))
    said = at.card.working.text()
    state = at.solving.outcome.wires.nodes.at("N2")
    assert said.startswith(f"A: {volts(state.a_v)} ÷ 120.1 V = ")
    assert "208.0 V ÷ √3" in said
    assert "Unbalance" not in said
    at.attention.select(("C1",))
    worst = at.solving.outcome.wires.branches.at("C1").a_a
    assert at.card.working.text().startswith(f"Loading: {amps(worst)} in A ÷ 180 A = ")
    at.attention.select(("LODGE",))
    assert "NEMA MG 1" in at.card.working.text()


def test_hot_wires_are_called_l1_and_l2(qtbot):
    split = {
        "S1": Supply(node="B", nominal_v=240.0, wires="split-phase", dx=-4, dy=0),
        "B": Busbar(),
        "L1": Load(node="B", phases="A", demand_kva=2.0),
        "L2": Load(node="B", phases="AB", demand_kva=3.0, dx=4),
    }
    at = stage(qtbot, Drawing(frequency_hz=60.0, elements=split))
    at.attention.select(("B",))
    assert shown(at, "L1 to neutral").endswith("V")
    at.attention.select(("L1",))
    assert shown(at, "In L1")
    chips = row(at, "phases").chips
    assert chips["AB"].text() == "L1L2"
    assert chips["C"].isHidden()
    at.solving.stop()


def test_a_single_phase_unit_offers_its_phases(qtbot):
    unit = Transformer(start="HV", end="PAD", v1_v=7200, v2_v=240, vector_group="Ii0", build="centre-tapped")
    at = stage(qtbot, camp(T1=unit))
    at.attention.select(("T1",))
    assert not row(at, "phases").isHidden()
    at.solving.stop()


def test_the_volts_that_stand_in_a_blank_box_are_those_of_the_list_of_assumed_values(qtbot):
    drawing = Drawing(
        elements={
            "B1": Busbar(), "S1": Supply(node="B1", nominal_v=208.0),
            "L1": Load(node="B1", demand_kva=1.0, phases="B"),
            "L2": Load(node="B1", demand_kva=1.0, phases="AB"),
            "M1": Motor(node="B1", rated_kw=1.0, phases="C"),
        }
    )  # fmt: skip
    at = stage(qtbot, drawing)
    for id, field in (("L1", "reference_v"), ("L2", "reference_v"), ("M1", "rated_v")):
        at.attention.select((id,))
        ledger = {(a.id, a.field): a.value for a in at.solving.outcome.assumptions}
        assert row(at, field).editor.placeholderText() == stated(ledger[id, field])
    at.attention.select(("L1",))
    assert row(at, "reference_v").editor.placeholderText() == "120.089"
    QTest.mouseClick(row(at, "phases").chips["CA"], LEFT)
    at.solving.settle()
    assert row(at, "reference_v").editor.placeholderText() == "208"
    at.solving.stop()
