"""The one style sheet of the window, light and dark, from the palette alone.

Widgets say what they are through the property `role`: see ROLES.
"""

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QPalette
from PySide6.QtWidgets import QWidget

from app.canvas.palette import Palette

ROLES = (
    "panel",  # a calm ground
    "sheet",  # the white ground of plots
    "rule",  # a quiet line
    "title",  # the name at the head of a panel
    "strong",  # a figure
    "quiet",  # labels, units
    "refusal",  # why an edit was refused
    "tapped",  # what a tap does
    "box",  # the white box of a field; `state` says refused, tap or nothing
    "link",  # a button without a box
    "tab",  # one of several pages to turn to
    "list",  # rows of findings
)


def mixed(one: QColor, other: QColor, share: float) -> QColor:
    """`share` of the one in the other."""
    rest = 1 - share
    return QColor.fromRgbF(
        one.redF() * share + other.redF() * rest,
        one.greenF() * share + other.greenF() * rest,
        one.blueF() * share + other.blueF() * rest,
    )


def play(widget: QWidget, role: str, state: str = "") -> None:
    """Give a widget its role, and restyle it where that changed."""
    if widget.property("role") == role and (widget.property("state") or "") == state:
        return
    widget.setProperty("role", role)
    widget.setProperty("state", state)
    restyle(widget)


def restyle(widget: QWidget) -> None:
    """Read the sheet again for a widget; one that was never shown reads it then."""
    if widget.testAttribute(Qt.WidgetAttribute.WA_WState_Polished):
        widget.style().unpolish(widget)
        widget.style().polish(widget)


def sheet(palette: Palette) -> str:
    """The style sheet of every widget of the window."""
    p = palette
    colours = {
        "PAPER": p.paper,
        "INK": p.ink,
        "SOFT": p.soft,
        "FAINT": p.faint,
        "PANEL": p.panel,
        "FIELD": p.field,
        "RAISED": p.raised,
        "FLOW": p.flow,
        "GOOD": p.good,
        "NEAR": p.near,
        "FAILED": p.failed,
        "TAP": p.tap,
        "HOVER": mixed(p.ink, p.panel, 0.06),
        "PRESSED": mixed(p.ink, p.panel, 0.12),
        "EDGE": mixed(p.faint, p.panel, 0.9),
        "CHOSEN": mixed(p.good, p.panel, 0.16),
        "WASH": mixed(p.flow, p.field, 0.30),
        "MUTED": mixed(p.soft, p.panel, 0.55),
    }
    text = _SHEET
    for name in sorted(colours, key=len, reverse=True):
        text = text.replace(f"@{name}", colours[name].name())
    return text


def qt_palette(palette: Palette) -> QPalette:
    """The same colours for what a style sheet does not reach."""
    p, made = palette, QPalette()
    role = QPalette.ColorRole
    for which, colour in (
        (role.Window, p.panel),
        (role.WindowText, p.ink),
        (role.Base, p.field),
        (role.AlternateBase, p.panel),
        (role.Text, p.ink),
        (role.Button, p.panel),
        (role.ButtonText, p.ink),
        (role.Highlight, p.flow),
        (role.HighlightedText, p.paper),
        (role.PlaceholderText, p.soft),
        (role.ToolTipBase, p.raised),
        (role.ToolTipText, p.ink),
        (role.Link, p.flow),
    ):
        made.setColor(which, colour)
    return made


