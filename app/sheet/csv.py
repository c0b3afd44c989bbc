"""The sheet as text files, one table a file, so that each loads as one table.

UTF-8 with a byte order mark (spreadsheet programs then read °, Ω and every name rightly), commas, lines
ended by CR LF, quoted as RFC 4180 says. Numbers stand unrounded with a point. Formulas stand as the figures
they yield. A text that a spreadsheet program would take for a formula (it begins, blanks aside, with
`=`, `+`, `-`, `@`, their full-width twins, a tab or a line break) gets an apostrophe in front.
"""

import csv
import io
from collections.abc import Iterable
from pathlib import Path

from app.sheet.safe import shown
from app.sheet.table import SheetTable, Value

TRIGGERS = tuple("=+-@\t\r\n\uff1d\uff0b\uff0d\uff20")
TOGETHER = ("Head", "Basis", "Cautions")  # tabs that stand in OUT.csv itself
LEAVE_OUT = ("key",)
BESIDE = (
    "busbars", "cables", "transformers", "loads", "supplies", "switches", "faults", "circuit_ends",
    "devices", "balance", "losses", "findings",
    "regulators", "motors", "starts", "spacing",
    "year", "year_basis", "year_branches", "year_nodes", "year_attachments",
    "cable_list", "orders", "settings", "open_points", "laterals", "allocation",
)  # fmt: skip


def files(tables: Iterable[SheetTable], path: Path) -> dict[Path, bytes]:
    """The content of every file; `path` itself comes last, as it names the others."""
    apart: dict[Path, bytes] = {}
    together: list[list[Value]] = [["Section", "Item", "Value", "Unit", "More"]]
    for t in tables:
        if t.key in LEAVE_OUT:
            continue
        if t.tab in TOGETHER:
            together += _flat(t)
        else:
            beside = _beside(path, t.key)
            apart[beside] = _encode(
                [[c.title for c in t.columns], *([c.value for c in r.cells] for r in t.rows)]
            )
            together.append(["Files", t.title, beside.name, "", ""])
    return {**apart, path: _encode(together)}


def _beside(path: Path, key: str) -> Path:
    return path.with_name(f"{path.stem}-{key.replace('_', '-')}{path.suffix}")


def outdated(path: Path, written: Iterable[Path]) -> list[Path]:
    """Files of an earlier sheet of this name that this one no longer has: a table left over would mislead."""
    ours = [_beside(path, key + part) for key in BESIDE for part in ("", "_results", "_worst")]
    return [p for p in ours if p not in set(written)]


def _flat(t: SheetTable) -> list[list[Value]]:
    """A table of the head or basis in the five columns of the common file."""
    lines = []
    for row in t.rows:
        cells = {c.key: cell.value for c, cell in zip(t.columns, row.cells, strict=True)}
        item, value, unit = cells.pop("item"), cells.pop("value", None), cells.pop("unit", None)
        heads = {c.key: c.title for c in t.columns}
        more = "; ".join(_said(heads[k], v) for k, v in cells.items() if v not in (None, ""))
        lines.append([t.title if t.key != "head" else "Head", item, value, unit, more])
    return lines


def _said(head: str, value: Value) -> str:
    return f"{head}: {value!r}" if isinstance(value, float) else f"{head}: {value}"


def _encode(lines: Iterable[Iterable[Value]]) -> bytes:
    out = io.StringIO(newline="")
    writer = csv.writer(out, lineterminator="\r\n")
    for line in lines:
        writer.writerow([_cell(v) for v in line])
    return out.getvalue().encode("utf-8-sig")


def _cell(value: Value) -> str | int | float:
    if value is None:
        return ""
    if not isinstance(value, str):
        return value
    value = shown(value)
    bare = value.lstrip(" \u00a0\ufeff\u200b")
    return "'" + value if bare.startswith(TRIGGERS) else value
