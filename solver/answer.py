"""From settled voltages to every branch, load and supply, and the power balance over all of them."""

import numpy as np

from solver.forest import Forest
from solver.load import drawn
from solver.network import Complex, Index, Network, Real
from solver.placed import Placed, fed_transformers
from solver.rounds import Trouble
from solver.solution import Solution
from solver.status import Status
from solver.sweep import Sweep, times
from solver.ties import add


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
        everywhere = _blank(network.node_count, voltage)
        live = forest.place >= 0
        everywhere[live] = voltage[forest.place[live]]
        lines = _lines(network, forest, everywhere, inflow)
        transformers = _transformers(network, forest, everywhere, inflow)
        load_power, load_current = _loads(network, everywhere)
        at_shunt = everywhere[network.shunt_node]
        shunt_power = at_shunt * np.conj(times(network.shunt_y, at_shunt))
        source_current = _blank(network.source_node.size, voltage)
        supplied = int(forest.depth_zone[1])
        source_current[forest.zone_source[:supplied]] = inflow[forest.zone_start[:supplied]]
        source_power = everywhere[network.source_node] * np.conj(source_current)
        closure = _closure(source_power, load_power, (load_power, shunt_power, *lines[2:], *transformers[2:]))
    closure[[s is not Status.SOLVED for s in status]] = np.nan
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
    )


def _closure(source_power: Complex, load_power: Complex, taken: tuple[Complex, ...]) -> Real:
    """(batch,) |supplied - drawn - lost| over the larger of supplied and drawn; dead rows do not count."""
    given = _total(source_power)
    size = np.maximum(np.abs(given), _total(np.abs(load_power)))
    gap = np.abs(given - sum(_total(power) for power in taken))
    return np.divide(gap, size, out=np.where(gap > 0, np.inf, 0.0), where=size > 0)


def _total(power: Complex | Real) -> Complex:
    """(batch,) sum of the rows that are live."""
    total = power.sum(axis=tuple(range(power.ndim - 1)))
    return total if np.isfinite(total).all() else np.nansum(power, axis=tuple(range(power.ndim - 1)))


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
    lost = (np.conj(series) * times(network.line_z, series)).sum(axis=1)
    if not network.line_y.any():
        return series, series, lost, 0 * lost
    first, last, half = voltage[network.line_from], voltage[network.line_to], network.line_y / 2
    first_charge, last_charge = times(half, first), times(half, last)
    charging = first * np.conj(first_charge) + last * np.conj(last_charge)
    return series + first_charge, series - last_charge, lost, charging.sum(axis=1)


def _transformers(
    network: Network, forest: Forest, voltage: Complex, inflow: Complex
) -> tuple[Complex, Complex, Complex, Complex]:
    supplied = int(forest.depth_zone[1])
    rows = forest.zone_transformer[supplied:]
    ratio, series = (a[:, None, :] for a in fed_transformers(network, forest))
    secondary = inflow[forest.zone_start[supplied:-1]]
    primary = secondary / np.conj(ratio)
    forward = (forest.transformer_way[rows] > 0)[:, None, None]
    first, last = voltage[network.transformer_from[rows]], voltage[network.transformer_to[rows]]
    iron = network.transformer_y[rows, :, None, :]
    into, out = iron[:, 0] * first, iron[:, 1] * last
    count = network.transformer_from.size
    tables = [_blank(count, voltage) for _ in range(4)]
    tables[0][rows] = np.where(forward, primary, -secondary) + into
    tables[1][rows] = np.where(forward, secondary, -primary) - out
    tables[2][rows] = np.abs(secondary) ** 2 * series
    tables[3][rows] = first * np.conj(into) + last * np.conj(out)
    return tables[0], tables[1], tables[2].sum(axis=1), tables[3].sum(axis=1)


def _loads(network: Network, voltage: Complex) -> tuple[Complex, Complex]:
    at = voltage.take(network.load_node, axis=0)
    if network.load_mix[:, 1:].any():
        power = drawn(network.load_power, network.load_mix[:, None, None, :], at, network.load_reference)
    else:
        power = np.where(np.isnan(at), at, network.load_power)
    return power, np.conj(power / at)


def unsolved(network: Network, forest: Forest | Trouble, width: int) -> Solution:
    """The solution of a network that is in trouble or not supplied: no figures, every status INVALID.

    network : Network
    forest : Trouble, or a Forest without a live node
    width : number of operating points
    Returns : Solution
    """

    def blank(rows: int) -> Complex:
        return np.full((rows, network.conductors, width), complex(np.nan, np.nan))

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
    )
