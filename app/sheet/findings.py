"""Every finding: what was judged, value, limit and whose it is, signed margin, case, verdict."""

import math

from app.sheet.head import unsolved_words, verdict_words
from app.sheet.nodes import VERDICT
from app.sheet.subject import PASSED, Subject
from app.sheet.table import Cell, Cells, Column, SheetTable, Style, table, text
from app.study.checking import NOISE
from app.study.outcome import Finding, Verdict

COLUMNS = (
    VERDICT,
    Column("check", "Check", style=Style.TEXT, width=14),
    Column("where", "Where", style=Style.LONG, width=20),
    Column("value", "Value", digits=1, near="limit"),
    Column("limit", "Limit", digits=1),
    Column("margin", "Margin", digits=2, near="0"),
    Column("unit", "Unit", style=Style.TEXT, width=7),
    Column("case", "Case", style=Style.TEXT, width=18),
    Column("whose", "Whose limit", style=Style.LONG, width=20),
    Column("sentence", "In words", style=Style.LONG, width=50),
)


def finding_tables(subject: Subject) -> list[SheetTable]:
    """All findings, as the study ranks them."""
    rows = {str(n): _row(subject, f) for n, f in enumerate(subject.outcome.findings)}
    note = (
        "One row for each element that fails or is near its limit, at its worst case; where none is, "
        "the element nearest to it. A negative margin fails, or exceeds what is advised."
        if subject.solved
        else unsolved_words(subject)
    )
    return [table("findings", "Findings", "Findings", COLUMNS, rows, note=note, held=0)]


def _row(subject: Subject, finding: Finding) -> Cells:
    told = verdict_words(finding.verdict)
    if finding.verdict is Verdict.HOLDS and finding.case:
        told = subject.held
    found = {
        "verdict": text(told),
        "check": text(finding.check),
        "where": text(", ".join(subject.tell(i) for i in finding.ids)),
        "unit": text(finding.unit),
        "case": text(finding.case),
        "whose": text(finding.whose),
        "sentence": text(finding.sentence),
    }
    if finding.value is not None:
        found["value"] = Cell(finding.value)
    if finding.value is None or finding.limit is None or finding.margin is None:
        return found
    found["limit"] = Cell(finding.limit)
    found["margin"] = Cell(finding.margin, _margin_formula(finding))
    if (finding.margin < 0) is (finding.verdict is Verdict.FAILS):  # advice may be passed without failing
        held = "holds" if finding.margin < 0 else told
        found["verdict"] = Cell(told, f'IF({{margin}}{PASSED},"FAIL","{held}")')
    return found


def _margin_formula(finding: Finding) -> str:
    """Value − limit for a lower limit, limit − value for an upper one, whichever the margin is."""
    value, limit = finding.value or 0.0, finding.limit or 0.0
    for formula, margin in (("{value}-{limit}", value - limit), ("{limit}-{value}", limit - value)):
        if math.isclose(margin, finding.margin or 0.0, rel_tol=1e-9, abs_tol=NOISE):
            return formula
    return ""
