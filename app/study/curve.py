"""What every notch of a transformer would do: all notches in all cases are one batch of the solver."""

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.model import taps
from app.model.drawing import Drawing
from app.model.kinds import Transformer
from app.study.changers import settled
from app.study.checking import margin_of
from app.study.layout import NONE, Layout, lay_out
from app.study.outcome import Verdict
from app.study.results import tables_of
from app.study.rows import Rows, rows_of
from app.study.structure import structure_findings
from app.study.values import notch_values
from app.study.zones import zones_of
from solver import Network, Status

Real = NDArray[np.float64]
BATCHED = ("source_voltage", "line_z", "line_y", "load_power", "load_reference", "shunt_y")
BATCHED_UNITS = ("transformer_ratio", "transformer_z", "transformer_y")


@dataclass(frozen=True, slots=True)
class TapCurve:
    """What each notch gives. Where a notch has no operating point its figures are nan and it does not hold.

    notches : (notch,) int, lowest first
    percent : (notch,) float [%] of the nameplate voltage, signed
    nameplate_v : (notch,) float [V] rated voltage of the tapped winding
    loss_kw : (notch, case) float [kW] total loss of the layout
    lowest_percent, highest_percent : (notch,) float [% of nominal] over all nodes fed through it, all cases
    holds : (notch,) bool, every voltage limit holds at every node fed through it, in every case
    """

    notches: NDArray[np.intp]
    percent: Real
    nameplate_v: Real
    loss_kw: Real
    lowest_percent: Real
    highest_percent: Real
    holds: NDArray[np.bool_]


def tap_curve(drawing: Drawing, transformer_id: str) -> TapCurve:
    """Solve a drawing at every notch of one transformer.

    drawing : the drawing
    transformer_id : id of a transformer in it

    Returns : TapCurve; all nan where the layout cannot be solved as drawn
    Raises : KeyError where the id is not a transformer's
    Source : see solver
    """
    unit = drawing.elements[transformer_id]
    if not isinstance(unit, Transformer):
        raise KeyError(transformer_id)
    layout = lay_out(drawing)
    zones = zones_of(drawing, layout)
    notches, cases = list(taps.notches(unit)), len(drawing.cases)
    found = structure_findings(drawing, layout, zones)
    if not layout.supplies or any(f.verdict is Verdict.BLOCKS for f in found):
        return _curve(unit, notches, np.full((len(notches), cases), np.nan), None, None)
    rows = rows_of(drawing, layout, zones)
    branch = layout.branch_row[transformer_id]
    rows = replace(rows, network=_spread(rows, branch, unit, notches, cases))
    rows, solution, _ = settled(drawing, layout, zones, rows, fixed=branch)
    tables = tables_of(layout, zones, rows, solution, len(notches) * cases)
    solved = np.array([s is Status.SOLVED for s in solution.status])
    loss = np.where(solved, tables.balance.loss_kw, np.nan).reshape(len(notches), cases)
    below = _fed_through(layout, branch)
    percent, drop = (
        tables.nodes.column(name)[below].reshape(-1, len(notches), cases)
        for name in ("percent", "drop_percent")
    )
    return _curve(unit, notches, loss, percent, _holds(drawing, percent, drop))


def _spread(rows: Rows, branch: int, unit: Transformer, notches: list[int], cases: int) -> Network:
    """The network once for every notch: column = notch · cases + case."""
    network, count = rows.network, len(notches)
    wide: dict[str, Any] = {name: _tiled(getattr(network, name), count) for name in BATCHED}
    ratio, z, y = notch_values(unit, notches)
    row = int(np.flatnonzero(rows.units == branch)[0])
    for name, values in zip(BATCHED_UNITS, (ratio, z, y), strict=True):
        column = np.repeat(getattr(network, name), count * cases, axis=-1)
        column[row] = np.repeat(values, cases, axis=-1)
        wide[name] = column
    return replace(network, **wide)


def _tiled(array: NDArray[np.generic], count: int) -> NDArray[np.generic]:
    if array.shape[-1] == 1:
        return array
    return np.tile(array, (1,) * (array.ndim - 1) + (count,))


def _fed_through(layout: Layout, branch: int) -> NDArray[np.intp]:
    """Nodes that get their power through a transformer: the zone on its far side, and what that feeds.

    The far side lies behind more transformers, seen from the supply; of two zones alike, or one zone, it
    is that of the node later in the order of the trees.
    """
    behind = [0] * len(layout.nodes)  # transformers between a node and its supply
    for node in layout.order:
        if (by := layout.fed_by[node]) != NONE:
            behind[node] = behind[layout.fed_from[node]] + isinstance(layout.branches[by], Transformer)
    ends = layout.start[branch], layout.end[branch]
    far = layout.zone[max(ends, key=lambda n: (behind[n], layout.fed_by[n] == branch, n))]
    through = [False] * len(layout.nodes)
    for node in layout.order:
        above = layout.fed_from[node]
        through[node] = layout.live[node] and (layout.zone[node] == far or above != NONE and through[above])
    return np.flatnonzero(through)


def _holds(drawing: Drawing, percent: Real, drop: Real) -> NDArray[np.bool_]:
    limits = drawing.limits
    good = (margin_of(percent, limits.low_percent, True) >= 0) & (
        margin_of(percent, limits.high_percent, False) >= 0
    )
    if limits.drop_percent is not None:
        good &= margin_of(drop, limits.drop_percent, False) >= 0
    return np.asarray(good.all(axis=(0, 2)))


def _curve(
    unit: Transformer, notches: list[int], loss: Real, percent: Real | None, holds: NDArray[np.bool_] | None
) -> TapCurve:
    nothing = np.full(len(notches), np.nan)
    some = percent is not None and percent.size > 0
    return TapCurve(
        notches=np.array(notches, dtype=np.intp),
        percent=np.array(notches) * unit.notch_percent,
        nameplate_v=np.array([taps.nameplate_v(unit, n) for n in notches]),
        loss_kw=loss,
        lowest_percent=percent.min(axis=(0, 2)) if some and percent is not None else nothing,
        highest_percent=percent.max(axis=(0, 2)) if some and percent is not None else nothing,
        holds=np.zeros(len(notches), dtype=bool) if holds is None else holds,
    )
