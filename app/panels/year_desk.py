"""What belongs to the year of a window: the run, its page, the page of profiles."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QSize, Qt, Signal
from PySide6.QtWidgets import QDialog, QWidget

from app.canvas.theme import Theme
from app.live.attention import Attention
from app.live.session import Session
from app.live.year_run import YearRun

if TYPE_CHECKING:
    from app.panels.profiles_page import ProfilesPage
    from app.panels.year_page import YearPage

AIR = 40  # of a page to the edges of a small screen


class YearDesk(QObject):
    """`sought` asks for elements to be brought into sight on the board."""

    sought = Signal(object)

    def __init__(self, session: Session, attention: Attention, theme: Theme, window: QWidget) -> None:
        super().__init__(window)
        self._shared = session, attention, theme
        self._window = window
        self.run = YearRun(session, self)
        self._page: YearPage | None = None
        self._profiles: ProfilesPage | None = None

    @property
    def page(self) -> YearPage:
        """The page of results."""
        if self._page is None:
            from app.panels.year_page import YearPage  # loaded when it is first asked for

            session, attention, theme = self._shared
            self._page = YearPage(session, self.run, attention, theme, self._window)
            self._page.profiles_wanted.connect(self.show_profiles)
            self._page.sought.connect(self.sought)
        return self._page

    @property
    def profiles(self) -> ProfilesPage:
        """The page of profiles."""
        if self._profiles is None:
            from app.panels.profiles_page import ProfilesPage

            session, _attention, theme = self._shared
            self._profiles = ProfilesPage(session, theme, self._window)
        return self._profiles

    def show_year(self) -> None:
        """Bring the page of results up."""
        self._raise(self.page)

    def run_now(self) -> None:
        """Bring it up and run the year."""
        self.show_year()
        if not self.run.running:
            self.run.start()

    def show_profiles(self, name: str = "") -> None:
        """Bring the page of profiles up, on one of them."""
        self._raise(self.profiles)
        self.profiles.show_profile(name)

    def stop(self) -> None:
        """Nothing is solved after this."""
        self.run.stop()

    def _raise(self, page: QDialog) -> None:
        page.setAttribute(Qt.WidgetAttribute.WA_WindowPropagation)  # the colours of the window, dark as light
        if not page.isVisible():
            room = self._window.screen().availableSize()
            page.resize(page.sizeHint().boundedTo(room - QSize(AIR, AIR)))
            page.show()
        page.activateWindow()
