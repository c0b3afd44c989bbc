"""A real spreadsheet program, run without a screen: every formula worked out anew."""

import math
import shutil
import subprocess
from collections.abc import Iterable
from pathlib import Path

import openpyxl
import pytest

ALWAYS = """<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema"
 xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load">
<prop oor:name="OOXMLRecalcMode" oor:op="fuse"><value>0</value></prop></item>
</oor:items>
"""
OFFICE = shutil.which("soffice")
needs_spreadsheet = pytest.mark.skipif(
    OFFICE is None,
    reason="soffice is not on the PATH: install libreoffice-calc-nogui to recalculate the sheet",
)


def recalculated(paths: Iterable[Path], into: Path) -> dict[str, Path]:
    """The workbooks, by file name, as the spreadsheet program saves them after working out every formula."""
    profile, out = into / "profile", into / "recalculated"
    (profile / "user").mkdir(parents=True, exist_ok=True)
    (profile / "user" / "registrymodifications.xcu").write_text(ALWAYS, encoding="utf-8")
    paths = list(paths)
    command = [
        str(OFFICE), f"-env:UserInstallation={profile.as_uri()}", "--headless", "--norestore",
        "--convert-to", "xlsx", "--outdir", str(out), *map(str, paths),
    ]  # fmt: skip
    subprocess.run(command, check=True, capture_output=True, timeout=300)
    return {path.name: out / path.name for path in paths}


def differences(path: Path, again: Path) -> tuple[int, list[str]]:
    """How many formula cells there are, and every one whose figure differs once worked out anew."""
    formulas = openpyxl.load_workbook(path)
    cached = openpyxl.load_workbook(path, data_only=True)
    fresh = openpyxl.load_workbook(again, data_only=True)
    count, found = 0, []
    for sheet in formulas:
        for row in sheet.iter_rows():
            for cell in row:
                if cell.data_type != "f":
                    continue
                count += 1
                ours = cached[sheet.title][cell.coordinate].value
                theirs = fresh[sheet.title][cell.coordinate].value
                if not _same(ours, theirs):
                    found.append(f"{sheet.title}!{cell.coordinate} {cell.value}: {ours!r}, anew {theirs!r}")
    return count, found


def _same(ours: object, theirs: object) -> bool:
    if isinstance(ours, int | float) and isinstance(theirs, int | float):
        return math.isclose(ours, theirs, rel_tol=1e-9, abs_tol=1e-9)
    return ours == theirs and ours is not None and not str(theirs).startswith("#")
