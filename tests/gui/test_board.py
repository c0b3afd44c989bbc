"""The board shows the drawing and its figures, follows every change, and finds what lies under the hand."""

from dataclasses import replace

import msgspec
import pytest
from board_drawings import EVERY_KIND, FERNHOLLOW, figures
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QImage, QPainter
from PySide6.QtWidgets import QGraphicsView

from app.canvas.board import Board
from app.canvas.geometry import Hit, HitKind, attachment_point, node_point, pose, route, scene
from app.canvas.ladder import RAIL_X
from app.canvas.standing import Standing
from app.canvas.tag import Caption
from app.canvas.theme import Theme
from app.canvas.user_symbol import Worn, read_svg
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model import edits
from app.model.drawing import Case, Drawing, Part, Symbol
from app.model.kinds import Busbar, Cable, Joint, Load, Transformer
from app.study.outcome import Finding, Verdict
from solver.status import Status

SVG = (
    b'<svg viewBox="0 0 60 40" xmlns="http://www.w3.org/2000/svg"><path d="M0 0H60V40H0Z" fill="#c00"/></svg>'
)


class Bench:
    """A board with everything it listens to; its figures are made up, and the test says when they change."""

    def __init__(self, drawing: Drawing) -> None:
        self.answer = lambda d: figures(d)
        self.session = Session(drawing)
        self.solving = Solving(self.session, run=lambda d: self.answer(d), tap_curve=lambda *_: None)
        self.solving.settle_solve()
        self.attention, self.theme = Attention(), Theme()
        self.theme.wear("light")
        self.board = Board(self.session, self.solving, self.attention, self.theme)

    def edit(self, change) -> None:
        assert self.session.edit("edit", change) == ""
        self.solving.settle_solve()

    def solve(self, **given) -> None:
        """The same drawing with other figures."""
        self.answer = lambda d: figures(d, **given)
        self.solving._owed = True
        self.solving.settle_solve()

    def image(self) -> bytes:
        picture = QImage(500, 300, QImage.Format.Format_RGB32)
        painter = QPainter(picture)
        self.board.render(painter, QRectF(0, 0, 500, 300), self.board.content())
        painter.end()
        return bytes(picture.constBits())


@pytest.fixture
def bench(qapp):
    made = []

    def make(drawing: Drawing) -> Bench:
        made.append(Bench(drawing))
        return made[-1]

    yield make
    for one in made:
        one.solving.stop()


def test_every_element_has_its_item_and_its_name(bench):
    board = bench(EVERY_KIND).board
    for id, element in EVERY_KIND.elements.items():
        assert board.item_of(id) is not None
        assert board.captions[id].text.splitlines()[0] == (element.name or id)


def test_captions_say_what_an_element_is(bench):
    board = bench(FERNHOLLOW).board
    assert board.captions["T2"].text == "T2\n100 kVA 11/0.4 kV Dyn11\ntap −2.5 %"
    assert board.captions["C1"].text == "C1\n3×35 Al 11 kV 1.15 km"
    assert board.captions["L2"].text == "House\n80 kVA pf 0.95"
    assert board.captions["S1"].text.startswith("Intake\n400 V\nheld at 97 %")


def test_supplies_say_what_they_give_and_scaled_loads_what_they_take(bench):
    night = Case(name="Night", load_percent=10.0)
    one = bench(msgspec.structs.replace(FERNHOLLOW, cases=(*FERNHOLLOW.cases, night)))
    given = one.solving.outcome.attachments.at("S1", 0).kw
    assert one.board.captions["S1"].text.endswith(f"\n{given:.2f} kW")
    assert one.board.captions["L2"].text == "House\n80 kVA pf 0.95"
    one.attention.show_case(2)
    taken = one.solving.outcome.attachments.at("L2", 2).kw
    assert one.board.captions["L2"].text == f"House\n80 kVA pf 0.95\n{taken:.2f} kW"


