"""Phases on the board: marks, symbols and figures, conductor by conductor, and none where all are alike."""

import math

import pytest
from board_drawings import FERNHOLLOW, figures
from phase_drawings import camp, wired
from PySide6.QtCore import QRectF
from test_board import Bench

from app.canvas.paper import Paper
from app.canvas.symbol_shapes import glyph
from app.canvas.symbol_units import variant
from app.model import edits
from app.model.drawing import Drawing
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Transformer
from app.study import run
from solver.status import Status


@pytest.fixture
def bench(qapp):
    made = Bench(camp())
    made.answer = lambda d: wired(d)
    made.solve_wired = lambda **given: _solve(made, **given)  # type: ignore[attr-defined]
    _solve(made)
    yield made
    made.solving.stop()


def _solve(bench, **given) -> None:
    bench.answer = lambda d: wired(d, **given)
    bench.solving._owed = True
    bench.solving.settle_solve()
    bench.board.write_rest()


def test_the_drawing_alone_shows_the_phases_that_are_stated(qapp):
    bench = Bench(camp())
    said = {i: item.phases.letters for i, item in bench.board.items_by_id.items() if item.phases is not None}
    assert said == {"N": "A", "J": "A", "W": "C", "L5": "C", "G1": "C"}
    assert all(bench.board.items_by_id[i].phases.stated for i in said)


def test_what_reaches_an_element_is_marked_quietly_where_it_states_nothing(bench):
    marks = {i: item.phases for i, item in bench.board.items_by_id.items() if item.phases is not None}
    assert marks["N2C"].letters == "AN"
    assert not marks["N2C"].stated
    assert marks["N"].letters == "AN"
    assert marks["N"].stated
    assert {"C1", "T1", "L1"}.isdisjoint(marks)  # three phases are nothing unusual
    assert marks["N2C"].phases == 1
    assert len(bench.board.items_by_id["N2C"].mark.strokes) == 2  # a stroke a conductor


def test_a_balanced_layout_carries_no_mark_and_looks_as_before(qapp):
    paper = Bench(FERNHOLLOW).board
    paper.show_outcome(FERNHOLLOW, figures(FERNHOLLOW), 0, None)
    assert all(item.phases is None and item.mark is None for item in paper.items_by_id.values())
    assert "·" not in paper.tags["C1"].text
    assert len(paper.tags["HS"].lines) == 2


def test_marks_go_again_when_the_last_odd_phase_does(bench):
    def plain(drawing):
        for id in ("N", "J", "W", "L5", "G1"):
            drawing = edits.change(drawing, id, phases="all")
        return drawing

    bench.answer = lambda d: figures(d)
    bench.edit(plain)
    assert all(item.mark is None for item in bench.board.items_by_id.values())


def test_a_branch_says_the_amperes_of_each_conductor_and_the_worst_by_name(bench):
    lines = bench.board.tags["C1"].text.split("\n")
    table = bench.solving.outcome.wires.branches.at("C1")
    assert lines[1].startswith(f"A {table.a_a:.1f} · B {table.b_a:.1f}")
    assert lines[1].endswith(f"N {table.n_a:.1f} A")
    assert " A " in lines[0]  # the most loaded of them, before its percent
    assert bench.board.tags["W"].text.split("\n")[1].startswith("C ")


def test_a_node_says_its_lowest_phase_on_its_own_base(bench):
    state = bench.solving.outcome.wires.nodes.at("LODGE")
    lines = bench.board.tags["LODGE"].text.split("\n")
    assert lines[0] == f"C {state.c_v:.1f} V"
    assert lines[1] == "N 5.1 V to earth"
    assert lines[2].endswith("of 120 V")
    assert "to earth" not in bench.board.tags["HV"].text
    assert "of 7.2 kV" in bench.board.tags["HV"].text


def test_while_a_tap_is_dragged_the_changes_are_those_of_the_lowest_phase(bench):
    before, after = wired(bench.session.drawing), wired(bench.session.drawing, seed=2)
    bench.board.show_outcome(bench.session.drawing, after, 0, before)
    moved = after.wires.nodes.at("W1").c_v - before.wires.nodes.at("W1").c_v
    assert f"{abs(moved):.1f} V" in bench.board.tags["W1"].text.split("\n")[-1]


def test_nothing_is_written_over_a_mark(bench):
    board = bench.board
    boxes = [t.spot.box for t in (*board.captions.values(), *board.tags.values()) if t.lines]
    for id, item in board.items_by_id.items():
        if item.mark is not None:
            over = [b for b in boxes if b.intersects(item.mark.box)]
            assert not over, f"words on the mark of {id}"


def test_a_mark_lies_on_its_line_clear_of_symbol_and_arrow(bench):
    for id in ("N", "W", "L5", "G1"):
        item = bench.board.items_by_id[id]
        assert item.boundingRect().contains(item.mark.box)
        assert not item.mark.box.intersects(item.core().adjusted(1, 1, -1, -1)), id


def test_an_electrode_is_drawn_at_its_node(bench):
    node = bench.board.items_by_id["N2"]
    assert not node.earth.isEmpty()
    assert node.boundingRect().contains(node.earth.boundingRect())
    assert bench.board.items_by_id["N1"].earth.isEmpty()


