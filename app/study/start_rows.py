"""The rows of a motor start: the layout before it, and behind its supplies' impedance while it lasts."""

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import msgspec
import numpy as np
from numpy.typing import NDArray

from app.model import assumed
from app.model.drawing import Drawing
from app.model.kinds import Motor, Supply
from app.study.layout import Layout, arrays_of
from app.study.rows import Rows
from app.study.values import columns, load_values, motor_row, scaled_values
from app.study.zones import Zones
from solver import Network, Solution

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
BATCHED = (
    "source_voltage", "line_z", "line_y", "load_power", "load_reference", "shunt_y", "transformer_ratio",
    "transformer_z", "transformer_y",
)  # fmt: skip


def without(drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, started: list[int]) -> Network:
    """The network once for every motor, with that motor off and all others running.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V]
    rows : its rows
    started : attachment rows of the motors

    Returns : Network, column = motor · cases + case
    """
    power, reference, mix = _running(drawing, layout, zones, rows)
    cases = len(drawing.cases)
    network = replace(rows.network, load_power=power, load_reference=reference, load_mix=mix)
    wide: dict[str, Any] = {name: _tiled(getattr(network, name), len(started)) for name in BATCHED}
    power = np.array(np.broadcast_to(wide["load_power"], (len(power), 1, len(started) * cases)))
    for number, row in enumerate(started):
        power[rows.loads == row, :, number * cases : (number + 1) * cases] = 0
    return replace(network, **{**wide, "load_power": power})


def _tiled(array: NDArray[Any], count: int) -> NDArray[Any]:
    return array if array.shape[-1] == 1 else np.tile(array, (1,) * (array.ndim - 1) + (count,))


def _running(drawing: Drawing, layout: Layout, zones: Zones, rows: Rows) -> tuple[Complex, Real, Real]:
    """Loads as the solver takes them, with motors that are drawn starting at their running power."""
    hung = [layout.attachments[i] for i in rows.loads]
    network = rows.network
    if not any(isinstance(a, Motor) and a.state == "starting" for a in hung):
        return network.load_power, network.load_reference, network.load_mix
    run: list[Any] = [msgspec.structs.replace(a, state="running") if _starts(a) else a for a in hung]
    ids, nominal = [layout.attachment_ids[i] for i in rows.loads], nominal_of(layout, zones, rows.loads)
    power, reference, mix = load_values(run, ids, nominal, drawing.cases)
    return *_per_phase(layout, rows, rows.loads, power, reference), mix


def _starts(hung: Any) -> bool:
    return isinstance(hung, Motor) and hung.state == "starting"


def nominal_of(layout: Layout, zones: Zones, hung: Any) -> Real:
    """Nominal volts where attachments hang.

    layout : the graph
    zones : nominal_v (zone,) float [V]
    hung : attachment rows

    Returns : (attachment,) float [V]
    """
    graph = arrays_of(layout)
    return np.nan_to_num(zones.nominal_v[graph.zone[graph.at[hung]]], nan=1.0)


def _per_phase(
    layout: Layout, rows: Rows, hung: Any, power: Complex, reference: Real
) -> tuple[Complex, Real]:
    at = arrays_of(layout).at[hung]
    one = (power / rows.phases[at, None])[:, None, :]
    return one, (reference / rows.wide[at])[:, None, None]


def behind(
    drawing: Drawing,
    layout: Layout,
    zones: Zones,
    rows: Rows,
    started: list[int],
    before: Network,
    still: Solution,
) -> Network:
    """The network with a starting row for every motor, and every supply whose fault level is stated behind
    its impedance: a node more and a line more, and the electromotive force that gave its volts before.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V]
    rows : its rows
    started : attachment rows of the motors
    before : Network without them
    still : Solution of it

    Returns : Network, column = motor · cases + case; the starting rows are the last loads
    Source : E = U + Z·I of each supply before the start
    """
    z = np.array([source_impedance(s) for s in _supplies(layout, rows)])
    weak = np.flatnonzero(z)
    with np.errstate(all="ignore"):
        current = np.conj(still.source_power / before.source_voltage)
    held = before.source_voltage + np.nan_to_num(current) * z[:, None, None]
    source = before.source_node.copy()
    fresh = before.node_count + np.arange(len(weak))
    source[weak] = fresh
    batch = before.batch
    power, reference, mix = _starting(drawing, layout, zones, rows, started)
    line_z = np.broadcast_to(before.line_z, (*before.line_z.shape[:3], before.line_z.shape[3]))
    extra = np.repeat(z[weak][:, None, None, None], line_z.shape[-1], axis=-1)
    none = np.zeros((len(weak), 1, 1, before.line_y.shape[-1]), dtype=np.complex128)
    loads = np.broadcast_to(before.load_reference, (*before.load_reference.shape[:2], 1))
    return replace(
        before,
        node_count=before.node_count + len(weak),
        source_node=source,
        source_voltage=held,
        line_from=np.concatenate([before.line_from, fresh]),
        line_to=np.concatenate([before.line_to, before.source_node[weak]]),
        line_z=np.concatenate([line_z, extra]),
        line_y=np.concatenate([before.line_y, none]),
        load_node=np.concatenate([before.load_node, arrays_of(layout).at[started]]),
        load_power=np.concatenate([np.broadcast_to(before.load_power, (len(loads), 1, batch)), power]),
        load_reference=np.concatenate([loads, reference]),
        load_mix=np.concatenate([before.load_mix, mix]),
    )


def _supplies(layout: Layout, rows: Rows) -> list[Supply]:
    return [s for i in rows.sources if isinstance(s := layout.attachments[i], Supply)]


def source_impedance(supply: Supply) -> complex:
    """Impedance of a supply at its least fault level: |Z| = U²/Sk, X = |Z| / √(1 + (R/X)²).

    supply : the supply

    Returns : complex [ohm] per phase, or of both wires; 0 where no fault level is stated
    Source : IEC 60909-0, network feeder, without its factor c, as the electromotive force is known
    """
    if supply.fault_level_min_mva is None:
        return 0j
    size = supply.nominal_v**2 / (supply.fault_level_min_mva * 1e6)
    angle = math.atan(assumed.value(supply, "xr"))
    return complex(size * math.cos(angle), size * math.sin(angle))


def _starting(
    drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, started: list[int]
) -> tuple[Complex, Real, Real]:
    """A row a motor: what it draws at its start in its own columns, else nothing."""
    cases = len(drawing.cases)
    demands = columns([motor_row(m, True) for m in motors_of(layout, started)], 9)
    power, reference, mix = scaled_values(demands, nominal_of(layout, zones, started), drawing.cases)
    one, reference = _per_phase(layout, rows, started, power, reference)
    whole = np.zeros((len(started), 1, len(started) * cases), dtype=np.complex128)
    for number in range(len(started)):
        whole[number, :, number * cases : (number + 1) * cases] = one[number]
    return whole, reference, mix


def motors_of(layout: Layout, started: Sequence[int]) -> list[Motor]:
    """The motors of attachment rows.

    layout : the graph
    started : attachment rows of motors

    Returns : list of Motor
    """
    return [m for i in started if isinstance(m := layout.attachments[i], Motor)]