def test_tags_and_nodes_write_the_outcome(bench):
    one = bench(FERNHOLLOW)
    state = one.solving.outcome.branches.at("C1", 0)
    first, second = one.board.tags["C1"].text.splitlines()
    assert first == f"{state.start_kw:.1f} kW → {state.loaded_percent:.1f} %"
    assert second == f"{state.loss_kw:.2f} kW lost"
    node = one.solving.outcome.nodes.at("HS", 0)
    assert one.board.tags["HS"].text == f"{node.voltage_v:.1f} V\n{node.percent:.1f} %"


def test_another_case_shows_its_own_figures(bench):
    one = bench(FERNHOLLOW)
    before = one.board.tags["HS"].text
    one.attention.show_case(1)
    node = one.solving.outcome.nodes.at("HS", 1)
    assert one.board.tags["HS"].text == f"{node.voltage_v:.1f} V\n{node.percent:.1f} %" != before


def test_a_tag_repaints_only_when_its_text_is_another(bench, qapp, qtbot, monkeypatch):
    painted = []
    plain = Caption.paint
    monkeypatch.setattr(Caption, "paint", lambda self, *a: (painted.append(self.id), plain(self, *a))[1])
    one = bench(FERNHOLLOW)
    view = QGraphicsView(one.board)
    qtbot.addWidget(view)
    view.resize(1200, 600)
    view.show()
    qtbot.waitExposed(view)
    view.fitInView(one.board.content())
    qapp.processEvents()
    assert {"C1", "T1", "GH"} <= set(painted)
    painted.clear()
    one.solve()
    qapp.processEvents()
    assert painted == []
    outcome = figures(FERNHOLLOW)
    loss = outcome.branches.columns["loss_kw"].copy()
    loss[outcome.branches.rows["C1"]] += 0.5
    columns = {**outcome.branches.columns, "loss_kw": loss}
    one.answer = lambda _: replace(outcome, branches=replace(outcome.branches, columns=columns))
    one.solving._owed = True
    one.solving.settle_solve()
    qapp.processEvents()
    assert "C1" in painted
    assert not {"T1", "GH", "L1", "S1"} & set(painted)


def test_a_drag_shows_changes_since_it_began_and_nothing_jumps(bench):
    one = bench(FERNHOLLOW)
    spots = {id: tag.spot.box.top() for id, tag in one.board.tags.items()}
    old = one.solving.outcome.nodes.at("HS", 0).voltage_v
    one.solving.begin_drag()
    one.solve(seed=5)
    new = one.solving.outcome.nodes.at("HS", 0).voltage_v
    sign = "▲" if new > old else "▼"
    assert one.board.tags["HS"].text.endswith(f"{sign} {abs(new - old):.1f} V")
    assert "▲" in one.board.tags["C1"].text or "▼" in one.board.tags["C1"].text
    assert {id: tag.spot.box.top() for id, tag in one.board.tags.items()} == spots
    one.solving.end_drag()
    assert "▲" not in one.board.tags["HS"].text
    assert "▼" not in one.board.tags["HS"].text


def test_stale_figures_look_grey(bench):
    one = bench(FERNHOLLOW)
    fresh = one.image()
    one.solving._aged = True
    one.solving.went_stale.emit()
    assert one.image() != fresh
    one.solve()
    assert one.image() == fresh


def test_figures_out_of_sight_are_written_a_little_later(bench, qapp, qtbot):
    one = bench(FERNHOLLOW)
    view = QGraphicsView(one.board)
    qtbot.addWidget(view)
    view.resize(300, 200)
    view.show()
    qtbot.waitExposed(view)
    view.centerOn(node_point(FERNHOLLOW.elements["GH"]))
    old = one.board.tags["GH"].text, one.board.tags["HS"].text
    one.solve(seed=9)
    assert one.board.tags["GH"].text != old[0]
    assert one.board.tags["HS"].text == old[1]
    qtbot.waitUntil(lambda: one.board.tags["HS"].text != old[1])
    node = one.solving.outcome.nodes.at("HS", 0)
    assert one.board.tags["HS"].text.startswith(f"{node.voltage_v:.1f} V")


