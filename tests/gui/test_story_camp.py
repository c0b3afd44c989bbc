"""A camp with laterals and a home behind a centre tap, drawn by hand from the shelf, and put right."""

import pytest
from hand_desk import SHIFT, Desk, blank
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from app.model import edits
from app.model.kinds import Cable, Load, Transformer
from app.model.phase_parts import parts_of
from solver.status import Status

__all__ = ["blank"]
Key = Qt.Key


def part(kind: str, words: str):
    return next(p for p in parts_of(kind, american=True) if words in p.name)


@pytest.fixture
def paper(blank):
    """An empty board in the habit of 60 Hz."""
    assert blank.session.edit("60 Hz", lambda d: edits.set_frequency(d, 60.0)) == ""
    return blank


def settled(desk: Desk):
    desk.solving.settle()
    desk.board.write_rest()
    QApplication.processEvents()
    return desk.solving.outcome


def pull(desk: Desk, what, start, end) -> None:
    """Take a part into the hand and draw it with the mouse."""
    desk.view.place(what)
    desk.drag(start, end)
    settled(desk)


def hang(desk: Desk, what, at) -> str:
    before = desk.drawing
    desk.view.place(what)
    desk.click(*at)
    settled(desk)
    return edits.added(before, desk.drawing)[-1]


def camp(desk: Desk) -> None:
    """Supply, transformer, backbone; two laterals on A with a load each."""
    hang(desk, part("supply", "12.47 kV"), (-24, 0))
    pull(desk, part("transformer", "75 kVA"), (-24, 0), (-14, 0))
    pull(desk, part("cable", "four-wire"), (-14, 0), (-2, 0))
    pull(desk, part("cable", "lateral"), (-2, 0), (8, -6))
    pull(desk, part("cable", "lateral"), (8, -6), (18, -6))
    pull(desk, part("cable", "lateral"), (-2, 0), (8, 6))
    for spot in ((8, -6), (18, -6), (8, 6)):
        hang(desk, part("load", "On A:"), spot)


def laterals(desk: Desk) -> dict[str, str]:
    return {i: e.phases for i, e in desk.drawing.elements.items() if isinstance(e, Cable)}


def test_a_camp_is_drawn_and_a_lateral_moved_with_one_key(paper):
    camp(paper)
    outcome = settled(paper)
    assert outcome.status is Status.SOLVED
    backbone, first, second, other = laterals(paper)
    assert list(laterals(paper).values()) == ["all", "A", "all", "A"]  # the second span follows the first
    loads = [e.phases for e in paper.drawing.elements.values() if isinstance(e, Load)]
    assert loads == ["all", "all", "all"]  # so do the loads on them
    far = paper.drawing.elements[second].end
    before, neutral = outcome.wires.nodes.at(far).a_v, outcome.wires.branches.at(backbone).n_a
    paper.select(other)
    paper.key(Key.Key_B, SHIFT)
    after = settled(paper)
    assert after.status is Status.SOLVED
    assert after.wires.nodes.at(far).a_v > before
    assert after.wires.branches.at(backbone).n_a < neutral
    assert paper.board.items_by_id[other].phases.letters == "BN"
    assert "B" in paper.board.tags[backbone].text


def test_everything_beyond_goes_along(paper):
    camp(paper)
    _, first, second, _ = laterals(paper)
    paper.select(first)
    paper.key(Key.Key_C, SHIFT)
    outcome = settled(paper)
    assert outcome.wires.branches.at(second).phases == "CN"
    assert not [f for f in outcome.findings if f.check == "no such phase"]


def test_a_home_behind_a_centre_tap_is_drawn_and_reads_l1_and_l2(paper):
    hang(paper, part("supply", "12.47 kV"), (-20, 0))
    pull(paper, part("transformer", "25 kVA"), (-20, 0), (-8, 0))
    unit = next(i for i, e in paper.drawing.elements.items() if isinstance(e, Transformer))
    paper.select(unit)
    paper.key(Key.Key_B, SHIFT)
    home = paper.drawing.elements[unit].end
    hang(paper, part("load", "240 V"), (-8, 0))
    lamp = hang(paper, part("load", "On A:"), (-8, 0))
    outcome = settled(paper)
    assert outcome.status is Status.SOLVED
    assert paper.board.items_by_id[unit].phases.letters.startswith("B")
    assert paper.board.items_by_id[lamp].phases.letters == "L1 N"
    assert paper.board.tags[home].text.startswith("L1 1")
    assert "of 120 V" in paper.board.tags[home].text
