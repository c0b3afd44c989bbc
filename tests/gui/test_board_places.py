"""Routes, hits and the places of words: pure functions over plain data."""

from pathlib import Path

import numpy as np
import pytest
from board_drawings import EVERY_KIND, FERNHOLLOW, by_hand, figures
from PySide6.QtCore import QPointF, QRectF

from app.canvas import gauge
from app.canvas.element_item import Look
from app.canvas.geometry import (
    HitKind,
    Outline,
    along,
    bar_ends,
    end_handle,
    grid,
    meet,
    nearest,
    pose,
    route,
    scene,
    snap,
    stub,
    to_point,
)
from app.canvas.paper import Paper
from app.canvas.placing import Homes, Spot, Taken, Wish, around, gap, place, strips
from app.canvas.standing import breadths
from app.model.drawing import Drawing
from app.model.file import load
from app.model.kinds import Busbar, Cable, Joint, Load
from app.study import run

SAMPLES = Path(__file__).parents[2] / "samples"


def points(drawing, id):
    return [grid(p) for p in route(drawing, id)]


def between(a, b, **branch):
    return points(Drawing(elements={"A": a, "B": b, "C": Cable(start="A", end="B", **branch)}), "C")


def test_a_level_line_meets_upright_bars_square():
    assert between(Busbar(x=0, y=0, length=6), Busbar(x=9, y=2, length=6)) == [(0, 1), (9, 1)]
    assert between(Busbar(x=0, y=0, length=6), Joint(x=9, y=2)) == [(0, 2), (9, 2)]
    assert between(Joint(x=3, y=-5), Busbar(x=2, y=4, length=6, upright=False)) == [(3, -5), (3, 4)]


def test_corners_leave_bars_square():
    assert between(Joint(x=0, y=0), Joint(x=5, y=3)) == [(0, 0), (5, 0), (5, 3)]
    assert between(Joint(x=0, y=0), Busbar(x=5, y=8, length=4)) == [(0, 0), (0, 6), (5, 6)]
    far = between(Busbar(x=0, y=0, length=2), Busbar(x=10, y=9, length=2))
    assert far == [(0, 1), (5, 1), (5, 8), (10, 8)]
    lying = [Busbar(x=0, y=0, length=2, upright=False), Busbar(x=10, y=8, length=2, upright=False)]
    assert between(*lying) == [(1, 0), (1, 4), (9, 4), (9, 8)]


def test_bends_are_kept_as_drawn():
    assert between(Joint(x=0, y=0), Busbar(x=8, y=0, length=6), via=((2.0, 2.0),)) == [(0, 0), (2, 2), (8, 2)]


def test_lines_side_by_side_do_not_lie_on_each_other():
    elements = {"A": Joint(x=0, y=0), "B": Joint(x=20, y=0)}
    elements |= {f"C{k}": Cable(start="A", end="B") for k in range(3)}
    elements["C3"] = Cable(start="B", end="A")
    drawing = Drawing(elements=elements)
    assert len({pose(route(drawing, f"C{k}"))[0].toTuple() for k in range(4)}) == 4


@pytest.mark.parametrize("spot", [(0, 0), (3, 7), (-40, 2)])
def test_a_branch_of_no_length_still_has_a_route(spot):
    line = between(Joint(x=spot[0], y=spot[1]), Joint(x=spot[0], y=spot[1]))
    assert line == [spot, spot]


def test_meeting_a_bar():
    bar = Busbar(x=0, y=0, length=4)
    assert meet(bar, QPointF(100, 20)) == QPointF(0, 20)
    assert meet(bar, QPointF(100, 900)) == QPointF(0, 40)
    assert bar_ends(bar) == (QPointF(0, -40), QPointF(0, 40))


def test_stubs_are_square():
    drawing = Drawing(elements={"J": Joint(), "L": Load(node="J", dx=2, dy=3)})
    assert [grid(p) for p in stub(drawing, "L")] == [(0, 0), (2, 0), (2, 3)]
    assert [grid(p) for p in to_point(Joint(), scene(4, 0))] == [(0, 0), (4, 0)]


def test_pose_lies_on_the_longest_run():
    centre, angle = pose([scene(0, 0), scene(0, 3), scene(-10, 3)])
    assert (grid(centre), angle) == ((-5, 3), 180)


def test_along_and_handles_stay_on_the_route():
    line = [QPointF(0, 0), QPointF(30, 0), QPointF(30, 30)]
    assert along(line, 40) == QPointF(30, 10)
    assert along(line, 999) == QPointF(30, 30)
    assert end_handle(line, 0) == QPointF(18, 0)
    assert end_handle(line, 1) == QPointF(30, 12)
    assert end_handle([QPointF(0, 0), QPointF(9, 0)], 0) == QPointF(3, 0)
    assert snap(QPointF(31, -29)) == (2.0, -1.0)


def test_the_nearest_is_hit_and_handles_come_before_nodes_before_lines():
    line = Outline(HitKind.BRANCH, "C", (QPointF(0, 0), QPointF(100, 0), QPointF(100, 50)))
    node = Outline(HitKind.NODE, "J", (QPointF(100, 0),), reach=3)
    bend = Outline(HitKind.BEND, "C", (QPointF(100, 4),), 2)
    assert nearest([line], QPointF(50, 6), 8).index == 0
    assert nearest([line], QPointF(94, 30), 8).index == 1
    assert nearest([line, node], QPointF(96, 1), 8).id == "J"
    assert nearest([line, node, bend], QPointF(100, 1), 8).kind is HitKind.BEND
    assert nearest([line, node, bend], QPointF(100, 1), 8).index == 2
    assert nearest([line], QPointF(50, 9), 8).kind is HitKind.PAPER
    assert nearest([], QPointF(), 8).kind is HitKind.PAPER


