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
from app.model.levels import SPLIT, TWO_WIRE
from app.study.layout import Layout, arrays_of
from app.study.rows import Rows
from app.study.values import columns, load_values, motor_row, scaled_values
from app.study.zones import Zones, nominal_of
from solver import Network, Solution
from solver.line import symmetric
from solver.share import pick
from solver.sweep import times

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Index = NDArray[np.intp]


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
    network = pick(network, np.tile(np.arange(cases), len(started)))
    power = network.load_power
    power = np.array(np.broadcast_to(power, (*power.shape[:-1], len(started) * cases)))
    for number, row in enumerate(started):
        power[rows.loads == row, :, number * cases : (number + 1) * cases] = 0
    return replace(network, load_power=power)


def _running(drawing: Drawing, layout: Layout, zones: Zones, rows: Rows) -> tuple[Complex, Real, Real]:
    """Loads as the solver takes them, with motors that are drawn starting at their running power."""
    hung = [layout.attachments[i] for i in rows.loads]
    network = rows.network
    if not any(isinstance(a, Motor) and a.state == "starting" for a in hung):
        return network.load_power, network.load_reference, network.load_mix
    run: list[Any] = [msgspec.structs.replace(a, state="running") if _starts(a) else a for a in hung]
    ids, nominal = [layout.attachment_ids[i] for i in rows.loads], nominal_at(layout, zones, rows.loads)
    power, reference, mix = load_values(run, ids, nominal, drawing.cases)
    return *_as_solved(layout, zones, rows, rows.loads, power, reference)[:2], mix


def _starts(hung: Any) -> bool:
    return isinstance(hung, Motor) and hung.state == "starting"


def nominal_at(layout: Layout, zones: Zones, hung: Any) -> Real:
    """Nominal volts where attachments hang.

    layout : the graph
    zones : nominal_v (zone,) float [V]
    hung : attachment rows

    Returns : (attachment,) float [V]
    """
    return np.nan_to_num(nominal_of(layout, zones)[arrays_of(layout).at[hung]], nan=1.0)


def _as_solved(
    layout: Layout, zones: Zones, rows: Rows, hung: Any, power: Complex, reference: Real
) -> tuple[Complex, Real, Index | None]:
    """Power and reference volts conductor by conductor, and where each lead goes where there are four."""
    if rows.conductors is not None:
        from app.study.wire_rows import loads_between  # loaded by then

        return loads_between(rows.conductors, hung, power, reference, nominal_at(layout, zones, hung))
    at = arrays_of(layout).at[hung]
    one = (power / rows.phases[at, None])[:, None, :]
    return one, (reference / rows.wide[at])[:, None, None], None


def behind(
    drawing: Drawing,
    layout: Layout,
    zones: Zones,
    rows: Rows,
    started: list[int],
    before: Network,
    still: Solution,
) -> Network:
    """The network with a starting row for every motor, and every supply behind the impedance of its least
    fault level, with the electromotive force that gave its volts before; none where it states no level.

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
    supplies = [s for i in rows.sources if isinstance(s := layout.attachments[i], Supply)]
    z = np.array([source_matrix(s, before.conductors) for s in supplies])[..., None]
    held = before.source_voltage + times(z, np.nan_to_num(still.source_current))
    power, reference, mix, to = _starting(drawing, layout, zones, rows, started)
    loads = before.load_reference
    loads = np.broadcast_to(loads, (*loads.shape[:-1], 1))
    wires = before.wires
    if wires is not None and to is not None:
        wires = replace(wires, load_to=np.concatenate([wires.load_to, to]))
    return replace(
        before,
        source_voltage=held,
        source_z=z,
        load_node=np.concatenate([before.load_node, arrays_of(layout).at[started]]),
        load_power=np.concatenate([before.load_power, power]),
        load_reference=np.concatenate([loads, reference]),
        load_mix=np.concatenate([before.load_mix, mix]),
        wires=wires,
    )


def source_matrix(supply: Supply, k: int) -> Complex:
    """Impedance of a supply between its conductors.

    Zs = (2 Z1 + Z0) / 3 on the diagonal, Zm = (Z0 - Z1) / 3 beside it, Z0 as its ratio says, else Z1; of a
    split-phase supply half in either hot wire. Its neutral is taken as firm.

    supply : the supply
    k : 1 or 4 conductors

    Returns : (k, k) complex [ohm]
    Source : see source_impedance, solver.line.symmetric
    """
    z = source_impedance(supply)
    matrix = np.zeros((k, k), dtype=np.complex128)
    if k == 1 or supply.wires == TWO_WIRE:
        matrix[0, 0] = z
    elif supply.wires == SPLIT:
        matrix[0, 0] = matrix[1, 1] = z / 2
    else:
        matrix[:3, :3] = symmetric(z, z * (1.0 if supply.z0_ratio is None else supply.z0_ratio))
    return matrix


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
) -> tuple[Complex, Real, Real, Index | None]:
    """A row a motor: what it draws at its start in its own columns, else nothing."""
    cases = len(drawing.cases)
    demands = columns([motor_row(m, True) for m in motors_of(layout, started)], 9)
    power, reference, mix = scaled_values(demands, nominal_at(layout, zones, started), drawing.cases)
    one, reference, to = _as_solved(layout, zones, rows, started, power, reference)
    whole = np.zeros((*one.shape[:-1], len(started) * cases), dtype=np.complex128)
    for number in range(len(started)):
        whole[number, :, number * cases : (number + 1) * cases] = one[number]
    return whole, reference, mix, to


def motors_of(layout: Layout, started: Sequence[int]) -> list[Motor]:
    """The motors of attachment rows.

    layout : the graph
    started : attachment rows of motors

    Returns : list of Motor
    """
    return [m for i in started if isinstance(m := layout.attachments[i], Motor)]
