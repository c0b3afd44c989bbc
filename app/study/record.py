"""An outcome as plain data for other programs: ids as keys, units in the keys, None for no figure."""

import math
from dataclasses import fields
from typing import Any

import numpy as np
from msgspec.structs import asdict

from app.model.drawing import Drawing
from app.model.kinds import kind_of
from app.model.writing import body
from app.study.cautions import CAUTIONS
from app.study.outcome import Finding, Outcome, Table, Wired
from app.study.start_table import StartTable


def record(drawing: Drawing, outcome: Outcome, version: str) -> dict[str, Any]:
    """Everything an outcome says except how long it took, so that the same drawing gives the same record.

    drawing : the drawing, for names and kinds
    outcome : what solving it gave
    version : of the program

    Returns : dict for json; every figure that depends on the case is a list with one entry a case
    """
    share = outcome.largest_share
    return {
        "farend": version,
        "project": drawing.project.title,
        "revision": drawing.project.revision,
        "frequency_hz": drawing.frequency_hz,
        "status": outcome.status.name.lower(),
        "sentence": outcome.sentence,
        "largest_share_percent": None if share is None else plain_value(share * 100),
        "to_blame": outcome.to_blame,
        "cases": list(outcome.cases),
        "case_status": [status.name.lower() for status in outcome.case_status],
        "loading_cases": [body(case) for case in drawing.cases],
        "balance": {f.name: plain_value(getattr(outcome.balance, f.name)) for f in fields(outcome.balance)},
        "nodes": table_record(drawing, outcome.nodes),
        "branches": table_record(drawing, outcome.branches),
        "attachments": table_record(drawing, outcome.attachments),
        **({} if outcome.starts is None else {"starts": _starts(drawing, outcome.starts)}),
        **({} if outcome.wires is None else _wires(drawing, outcome.wires)),
        **({} if outcome.faults is None else {"faults": table_record(drawing, outcome.faults)}),
        **({"fault_basis": dict(outcome.fault_basis)} if outcome.fault_basis else {}),
        "findings": [finding_record(f) for f in outcome.findings],
        "assumptions": [{k: plain_value(v) for k, v in asdict(a).items()} for a in outcome.assumptions],
        "fed_by": dict(outcome.upstream),
        "cautions": list(CAUTIONS),
    }


def table_record(drawing: Drawing, table: Table[Any]) -> dict[str, dict[str, Any]]:
    """A table by id, every row with its name and kind.

    drawing : the drawing
    table : columns (row,) or (row, case)

    Returns : id to column to figure, None where there is none
    """
    columns = {name: column.tolist() for name, column in table.columns.items()}
    found = {}
    for row, id in enumerate(table.ids):
        element = drawing.elements[id]
        told: dict[str, Any] = {"name": element.name, "kind": kind_of(element)}
        for name, column in columns.items():
            told[name] = plain_value(column[row])
        found[id] = told
    return found


def _wires(drawing: Drawing, wired: Wired) -> dict[str, dict[str, dict[str, Any]]]:
    """Volts and amperes conductor by conductor, under keys of their own."""
    return {
        "node_wires": table_record(drawing, wired.nodes),
        "branch_wires": table_record(drawing, wired.branches),
        "attachment_wires": table_record(drawing, wired.attachments),
    }


def _starts(drawing: Drawing, table: StartTable) -> dict[str, dict[str, Any]]:
    """Motor starts, with the board and the supply that are judged."""
    told = table_record(drawing, table)
    for id, board, supply in zip(table.ids, table.boards, table.supplies, strict=True):
        told[id] |= {"board": board, "supply": supply}
    return told


def finding_record(finding: Finding) -> dict[str, Any]:
    """A finding as plain data.

    finding : any

    Returns : field to value
    """
    told = asdict(finding)
    told["verdict"] = finding.verdict.value
    told["by_case"] = [verdict.value for verdict in finding.by_case]
    return {name: plain_value(value) for name, value in told.items()}


def plain_value(value: Any) -> Any:
    """What json can hold: lists for arrays, None for what is not finite.

    value : a figure, text or any nesting of lists of them

    Returns : the same as plain data
    """
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, np.ndarray):
        return plain_value(value.tolist())
    if isinstance(value, list | tuple):
        return [plain_value(v) for v in value]
    return value