def test_words_take_the_first_free_spot():
    spots = [Spot(QRectF(0, 0, 10, 10)), Spot(QRectF(50, 0, 10, 10)), Spot(QRectF(90, 0, 10, 10))]
    taken = Taken([QRectF(0, 0, 30, 5)])
    placed = place([Wish(("a", "tag"), spots), Wish(("b", "tag"), spots)], taken)
    assert placed["a", "tag"] is spots[1]
    assert placed["b", "tag"] is spots[2]


def test_where_nothing_is_free_the_least_is_hidden():
    spots = [Spot(QRectF(0, 0, 10, 10)), Spot(QRectF(6, 0, 10, 10))]
    placed = place([Wish(("a", "tag"), spots)], Taken([QRectF(-50, -50, 60, 100), QRectF(14, 0, 50, 2)]))
    assert placed["a", "tag"] is spots[1]


def test_spots_lie_beside_the_box():
    core = QRectF(0, 0, 20, 20)
    for spot in around(core, 30, 10, "balr1234", gap=5):
        assert not core.intersects(spot.box)
        assert (spot.box.width(), spot.box.height()) == (30, 10)
    slant = list(strips([QPointF(0, 0), QPointF(100, 100)]))
    assert len(slant) > 3
    assert not any(box.contains(QPointF(80, 20)) for box in slant)


@pytest.mark.parametrize("drawing", [FERNHOLLOW, EVERY_KIND], ids=["fernhollow", "every kind"])
def test_no_words_lie_on_each_other_or_on_a_symbol(qapp, drawing):
    paper = Paper(Look())
    paper.lay_out(drawing)
    paper.show_outcome(drawing, figures(drawing, near=("C1",), failing=("T1",)), 0, None)
    paper.arrange()
    blocks = [b for b in (*paper.captions.values(), *paper.tags.values()) if b.lines]
    boxes = [b.spot.box for b in blocks]
    for k, box in enumerate(boxes):
        assert not any(box.intersects(other) for other in boxes[k + 1 :]), blocks[k].text
        assert not any(box.intersects(item.core()) for item in paper.items_by_id.values()), blocks[k].text
    lines = [strip for item in paper.items_by_id.values() for strip in strips(getattr(item, "points", []), 0)]
    assert not [b.text for b in blocks if any(b.spot.box.intersects(line) for line in lines)]


@pytest.mark.parametrize("drawing", [FERNHOLLOW, EVERY_KIND, *(by_hand(dy) for dy in (0.0, 1.0, 2.0, 3.0))])
def test_volts_are_nearer_to_their_own_node_than_to_any_other_or_led_to_it(qapp, drawing):
    paper = Paper(Look())
    paper.lay_out(drawing)
    paper.show_outcome(drawing, figures(drawing), 0, None)
    paper.arrange()
    cores = {id: paper.items_by_id[id].core() for id in drawing.nodes()}
    for id, core in cores.items():
        tag = paper.tags[id]
        if tag.lead is not None:
            assert core.adjusted(-1, -1, 1, 1).contains(tag.lead.p2())
            continue
        away = gap(tag.spot.box, core)
        assert away <= 22
        assert all(gap(tag.spot.box, other) > away for i, other in cores.items() if i != id), id
    assert sum(paper.tags[id].lead is not None for id in cores) <= len(cores) / 2


@pytest.mark.parametrize("symbols", ["IEC", "ANSI"])
def test_tags_stay_under_their_lines_with_either_set_of_symbols(qapp, symbols):
    drawing = load(SAMPLES / "fernhollow_pair.farend")
    paper = Paper(Look(symbols=symbols))
    paper.lay_out(drawing)
    paper.show_outcome(drawing, run(drawing), 0, None)
    paper.arrange()
    for id in drawing.branches():
        item, words = paper.items_by_id[id], paper.tags[id].spot.box
        assert words.top() > item.at.y(), id
        assert gap(words, item.core()) <= 10, id


def test_whose_home_is_nearest():
    homes = Homes({"A": QRectF(0, 0, 10, 100), "B": QRectF(100, 40, 10, 10), "far": QRectF(900, 0, 5, 5)})
    assert homes.nearest_is("A", QRectF(20, 40, 20, 10))
    assert not homes.nearest_is("A", QRectF(60, 40, 20, 10))
    assert homes.nearest_is("B", QRectF(60, 40, 20, 10))
    assert not homes.nearest_is("A", QRectF(50, 40, 10, 10)), "as near to the one as to the other"
    assert not homes.nearest_is("far", QRectF(450, 0, 10, 10))


def test_to_cover_a_symbol_is_worse_than_to_cover_words():
    spots = [Spot(QRectF(0, 0, 10, 10)), Spot(QRectF(50, 0, 10, 10))]
    taken = Taken([QRectF(50, 0, 10, 10)])
    taken.add(QRectF(0, 0, 10, 4), weight=8.0)
    assert place([Wish(("a", "tag"), spots)], taken)["a", "tag"] is spots[1]


def test_the_gauge_is_monotone_and_never_leaves_its_track():
    reading = gauge.Reading(94, 110, 96, 104, 97)
    heights = [gauge.height_of(p, reading) for p in (0, 80, 94, 97, 104, 110, 130, 900)]
    assert heights == sorted(heights)
    assert heights[0] == 0
    assert heights[-1] == 1
    assert heights[2] == pytest.approx(gauge.LIMIT_SHARE)
    assert heights[5] == pytest.approx(1 - gauge.LIMIT_SHARE)


def test_breadth_is_monotone_and_bounded():
    widths = breadths(np.arange(0.0, 300.0, 10.0)).tolist()
    assert widths == sorted(widths)
    assert breadths(np.array([np.nan]))[0] == widths[0]
    assert widths[-1] < 12
