"""A stage for the panels' tests: the invented estate with its two transformers, solved for real."""

from dataclasses import dataclass

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QApplication, QHBoxLayout, QVBoxLayout, QWidget

from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model.drawing import Case, Drawing, Limits, Project
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Transformer
from app.panels.card import Card
from app.panels.findings import FindingsBar
from app.panels.head import Head
from app.panels.strip import VoltageStrip
from app.panels.style import sheet
from app.panels.tape import LossTape

ONE = (Case(name="As drawn"),)
TWO = (
    Case(name="Full load, low intake", supply_percent=97.0),
    Case(name="Quiet night, high intake", supply_percent=106.0, load_percent=6.0),
)
HV = {"resistance_ohm_per_km": 0.868, "reactance_ohm_per_km": 0.126, "capacitance_uf_per_km": 0.19}


def fernhollow(cases: tuple[Case, ...] = TWO, **changed) -> Drawing:
    """The 11 kV pair. `changed` elements take the place of those of the same id."""
    elements = {
        "S1": Supply(node="B1", name="Intake", dx=-5, dy=0),
        "B1": Busbar(x=0, y=0, length=6, name="GH"),
        "L1": Load(node="B1", name="Lodge", dx=4, dy=2, demand_kva=12.0),
        "T1": Transformer(
            start="B1", end="J1", rating_kva=160, v1_v=400, v2_v=11000, vector_group="Dyn11",
            load_loss_w=1750, no_load_loss_w=189, no_load_current_percent=0.7, tapped="winding 2",
        ),
        "J1": Joint(x=12, y=0),
        "C1": Cable(start="J1", end="J2", type="3×35 Al 11 kV", length_m=1150.0, rating_a=120.0, **HV),
        "J2": Joint(x=28, y=0),
        "T2": Transformer(start="J2", end="B2", load_loss_w=1250, no_load_loss_w=130, tap=-1),
        "B2": Busbar(x=40, y=0, length=6, name="HS"),
        "L2": Load(node="B2", name="House", dx=4, dy=-1, demand_kva=80.0),
    }  # fmt: skip
    return Drawing(
        project=Project(title="Fernhollow Estate", place="11 kV pair", revision="B"),
        limits=Limits(name="LV +10/−6 %", low_percent=94.0, high_percent=110.0),
        cases=cases,
        elements={**elements, **changed},
    )


@dataclass
class Stage:
    """Everything the panels share, and the panels in one plain window."""

    session: Session
    solving: Solving
    attention: Attention
    theme: Theme
    window: QWidget
    head: Head
    card: Card
    strip: VoltageStrip
    tape: LossTape
    findings: FindingsBar

    @property
    def drawing(self) -> Drawing:
        """The drawing as it stands."""
        return self.session.drawing


def stage(qtbot, drawing: Drawing, size: tuple[int, int] = (1200, 760), look: str = "light") -> Stage:
    """The panels around an empty middle, solved and shown."""
    session, theme = Session(drawing), Theme()
    theme.wear(look)
    solving, attention = Solving(session), Attention(session)
    attention.case_shown.connect(solving.look)
    window = QWidget()
    shared = (session, solving, attention, theme)
    made = Stage(
        *shared, window, Head(*shared), Card(*shared), VoltageStrip(*shared), LossTape(*shared),
        FindingsBar(*shared),
    )  # fmt: skip
    middle, across, down = QVBoxLayout(), QHBoxLayout(), QVBoxLayout(window)
    middle.addStretch(2)
    middle.addWidget(made.strip, 1)
    across.addLayout(middle, 1)
    across.addWidget(made.card)
    down.addWidget(made.head)
    down.addLayout(across, 1)
    down.addWidget(made.tape)
    down.addWidget(made.findings)
    for layout in (middle, across, down):
        layout.setSpacing(0)
        layout.setContentsMargins(0, 0, 0, 0)
    window.setObjectName("whole")
    window.setStyleSheet(sheet(theme.palette))
    theme.changed.connect(lambda: window.setStyleSheet(sheet(theme.palette)))
    window.resize(*size)
    qtbot.addWidget(window)
    solving.settle()
    window.show()
    qtbot.waitExposed(window)
    return made


def type_text(widget: QWidget, text: str) -> None:
    """Key presses that carry these letters; QTest knows only those of a plain keyboard."""
    for letter in text:
        for kind in (QKeyEvent.Type.KeyPress, QKeyEvent.Type.KeyRelease):
            QApplication.sendEvent(widget, QKeyEvent(kind, 0, Qt.KeyboardModifier.NoModifier, letter))