_SHEET = """
QMainWindow, QDialog, QWidget#whole, *[role="panel"] { background: @PANEL; }
*[role="sheet"] { background: @FIELD; }
QWidget { color: @INK; }
QLabel { background: transparent; }
QMessageBox, QDialogButtonBox { dialogbuttonbox-buttons-have-icons: 0; }
*[role="rule"] { background: @FAINT; border: none; max-height: 1px; min-height: 1px; }
*[role="title"] { font-size: 12pt; font-weight: bold; }
*[role="strong"] { font-weight: bold; }
*[role="quiet"] { color: @SOFT; }
*[role="refusal"] { color: @FAILED; font-size: 8.5pt; }
*[role="tapped"] { color: @TAP; font-size: 8.5pt; }

QFrame[role="box"] { background: @FIELD; border: 1px solid @EDGE; border-radius: 6px; }
QFrame[role="box"]:hover { border-color: @MUTED; }
QFrame[role="box"][state="focus"] { border: 1px solid @FLOW; }
QFrame[role="box"][state="refused"] { border: 1px solid @FAILED; }
QFrame[role="box"][state="tap"] { border: 1px solid @TAP; }
QFrame[role="box"] QLineEdit, QFrame[role="box"] QPlainTextEdit {
    background: transparent; border: none; padding: 0; font-weight: bold;
    placeholder-text-color: @SOFT; selection-background-color: @FLOW; selection-color: @PAPER;
}
QFrame[role="box"] QLineEdit[blank="true"], QFrame[role="box"] QPlainTextEdit { font-weight: normal; }
QFrame[role="box"][state="tap"] QLineEdit { color: @TAP; }
QFrame[role="box"] QComboBox {
    background: transparent; border: none; padding: 0 2px 0 0; font-weight: bold; min-height: 18px;
}
QFrame[role="box"] QToolButton { border: none; background: transparent; color: @SOFT; padding: 0; }
QFrame[role="box"] QToolButton::menu-indicator { image: none; }
QFrame[role="box"] QToolButton:hover { color: @INK; background: @HOVER; border-radius: 4px; }
QFrame[role="box"] QToolButton:focus { color: @FLOW; }

QLineEdit, QPlainTextEdit {
    background: @FIELD; border: 1px solid @EDGE; border-radius: 6px; padding: 3px 7px;
    placeholder-text-color: @SOFT; selection-background-color: @FLOW; selection-color: @PAPER;
}
QLineEdit:focus, QPlainTextEdit:focus { border-color: @FLOW; }
QLineEdit[role="title"] {
    background: transparent; border: 1px solid transparent; padding: 0 3px; placeholder-text-color: @INK;
}
QLineEdit[role="title"]:hover { border-color: @EDGE; background: @FIELD; }
QLineEdit[role="title"]:focus { border-color: @FLOW; background: @FIELD; }
QLineEdit[role="title"][state="refused"] { border-color: @FAILED; }

QComboBox { background: @FIELD; border: 1px solid @EDGE; border-radius: 6px; padding: 3px 8px; }
QComboBox:focus { border-color: @FLOW; }
QComboBox::drop-down { border: none; width: 16px; }
QComboBox QAbstractItemView, QListView, QListWidget {
    background: @RAISED; border: 1px solid @EDGE; outline: none;
    selection-background-color: @WASH; selection-color: @INK;
}
QListWidget[role="list"], QListView[role="list"] { background: transparent; border: none; }
QListWidget::item { padding: 1px 4px; border-radius: 4px; }
QListWidget::item:hover { background: @HOVER; }
QListWidget::item:selected { background: @CHOSEN; color: @INK; }

QCheckBox { spacing: 6px; }

QPushButton {
    background: @FIELD; border: 1px solid @EDGE; border-radius: 6px; padding: 4px 14px;
}
QPushButton:hover { border-color: @MUTED; }
QPushButton:pressed { background: @PRESSED; }
QPushButton:focus { border-color: @FLOW; }
QPushButton:default { border-color: @INK; }
QPushButton:disabled, QCheckBox:disabled, QLineEdit:disabled { color: @MUTED; }
QPushButton[role="link"], QToolButton[role="link"] {
    background: transparent; border: 1px solid transparent; border-radius: 4px; padding: 2px 4px;
    color: @SOFT; text-align: left;
}
QPushButton[role="link"]:hover, QToolButton[role="link"]:hover { color: @INK; background: @HOVER; }
QPushButton[role="link"]:focus, QToolButton[role="link"]:focus { border-color: @FLOW; }
QPushButton[role="link"][state="near"] { color: @NEAR; font-weight: bold; }

QPushButton[role="tab"] {
    background: transparent; border: none; border-bottom: 2px solid transparent; border-radius: 0;
    padding: 4px 8px; color: @SOFT;
}
QPushButton[role="tab"]:hover { color: @INK; }
QPushButton[role="tab"]:checked { color: @INK; border-bottom-color: @INK; }
QPushButton[role="tab"]:focus { color: @FLOW; }

QTableView { background: @FIELD; border: 1px solid @EDGE; outline: none; }
QTableView::item { padding: 0 6px; border: none; }
QTableView::item:hover { background: @HOVER; }
QTableView::item:selected { background: @CHOSEN; }
QHeaderView { background: @PANEL; border: none; }
QHeaderView::section {
    background: @PANEL; color: @SOFT; border: none; border-bottom: 1px solid @EDGE; padding: 3px 6px;
}
QHeaderView::section:hover { color: @INK; }

QMenuBar { background: @PANEL; color: @INK; spacing: 2px; }
QMenuBar::item { background: transparent; padding: 4px 9px; border-radius: 4px; }
QMenuBar::item:selected { background: @HOVER; }
QMenu { background: @RAISED; border: 1px solid @EDGE; padding: 4px; }
QMenu::item { padding: 4px 26px 4px 22px; border-radius: 4px; background: transparent; }
QMenu::item:selected { background: @WASH; color: @INK; }
QMenu::item:disabled { color: @MUTED; }
QMenu::separator { height: 1px; background: @FAINT; margin: 4px 8px; }
QToolTip { background: @RAISED; color: @INK; border: 1px solid @MUTED; padding: 4px 6px; }

QScrollArea, QAbstractScrollArea { border: none; }
QScrollArea > QWidget > QWidget[role="panel"] { background: @PANEL; }
QScrollBar:vertical { background: transparent; width: 9px; margin: 0; }
QScrollBar:horizontal { background: transparent; height: 9px; margin: 0; }
QScrollBar::handle { background: @FAINT; border-radius: 3px; margin: 2px; min-height: 28px; min-width: 28px; }
QScrollBar::handle:hover { background: @MUTED; }
QScrollBar::add-line, QScrollBar::sub-line { width: 0; height: 0; }
QScrollBar::add-page, QScrollBar::sub-page { background: transparent; }
QSplitter::handle { background: @FAINT; }
QSplitter::handle:vertical { height: 1px; }
QSplitter::handle:horizontal { width: 1px; }
QSplitter::handle:hover { background: @FLOW; }
QStatusBar { background: @PANEL; color: @SOFT; }
"""
