"""The tap of a layout with laterals of one phase is dragged: figures and ladder are those of a study."""

import numpy as np
import pytest
from hand_desk import Desk
from phase_drawings import camp
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app import study
from app.canvas.ladder import EDGE, RAIL_X
from app.model.drawing import Case
from solver.status import Status

LEFT, NONE = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier


@pytest.fixture
def camped(qtbot):
    made = Desk(camp((Case(name="Day"), Case(name="Night", load_percent=20.0))))
    qtbot.addWidget(made.view)
    made.select("T1")
    made.solving.settle()
    yield made
    made.solving.stop()


def spot(desk, notch):
    ladder = desk.board.ladder_of("T1")
    assert ladder is not None
    return desk.view.mapFromScene(ladder.mapToScene(RAIL_X, EDGE + ladder.notches.y(notch)))


def test_a_tap_drag_moves_every_phase_and_the_ladder_knows_each_notch(camped):
    desk, port = camped, camped.view.viewport()
    QTest.mouseMove(port, spot(desk, 0))
    QTest.mousePress(port, LEFT, NONE, spot(desk, 0))
    for notch in (-1, -2):
        QTest.mouseMove(port, spot(desk, notch))
        QApplication.processEvents()
        desk.solving.settle_solve()
        outcome = desk.solving.outcome
        assert outcome.status is Status.SOLVED
        assert outcome.branches.at("T1").notch == notch
        assert outcome.wires.nodes.at("N2").a_v > desk.solving.reference.wires.nodes.at("N2").a_v
    QTest.mouseRelease(port, LEFT, NONE, spot(desk, -2))
    desk.solving.settle()
    alone = study.run(desk.drawing)
    for table in ("nodes", "branches", "attachments"):
        live, fresh = getattr(desk.solving.outcome.wires, table), getattr(alone.wires, table)
        for name, column in fresh.columns.items():
            assert live.columns[name].tobytes() == column.tobytes(), (table, name)
    curve = desk.solving.curve("T1")
    at = int(np.flatnonzero(curve.notches == -2)[0])
    assert curve.loss_kw[at] == pytest.approx(alone.balance.loss_kw)
    assert curve.lowest_percent[at] == pytest.approx(
        min(alone.nodes.at(i, c).percent for i in alone.nodes.ids if i != "HV" for c in (0, 1))
    )
    assert desk.steps == 1
