"""The voltage strip: volts along the route, a curve a case; a transformer's step drags its tap."""

import math

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QKeyEvent, QMouseEvent, QPainter, QPaintEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.canvas.geometry import segment_gap
from app.canvas.palette import font
from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model.drawing import label
from app.model.edits import Change
from app.model.taps import by_hand
from app.panels.results import tap_words
from app.panels.strip_axes import Axes, Stretch, axes, node_points, span, stretches
from app.panels.strip_paint import Curve, Shown, paint_head, paint_strip
from app.panels.strip_phases import PhaseCurve, base_of, phase_curves, system_of
from app.panels.strip_routes import Routes, routes
from app.panels.strip_tap import TapDrag
from app.panels.strip_words import spoken
from app.panels.words import plain_tip
from app.study.outcome import Outcome

HEAD = 34.0
FOOT = 42.0
LEFT_MARGIN, RIGHT_MARGIN = 58.0, 34.0
WIRED_MARGIN = 84.0  # where limits are told in volts as well
REACH = 9.0


class VoltageStrip(QWidget):
    """Painted from the outcome; hover and selection are shared with the board."""

    def __init__(
        self,
        session: Session,
        solving: Solving,
        attention: Attention,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self._session, self._solving, self._attention, self._theme = session, solving, attention, theme
        self.routes = Routes({}, ())
        self.axes: Axes | None = None
        self.curves: list[Curve] = []  # the case shown whole, of the others the main route
        self.phases: list[PhaseCurve] = []  # of the case shown, where they are not alike
        self.before: Curve | None = None  # the main route when the drag began
        self.tap = TapDrag(session, solving, attention)
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setAccessibleName("Voltage strip")
        self.setAccessibleDescription("Volts along the route. Up and down move the tap of the chosen step.")
        session.changed.connect(self._changed)
        session.replaced.connect(self._follow)
        solving.solved.connect(self._follow)
        solving.went_stale.connect(self.update)
        attention.selected.connect(self._follow)
        attention.hovered.connect(lambda _id: self.update())
        attention.case_shown.connect(self._follow)
        theme.changed.connect(self.update)
        self._follow()

    def sizeHint(self) -> QSize:
        return QSize(700, 196)

    def minimumSizeHint(self) -> QSize:
        return QSize(240, 150)

    # -- what is shown --------------------------------------------------------------------------
    @property
    def _outcome(self) -> Outcome | None:
        """The figures shown; where the case has none and never had, those of the cases that are solved."""
        shown = self._solving.outcome
        return shown if shown is not None and shown.solved_cases else None

    @property
    def _lacking(self) -> bool:
        """True where the curves are those of other cases alone."""
        return self._outcome is not None and self._solving.figures is None

    @property
    def case(self) -> int:
        """The case drawn whole: the one shown, or the first that is solved."""
        outcome = self._outcome
        if outcome is None:
            return 0
        return outcome.solved_cases[0] if self._lacking else min(self._attention.case, len(outcome.cases) - 1)

    def _changed(self, change: Change) -> None:
        """New figures come with the next outcome; only what is gone must go at once."""
        if change.topology:
            self._follow()
        else:
            self.update()

    def _follow(self) -> None:
        """Lay the curves out anew."""
        outcome, drawing = self._outcome, self._session.drawing
        if outcome is None:
            self.routes, self.axes, self.curves, self.before = Routes({}, ()), None, [], None
            self.phases = []
            self.update()
            return
        chosen = (self.tap.id,) if self.tap.id else self._attention.selection
        self.routes = routes(drawing, outcome, self.case, chosen, self.routes)
        before = self._solving.reference
        reach = span(drawing.limits, self.routes, [outcome, *([before] if before else [])])
        if self.tap.reach is not None:
            reach = min(reach[0], self.tap.reach[0]), max(reach[1], self.tap.reach[1])
        self.tap.reach = reach if self.tap.id else None
        right = RIGHT_MARGIN if outcome.wires is None else WIRED_MARGIN
        room = QRectF(
            LEFT_MARGIN, HEAD, self.width() - LEFT_MARGIN - right, max(self.height() - HEAD - FOOT, 20)
        )
        self.axes = axes(room, self.routes, reach)
        backbone = self.routes.backbone
        self.curves = [
            self._curve(outcome, case, self.routes if case == self.case else backbone)
            if outcome.solved(case)
            else Curve(outcome.cases[case], [], {})
            for case in range(len(outcome.cases))
        ]
        shown = self.curves[self.case].nodes
        self.phases = phase_curves(drawing, outcome, self.case, self.routes, self.axes, shown)
        known = before is not None and self.case < len(before.cases)
        self.before = self._curve(before, self.case, backbone) if before is not None and known else None
        self.update()

    def _curve(self, outcome: Outcome, case: int, routes: Routes) -> Curve:
        assert self.axes is not None
        spots = node_points(outcome, case, routes, self.axes)
        return Curve(outcome.cases[case], stretches(self._session.drawing, routes, spots), spots)

    def resizeEvent(self, event) -> None:
        self._follow()

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        palette = self._theme.palette
        painter.fillRect(self.rect(), palette.field)
        self._paint_head(painter)
        if self.axes is None or not self.routes.stops:
            painter.setFont(font(9))
            painter.setPen(palette.soft)
            painter.drawText(self.rect(), int(Qt.AlignmentFlag.AlignCenter), self._why_empty())
            return
        shown = Shown(
            drawing=self._session.drawing,
            routes=self.routes,
            axes=self.axes,
            curves=self.curves,
            case=self.case,
            before=self.before,
            selection=self._attention.selection,
            hover=self._attention.hover,
            held=self.tap.id or (self._keyed() if self.hasFocus() else ""),
            stale=self._solving.stale or self._lacking,
            phases=self.phases,
            system=system_of(self._outcome, self.routes) if self.phases and self._outcome else "",
            base_v=base_of(self._outcome, self.routes) if self._outcome else math.nan,
        )
        paint_strip(painter, shown, palette)

    def _paint_head(self, painter: QPainter) -> None:
        palette = self._theme.palette
        held = self.tap.id or (self._keyed() if self.hasFocus() else "")
        text = "% of nominal; volts at the right" if self.phases else "% of nominal"
        if self._lacking:
            text += f"; case {self._session.drawing.cases[self._attention.case].name} is not solved"
        if held:
            drawing = self._session.drawing
            text = f"{label(drawing, held)}  {tap_words(drawing, self._outcome, held, self.case)}"
        paint_head(painter, self.width(), text, bool(held), palette)

    def _why_empty(self) -> str:
        if not self._session.drawing.elements:
            return "Draw a supply to see volts along the route."
        return "No figures: not solved." if self._solving.problem is not None else ""

    # -- what lies under the hand ---------------------------------------------------------------
    def handle_of(self, id: str) -> QPointF | None:
        """Where the dot is that drags a transformer's tap."""
        for stretch in self._steps():
            if stretch.branch == id:
                return stretch.points[2]
        return None

    def _steps(self) -> list[Stretch]:
        if not self.curves:
            return []
        elements = self._session.drawing.elements
        found = self.curves[self.case].stretches
        return [s for s in found if by_hand(elements.get(s.branch))]

    def _handle_at(self, point: QPointF) -> str:
        best, least = "", REACH
        for stretch in self._steps():
            away = min(math.dist(point.toTuple(), stretch.points[k].toTuple()) for k in (2, 1))
            away = min(away, segment_gap(stretch.points[1], stretch.points[2], point) + 3)
            if away < least:
                best, least = stretch.branch, away
        return best

    def _thing_at(self, point: QPointF) -> str:
        """The node or branch nearest to a point, the main route first."""
        if not self.curves:
            return ""
        curve = self.curves[self.case]
        drawn: list[Curve | PhaseCurve] = [curve, *self.phases]
        spots = [spot for each in drawn for spot in each.nodes.items()]
        nodes = [(math.dist(point.toTuple(), at.toTuple()), id) for id, at in spots]
        near = min((n for n in nodes if n[1] in self.routes.main), default=(math.inf, ""))
        if near[0] < REACH:
            return near[1]
        best, least = "", REACH
        for stretch in (s for each in drawn for s in each.stretches):
            pairs = zip(stretch.points, stretch.points[1:], strict=False)
            aside = 0 if stretch.node in self.routes.main else 2
            away = min(segment_gap(a, b, point) for a, b in pairs) + aside
            if away < least:
                best, least = stretch.branch, away
        return best

    def words(self, id: str) -> str:
        """A node or branch in words, for the tooltip."""
        return spoken(self._session.drawing, self._outcome, self.case, id)

    # -- hand -----------------------------------------------------------------------------------
    def mousePressEvent(self, event: QMouseEvent) -> None:
        if event.button() != Qt.MouseButton.LeftButton:
            return
        handle = self._handle_at(event.position())
        if handle and self.axes is not None:
            self._attention.select((handle,))
            self.tap.take(handle, event.position().y(), self.axes.px_per_percent)
            self._follow()
            return
        thing = self._thing_at(event.position())
        self._attention.select((thing,) if thing else ())

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self.tap.dragged:
            self.tap.drag(event.position().y())
            return
        handle = self._handle_at(event.position())
        met = handle or self._thing_at(event.position())
        self._attention.look_at(met)
        self.setToolTip(plain_tip(self.words(met)))
        self.setCursor(Qt.CursorShape.SizeVerCursor if handle else Qt.CursorShape.ArrowCursor)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        if event.button() == Qt.MouseButton.LeftButton and self.tap.dragged:
            self.tap.let_go()
            self._follow()

    def leaveEvent(self, event: QEvent) -> None:
        if not self.tap.dragged:
            self._attention.look_at("")

    # -- keys -----------------------------------------------------------------------------------
    def _keyed(self) -> str:
        """The step that the keys move: the selected one, else the last on the main route."""
        steps = [s.branch for s in self._steps()]
        chosen = [s for s in steps if s in self._attention.selection]
        on_main = [s.branch for s in self._steps() if s.node in self.routes.main]
        return (chosen or on_main[-1:] or steps[-1:] or [""])[0]

    def keyPressEvent(self, event: QKeyEvent) -> None:
        key, steps = event.key(), [s.branch for s in self._steps()]
        if key == Qt.Key.Key_Escape and self.tap.id:
            self.tap.put_back()
            self._follow()
        elif key in (Qt.Key.Key_Left, Qt.Key.Key_Right) and steps:
            way = 1 if key == Qt.Key.Key_Right else -1
            self._attention.select((steps[(steps.index(self._keyed()) + way) % len(steps)],))
        elif key in (Qt.Key.Key_Up, Qt.Key.Key_Down) and steps:
            self.tap.nudge(self._keyed(), 1 if key == Qt.Key.Key_Up else -1)
        else:
            super().keyPressEvent(event)

    def focusInEvent(self, event) -> None:
        super().focusInEvent(event)
        self.update()

    def focusOutEvent(self, event) -> None:
        super().focusOutEvent(event)
        self.update()