@pytest.mark.parametrize("symbols", ["IEC", "ANSI"])
def test_every_build_of_a_unit_and_a_stated_star_point_has_its_own_symbol(symbols):
    plain = {"start": "a", "end": "b", "vector_group": "Ii0"}
    units = [
        Transformer(**plain),
        Transformer(**plain, build="centre-tapped"),
        Transformer(**plain, build="open delta"),
        Transformer(**plain, build="open star to open delta"),
        Transformer(**plain, earth_1_ohm=0.0),
        Transformer(**plain, earth_2_ohm=0.0),
    ]
    drawn = []
    for unit in units:
        made = glyph("transformer", symbols, variant(unit))
        marks = tuple((at.x(), at.y(), _points(path)) for at, path in made.upright)
        drawn.append((_points(made.strokes), marks))
    assert len(set(map(str, drawn))) == len(units)


def _points(path) -> tuple:
    return tuple((round(e.x, 2), round(e.y, 2)) for e in map(path.elementAt, range(path.elementCount())))


def test_from_afar_the_letters_go_and_from_farther_the_strokes(bench, monkeypatch):
    from PySide6.QtGui import QImage, QPainter

    def painted(zoom: float) -> int:
        item = bench.board.items_by_id["N"]
        picture = QImage(300, 60, QImage.Format.Format_RGB32)
        picture.fill(0xFFFFFF)
        painter = QPainter(picture)
        painter.scale(zoom, zoom)
        painter.translate(-item.mark.box.topLeft())
        from app.canvas import phase_mark

        phase_mark.paint(painter, item.mark, bench.board.look.palette, False)
        painter.end()
        return sum(picture.pixel(x, y) & 0xFFFFFF != 0xFFFFFF for x in range(80) for y in range(30))

    near, far, farther = painted(1.0), painted(0.4), painted(0.15)
    assert near > far > farther == 0


def test_the_gauge_reaches_up_to_the_highest_phase(bench):
    shown = bench.board._shown
    assert isinstance(bench.board, Paper)
    assert shown is not None
    reading = shown.reading("LODGE")
    high = float(shown.outcome.nodes.column("high_percent")[shown.outcome.nodes.rows["LODGE"], 0])
    assert math.isclose(reading.highest, max(high, reading.shown))
    assert isinstance(bench.board.content(), QRectF)


def test_the_gauge_points_at_the_highest_phase_too_where_it_is_another(bench):
    outcome = bench.solving.outcome
    higher = outcome.nodes.column("percent").copy()
    higher[outcome.nodes.rows["LODGE"]] += 3.0
    outcome.nodes.columns["high_percent"] = higher
    reading = bench.board._shown.reading("LODGE")
    assert math.isclose(reading.upper, reading.shown + 3.0)
    assert bench.board._shown.reading("N1").upper is None


def _street() -> Drawing:
    elements = {
        "B1": Busbar(),
        "S1": Supply(node="B1", nominal_v=11000.0),
        "B2": Busbar(x=200.0),
        "T1": Transformer(start="B1", end="B2", rating_kva=100.0),
    }
    for k, phases in enumerate(("all", "BC", "all", "C", "all")):
        elements[f"J{k}"] = Joint(x=400.0 + 200 * k)
        start = f"J{k - 1}" if k else "B2"
        elements[f"C{k}"] = Cable(start=start, end=f"J{k}", length_m=50.0, phases=phases)
        elements[f"L{k}"] = Load(node=f"J{k}", demand_kva=2.0)
    return Drawing(elements=elements)


def test_marks_that_were_carried_along_are_those_of_a_board_drawn_afresh(qapp):
    made = Bench(_street())
    made.answer = run
    steps = (
        lambda d: edits.set_tap(d, "T1", 1),
        lambda d: edits.change(d, "C1", length_m=70.0),  # states BC, and all of it is there
        lambda d: edits.change(d, "C3", length_m=70.0),
        lambda d: edits.change(d, "C1", phases="AB"),  # what follows has no C, and L3 nothing
        lambda d: edits.change(d, "C3", phases="B"),
        lambda d: edits.set_tap(d, "T1", -1),
        lambda d: edits.change(d, "C1", phases="all"),
        lambda d: edits.change(d, "C3", phases="all"),  # all alike again
    )
    seen = set()
    for step in steps:
        assert made.session.edit("Step", step) == ""
        made.solving.settle_solve()
        made.board.write_rest()
        drawing = made.session.drawing
        outcome, afresh = made.solving.outcome, Paper(made.board.look)
        assert outcome.status is Status.SOLVED, outcome.sentence
        afresh.lay_out(drawing)
        afresh.show_outcome(drawing, outcome, 0, None)
        marks = {i: item.phases for i, item in made.board.items_by_id.items()}
        assert marks == {i: item.phases for i, item in afresh.items_by_id.items()}
        seen.add(tuple(mark.letters if mark else "" for mark in marks.values()))
    assert len(seen) >= 4
    made.solving.stop()
