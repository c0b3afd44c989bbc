"""From settled voltages to every branch, load and supply, and the power balance over all of them."""

import numpy as np

from solver.forest import Forest
from solver.load import drawn
from solver.network import Complex, Index, Network, Real
from solver.placed import Placed
from solver.reached import fed_conductors
from solver.rounds import Trouble
from solver.solution import Solution
from solver.status import Status
from solver.sweep import Sweep, over_conductors, times
from solver.ties import add
from solver.wires import EARTH

NAN = complex(np.nan, np.nan)


def answer(
    network: Network,
    forest: Forest,
    placed: Placed,
    voltage: Complex,
    status: tuple[Status, ...],
    iterations: Index,
    tied: Complex | None = None,
) -> Solution:
    """Every branch, load and supply from the settled voltages.

    network : Network
    forest : Forest, of that network
    placed : Placed, of both
    voltage : (live, k, batch) complex [V]
    status : (batch,) each a Status
    iterations : (batch,) int
    tied : (tie current, batch) complex [A], None where nothing is tied
    Returns : Solution
    """
    with np.errstate(all="ignore"):
        sweep = Sweep(placed, forest, voltage.shape[-1])
        sweep.currents(voltage)
        if placed.joints is not None and tied is not None:
            add(placed.joints, tied, sweep.current)
        inflow = sweep.backward()
        everywhere = _everywhere(network, forest, voltage)
        lines = _lines(network, forest, everywhere, inflow)
        own = _own(network, placed, tied)
        transformers = _transformers(network, forest, placed, everywhere, inflow, own)
        load_power, load_current = _loads(network, everywhere)
        at_shunt = everywhere[network.shunt_node]
        shunt_power = at_shunt * np.conj(times(network.shunt_y, at_shunt))
        source_current = _blank(network.source_node.size, voltage)
        supplied = int(forest.depth_zone[1])
        source_current[forest.zone_source[:supplied]] = inflow[forest.zone_start[:supplied]]
        source_power = everywhere[network.source_node] * np.conj(source_current)
        earth_current, earth_loss = _earths(network, placed, tied, voltage)
        taken = (load_power, shunt_power, earth_loss, *lines[2:], *transformers[2:])
        closure = _closure(source_power, load_power, taken)
    closure[[s is not Status.SOLVED for s in status]] = np.nan
    if network.wires is not None:
        fed = fed_conductors(network, forest, placed)
        if placed.by is not None and placed.here is not None:
            fed[forest.order, -1] |= (placed.by | placed.here)[:, -1]
        if not fed.all():
            everywhere[~fed] = NAN
    return Solution(
        network=network,
        forest=forest,
        status=status,
        voltage=everywhere,
        line_in=lines[0],
        line_out=lines[1],
        transformer_in=transformers[0],
        transformer_out=transformers[1],
        load_power=load_power,
        load_current=load_current,
        shunt_power=shunt_power,
        source_current=source_current,
        source_power=source_power,
        iterations=iterations,
        closure=closure,
        line_series_loss=lines[2],
        line_charging=lines[3],
        transformer_series_loss=transformers[2],
        transformer_magnetising_loss=transformers[3],
        earth_current=earth_current,
    )


def _everywhere(network: Network, forest: Forest, voltage: Complex) -> Complex:
    """(node, k, batch) volts of the nodes out of those of the places."""
    everywhere = _blank(network.node_count, voltage)
    if forest.tie_place.size:
        live = forest.place >= 0
        everywhere[live] = voltage[forest.place[live]]
    else:
        everywhere[forest.order] = voltage
    return everywhere


def _own(network: Network, placed: Placed, tied: Complex | None) -> Complex | None:
    """(transformer, 2, batch) currents that fed sides draw of their own."""
    if network.wires is None or placed.joints is None or tied is None:
        return None
    column = placed.joints.own
    return np.where((column >= 0)[..., None], tied[column], 0)


def _earths(
    network: Network, placed: Placed, tied: Complex | None, voltage: Complex
) -> tuple[Complex, Complex]:
    """(earth, batch) current into each electrode and its loss."""
    count = 0 if network.wires is None else network.wires.earth_node.size
    current = np.full((count, voltage.shape[-1]), NAN)
    if network.wires is not None and placed.joints is not None and tied is not None:
        live = placed.joints.earth >= 0
        current[live] = tied[placed.joints.earth[live]]
        return current, np.abs(current) ** 2 * network.wires.earth_z
    return current, current


def _closure(source_power: Complex, load_power: Complex, taken: tuple[Complex, ...]) -> Real:
    """(batch,) |supplied - drawn - lost| over the larger of supplied and drawn; dead rows do not count."""
    given = _total(source_power)
    size = np.maximum(np.abs(given), _total(np.abs(load_power)))
    gap = np.abs(given - sum(_total(power) for power in taken if power.size))
    return np.divide(gap, size, out=np.where(gap > 0, np.inf, 0.0), where=size > 0)


