"""The sheet that is handed over: the outcome of a drawing as a workbook or as text files. Knows no Qt."""

from app.sheet.tables import tables
from app.sheet.writing import SheetError, write

__all__ = ["SheetError", "tables", "write"]
