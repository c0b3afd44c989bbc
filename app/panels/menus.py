"""The menus and what they do with files: open, save, export, leave."""

from collections.abc import Callable
from functools import partial
from pathlib import Path
from typing import Any

from PySide6.QtCore import QObject
from PySide6.QtGui import QAction, QActionGroup, QKeySequence
from PySide6.QtWidgets import QMenu

from app.model.drawing import Drawing
from app.model.file import FileError
from app.panels.dialogs import DRAWINGS, PICTURES, SHEETS, Dialogs, file_name

Do = Callable[[], Any]


class Menus(QObject):
    """Built once for a window, which offers its session, document, solving, view, theme and shelf."""

    def __init__(self, window: Any) -> None:
        super().__init__(window)
        self.window = window
        self.dialogs = Dialogs(window)
        self._file()
        self._edit()
        self._look()
        self._year()
        self._help()

    # -- building -------------------------------------------------------------------------------
    def _add(self, menu: QMenu, text: str, do: Do, keys: Any = None, tip: str = "") -> QAction:
        action = menu.addAction(text)
        action.triggered.connect(lambda _checked=False: do())
        if keys is not None:
            action.setShortcut(QKeySequence(keys))
        if tip:
            action.setStatusTip(tip)
            action.setToolTip(tip)
        return action

    def _file(self) -> None:
        menu, std = self.window.menuBar().addMenu("&File"), QKeySequence.StandardKey
        self._add(menu, "&New drawing", self.new, std.New)
        self._add(menu, "&Open…", self.open, std.Open)
        self.recent = menu.addMenu("Open &recent")
        self.recent.aboutToShow.connect(self._list_recent)
        menu.addSeparator()
        self._add(menu, "&Save", self.save, std.Save)
        self._add(menu, "Save &as…", self.save_as, "Ctrl+Shift+S")
        menu.addSeparator()
        self._add(menu, "&Hand over results sheet…", self.export_sheet, "Ctrl+E", "Workbook or tables")
        self._add(menu, "Save &picture…", self.export_picture, "Ctrl+Shift+E")
        menu.addSeparator()
        self._add(menu, "&Quit", self.window.close, std.Quit)

    def _edit(self) -> None:
        menu, view, std = self.window.menuBar().addMenu("&Edit"), self.window.view, QKeySequence.StandardKey
        history = self.window.session.history
        for action, key in (
            (history.createUndoAction(menu, "Undo"), std.Undo),
            (history.createRedoAction(menu, "Redo"), std.Redo),
        ):
            action.setShortcut(QKeySequence(key))
            menu.addAction(action)
        menu.addSeparator()
        self._add(menu, "Cu&t", view.cut_selection, std.Cut)
        self._add(menu, "&Copy", view.copy_selection, std.Copy)
        self._add(menu, "&Paste", view.paste, std.Paste)
        self._add(menu, "D&uplicate", view.duplicate_selection, "Ctrl+D")
        self._add(menu, "&Delete", view.delete_selection, std.Delete)
        menu.addSeparator()
        self._add(menu, "Select &all", view.select_all, std.SelectAll)
        self._add(menu, "&Rename", view.rename_selection, "F2")
        self._add(menu, "Turn &ends round", view.swap_selection)
        self._add(
            menu,
            "&Keep on shelf",
            self.keep_on_shelf,
            "Ctrl+K",
            "Keep the selected element as a part of yours",
        )

    def _look(self) -> None:
        menu, view, std = self.window.menuBar().addMenu("&View"), self.window.view, QKeySequence.StandardKey
        self._add(menu, "Zoom &in", view.zoom_in, std.ZoomIn)
        self._add(menu, "Zoom &out", view.zoom_out, std.ZoomOut)
        self._add(menu, "&Whole drawing", view.fit, "Ctrl+0")
        menu.addSeparator()
        theme = self.window.theme
        self._choice(
            menu,
            (("As the desktop", "desktop"), ("Light", "light"), ("Dark", "dark")),
            theme.choice,
            self._wear,
        )
        menu.addSeparator()
        self._choice(
            menu,
            (("Symbols after IEC 60617", "IEC"), ("Symbols after ANSI/IEEE 315", "ANSI")),
            theme.symbols,
            self._wear_symbols,
        )
        menu.addSeparator()
        for text, panel in (
            ("Voltage strip", self.window.strip),
            ("Loss tape", self.window.tape),
            ("Card", self.window.card),
        ):
            action = menu.addAction(text)
            action.setCheckable(True)
            action.setChecked(True)
            action.toggled.connect(panel.setVisible)

    def _choice(
        self, menu: QMenu, offers: tuple[tuple[str, str], ...], now: str, take: Callable[[str], None]
    ) -> None:
        group = QActionGroup(menu)
        for text, value in offers:
            action = menu.addAction(text)
            action.setCheckable(True)
            action.setChecked(value == now)
            action.triggered.connect(lambda _checked=False, v=value: take(v))
            group.addAction(action)

    def _year(self) -> None:
        menu, year = self.window.menuBar().addMenu("&Year"), self.window.year
        self._add(menu, "&Run the year", year.run_now, "F9", "Every hour of the profiles")
        self._add(menu, "&Show the year…", year.show_year, "Shift+F9")
        self._add(menu, "&Profiles…", year.show_profiles, "Ctrl+Shift+P", "Paste, open or invent them")

    def _help(self) -> None:
        menu = self.window.menuBar().addMenu("&Help")
        self._add(menu, "&Keys", self.show_keys, "F1")
        self._add(menu, "&About Farend", self.show_about)

    def show_keys(self) -> None:
        """The list of keys."""
        from app.panels.about import Keys  # what a menu opens is loaded when it is opened

        Keys(self.window).exec()

    def show_about(self) -> None:
        """The about box."""
        from app.panels.about import About

        About(self.window).exec()

    # -- looks ----------------------------------------------------------------------------------
    def _wear(self, choice: str) -> None:
        self.window.preferences.theme = choice
        self.window.theme.wear(choice=choice)

    def _wear_symbols(self, symbols: str) -> None:
        self.window.preferences.symbols = symbols
        self.window.theme.wear(symbols=symbols)

    # -- files ----------------------------------------------------------------------------------
    def _list_recent(self) -> None:
        self.recent.clear()
        for path in self.window.preferences.recent:
            self._add(self.recent, str(path).replace("&", "&&"), partial(self.open_if_free, Path(path)))
        self.recent.setEnabled(True)
        if not self.recent.actions():
            self.recent.addAction("Nothing opened yet").setEnabled(False)

    def may_leave(self) -> bool:
        """Ask about unsaved changes; False where the person stays."""
        document = self.window.document
        if not document.modified:
            return True
        answer = self.dialogs.keep_changes(document.path.name if document.path else "The new drawing")
        return answer == "discard" or (answer == "save" and self.save())

    def new(self) -> None:
        """Start an empty drawing."""
        if self.may_leave():
            self.window.document.start(Drawing())

    def open(self) -> None:
        """Ask for a drawing and open it."""
        path = self.window.document.path
        chosen = self.dialogs.file_to_open(path.parent if path else Path.home())
        if chosen is not None:
            self.open_if_free(chosen)

    def open_if_free(self, path: Path) -> None:
        """Open a drawing unless the person wants to stay with the changed one."""
        if self.may_leave():
            self.open_path(path)

    def open_path(self, path: Path) -> bool:
        """Open a drawing; a bad file is told in one sentence and the open drawing stays."""
        try:
            warning = self.window.document.load(path)
        except FileError as error:
            if not path.exists():
                self.window.preferences.forget(path)
            self.dialogs.tell(str(error))
            return False
        self.window.preferences.add_recent(path)
        if warning:
            self.dialogs.tell(f"{warning} If it is saved there meanwhile, saving here asks first.")
        return True

    def save(self) -> bool:
        """Save where the drawing came from, or ask."""
        if self.window.document.path is None:
            return self.save_as()
        return self._write(None)

    def save_as(self) -> bool:
        """Ask where, and save."""
        document = self.window.document
        title = self.window.session.drawing.project.title or "drawing"
        start = document.path or Path.home() / f"{file_name(title)}.farend"
        chosen = self.dialogs.file_to_write("Save drawing", start, DRAWINGS)
        return chosen is not None and self._write(chosen)

    def _write(self, path: Path | None) -> bool:
        document = self.window.document
        if (
            path is None
            and document.changed_on_disk()
            and not self.dialogs.agree(
                f"{document.path.name} was changed by somebody else since it was opened. Write over it?"
            )
        ):
            return False
        try:
            document.save() if path is None else document.save_as(path)
        except FileError as error:
            self.dialogs.tell(str(error))
            return False
        self.window.preferences.add_recent(document.path)
        return True

    def offer_recovery(self) -> bool:
        """After a crash: offer the copies that were kept. True where one was opened."""
        for copy in self.window.document.recoverable():
            answer = self.dialogs.recovery(copy.title)
            if answer == "open":
                self.window.document.recover(copy)
                return True
            if answer == "throw":
                self.window.document.forget(copy)
        return False

    # -- handing over ---------------------------------------------------------------------------
    def export_sheet(self) -> None:
        """Write the results sheet."""
        from app.sheet import write

        path = self._where("Hand over results sheet", ".xlsx", SHEETS)
        if path is not None:
            self.window.solving.settle()
            outcome = self.window.solving.problem or self.window.solving.outcome
            self._try(
                lambda: write(self.window.session.drawing, outcome, path),
                f"Results sheet written to {path.name}.",
            )

    def export_picture(self) -> None:
        """Write the diagram with its results."""
        from app.canvas.picture import picture

        path = self._where("Save picture", ".svg", PICTURES)
        if path is not None:
            window = self.window
            window.solving.settle()
            outcome = window.solving.problem or window.solving.outcome
            self._try(
                lambda: picture(
                    window.session.drawing,
                    outcome,
                    path,
                    window.theme.palette,
                    window.theme.symbols,
                    window.attention.case,
                ),
                f"Picture written to {path.name}.",
            )

    def _where(self, title: str, suffix: str, kinds: str) -> Path | None:
        document = self.window.document
        start = document.path or Path.home() / file_name(
            self.window.session.drawing.project.title or "drawing"
        )
        return self.dialogs.file_to_write(title, start.with_suffix(suffix), kinds)

    def _try(self, do: Do, done: str) -> None:
        try:
            do()
        except (OSError, ValueError) as error:
            self.dialogs.tell(str(error))
        else:
            self.window.findings.tell(done)

    def keep_on_shelf(self) -> None:
        """Keep the one selected element as a part of the user's own."""
        selection = self.window.attention.selection
        if len(selection) != 1:
            self.window.findings.tell("Select one element to keep it on the shelf.")
            return
        self.window.shelf.keep(next(iter(selection)))