def test_states_differ_by_shape_as_well_as_colour(bench):
    one = bench(EVERY_KIND)
    one.solve(failing=("C1",), near=("T1", "J1"), dead="W1J3")
    board = one.board
    assert board.item_of("C1").standing is Standing.FAILED
    assert board.item_of("T1").standing is Standing.NEAR
    assert board.item_of("O1").standing is Standing.GOOD
    assert board.item_of("W1").standing is Standing.DEAD
    assert board.tags["J3"].text == "dead"
    assert board.tags["W1"].text == ""
    dashes = set()
    for standing in Standing:
        from app.canvas.standing import pen

        dashes.add(tuple(pen(standing, 4.0, board.look.palette).dashPattern()))
    assert len(dashes) == 4  # no figures yet and good are both plain lines


def test_several_cases_are_judged_one_by_one(bench):
    one = bench(FERNHOLLOW)
    outcome = figures(FERNHOLLOW)
    low = Finding("voltage low", Verdict.FAILS, ("HS",), "HS is low.", case=outcome.cases[0])
    low = msgspec.structs.replace(low, by_case=(Verdict.FAILS, Verdict.NEAR))
    noted = Finding("closed ring", Verdict.NOTE, ("GH",), "GH stands in a ring.")
    one.answer = lambda _: replace(outcome, findings=(low, noted))
    one.solving._owed = True
    one.solving.settle_solve()
    assert one.board.item_of("HS").standing is Standing.FAILED
    assert one.board.item_of("GH").standing is Standing.GOOD  # a note judges nothing
    one.attention.show_case(1)
    assert one.board.item_of("HS").standing is Standing.NEAR


def test_breadth_grows_with_loading(bench):
    one = bench(FERNHOLLOW)
    branches = one.solving.outcome.branches
    by_loading = sorted(branches.ids, key=lambda id: branches.at(id, 0).loaded_percent)
    widths = [one.board.item_of(id).flow.width for id in by_loading]
    assert widths == sorted(widths)
    assert widths[0] < widths[-1]


def test_power_that_runs_back_turns_the_arrow(bench):
    one = bench(FERNHOLLOW)
    outcome = figures(FERNHOLLOW)
    columns = dict(outcome.branches.columns)
    columns["through_kw"] = -columns["through_kw"]
    one.answer = lambda _: replace(outcome, branches=replace(outcome.branches, columns=columns))
    one.solving._owed = True
    one.solving.settle_solve()
    assert " ← " in one.board.tags["C1"].text
    assert "−" not in one.board.tags["C1"].text
    assert one.board.item_of("C1").flow.forward is False


def test_the_board_follows_edits_undo_and_another_drawing(bench):
    one = bench(FERNHOLLOW)
    one.edit(lambda d: edits.put(d, {"J9": Joint(x=4, y=9), "C9": Cable(start="GH", end="J9")}))
    assert one.board.item_of("C9") is not None
    one.edit(lambda d: edits.move(d, {"J9"}, 3, 0))
    assert one.board.item_of("C9").points[-1] == scene(7, 9)
    assert one.board.item_of("J9").ends[0] == scene(7, 9)
    one.edit(lambda d: edits.rename(d, "J9", "Mill"))
    assert one.board.captions["J9"].text == "Mill"
    for _ in range(3):
        one.session.history.undo()
    assert one.board.item_of("C9") is None
    assert one.board.item_of("J9") is None
    one.session.open(EVERY_KIND)
    assert one.board.item_of("HS") is None
    assert set(one.board.items_by_id) == set(EVERY_KIND.elements)


def test_selecting_what_is_then_deleted_lets_go_of_it(bench):
    one = bench(FERNHOLLOW)
    one.attention.select(["L1", "T1"])
    one.edit(lambda d: edits.remove(d, {"L1"}))
    assert one.attention.selection == {"T1"}


