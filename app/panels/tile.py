"""One part on the shelf: its symbol, clicked to pick, dragged out to place."""

from PySide6.QtCore import QMimeData, QPoint, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QDrag, QIcon, QMouseEvent, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QAbstractButton, QApplication, QSizePolicy

from app.canvas.palette import font
from app.canvas.symbols import icon
from app.canvas.theme import Theme
from app.canvas.tools_clip import PART_MIME
from app.canvas.user_symbol import symbol_icon
from app.model.drawing import Part
from app.model.kinds import kind_of
from app.model.parts import encode_part
from app.panels.boxes import chevron
from app.panels.style import mixed

TILE = 44
PICTURE = 30


class Tile(QAbstractButton):
    """Checked while its part is in the hand."""

    dropped_svg = Signal(str)
    more_asked = Signal()  # what else there is of its kind

    def __init__(self, part: Part, theme: Theme, own: bool, parent=None) -> None:
        super().__init__(parent)
        self.part, self.own = part, own
        self.has_more = False  # a mark in its corner says that there is more of its kind
        self._theme = theme
        self._pressed_at: QPoint | None = None
        self.setCheckable(True)
        self.setAutoExclusive(False)
        self.setAcceptDrops(own)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAttribute(Qt.WidgetAttribute.WA_Hover)
        self.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.setAccessibleName(part.name)
        self.setText(part.name if own else "")
        theme.changed.connect(self.update)

    def sizeHint(self) -> QSize:
        return QSize(TILE + 4, TILE + (11 if self.own else -2))

    def picture(self) -> QIcon:
        """The user's own symbol, or that of the kind."""
        if self.part.symbol is not None:
            return symbol_icon(self.part.symbol, PICTURE)
        return icon(kind_of(self.part.element), self._theme.symbols, self._theme.palette, PICTURE)

    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        look = self._theme.palette
        room = QRectF(self.rect()).adjusted(2.5, 1.5, -2.5, -1.5)
        if self.isChecked():
            painter.setBrush(mixed(look.good, look.panel, 0.18))
            painter.setPen(QPen(look.good, 1))
            painter.drawRoundedRect(room, 7, 7)
        elif self.underMouse() or self.hasFocus():
            painter.setBrush(mixed(look.ink, look.panel, 0.06))
            painter.setPen(QPen(look.flow, 1) if self.hasFocus() else Qt.PenStyle.NoPen)
            painter.drawRoundedRect(room, 7, 7)
        left, top = (self.width() - PICTURE) // 2, 5
        self.picture().paint(painter, left, top, PICTURE, PICTURE)
        if self.has_more:
            chevron(painter, self.corner().center(), look.soft)
        if self.own:
            painter.setFont(font(7))
            painter.setPen(look.soft)
            elide = Qt.TextElideMode.ElideRight
            name = painter.fontMetrics().elidedText(self.part.name, elide, self.width() - 6)
            below = self.rect().adjusted(0, PICTURE + 5, 0, -3)
            painter.drawText(below, int(Qt.AlignmentFlag.AlignCenter), name)

    def corner(self) -> QRectF:
        """Where the mark stands that more can be had of its kind."""
        return QRectF(self.width() - 15, self.height() - 15, 13, 13)

    def contextMenuEvent(self, event) -> None:
        if self.has_more:
            self.more_asked.emit()
        else:
            super().contextMenuEvent(event)

    # -- dragging out ---------------------------------------------------------------------------
    def mousePressEvent(self, event: QMouseEvent) -> None:
        if self.has_more and self.corner().contains(event.position()):
            self.more_asked.emit()
            return
        self._pressed_at = event.position().toPoint()
        super().mousePressEvent(event)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        if self._pressed_at is None or not event.buttons() & Qt.MouseButton.LeftButton:
            return
        away = (event.position().toPoint() - self._pressed_at).manhattanLength()
        if away >= QApplication.startDragDistance():
            self._pressed_at = None
            self.setDown(False)
            self.drag().exec(Qt.DropAction.CopyAction)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        self._pressed_at = None
        super().mouseReleaseEvent(event)
        event.accept()  # of a press on the corner too, which the button knows nothing of

    def drag(self) -> QDrag:
        """The part on its way to the paper."""
        made = QDrag(self)
        made.setMimeData(mime(self.part))
        picture = self.picture().pixmap(QSize(PICTURE, PICTURE), self.devicePixelRatioF())
        made.setPixmap(picture)
        made.setHotSpot(QPoint(PICTURE // 2, PICTURE // 2))
        return made

    # -- an SVG dropped on it -------------------------------------------------------------------
    def dragEnterEvent(self, event) -> None:
        if svg_path(event.mimeData()):
            event.acceptProposedAction()

    def dragMoveEvent(self, event) -> None:
        if svg_path(event.mimeData()):
            event.acceptProposedAction()

    def dropEvent(self, event) -> None:
        path = svg_path(event.mimeData())
        if path:
            event.acceptProposedAction()
            self.dropped_svg.emit(path)


def mime(part: Part) -> QMimeData:
    """A part as dragged data."""
    data = QMimeData()
    data.setData(PART_MIME, encode_part(part))
    return data


def svg_path(data: QMimeData) -> str:
    """The one local SVG file in dragged data, or nothing."""
    paths = [url.toLocalFile() for url in data.urls() if url.isLocalFile()]
    return paths[0] if len(paths) == 1 and paths[0].lower().endswith(".svg") else ""
