"""The loss tape at the foot: where every kilowatt goes, to scale."""

from PySide6.QtCore import QEvent, QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QKeyEvent, QMouseEvent, QPainter, QPaintEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model.edits import Change
from app.model.figures import change, closure, loss, percent, plain, power
from app.panels.tape_cut import Cut, Piece, cut
from app.panels.tape_paint import BAR_TOP, HEIGHT, MARGIN, Shown, paint_tape
from app.panels.words import plain_tip
from app.study.outcome import Outcome


class LossTape(QWidget):
    """Hovering a piece lights its branch; clicking selects it; the arrow keys walk along the tape."""

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
        self.cut = Cut()
        self.walked = -1
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setAccessibleName("Loss tape")
        session.changed.connect(self._changed)
        session.replaced.connect(self._follow)
        solving.solved.connect(self._follow)
        solving.went_stale.connect(self.update)
        attention.case_shown.connect(self._follow)
        attention.hovered.connect(self._look)
        attention.selected.connect(self._look)
        theme.changed.connect(self.update)
        self._follow()

    def sizeHint(self) -> QSize:
        return QSize(800, HEIGHT)

    def minimumSizeHint(self) -> QSize:
        return QSize(240, HEIGHT)

    # -- what is shown --------------------------------------------------------------------------
    @property
    def _outcome(self) -> Outcome | None:
        return self._solving.figures

    @property
    def _case(self) -> int:
        return min(self._attention.case, len(self._outcome.cases) - 1) if self._outcome else 0

    def _look(self) -> None:
        self.update()

    def _changed(self, change: Change) -> None:
        """New figures come with the next outcome; names and what is gone follow at once."""
        if change.topology:
            self._follow()

    def _follow(self) -> None:
        outcome = self._outcome
        room = self.width() - 2 * MARGIN
        self.cut = cut(self._session.drawing, outcome, self._case, room) if outcome else Cut()
        self.walked = min(self.walked, len(self.cut.pieces) - 1)
        self.setAccessibleDescription(self.sentence())
        self.update()

    def resizeEvent(self, event) -> None:
        self._follow()

    def sentence(self) -> str:
        """`supply 89.57 kW = loads 87.93 + lost 1.64 (closes to 2·10⁻⁹)`."""
        outcome = self._outcome
        if outcome is None or not self.cut.total_kw:
            return ""
        balance, case = outcome.balance, self._case
        supply, infeed = float(balance.supply_kw[case]), float(balance.generation_kw[case])
        fed = [f"supply {_two(supply)}"] if supply >= 0 else []
        fed += [f"infeed {_two(infeed)}"] if infeed > 0 else []
        gone = [f"back to the supply {_two(-supply)}"] if supply < 0 else []
        gone += [f"loads {_two(float(balance.load_kw[case]))}", f"lost {_two(float(balance.loss_kw[case]))}"]
        closes = closure(float(balance.closure[case]))
        return f"{' + '.join(fed)} kW = {' + '.join(gone)} (closes to {closes})"

    def moved(self) -> str:
        """The change of the losses since the drag began."""
        outcome, before = self._outcome, self._solving.reference
        if outcome is None or before is None or self._case >= len(before.cases):
            return ""
        now, then = (float(o.balance.loss_kw[self._case]) for o in (outcome, before))
        moved = change(now, then, loss)
        return f"lost {moved}" if moved else ""

    def paintEvent(self, event: QPaintEvent) -> None:
        attention = self._attention
        lit = {attention.hover} if attention.hover else set()
        shown = Shown(
            cut=self.cut,
            sentence=self.sentence() or self._why_empty(),
            moved=self.moved(),
            lit=lit,
            selected=set(attention.selection),
            walked=self.cut.pieces[self.walked] if self.hasFocus() and self.walked >= 0 else None,
            stale=self._solving.stale,
            focused=self.hasFocus(),
        )
        paint_tape(QPainter(self), self.width(), shown, self._theme.palette)

    def _why_empty(self) -> str:
        if not self._session.drawing.elements:
            return "draw a supply and a load to see it"
        return "no figures: not solved" if self._solving.problem is not None else ""

    # -- hand and keys --------------------------------------------------------------------------
    def piece_at(self, point: QPointF) -> Piece | None:
        """The piece under a point."""
        if not BAR_TOP - 6 <= point.y() <= BAR_TOP + 34:
            return None
        x = point.x() - MARGIN
        return next((p for p in self.cut.pieces if p.left - 1 <= x <= p.left + max(p.width, 2) + 1), None)

    def rect_of(self, piece: Piece) -> QRectF:
        """Where a piece lies on the widget."""
        return QRectF(MARGIN + piece.left, BAR_TOP, piece.width, 28)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        piece = self.piece_at(event.position())
        self.setToolTip(plain_tip(self.words(piece)) if piece else "")
        self._attention.look_at(piece.ids[0] if piece and len(piece.ids) == 1 else "")
        self.setCursor(
            Qt.CursorShape.PointingHandCursor if piece and piece.ids else Qt.CursorShape.ArrowCursor
        )

    def leaveEvent(self, event: QEvent) -> None:
        self._attention.look_at("")

    def mousePressEvent(self, event: QMouseEvent) -> None:
        piece = self.piece_at(event.position())
        if event.button() == Qt.MouseButton.LeftButton and piece is not None and piece.ids:
            self.walked = self.cut.pieces.index(piece)
            self._attention.select(piece.ids)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        step = {Qt.Key.Key_Right: 1, Qt.Key.Key_Left: -1}.get(Qt.Key(event.key()))
        pieces = self.cut.pieces
        if step and pieces:
            self.walked = (self.walked + step) % len(pieces)
            piece = pieces[self.walked]
            self._attention.look_at(piece.ids[0] if len(piece.ids) == 1 else "")
            self.setAccessibleDescription(self.words(piece))
            self.update()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Space) and self.walked >= 0:
            self._attention.select(pieces[self.walked].ids)
        else:
            super().keyPressEvent(event)

    def focusOutEvent(self, event) -> None:
        super().focusOutEvent(event)
        self.update()

    def words(self, piece: Piece) -> str:
        """A piece in words."""
        what = {"copper": "copper loss", "iron": "iron loss", "lines": "line loss", "load": "load"}
        share = percent(100 * piece.kw / self.cut.total_kw, 2)
        size = power(piece.kw) if piece.what in ("load", "export") else loss(piece.kw)
        return f"{piece.name}: {what.get(piece.what, '')} {size}, {share} of all".replace(":  ", ": ")


def _two(kw: float) -> str:
    return plain(kw, 2)