def test_selection_and_hover_light_up(bench):
    one = bench(FERNHOLLOW)
    dull = one.image()
    one.attention.select(["C1"])
    selected = one.image()
    one.attention.select([])
    one.attention.look_at("C1")
    assert len({dull, selected, one.image()}) == 3
    one.attention.look_at("")
    assert one.image() == dull


def test_a_selected_transformer_shows_its_ladder_above_it(bench):
    one = bench(FERNHOLLOW)
    assert one.board.ladder_of("T2") is None
    one.attention.select(["T2"])
    ladder = one.board.ladder_of("T2")
    box = ladder.sceneBoundingRect()
    assert box.bottom() <= one.board.item_of("T2").core().top()
    rail = ladder.mapToScene(RAIL_X, box.height() / 2)
    assert one.board.hit(rail) == Hit(HitKind.LADDER, "T2")
    assert one.board.hit(box.topRight() - QPointF(4, -4)).kind is not HitKind.LADDER
    one.attention.select([])
    assert one.board.ladder_of("T2") is None


@pytest.mark.parametrize("choice", ["light", "dark"])
@pytest.mark.parametrize("symbols", ["IEC", "ANSI"])
def test_every_kind_paints_in_both_sets_and_palettes(bench, choice, symbols):
    one = bench(EVERY_KIND)
    plain = one.image()
    one.theme.wear(choice, symbols)
    assert (one.image() == plain) == ((choice, symbols) == ("light", "IEC"))


def test_hits(bench):
    one = bench(EVERY_KIND)
    board, drawing = one.board, EVERY_KIND
    assert board.hit(node_point(drawing.elements["J1"])).id == "J1"
    top = board.hit(scene(0, -4))
    assert (top.kind, top.id) == (HitKind.NODE, "B1")
    load = board.hit(attachment_point(drawing, "L1"))
    assert (load.kind, load.id) == (HitKind.ATTACHMENT, "L1")
    middle = board.hit(pose(route(drawing, "T1"))[0])
    assert (middle.kind, middle.id) == (HitKind.BRANCH, "T1")
    second = board.hit(scene(26, 0))
    assert (second.kind, second.id, second.index) == (HitKind.BRANCH, "O1", 1)
    assert board.hit(QPointF(-900, 900)).kind is HitKind.PAPER
    near, far = scene(7, -3) + QPointF(0, 8), scene(7, -3) + QPointF(0, 30)
    assert board.hit(near).id == "C1"
    assert board.hit(far).kind is HitKind.PAPER
    assert board.hit(far, 40.0).id == "C1"


def test_bends_and_ends_of_the_one_selected_branch_can_be_taken(bench):
    drawing = edits.reroute(EVERY_KIND, "O1", ((20.0, -3.0), (20.0, 4.0)))
    one = bench(drawing)
    bend = scene(20, 4)
    assert one.board.hit(bend).kind is HitKind.BRANCH
    one.attention.select(["O1"])
    hit = one.board.hit(bend)
    assert (hit.kind, hit.id, hit.index) == (HitKind.BEND, "O1", 1)
    end = one.board.hit(scene(26, 4) - QPointF(18, 0), 4.0)
    assert (end.kind, end.index) == (HitKind.END, 1)
    assert one.board.hit(node_point(drawing.elements["J2"])).kind is HitKind.NODE


def test_the_users_own_symbol_is_worn_on_the_board(bench):
    part = Part(name="Mine", element=Transformer(start="", end=""), symbol=read_svg(SVG))
    plain = bench(FERNHOLLOW)
    elements = dict(FERNHOLLOW.elements)
    elements["T2"] = Transformer(start="J2", end="HS", part="mine")
    one = bench(msgspec.structs.replace(FERNHOLLOW, elements=elements, parts={"mine": part}))
    item = one.board.item_of("T2")
    assert isinstance(item.worn, Worn)
    assert not isinstance(plain.board.item_of("T2").worn, Worn)
    picture = QImage(60, 60, QImage.Format.Format_RGB32)
    painter = QPainter(picture)
    one.board.render(painter, QRectF(0, 0, 60, 60), QRectF(item.at.x() - 30, item.at.y() - 30, 60, 60))
    painter.end()
    assert picture.pixelColor(30, 30).name() == "#cc0000"


