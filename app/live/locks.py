"""A lock beside a file, so that a second window on the same file is noticed; a dead one is recognised."""

from pathlib import Path

from PySide6.QtCore import QLockFile


def lock_path(path: Path) -> Path:
    """Where the lock of a file lies: `.name.lock` beside it."""
    return path.with_name(f".{path.name}.lock")


class FileLock:
    """Tries to take the lock of a file.

    sentence: who holds it, for people, or None where it is ours (or no lock can be kept there at all)
    """

    def __init__(self, path: Path) -> None:
        self._lock = QLockFile(str(lock_path(path)))
        self._lock.setStaleLockTime(0)  # a live holder never goes stale, a dead one does at once
        self.sentence: str | None = None
        if not self._lock.tryLock(0) and self._lock.error() == QLockFile.LockError.LockFailedError:
            process, host, _ = self._lock.getLockInfo()
            where = f"process {process} on {host}" if process else "another process"
            self.sentence = f"{path.name} is already open in another window ({where})."

    def release(self) -> None:
        """Give it up."""
        if self._lock.isLocked():
            self._lock.unlock()
