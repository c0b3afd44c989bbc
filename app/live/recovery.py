"""Recovery copies: what was on the board when a program ended without closing."""

import json
from pathlib import Path
from typing import Any
from uuid import uuid4

from msgspec import Struct
from PySide6.QtCore import QLockFile, QStandardPaths

from app.model.drawing import Drawing
from app.model.file import FileError, save


class Copy(Struct, frozen=True):
    """A copy left behind. path: the drawing's own file, or None where it had none."""

    file: Path
    title: str
    path: Path | None


class Recovery:
    """One copy for each open window, guarded by a lock that dies with the program."""

    def __init__(self, folder: Path | None = None) -> None:
        self._folder = folder or _usual_folder()
        self._file = self._folder / f"{uuid4().hex}.farend"
        self._lock: QLockFile | None = None
        self._found: dict[Path, QLockFile] = {}  # held, so that no other window offers the same copy

    def write(self, drawing: Drawing, path: Path | None) -> None:
        """Keep a copy. Where the folder cannot be written the work goes on without one."""
        try:
            self._folder.mkdir(parents=True, exist_ok=True)
            if self._lock is None:
                self._lock = _taken(self._file)
            title = path.name if path else drawing.project.title or "a drawing that was never saved"
            about = {"title": title, "path": str(path) if path else None}
            _about(self._file).write_text(json.dumps(about), encoding="utf-8")
            save(drawing, self._file)
        except (OSError, FileError):
            self.clear()

    def clear(self) -> None:
        """There is nothing to recover any more."""
        _remove(self._file)
        if self._lock is not None:
            self._lock.unlock()
            self._lock = None

    def left_behind(self) -> list[Copy]:
        """Copies whose program is gone, the newest first."""
        for file in self._folder.glob("*.farend"):
            if file != self._file and file not in self._found:
                lock = _taken(file)
                if lock is not None:
                    self._found[file] = lock
        files = [f for f in self._found if f.exists()]
        return [_read(f) for f in sorted(files, key=lambda f: f.stat().st_mtime, reverse=True)]

    def forget(self, copy: Copy) -> None:
        """Remove a copy left behind."""
        _remove(copy.file)
        lock = self._found.pop(copy.file, None)
        if lock is not None:
            lock.unlock()

    def close(self) -> None:
        """Remove our copy; what was found and not answered stays for the next start."""
        self.clear()
        for lock in self._found.values():
            lock.unlock()
        self._found.clear()


def _usual_folder() -> Path:
    place = QStandardPaths.StandardLocation.GenericStateLocation
    return Path(QStandardPaths.writableLocation(place)) / "farend" / "recovery"


def _about(file: Path) -> Path:
    return file.with_suffix(".json")


def _taken(file: Path) -> QLockFile | None:
    lock = QLockFile(str(file.with_suffix(".lock")))
    lock.setStaleLockTime(0)
    return lock if lock.tryLock(0) else None


def _remove(file: Path) -> None:
    for one in (file, _about(file)):
        try:
            one.unlink(missing_ok=True)
        except OSError:
            pass  # a folder that turned read-only keeps its copy; it is offered again, not lost


def _read(file: Path) -> Copy:
    try:
        about: Any = json.loads(_about(file).read_text(encoding="utf-8"))
        path = Path(about["path"]) if about["path"] else None
        return Copy(file, str(about["title"]), path)
    except (OSError, ValueError, KeyError, TypeError):
        return Copy(file, file.name, None)
