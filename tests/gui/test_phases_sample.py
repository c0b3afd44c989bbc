"""The camp of the samples on the real board: nothing overlaps, taps move it, a lost neutral is told."""

from pathlib import Path

import pytest
from hand_desk import SHIFT, Desk
from panels_stage import stage
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from test_hand_taps import spot

from app.model import edits, figures
from app.model.file import load
from app.model.kinds import Transformer

SAMPLES = Path(__file__).resolve().parents[2] / "samples"
CAMP = "loonmarrow_camp.farend"


def drawn(name: str):
    """The drawing of a sample."""
    read = load(SAMPLES / name)
    return read[0] if isinstance(read, tuple) else read


def id_of(drawing, name: str) -> str:
    return next(i for i, e in drawing.elements.items() if e.name == name)


@pytest.fixture
def desk(qtbot):
    made = Desk(drawn(CAMP))
    qtbot.addWidget(made.view)
    made.board.write_rest()
    made.board.arrange()
    yield made
    made.solving.stop()


def words(board) -> list:
    both = [*board.captions.items(), *board.tags.items()]
    return [(id, block.spot.box) for id, block in both if block.lines]


def test_no_words_lie_on_words_or_on_marks(desk):
    boxes = words(desk.board)
    pairs = [(x, y) for k, x in enumerate(boxes) for y in boxes[k + 1 :]]
    over = [(a, b) for (a, one), (b, other) in pairs if one.intersects(other)]
    marks = [(i, item.mark.box) for i, item in desk.board.items_by_id.items() if item.mark is not None]
    over += [(i, a) for i, mark in marks for a, box in boxes if box.intersects(mark)]
    assert len(marks) == 10
    assert over == []


def test_the_worst_pedestal_reads_as_the_study_has_it(desk):
    id = id_of(desk.drawing, "N2")
    state = desk.solving.outcome.wires.nodes.at(id, 0)
    assert desk.board.tags[id].text.startswith(f"A {figures.volts(state.a_v)}")
    assert "of 120 V" in desk.board.tags[id].text


def test_a_tap_key_moves_every_phase(desk):
    unit = next(i for i, e in desk.drawing.elements.items() if isinstance(e, Transformer))
    id = id_of(desk.drawing, "N2")
    desk.select(unit)
    before = desk.solving.outcome.wires.nodes.at(id, 0).a_v
    desk.key(Qt.Key.Key_Down)
    desk.solving.settle()
    desk.board.write_rest()
    after = desk.solving.outcome.wires.nodes.at(id, 0).a_v
    assert after > before + 2
    assert desk.board.tags[id].text.startswith(f"A {figures.volts(after)}")


def test_one_key_on_a_lateral_helps_the_worst_pedestal(desk):
    far, lateral = id_of(desk.drawing, "N2"), id_of(desk.drawing, "Lateral J")
    before = desk.solving.outcome.wires.nodes.at(far, 0).a_v
    desk.select(lateral)
    desk.key(Qt.Key.Key_C, SHIFT)
    desk.solving.settle()
    assert desk.solving.outcome.wires.nodes.at(far, 0).a_v > before + 1
    assert desk.board.items_by_id[lateral].phases.letters == "CN"


def test_a_phase_that_alone_is_too_high_is_the_one_that_is_told(desk):
    case = next(k for k, c in enumerate(desk.drawing.cases) if "Quiet" in c.name)
    desk.session.edit("lost", lambda d: edits.change(d, id_of(d, "Backbone"), neutral="none"))
    desk.attention.show_case(case)
    desk.solving.settle()
    desk.board.write_rest()
    id = id_of(desk.drawing, "Showers")
    node, wires = desk.solving.outcome.nodes.at(id, case), desk.solving.outcome.wires.nodes.at(id, case)
    assert node.high_percent > desk.drawing.limits.high_percent
    assert desk.board.tags[id].text.startswith(f"B {figures.volts(wires.b_v)}")
    assert desk.board._shown.reading(id).shown == node.high_percent


def test_a_lost_neutral_is_told_in_the_bar_and_on_the_card(qtbot):
    drawing = drawn(CAMP)
    broken = edits.change(drawing, id_of(drawing, "Backbone"), neutral="none")
    at = stage(qtbot, broken)
    assert "fail" in at.findings.headline.text()
    assert "No neutral" in at.findings.sentence.text()
    at.attention.select((id_of(broken, "N2"),))
    assert any("No neutral" in sentence.text() for _, sentence in at.card.lines._rows)
    at.solving.stop()


@pytest.mark.parametrize("name", sorted(p.name for p in SAMPLES.glob("*.farend")))
def test_marks_stand_only_where_phases_are_not_alike(qtbot, name):
    made = Desk(drawn(name))
    qtbot.addWidget(made.view)
    marked = any(item.mark is not None for item in made.board.items_by_id.values())
    assert marked is (made.solving.outcome.wires is not None)
    made.solving.stop()


def test_while_a_tap_is_dragged_the_phase_told_says_its_change(desk):
    unit = next(i for i, e in desk.drawing.elements.items() if isinstance(e, Transformer))
    far = id_of(desk.drawing, "N2")
    desk.select(unit)
    desk.solving.settle()
    before = desk.solving.outcome.wires.nodes.at(far, 0).a_v
    port = desk.view.viewport()
    QTest.mouseMove(port, spot(desk, 0, unit))
    QTest.mousePress(port, Qt.MouseButton.LeftButton, pos=spot(desk, 0, unit))
    QTest.mouseMove(port, spot(desk, -1, unit))
    desk.solving.settle_solve()
    desk.board.write_rest()
    moved = desk.solving.outcome.wires.nodes.at(far, 0).a_v - before
    assert desk.board.tags[far].text.endswith(f"▲ {figures.volts(moved)}")
    QTest.mouseRelease(port, Qt.MouseButton.LeftButton, pos=spot(desk, -1, unit))
    assert desk.drawing.elements[unit].tap == -1
    assert desk.steps == 1