def test_an_empty_drawing_and_one_without_figures_show(bench):
    empty = bench(Drawing())
    assert empty.image()
    lone = Bench.__new__(Bench)
    lone.session = Session(FERNHOLLOW)
    lone.solving = Solving(lone.session, run=figures, tap_curve=lambda *_: None)
    lone.board = Board(lone.session, lone.solving, Attention(), Theme())
    assert lone.board.tags["C1"].text == ""
    assert lone.image()
    lone.solving.stop()


def test_a_node_that_becomes_a_bar_is_drawn_as_one(bench):
    one = bench(EVERY_KIND)
    one.edit(lambda d: edits.put(d, {"J1": Busbar(x=14, y=-3, length=4)}))
    assert one.board.item_of("J1").bar
    one.edit(lambda d: edits.remove(d, {"K1"}))
    one.edit(lambda d: edits.put(d, {"K1": Load(node="J1", dx=0, dy=-4)}))
    assert one.board.captions["K1"].text.endswith("kVA pf 0.95")


def test_where_there_is_no_answer_only_what_stands_in_its_way_is_marked(bench):
    one = bench(FERNHOLLOW)
    good = one.board.tags["C1"].text
    blocked = replace(
        figures(FERNHOLLOW, dead="".join(FERNHOLLOW.elements)),
        status=Status.INVALID,
        findings=(Finding("closed loop", Verdict.BLOCKS, ("T1",), "T1 closes a loop."),),
    )
    one.answer = lambda _: blocked
    one.solving._owed = True
    one.solving.settle_solve()
    assert one.board.look.stale
    assert one.board.tags["C1"].text == good
    assert one.board.item_of("T1").standing is Standing.FAILED
    assert one.board.item_of("T2").standing is Standing.PLAIN
    fresh = bench(Drawing())
    fresh.answer = lambda _: blocked
    fresh.session.open(FERNHOLLOW)
    fresh.solving.settle_solve()
    assert fresh.board.tags["C1"].text == fresh.board.tags["HS"].text == ""
    assert fresh.board.item_of("T1").standing is Standing.FAILED
    assert fresh.board.item_of("HS").standing is Standing.PLAIN
    fresh.solve()
    assert fresh.board.tags["C1"].text == good
    assert fresh.board.item_of("T1").standing is Standing.GOOD


def test_long_names_are_wrapped_and_cut(bench):
    name = "The substation at the far end of the long lane behind the old brewery"
    one = bench(edits.rename(FERNHOLLOW, "T1", name))
    lines = one.board.captions["T1"].text.splitlines()
    assert lines[:2] == ["The substation at the far", "end of the long lane …"]
    blank = bench(msgspec.structs.replace(FERNHOLLOW, elements={"J": Joint(name="  ")}))
    assert blank.board.captions["J"].text == "J"


@pytest.mark.parametrize(
    "symbol",
    [
        Symbol(svg="<svg", width=60, height=40),
        Symbol(svg=SVG.decode().replace("path", "script"), width=60, height=40),
        Symbol(svg=SVG.decode(), width=0, height=40),
        Symbol(svg=SVG.decode(), width=60, height=float("nan")),
        Symbol(svg=SVG.decode(), width=60, height=40, terminals=((float("inf"), 0.0),)),
    ],
)
def test_a_drawing_from_elsewhere_cannot_bring_a_hostile_symbol(bench, symbol):
    part = Part(name="Mine", element=Transformer(start="", end=""), symbol=symbol)
    elements = {**FERNHOLLOW.elements, "T2": Transformer(start="J2", end="HS", part="mine")}
    one = bench(msgspec.structs.replace(FERNHOLLOW, elements=elements, parts={"mine": part}))
    assert not isinstance(one.board.item_of("T2").worn, Worn)
    assert one.image()