def _total(power: Complex | Real) -> Complex:
    """(batch,) sum of the rows that are live."""
    rows = np.ascontiguousarray(power.reshape(-1, power.shape[-1]).T)  # a sum that knows no other column
    total = rows.sum(axis=1)
    return total if np.isfinite(total).all() else np.nansum(rows, axis=1)


def _blank(rows: int, like: Complex) -> Complex:
    return np.full((rows, *like.shape[1:]), complex(np.nan, np.nan))


def _lines(
    network: Network, forest: Forest, voltage: Complex, inflow: Complex
) -> tuple[Complex, Complex, Complex, Complex]:
    way = forest.line_way
    series = inflow.take(forest.line_place, axis=0, mode="clip")
    np.negative(series, series, where=(way < 0)[:, None, None])
    if (dead := way == 0).any():
        series[dead] = complex(np.nan, np.nan)
    lost = over_conductors(np.conj(series) * times(network.line_z, series))
    if not network.line_y.any():
        return series, series, lost, 0 * lost
    first, last, half = voltage[network.line_from], voltage[network.line_to], network.line_y / 2
    first_charge, last_charge = times(half, first), times(half, last)
    charging = first * np.conj(first_charge) + last * np.conj(last_charge)
    return series + first_charge, series - last_charge, lost, over_conductors(charging)


def _transformers(
    network: Network, forest: Forest, placed: Placed, voltage: Complex, inflow: Complex, own: Complex | None
) -> tuple[Complex, Complex, Complex, Complex]:
    supplied = int(forest.depth_zone[1])
    rows = forest.zone_transformer[supplied:]
    if not rows.size:
        nothing = _blank(network.transformer_from.size, voltage)
        return nothing, nothing, nothing[:, 0], nothing[:, 0]
    secondary = inflow[forest.zone_start[supplied:-1]]
    side = (forest.transformer_way[rows] < 0).astype(int)
    first, last = voltage[network.transformer_from[rows]], voltage[network.transformer_to[rows]]
    if placed.gain is None or network.wires is None:
        primary = secondary / np.conj(placed.ratio)
        lost = np.abs(secondary) ** 2 * placed.series
        iron = network.transformer_y[rows, :, None, :]
        into, out = iron[:, 0] * first, iron[:, 1] * last
    else:
        units = network.wires.units
        primary = times(np.swapaxes(placed.gain, 1, 2), secondary)
        if own is not None:
            primary = primary + np.einsum("rok,rob->rkb", units.own[rows, side], own[rows])
        back = (side == 1)[:, None, None]
        fed, far = np.where(back, last, first), np.where(back, first, last)
        lost = fed * np.conj(primary) - far * np.conj(secondary)
        into, out = times(units.iron[rows, 0], first), times(units.iron[rows, 1], last)
    forward = (side == 0)[:, None, None]
    tables = [_blank(network.transformer_from.size, voltage) for _ in range(4)]
    tables[0][rows] = np.where(forward, primary, -secondary) + into
    tables[1][rows] = np.where(forward, secondary, -primary) - out
    tables[2][rows] = lost
    tables[3][rows] = first * np.conj(into) + last * np.conj(out)
    return tables[0], tables[1], over_conductors(tables[2]), over_conductors(tables[3])


def _loads(network: Network, voltage: Complex) -> tuple[Complex, Complex]:
    at = voltage.take(network.load_node, axis=0)
    if network.wires is not None:
        to = network.wires.load_to
        far = np.take_along_axis(at, np.maximum(to, 0)[..., None], axis=1)
        at = at - np.where((to == EARTH)[..., None], 0, far)
    if network.load_mix[:, 1:].any():
        power = drawn(network.load_power, network.load_mix[:, None, None, :], at, network.load_reference)
    else:
        power = np.where(np.isnan(at), at, network.load_power)
    return power, np.conj(np.divide(power, at, out=np.zeros_like(power + at), where=at != 0))


def unsolved(network: Network, forest: Forest | Trouble, width: int) -> Solution:
    """The solution of a network that is in trouble or not supplied: no figures, every status INVALID.

    network : Network
    forest : Trouble, or a Forest without a live node
    width : number of operating points
    Returns : Solution
    """

    def blank(rows: int) -> Complex:
        return np.full((rows, network.conductors, width), NAN)

    lines, units = network.line_from.size, network.transformer_from.size
    loads, sources = network.load_node.size, network.source_node.size
    return Solution(
        network=network,
        forest=forest,
        status=(Status.INVALID,) * width,
        voltage=blank(network.node_count),
        line_in=blank(lines),
        line_out=blank(lines),
        transformer_in=blank(units),
        transformer_out=blank(units),
        load_power=blank(loads),
        load_current=blank(loads),
        shunt_power=blank(network.shunt_node.size),
        source_current=blank(sources),
        source_power=blank(sources),
        iterations=np.zeros(width, dtype=np.intp),
        closure=np.full(width, np.nan),
        line_series_loss=blank(lines)[:, 0],
        line_charging=blank(lines)[:, 0],
        transformer_series_loss=blank(units)[:, 0],
        transformer_magnetising_loss=blank(units)[:, 0],
        earth_current=blank(0 if network.wires is None else network.wires.earth_node.size)[:, 0],
    )
