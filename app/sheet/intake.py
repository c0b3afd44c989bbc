"""What each supply holds from case to case, its fault levels, and who says so."""

import math

from app.model.drawing import label
from app.model.kinds import Supply
from app.sheet.attachments import NODE
from app.sheet.subject import IDENTITY, Subject
from app.sheet.table import Cell, Cells, Column, SheetTable, Style, given, table, text

KEY = "intake"
HELD = {"unit": "% of Un", "digits": 1, "width": 9}
IN_CASE = {"head": "in case", "style": Style.TEXT, "width": 14}
COLUMNS = (
    *IDENTITY, NODE,
    Column("un", "Un", "V", digits=0, width=8),
    Column("low", "Held, lowest", **HELD),  # type: ignore[arg-type]
    Column("low_case", **IN_CASE),  # type: ignore[arg-type]
    Column("high", "Held, highest", **HELD),  # type: ignore[arg-type]
    Column("high_case", **IN_CASE),  # type: ignore[arg-type]
    Column("most", "Fault level, highest", "MVA", digits=1, width=10),
    Column("most_ka", "so", "kA", digits=2, width=8),
    Column("least", "Fault level, least", "MVA", digits=1, width=10),
    Column("least_ka", "so", "kA", digits=2, width=8),
    Column("xr", "X/R", digits=2, width=7),
    Column("z0", "Z0/Z1", digits=2, width=10),
    Column("said", "Stated by", style=Style.LONG, width=26),
)  # fmt: skip
NOTE = (
    "kA = MVA / (√3·Un), of two or split wires MVA / Un. Faults see the highest and the least level, motor "
    "starts the least; a supply without one is stiff to a start, and no faults are worked out behind it."
)


def intake_tables(subject: Subject) -> list[SheetTable]:
    """Every supply."""
    supplies = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Supply)}
    rows = {id: _supply(subject, id, supply) for id, supply in supplies.items()}
    title = "Supplies: volts held, fault levels"
    return [table(KEY, "Supplies", title, COLUMNS, rows, note=NOTE)] if rows else []


def _supply(subject: Subject, id: str, supply: Supply) -> Cells:
    all_cases = subject.drawing.cases
    cases = [all_cases[c] for c in subject.outcome.solved_cases] or all_cases
    held = [case.supply_percent * supply.held_percent / 100 for case in cases]
    low, high = held.index(min(held)), held.index(max(held))
    found = subject.identity(id) | {
        "node": text(label(subject.drawing, supply.node)),
        "un": subject.value(id, "nominal_v"),
        "low": Cell(held[low]),
        "low_case": text(cases[low].name),
        "high": Cell(held[high]),
        "high_case": text(cases[high].name),
        "said": given(supply.note) if supply.note else text("nobody named: ask for it in writing"),
    }
    for name, field in (("most", "fault_level_max_mva"), ("least", "fault_level_min_mva")):
        level = subject.value(id, field)
        if isinstance(level.value, float):
            wide, root = (math.sqrt(3), "SQRT(3)*") if supply.wires == "three-phase" else (1.0, "")
            formula = f"{{{name}}}*1000/({root}{{un}})"
            found |= {
                name: level,
                f"{name}_ka": Cell(level.value * 1e3 / (wide * supply.nominal_v), formula),
            }
        else:
            found[name] = text("not stated")
    if isinstance(found["most"].value, float):
        ratio = subject.value(id, "z0_ratio")
        found |= {
            "xr": subject.value(id, "xr"),
            "z0": ratio if ratio.value is not None else text("unearthed"),
        }
    return found
