"""What every notch of a transformer would do: all notches in all cases are one batch of the solver."""

from dataclasses import replace
from typing import Any

import numpy as np
from msgspec import Struct
from msgspec.structs import replace as replaced
from numpy.typing import NDArray

from app.model import taps
from app.model.drawing import Drawing
from app.model.kinds import Transformer
from app.study.changers import settled
from app.study.checking import margin_of
from app.study.layout import NONE, Layout, lay_out
from app.study.outcome import Verdict
from app.study.results import tables_of
from app.study.rise_findings import rise_of
from app.study.rows import Rows, rows_of
from app.study.structure import structure_findings
from app.study.unit_ports import port_of, ratio_of
from app.study.values import notch_values
from app.study.zones import Zones, zones_of
from solver import Network, Status
from solver.share import pick

Real = NDArray[np.float64]
BATCHED = ("gain", "series", "iron", "own_z")  # of a two-port


class TapCurve(Struct, frozen=True):
    """What each notch gives. Where a notch has no operating point its figures are nan and it does not hold.

    notches : (notch,) int, lowest first
    percent : (notch,) float [%] of the nameplate voltage, signed
    nameplate_v : (notch,) float [V] rated voltage of the tapped winding
    loss_kw : (notch, case) float [kW] total loss of the layout
    lowest_percent, highest_percent : (notch,) float [% of nominal] over all nodes fed through it, all cases,
        all phases
    holds : (notch,) bool, every voltage limit holds at every node fed through it, in every case
    left_out : (chosen,) cases that have an operating point at no notch, which bounds and verdicts pass over
    """

    notches: NDArray[np.intp]
    percent: Real
    nameplate_v: Real
    loss_kw: Real
    lowest_percent: Real
    highest_percent: Real
    holds: NDArray[np.bool_]
    left_out: tuple[int, ...] = ()


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
    rows = replace(rows, network=_spread(layout, zones, rows, branch, notches, cases))
    rows, solution, _ = settled(drawing, layout, zones, rows, fixed=branch)
    tables = tables_of(layout, zones, rows, solution, len(notches) * cases)
    solved = np.array([s is Status.SOLVED for s in solution.status]).reshape(len(notches), cases)
    loss = np.where(solved, tables.balance.loss_kw.reshape(solved.shape), np.nan)
    below = _fed_through(layout, branch)
    known = solved.any(axis=0) if solved.any() else np.ones(cases, dtype=bool)
    column, rise = tables.nodes.column, rise_of(drawing, layout, zones, rows, tables)
    whole = [column(name) for name in ("percent", "high_percent", "drop_percent")]
    low, high, drop, lifted = (
        np.where(solved, figures[below].reshape(-1, *solved.shape), np.nan)[..., known]
        for figures in (*whole, np.zeros_like(whole[0]) if rise is None else rise)
    )
    made = _curve(unit, notches, loss, (low, high), _holds(drawing, low, high, drop, lifted))
    return replaced(made, left_out=tuple(np.flatnonzero(~known).tolist()))


def _spread(layout: Layout, zones: Zones, rows: Rows, branch: int, notches: list[int], cases: int) -> Network:
    """The network once for every notch: column = notch · cases + case."""
    network, unit = rows.network, layout.branches[branch]
    assert isinstance(unit, Transformer)
    row = int(np.flatnonzero(rows.units == branch)[0])
    wide = pick(network, np.tile(np.arange(cases), len(notches)))

    def put(array: Any, values: Any) -> Any:
        column = np.broadcast_to(array, (*array.shape[:-1], len(notches) * cases)).copy()
        column[row] = np.repeat(values, cases, axis=-1)
        return column

    ratio, z, y = notch_values(unit, notches)
    wires = wide.wires
    if wires is not None and rows.conductors is not None:
        ends = layout.start[branch], layout.end[branch]
        systems = [zones.system[layout.zone[node]] for node in ends]
        joined = rows.conductors.units.get(branch)
        ratio = np.array([ratio_of(unit, joined, systems, at) for at in ratio])
        taps_of = [replaced(unit, tap=n, regulates="no") for n in notches]
        ports = [port_of(u, joined, z[n], y[:, n]) for n, u in enumerate(taps_of)]
        units = {
            name: put(getattr(wires.units, name), np.concatenate([getattr(p, name) for p in ports], axis=-1))
            for name in BATCHED
        }
        wires = replace(wires, units=replace(wires.units, **units))
    return replace(
        wide,
        transformer_ratio=put(wide.transformer_ratio, ratio),
        transformer_z=put(wide.transformer_z, z),
        transformer_y=put(wide.transformer_y, y),
        wires=wires,
    )


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


def _holds(drawing: Drawing, low: Real, high: Real, drop: Real, rise: Real) -> NDArray[np.bool_]:
    limits = drawing.limits
    good = (margin_of(low, limits.low_percent, True) >= 0) & (
        margin_of(high, limits.high_percent, False) >= 0
    )
    if limits.drop_percent is not None:
        good &= margin_of(drop, limits.drop_percent, False) >= 0
    if limits.rise_percent is not None:  # where there is no answer without generation it is not judged
        good &= ~(margin_of(rise, limits.rise_percent, False) < 0)
    return np.asarray(good.all(axis=(0, 2)))


def _curve(
    unit: Transformer,
    notches: list[int],
    loss: Real,
    percent: tuple[Real, Real] | None,
    holds: NDArray[np.bool_] | None,
) -> TapCurve:
    nothing = np.full(len(notches), np.nan)
    some = percent is not None and percent[0].size > 0
    return TapCurve(
        notches=np.array(notches, dtype=np.intp),
        percent=np.array(notches) * unit.notch_percent,
        nameplate_v=np.array([taps.nameplate_v(unit, n) for n in notches]),
        loss_kw=loss,
        lowest_percent=percent[0].min(axis=(0, 2)) if some and percent is not None else nothing,
        highest_percent=percent[1].max(axis=(0, 2)) if some and percent is not None else nothing,
        holds=np.zeros(len(notches), dtype=bool) if holds is None else holds,
    )
