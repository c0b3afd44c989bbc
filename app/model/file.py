"""The drawing's file: UTF-8 JSON, read whole or not at all, saved so that the old file outlives any crash."""

import contextlib
import os
import stat
import tempfile
from pathlib import Path

from app.model.drawing import Drawing
from app.model.errors import FileError
from app.model.raw import LARGEST, raw_object
from app.model.reading import drawing_from
from app.model.writing import drawing_text

__all__ = ["FileError", "decode", "encode", "load", "read_bytes", "save", "sentence", "write_bytes"]


def encode(drawing: Drawing) -> bytes:
    """The drawing as the bytes of its file."""
    return drawing_text(drawing).encode("utf-8")


def decode(data: bytes) -> Drawing:
    """The drawing in the bytes of a file; raises FileError."""
    try:
        return drawing_from(raw_object(data, "farend", "drawing"))
    except FileError as error:
        raise FileError(sentence("The file", str(error))) from None


def load(path: str | Path) -> Drawing:
    """The drawing in a file; raises FileError with the file's name in it."""
    path = Path(path)
    data = read_bytes(path)
    try:
        return drawing_from(raw_object(data, "farend", "drawing"))
    except FileError as error:
        raise FileError(sentence(path.name, str(error))) from None


def save(drawing: Drawing, path: str | Path) -> None:
    """Write the drawing; where that fails, FileError, and the old file is as it was."""
    write_bytes(Path(path), encode(drawing))


def sentence(name: str, words: str) -> str:
    """`x.farend is empty.` but `x.farend: T2 (transformer): …`."""
    verb = words.startswith(("is ", "has ", "says ", "holds ", "was "))
    return f"{name} {words}" if verb else f"{name}: {words}"


def read_bytes(path: Path) -> bytes:
    """All bytes of a file that is not too large; raises FileError."""
    try:
        size = path.stat().st_size
        if size > LARGEST:
            raise FileError(f"{path.name} has {size >> 20} MiB, allowed are at most {LARGEST >> 20} MiB.")
        if not stat.S_ISREG(path.stat().st_mode):
            raise FileError(f"{path.name} is no file, allowed is a file.")
        return path.read_bytes()
    except FileNotFoundError:
        raise FileError(f"{path.name} does not exist in {path.absolute().parent}.") from None
    except OSError as error:
        raise FileError(f"{path.name} cannot be read: {_reason(error)}.") from None
    except ValueError as error:
        if isinstance(error, FileError):
            raise
        raise FileError(f"{str(path)!r} is no name of a file.") from None


def write_bytes(path: Path, data: bytes) -> None:
    """Put bytes in place of a file in one step: beside it, down to the disk, then over it."""
    beside: str | None = None
    try:
        path = path.resolve()
        if path.exists() and not os.access(path, os.W_OK):
            raise PermissionError(13, "it is read-only")
        handle, beside = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name[:40]}.", suffix=".new")
        with os.fdopen(handle, "wb") as fresh:
            fresh.write(data)
            fresh.flush()
            os.fsync(fresh.fileno())
        os.chmod(beside, _mode(path))
        os.replace(beside, path)
        beside = None
        _sync_folder(path.parent)
    except (OSError, ValueError) as error:
        raise FileError(f"{path.name} cannot be saved: {_reason(error)}.") from None
    finally:
        if beside is not None:
            with contextlib.suppress(OSError):
                os.unlink(beside)


def _mode(path: Path) -> int:
    """The permissions of the file that is replaced, or what a new file would get."""
    if path.exists():
        return stat.S_IMODE(path.stat().st_mode)
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask


def _sync_folder(folder: Path) -> None:
    """So that the new name outlives a power cut; not every system can."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _reason(error: Exception) -> str:
    words = getattr(error, "strerror", None) or str(error)
    return words[:1].lower() + words[1:]
