"""The file behind the session: load, save, recovery copy, and who else has it open."""

from pathlib import Path

from PySide6.QtCore import QObject, QTimer, Signal

from app.live.locks import FileLock
from app.live.recovery import Copy, Recovery
from app.live.session import Session
from app.model.drawing import Drawing
from app.model.file import FileError, load, save

SUFFIX = ".farend"
RECOVERY_MS = 3000  # an edit is in the recovery copy no later than this


class Document(QObject):
    """Where the open drawing came from and whether it is kept.

    path: the file, or None for a drawing that was never saved
    """

    saved = Signal()

    def __init__(
        self, session: Session, parent: QObject | None = None, *, recovery_folder: Path | None = None
    ) -> None:
        super().__init__(parent)
        self._session = session
        self._recovery = Recovery(recovery_folder)
        self._lock: FileLock | None = None
        self._seen: bytes | None = None  # the file as we last read or wrote it
        self.path: Path | None = None
        self._soon = QTimer(self, singleShot=True, interval=RECOVERY_MS)
        self._soon.timeout.connect(self.keep_copy)
        session.history.indexChanged.connect(self._follow)  # by then the history knows if it is clean

    @property
    def modified(self) -> bool:
        """True where the drawing differs from its file."""
        return not self._session.history.isClean()

    def start(self, drawing: Drawing) -> None:
        """Begin a drawing that has no file yet."""
        self._turn_to(None, None)
        self._session.open(drawing)

    def load(self, path: Path) -> str | None:
        """Open a file; returns a warning where another window has it open.

        A file that cannot be read raises FileError and leaves the open drawing as it was.
        """
        path = path.absolute()
        drawing = load(path)
        ours = self._lock if path == self.path else None
        lock = ours if ours is not None and ours.sentence is None else FileLock(path)
        self._turn_to(path, lock)
        self._session.open(drawing)
        self._seen = _contents(path)
        return lock.sentence

    def save(self) -> None:
        """Write the drawing to its file; ask first where `changed_on_disk`. Raises FileError."""
        if self.path is None:
            raise FileError("The drawing has no file yet: choose a name for it first.")
        self._write(self.path)

    def save_as(self, path: Path) -> None:
        """Write the drawing to another file, which becomes its own. Raises FileError."""
        path = _with_suffix(path.absolute())
        if path == self.path:
            self._write(path)
            return
        lock = FileLock(path)
        if lock.sentence is not None:
            raise FileError(f"{lock.sentence} Choose another name.")
        try:
            self._write(path)
        except FileError:
            lock.release()
            raise
        self._hold(lock)
        self.path = path
        self.saved.emit()

    def changed_on_disk(self) -> bool:
        """True where somebody else has changed or removed the file since we read or wrote it."""
        return self.path is not None and _contents(self.path) != self._seen

    def close(self) -> None:
        """Leave in good order: no recovery copy and no lock stay behind."""
        self._turn_to(None, None)
        self._recovery.close()

    # recovery -----------------------------------------------------------------------------------

    def keep_copy(self) -> None:
        """Write the recovery copy now."""
        if self.modified:
            self._recovery.write(self._session.drawing, self.path)

    def recoverable(self) -> list[Copy]:
        """Copies that a program which ended without closing left behind, the newest first."""
        return self._recovery.left_behind()

    def recover(self, copy: Copy) -> str | None:
        """Open a copy as changed but not saved; returns a warning like `load`. Raises FileError."""
        drawing = load(copy.file)
        lock = FileLock(copy.path) if copy.path is not None else None
        self._turn_to(copy.path, lock)
        self._session.open(drawing)
        self._session.history.resetClean()
        self._seen = _contents(copy.path) if copy.path is not None else None
        self.keep_copy()
        self._recovery.forget(copy)
        return lock.sentence if lock is not None else None

    def forget(self, copy: Copy) -> None:
        """Throw a copy away."""
        self._recovery.forget(copy)

    # inside -------------------------------------------------------------------------------------

    def _follow(self, _index: int) -> None:
        if not self.modified:
            self._soon.stop()
            self._recovery.clear()
        elif not self._soon.isActive():
            self._soon.start()

    def _turn_to(self, path: Path | None, lock: FileLock | None) -> None:
        self._soon.stop()
        self._recovery.clear()
        self._hold(lock)
        self.path, self._seen = path, None

    def _hold(self, lock: FileLock | None) -> None:
        if self._lock is not None and self._lock is not lock:
            self._lock.release()
        self._lock = lock

    def _write(self, path: Path) -> None:
        save(self._session.drawing, path)
        self._seen = _contents(path)
        self._soon.stop()
        self._recovery.clear()
        self._session.history.setClean()
        if path == self.path:
            self.saved.emit()


def _with_suffix(path: Path) -> Path:
    return path if path.suffix.lower() == SUFFIX else path.with_name(path.name + SUFFIX)


def _contents(path: Path) -> bytes | None:
    try:
        return path.read_bytes()
    except OSError:
        return None
