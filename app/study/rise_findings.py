"""How far generation lifts the volts: each case against the same case with all generators off."""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.kinds import Generator
from app.study.checking import NEAR_SHARE, SET_HERE, Check, findings_of
from app.study.layout import Layout
from app.study.outcome import Finding
from app.study.results import Tables, tables_of
from app.study.rows import Rows
from app.study.words import tell
from app.study.zones import Zones
from solver import Status, solve

Real = NDArray[np.float64]


def rise_findings(
    drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, tables: Tables, cases: tuple[str, ...]
) -> list[Finding]:
    """Hold the rise by generation against its limit: ΔU = U with all generators − U without any.

    Everything else stands as it is: loads, taps, regulators where they came to rest. A case that does not
    solve without its generators is not judged.

    drawing : the drawing, for its limit and names
    layout : its graph
    zones : its voltage levels
    rows : of the solver, at rest
    tables : percent (node, case) [% of nominal] as solved
    cases : names of the cases

    Returns : list of Finding; none where no limit is set or nothing generates
    Source : the limit is the drawing's; the change of voltage is taken as VDE-AR-N 4105 does (from memory)
    """
    limit, rise = drawing.limits.rise_percent, rise_of(drawing, layout, zones, rows, tables)
    if limit is None or rise is None:
        return []
    ids = tables.nodes.ids

    def subject(row: int, case: int, value: str) -> str:
        return f"{tell(drawing, ids[row])} is lifted by {value} of nominal by generation"

    near = limit * (1 - NEAR_SHARE)
    check = Check("voltage rise", ids, rise, limit, False, near, subject, "the most allowed is")
    return findings_of(check, drawing.limits.rise_name or SET_HERE, cases)


def rise_of(drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, tables: Tables) -> Real | None:
    """How far all generators together lift every node; nothing where no limit is set or nothing generates.

    drawing : the drawing, for its limit
    layout : its graph
    zones : its voltage levels
    rows : of the solver, at rest
    tables : percent (node, batch) [% of nominal] as solved

    Returns : (node, batch) float [% of nominal], nan where a point has no answer without its generators
    Source : see rise_findings
    """
    makes = np.array([isinstance(layout.attachments[row], Generator) for row in rows.loads], dtype=bool)
    if drawing.limits.rise_percent is None or not makes.any():
        return None
    still = rows.network.load_power * ~makes[:, None, None]
    solution = solve(replace(rows.network, load_power=still), forest=layout.forest)
    without = tables_of(layout, zones, rows, solution, tables.nodes.column("percent").shape[1])
    unsolved = np.array([s is not Status.SOLVED for s in solution.status])
    return np.where(unsolved, np.nan, _rise(tables, without))


def _rise(tables: Tables, without: Tables) -> Real:
    """(node, case) rise, %: of the phase that rises most, where phases are not alike."""
    if tables.wires is None or without.wires is None:
        return tables.nodes.column("percent") - without.nodes.column("percent")
    now, then = tables.wires.nodes, without.wires.nodes
    each = np.array([now.column(n) - then.column(n) for n in ("a_v", "b_v", "c_v")])
    most = np.where(np.isnan(each), -np.inf, each).max(axis=0)
    base = now.column("base_v")
    return 100 * np.where(np.isinf(most), np.nan, most) / base[:, None]
