"""An outcome as plain data for other programs: ids as keys, units in the keys, None for no figure."""

import math
from dataclasses import asdict, fields
from typing import Any

import numpy as np

from app.model.drawing import Drawing
from app.model.kinds import kind_of
from app.study.cautions import CAUTIONS
from app.study.outcome import Outcome, Table, Wired
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
        "largest_share_percent": None if share is None else _plain(share * 100),
        "to_blame": outcome.to_blame,
        "cases": list(outcome.cases),
        "balance": {f.name: _plain(getattr(outcome.balance, f.name)) for f in fields(outcome.balance)},
        "nodes": _rows(drawing, outcome.nodes),
        "branches": _rows(drawing, outcome.branches),
        "attachments": _rows(drawing, outcome.attachments),
        **({} if outcome.starts is None else {"starts": _starts(drawing, outcome.starts)}),
        **({} if outcome.wires is None else _wires(drawing, outcome.wires)),
        **({} if outcome.faults is None else {"faults": _rows(drawing, outcome.faults)}),
        "findings": [{k: _plain(v) for k, v in _finding(f).items()} for f in outcome.findings],
        "assumptions": [{k: _plain(v) for k, v in asdict(a).items()} for a in outcome.assumptions],
        "fed_by": dict(outcome.upstream),
        "cautions": list(CAUTIONS),
    }


def _rows(drawing: Drawing, table: Table[Any]) -> dict[str, dict[str, Any]]:
    columns = {name: column.tolist() for name, column in table.columns.items()}
    found = {}
    for row, id in enumerate(table.ids):
        element = drawing.elements[id]
        told: dict[str, Any] = {"name": element.name, "kind": kind_of(element)}
        for name, column in columns.items():
            told[name] = _plain(column[row])
        found[id] = told
    return found


def _wires(drawing: Drawing, wired: Wired) -> dict[str, dict[str, dict[str, Any]]]:
    """Volts and amperes conductor by conductor, under keys of their own."""
    return {
        "node_wires": _rows(drawing, wired.nodes),
        "branch_wires": _rows(drawing, wired.branches),
        "attachment_wires": _rows(drawing, wired.attachments),
    }


def _starts(drawing: Drawing, table: StartTable) -> dict[str, dict[str, Any]]:
    """Motor starts, with the board and the supply that are judged."""
    told = _rows(drawing, table)
    for id, board, supply in zip(table.ids, table.boards, table.supplies, strict=True):
        told[id] |= {"board": board, "supply": supply}
    return told


def _finding(finding: Any) -> dict[str, Any]:
    told = {f.name: getattr(finding, f.name) for f in fields(finding)}
    told["verdict"] = finding.verdict.value
    told["by_case"] = [verdict.value for verdict in finding.by_case]
    return told


def _plain(value: Any) -> Any:
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, np.ndarray):
        return _plain(value.tolist())
    if isinstance(value, list | tuple):
        return [_plain(v) for v in value]
    return value
