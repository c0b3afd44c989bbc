"""Writing the sheet: the kind by its suffix, and the old file left alone until the new one is whole."""

import os
import tempfile
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path

from app.model.drawing import Drawing
from app.sheet import csv
from app.sheet.tables import tables
from app.study.outcome import Outcome

SUFFIXES = (".xlsx", ".csv")


class SheetError(ValueError):
    """Why the sheet was not written, as one sentence."""


def write(drawing: Drawing, outcome: Outcome, path: Path | str) -> tuple[Path, ...]:
    """Write the sheet; the files written. `OUT.xlsx` is a workbook. `OUT.csv` holds head, basis and
    cautions, and each further table stands beside it in a file such as `OUT-busbars.csv`; tables of an
    earlier sheet of that name go."""
    path = Path(path)
    kind = path.suffix.lower()
    if kind not in SUFFIXES:
        named = f"ends in {path.suffix}" if path.suffix else "has no suffix"
        raise SheetError(f"Sheet not written: {path.name} {named}; allowed is .xlsx or .csv.")
    made = tables(drawing, outcome)
    if kind == ".xlsx":
        from app.sheet import xlsx  # the workbook writer is loaded only for a workbook

        files: dict[Path, Callable[[Path], None]] = {path: lambda p: xlsx.save(made, drawing, p)}
    else:
        files = {p: _saver(content) for p, content in csv.files(made, path).items()}
    try:
        _replace_all(files)
        for left in csv.outdated(path, files) if kind == ".csv" else ():
            left.unlink(missing_ok=True)
    except OSError as error:
        raise SheetError(_sentence(path, error)) from error
    return tuple(files)


def _saver(content: bytes) -> Callable[[Path], None]:
    return lambda path: _ignore(path.write_bytes(content))


def _ignore(count: int) -> None:
    """Takes the count of bytes that nobody asks for."""


def _replace_all(files: dict[Path, Callable[[Path], None]]) -> None:
    """Every file whole beside its place first, then all put in place."""
    waiting: dict[Path, Path] = {}
    try:
        for path, save in files.items():
            if path.is_dir():
                raise IsADirectoryError(path)
            handle, name = tempfile.mkstemp(prefix=f".{path.stem[:40]}.", suffix=path.suffix, dir=path.parent)
            os.close(handle)
            waiting[path] = Path(name)
            save(waiting[path])
            _as_others(waiting[path])
        for path, ready in waiting.items():
            os.replace(ready, path)
    finally:
        for ready in waiting.values():
            with suppress(OSError):
                ready.unlink(missing_ok=True)


def _as_others(path: Path) -> None:
    """Rights as any new file would have; a file made for waiting is its owner's alone."""
    mask = os.umask(0)
    os.umask(mask)
    path.chmod(0o666 & ~mask)


def _sentence(path: Path, error: OSError) -> str:
    where = f"Sheet not written to {path}"
    if isinstance(error, FileNotFoundError):
        return f"{where}: the folder {path.parent} does not exist."
    if isinstance(error, IsADirectoryError):
        return f"{where}: that is a folder; name a file that ends in .xlsx or .csv."
    if isinstance(error, NotADirectoryError):
        return f"{where}: {path.parent} is not a folder."
    if isinstance(error, PermissionError):
        return f"{where}: not permitted. Is it open in another program, or the folder read-only?"
    return f"{where}: {error.strerror or error}."
