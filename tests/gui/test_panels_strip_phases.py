"""The voltage strip of a layout whose phases are not alike: a curve a phase, the band in volts too."""

import math

import pytest
from panels_stage import fernhollow, stage
from phase_drawings import camp
from PySide6.QtCore import QPoint, QRectF, Qt
from PySide6.QtGui import QColor, QImage, QPainter
from PySide6.QtTest import QTest

from app.canvas.palette import LIGHT
from app.model.drawing import Case, Limits
from app.model.kinds import Load, Transformer
from app.panels.strip_axes import Axes
from app.panels.strip_band import LABEL, label_places
from app.panels.strip_phases import paint_phases

CASES = (Case(name="Peak"), Case(name="Night", load_percent=20.0))


@pytest.fixture
def at(qtbot):
    made = stage(qtbot, camp(CASES))
    yield made
    made.solving.stop()


def curves(at) -> dict:
    return {curve.letter: curve for curve in at.strip.phases}


def test_each_phase_has_a_curve_over_the_nodes_it_reaches(at):
    made = curves(at)
    assert set(made) == {"A", "B", "C"}
    assert {"N1", "N2", "J1"} <= set(made["A"].nodes)
    assert "N2" not in made["B"].nodes
    assert "W1" in made["C"].nodes


def test_the_curves_lie_at_the_percent_of_their_own_base(at):
    state = at.solving.outcome.wires.nodes.at("LODGE", 0)
    for letter, curve in curves(at).items():
        volts = getattr(state, f"{letter.lower()}_v")
        wanted = at.strip.axes.y(100 * volts / state.base_v)
        assert math.isclose(curve.nodes["LODGE"].y(), wanted)


def test_they_are_those_of_the_case_shown(at):
    before = curves(at)["A"].nodes["N2"].y()
    at.attention.show_case(1)
    assert curves(at)["A"].nodes["N2"].y() < before  # at night the lateral stands higher


def test_the_axis_has_room_for_every_phase(at):
    room = at.strip.axes.room
    spots = [spot for curve in at.strip.phases for spot in curve.nodes.values()]
    assert all(room.top() <= spot.y() <= room.bottom() for spot in spots)


def test_a_balanced_layout_keeps_its_one_curve_a_case(qtbot):
    at = stage(qtbot, fernhollow())
    assert at.strip.phases == []
    assert at.strip.axes.room.right() > at.strip.width() - 40
    at.solving.stop()


def test_a_click_on_the_curve_of_any_phase_selects(at):
    spot = curves(at)["C"].nodes["W1"]
    QTest.mouseClick(at.strip, Qt.MouseButton.LeftButton, pos=QPoint(round(spot.x()), round(spot.y())))
    assert at.attention.selection in ({"W1"}, {"W"})


def test_a_node_says_its_phases_under_the_hand(at):
    assert "A 1" in at.strip.words("LODGE")
    assert "to neutral" in at.strip.words("LODGE")


def test_behind_a_centre_tap_both_hot_wires_go_on_from_the_phase_that_feeds_them(qtbot):
    unit = Transformer(
        start="HV", end="PAD", v1_v=7200.0, v2_v=240.0, vector_group="Ii0", build="centre-tapped",
        phases="B", rating_kva=25.0,
    )  # fmt: skip
    drawing = camp(T1=unit)
    kept = {i: drawing.elements[i] for i in ("S1", "HV", "T1", "PAD")}
    kept["L1"] = Load(node="PAD", demand_kva=4.0, phases="A", dx=4, dy=0)
    at = stage(qtbot, type(drawing)(frequency_hz=60.0, elements=kept))
    made = curves(at)
    assert {"A", "B"} <= set(made)
    for letter in "AB":
        (step,) = [s for s in made[letter].stretches if s.branch == "T1"]
        assert step.points[0] == made["B"].nodes["HV"]
    assert made["A"].nodes["PAD"].y() > made["B"].nodes["PAD"].y()  # the loaded half stands lower
    at.solving.stop()


def test_the_strip_is_painted_in_both_looks(at, qtbot):
    for look in ("light", "dark"):
        at.theme.wear(look)
        at.attention.select(("C1",))
        picture = at.strip.grab().toImage()
        assert not picture.isNull()


def test_figures_of_a_narrow_band_keep_apart():
    axes = Axes(QRectF(50, 30, 600, 60), 60.0, 130.0, 1.0, 40.0)
    limits = Limits(low_percent=97.0, high_percent=103.0)
    places = label_places(axes, limits)
    assert set(places) == {97.0, 103.0}  # no room for the nominal between
    assert abs(places[97.0] - places[103.0]) >= LABEL - 1e-9
    wide = label_places(Axes(QRectF(50, 30, 600, 200), 90.0, 112.0, 1.0, 40.0), Limits())
    assert 100.0 in wide


def test_curves_out_of_date_leave_the_colours_of_the_window_as_they_are(at):
    palette = LIGHT
    before = [QColor(getattr(palette, name)).getRgb() for name in palette.__struct_fields__]
    image = QImage(at.strip.size(), QImage.Format.Format_ARGB32_Premultiplied)
    painter = QPainter(image)
    paint_phases(painter, at.strip.phases, set(), set(), palette, stale=True)
    painter.end()
    assert [getattr(palette, name).getRgb() for name in palette.__struct_fields__] == before
