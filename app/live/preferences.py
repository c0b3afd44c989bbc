"""What the person likes: kept between starts, in a file whose place can be given."""

from pathlib import Path

from PySide6.QtCore import QByteArray, QSettings, QStandardPaths

RECENT_FILES = 10
THEMES = ("desktop", "light", "dark")
SYMBOL_SETS = ("IEC", "ANSI")


class Preferences:
    """Theme, symbols, unit habit, recent files, window geometry and where the shelf is kept."""

    def __init__(self, path: Path | None = None) -> None:
        self._kept = QSettings(str(path or _usual("farend.ini")), QSettings.Format.IniFormat)

    @property
    def theme(self) -> str:
        """desktop, light or dark."""
        return self._choice("theme", THEMES)

    @theme.setter
    def theme(self, choice: str) -> None:
        self._keep("theme", choice)

    @property
    def symbols(self) -> str:
        """IEC or ANSI."""
        return self._choice("symbols", SYMBOL_SETS)

    @symbols.setter
    def symbols(self, choice: str) -> None:
        self._keep("symbols", choice)

    @property
    def geometry(self) -> bytes:
        """The window's place and size as Qt writes it; empty at the first start."""
        value = self._kept.value("geometry")
        return bytes(value.data()) if isinstance(value, QByteArray) else b""

    @geometry.setter
    def geometry(self, geometry: bytes) -> None:
        self._keep("geometry", QByteArray(geometry))

    @property
    def shelf_path(self) -> Path:
        """The file of the user's own parts."""
        value = self._kept.value("shelf_path")
        return Path(value) if isinstance(value, str) and value else _usual("shelf.json")

    @shelf_path.setter
    def shelf_path(self, path: Path) -> None:
        self._keep("shelf_path", str(path))

    @property
    def recent(self) -> list[Path]:
        """Drawings opened or saved lately, the newest first."""
        value = self._kept.value("recent")
        paths = [value] if isinstance(value, str) else value if isinstance(value, list) else []
        return [Path(p) for p in paths if isinstance(p, str) and p][:RECENT_FILES]

    def add_recent(self, path: Path) -> None:
        """Put a drawing at the head of the recent ones."""
        whole = path.absolute()
        self._keep(
            "recent", [str(p) for p in [whole, *(p for p in self.recent if p != whole)]][:RECENT_FILES]
        )

    def forget(self, path: Path) -> None:
        """Take a drawing that is gone off the recent ones."""
        self._keep("recent", [str(p) for p in self.recent if p != path.absolute()])

    def _choice(self, key: str, allowed: tuple[str, ...]) -> str:
        value = self._kept.value(key)
        return value if isinstance(value, str) and value in allowed else allowed[0]

    def _keep(self, key: str, value: object) -> None:
        self._kept.setValue(key, value)
        self._kept.sync()


def _usual(name: str) -> Path:
    place = QStandardPaths.StandardLocation.GenericConfigLocation
    return Path(QStandardPaths.writableLocation(place)) / "farend" / name
