"""A sheet written as a workbook and read back."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from app.model.drawing import Drawing
from app.sheet import write
from app.study import run


@pytest.fixture
def workbook(tmp_path: Path) -> Callable[..., Any]:
    def read(drawing: Drawing, *, figures: bool = True) -> Any:
        path = tmp_path / "sheet.xlsx"
        write(drawing, run(drawing), path)
        return openpyxl.load_workbook(path, data_only=figures)

    return read
