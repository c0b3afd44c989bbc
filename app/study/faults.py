"""Prospective fault currents at every node: what boards must bear, and what devices are left to trip on.

They hang on impedances and not on loads or taps, so the last answer is kept and a step of a tap drag costs
nothing. They have no loading case.
"""

from collections.abc import Mapping
from dataclasses import dataclass

from msgspec.structs import replace

from app.model.drawing import Drawing, Limits
from app.model.kinds import Branch, Element, Line, Node, Supply, Transformer
from app.study.fault_basis import fault_basis
from app.study.fault_feeders import is_marked
from app.study.fault_findings import fault_findings, unstated
from app.study.fault_rows import fault_rows, is_stated
from app.study.fault_table import fault_table
from app.study.graph import Layout
from app.study.layout import lay_out
from app.study.outcome import Assumption, FaultState, Finding, Table, Verdict
from app.study.structure import structure_findings
from app.study.zones import Zones, zones_of


@dataclass(frozen=True)
class Faults:
    """Fault currents of a drawing.

    nodes : Table of FaultState by node id; nan where nothing is worked out
    findings : boards and devices judged; a NOTE where any wants it and it could not be
    assumptions : what only fault currents need and was not given
    worked_out : whether any node has figures
    basis : items and the sentences that say how it was worked out
    """

    nodes: Table[FaultState]
    findings: tuple[Finding, ...]
    assumptions: tuple[Assumption, ...]
    worked_out: bool
    basis: tuple[tuple[str, str], ...] = ()


NO_FAULTS = Faults(Table(FaultState, (), {}, {}), (), (), False)
Bearing = dict[str, Element]
_last: tuple[Bearing, Limits, float, Faults] | None = None


def faults(drawing: Drawing) -> Faults:
    """Fault currents at every node of a drawing.

    drawing : the drawing; its values are taken as checked by the model

    Returns : Faults; figures only where nothing bars a solution and supplies state a fault level
    Source : IEC 60909-0:2016 (from memory)
    """
    layout = lay_out(drawing)
    zones = zones_of(drawing, layout)
    found = structure_findings(drawing, layout, zones)
    barred = not layout.supplies or any(f.verdict is Verdict.BLOCKS for f in found)
    return faults_of(drawing, layout, zones, barred)


def faults_of(drawing: Drawing, layout: Layout, zones: Zones, barred: bool) -> Faults:
    """The same where the graph is known already.

    drawing : the drawing
    layout : its graph
    zones : its voltage levels
    barred : something bars a solution

    Returns : Faults
    """
    global _last
    if barred or not any(isinstance(s, Supply) and is_stated(s) for s in layout.attachments):
        told = unstated(drawing, layout, barred) if asked_for(drawing) else ()
        return Faults(fault_table(drawing, layout, zones, None), told, (), False)
    bearing = _bearing(drawing)
    last = _last
    if last is not None and last[1:3] == (drawing.limits, drawing.frequency_hz) and _same(last[0], bearing):
        return last[3]
    rows = fault_rows(drawing, layout, zones)
    table = fault_table(drawing, layout, zones, rows)
    worked_out = bool(rows.known.any())
    findings = fault_findings(drawing, layout, table) if worked_out or asked_for(drawing) else ()
    basis = fault_basis(drawing, rows.counted)
    made = Faults(table, findings, rows.assumptions, worked_out, basis)
    _last = (bearing, drawing.limits, drawing.frequency_hz, made)
    return made


def asked_for(drawing: Drawing) -> bool:
    """Whether any board or device of a drawing wants its fault currents judged.

    drawing : the drawing

    Returns : bool
    """
    return any(
        e.withstand_ka is not None if isinstance(e, Node) else isinstance(e, Line) and e.trip_a is not None
        for e in drawing.elements.values()
    )


def _bearing(drawing: Drawing) -> Bearing:
    """All that fault currents hang on."""
    return {
        i: e for i, e in drawing.elements.items() if isinstance(e, Node | Branch | Supply) or is_marked(e)
    }


def _same(old: Mapping[str, Element], new: Mapping[str, Element]) -> bool:
    if list(old) != list(new):
        return False
    return all(was is now or _alike(was, now) for was, now in zip(old.values(), new.values(), strict=True))


def _alike(was: Element, now: Element) -> bool:
    """The same transformer at another tap."""
    both = isinstance(was, Transformer) and isinstance(now, Transformer)
    return both and replace(was, tap=now.tap) == now  # type: ignore[attr-defined]
