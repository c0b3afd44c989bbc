"""The card at the right: one element's data and results, several at once, or the drawing as a whole."""

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QKeyEvent, QPixmap
from PySide6.QtWidgets import QFrame, QScrollArea, QVBoxLayout, QWidget

from app.canvas.symbols import symbol_pixmap
from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.solving import Solving
from app.model import edits
from app.model.drawing import Project
from app.model.fields import fields_of
from app.model.kinds import Transformer, kind_of
from app.panels.asked import Asked
from app.panels.card_head import SYMBOL_SIZE, CardHead
from app.panels.element_page import ElementPage
from app.panels.element_words import step_text, subject, where
from app.panels.now_table import NowTable
from app.panels.page import Page
from app.panels.project_page import ProjectPage
from app.panels.results import findings_about, rows, tap_words
from app.panels.special_rows import TapRow
from app.panels.style import play
from app.panels.summary import summary_rows
from app.panels.verdict_lines import VerdictLines
from app.panels.wire_rows import reach
from app.panels.wire_working import working
from app.panels.words import Rule, Sentence

WIDTH = 320
LOADING_TIP = "Loading is by current against rated current, of the winding nearer to it."


class Card(QScrollArea):
    """Follows selection, drawing and outcome; pages are made once a kind and refreshed in place."""

    profiles_wanted = Signal(str)  # the page of profiles, on this one
    left = Signal()  # Esc in a field that has nothing to give up: the board takes the keyboard back

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
        self._pages: dict[str, ElementPage] = {}
        self._ids: tuple[str, ...] = ()
        self._page: Page | None = None
        self._build()
        self._listen()
        self._turn()

    def _build(self) -> None:
        self.setWidgetResizable(True)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOn)  # nothing jumps sideways
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setFixedWidth(WIDTH)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setAccessibleName("Card")
        self.head = CardHead()
        self.project = ProjectPage(self._session, self._attention, self._theme)
        self.now = NowTable(self._theme)
        self.working = Sentence("quiet")
        self.lines = VerdictLines(self._theme)
        self._rules = (Rule(), Rule(), Rule())
        content = QWidget()
        play(content, "panel")
        self._down = QVBoxLayout(content)
        self._down.setContentsMargins(18, 14, 9, 14)
        self._down.setSpacing(10)
        for widget in (
            self.head,
            self.project,
            self._rules[0],
            self.now,
            self.working,
            self._rules[1],
            self.lines,
            self._rules[2],
        ):
            self._down.addWidget(widget)
        self._down.addStretch(1)
        self.project.hide()
        self.setWidget(content)
        play(self, "panel")

    def _listen(self) -> None:
        self._session.changed.connect(self._changed)
        self._session.replaced.connect(self._turn)
        self._solving.solved.connect(self._show_results)
        self._solving.went_stale.connect(self._show_results)
        self._attention.selected.connect(self._turn)
        self._attention.case_shown.connect(self.refresh)
        self._theme.changed.connect(self._redress)
        self.head.renamed.connect(self._rename)
        self.project.year.profiles_wanted.connect(self.profiles_wanted)

    def sizeHint(self) -> QSize:
        return QSize(WIDTH, 600)

    def minimumSizeHint(self) -> QSize:
        return QSize(WIDTH, 120)

    # -- what is shown --------------------------------------------------------------------------
    @property
    def ids(self) -> tuple[str, ...]:
        """The elements the card is about, in the order of the drawing."""
        chosen = self._attention.selection
        return tuple(i for i in self._session.drawing.elements if i in chosen)

    def _turn(self) -> None:
        """Show another selection: what is being typed is committed first."""
        if self._page is not None:
            self.head.name.commit()
            self._page.commit()
        self._ids = self.ids
        self.head.refuse("")
        if self.head.name.busy:
            self.head.name.give_up()
        page = self._page_for(self._ids)
        if page is not self._page:
            if self._page is not None:
                self._page.forget()
                self._show_page(self._page, False)
            self._page = page
            self._show_page(page, True)
        self.verticalScrollBar().setValue(0)
        self.refresh()

    def _show_page(self, page: Page, shown: bool) -> None:
        page.setVisible(shown)
        if isinstance(page, ElementPage):
            page.more.setVisible(shown)
            self._rules[2].setVisible(shown)
        elif shown:
            self._rules[2].hide()

    def _page_for(self, ids: tuple[str, ...]) -> Page:
        drawing = self._session.drawing
        kinds = {kind_of(drawing.elements[i]) for i in ids}
        if len(kinds) != 1:
            return self._empty if kinds else self.project
        kind = kinds.pop()
        if kind not in self._pages:
            page = ElementPage(kind, self._session, self._theme)
            page.profiles_wanted.connect(self.profiles_wanted)
            self._pages[kind] = page
            self._down.insertWidget(1, page)
            self._down.insertWidget(self._down.count() - 1, page.more)
            page.more.hide()
        return self._pages[kind]

    @property
    def _empty(self) -> Page:
        """The page of a selection of several kinds: no field is shared."""
        if not hasattr(self, "_several"):
            self._several = Page(self._theme)
            self._down.insertWidget(1, self._several)
        return self._several

    def refresh(self) -> None:
        """Show the values as they stand; the page is made anew only where the selection changed kind."""
        if self.ids != self._ids:
            self._turn()
            return
        self._show_fields()
        self._show_results()

    def _changed(self) -> None:
        """New results come with the next outcome."""
        if self.ids != self._ids or not self._solving.stale:
            self.refresh()
        else:
            self._show_fields()
            self._show_tap()

    def _show_fields(self) -> None:
        self._show_head()
        if isinstance(self._page, ElementPage):
            self._page.show_ids(self._ids)
        elif self._page is self.project:
            self.project.refresh()

    def _show_head(self) -> None:
        drawing, ids = self._session.drawing, self._ids
        if not ids:
            self.head.show_about(drawing.project.title, "New drawing", "drawing", None)
            self.head.name.setReadOnly(False)
        elif len(ids) == 1:
            element = drawing.elements[ids[0]]
            self.head.show_about(element.name, ids[0], where(drawing, ids[0]), self._symbol(ids[0]))
            self.head.name.setReadOnly(False)
        else:
            words = subject(drawing, ids)
            about = "fields set here are set on all of them" if self._pages else ""
            shared = isinstance(self._page, ElementPage)
            self.head.show_about(words, "", about if shared else "of several kinds", None)
            self.head.name.setReadOnly(True)

    def _symbol(self, id: str) -> QPixmap:
        kind = kind_of(self._session.drawing.elements[id])
        ratio = self.devicePixelRatioF()
        return symbol_pixmap(kind, self._theme.symbols, self._theme.palette, SYMBOL_SIZE, ratio)

    def _show_results(self) -> None:
        outcome, drawing = self._solving.outcome, self._session.drawing
        self._show_tap()
        if outcome is None:
            self.now.show_rows([], (), 0, self._solving.stale)
            self.working.say("")
            self.lines.show_findings([])
        else:
            case = min(self._attention.case, len(outcome.cases) - 1)
            asked = Asked(drawing, outcome, self._solving.reference, case)
            made = rows(asked, self._ids[0]) if len(self._ids) == 1 else summary_rows(asked, self._ids)
            self.now.show_rows(made, outcome.cases, case, self._solving.stale)
            one = drawing.elements.get(self._ids[0]) if len(self._ids) == 1 else None
            self.working.say(working(drawing, outcome, self._ids[0], case) if one is not None else "")
            self.now.setToolTip(LOADING_TIP if isinstance(one, Transformer) else "")
            told = self._solving.problem or outcome
            self.lines.show_findings(findings_about(told, self._ids) if self._ids else [])
        if isinstance(self._page, ElementPage) and self._ids:
            self._page.show_reach(*reach(drawing, outcome, self._ids[0]))
            self._page.show_ledger(() if outcome is None else outcome.assumptions)
        self.now.setVisible(bool(self.now.rows))
        self._rules[0].setVisible(bool(self.now.rows))
        self._rules[1].setVisible(not self.lines.isHidden())

    def _show_tap(self) -> None:
        row = self._page.rows.get("tap") if self._page is not None else None
        if not isinstance(row, TapRow) or not self._ids:
            return
        alone = len(self._ids) == 1 and isinstance(
            self._session.drawing.elements.get(self._ids[0]), Transformer
        )
        shown = self._session.drawing, self._solving.outcome
        row.say(tap_words(*shown, self._ids[0], self._attention.case) if alone else "")

    def _redress(self) -> None:
        self._show_head()
        for widget in self.findChildren(QWidget):
            widget.update()

    # -- what is asked for ----------------------------------------------------------------------
    def _rename(self, name: str) -> None:
        ids = self._ids
        if not ids:
            field = fields_of(Project)["title"]
            text = step_text(field, name.strip(), "the drawing")
            refusal = self._session.edit(text, lambda d: edits.set_project(d, title=name.strip()))
        else:
            text = f"Name of {ids[0]} to {name.strip()}" if name.strip() else f"Name of {ids[0]} cleared"
            refusal = self._session.edit(text, lambda d: edits.rename(d, ids[0], name))
        self.head.refuse(refusal)
        if not refusal:
            self._show_head()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.left.emit()
        else:
            super().keyPressEvent(event)

    def take_focus(self) -> None:
        """Put the focus into the first field, and the card into sight."""
        self.setVisible(True)
        first = next(iter(self._page.rows.values()), None) if self._page is not None else None
        (first.editor if first is not None else self.head.name).setFocus(Qt.FocusReason.TabFocusReason)

    def focus_field(self, id: str, field: str) -> None:
        """Select an element and put the focus into one of its fields."""
        self._attention.select((id,))
        row = self._page.point_at(field) if self._page is not None else None
        if row is not None:
            self.ensureWidgetVisible(row)
