"""The rows of a network put in the order of the sweep: one row a place, loads gathered at their nodes."""

from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from solver.forest import Forest
from solver.hung import Hung, hang
from solver.joints import Joints, joints_of
from solver.loose import Loose, conductors, find_loose
from solver.network import Complex, Flag, Index, Network, Real
from solver.wires import Wires


@dataclass(frozen=True, slots=True)
class Placed:
    """What one sweep reads. The last axis of every array is the batch, or 1 long.

    root : (zone, k, batch) complex [V] of the supplied zones, at depth 0
    z : (live, k, k, batch) complex [ohm] of the line that feeds each place; at the root of a zone 0, or what
        its supply stands behind
    y : (live, k, k, batch) complex [S] at each place: shunts, half the line charging, magnetising
        branches and constant-impedance loads; None where there is none
    power : (live, k, batch) complex [VA] conjugate of the constant-power part
    current : (live, k, batch) complex [A] conjugate of the constant-current part; None where there is none
    ratio : (fed zone, 1, batch) complex, feeding side over fed side, of the transformer of each fed zone
    series : (fed zone, 1, batch) complex [ohm] at the fed side; (fed zone, k, k, batch) beside a gain
    gain : (fed zone, k, k, batch) complex, fed volts out of feeding volts of two-ports; None where k = 1
    level : (zone, batch) float [V] no-load voltage of each zone
    joints : Joints of the ties, None where there is none
    loose : Loose, None where everything is held
    hung : Hung, loads between conductors; None where there are none, or k = 1
    by : (live, k) bool, conductors through which each place is fed; None where k = 1
    here : (live, k) bool, conductors that meet there; None where k = 1
    """

    root: Complex
    z: Complex
    y: Complex | None
    power: Complex
    current: Complex | None
    ratio: Complex
    series: Complex
    level: Real
    joints: Joints | None
    loose: Loose | None = None
    hung: Hung | None = None
    by: Flag | None = None
    here: Flag | None = None
    gain: Complex | None = None

    @property
    def asks(self) -> bool:
        """Loads that hold their power or current can ask too much; impedances always leave an answer."""
        if self.gain is not None:
            return self.hung is not None
        return self.current is not None or bool(self.power.any())

    def take(self, points: Index) -> "Placed":
        """The same with some operating points only."""

        names = ("root", "z", "y", "power", "current", "ratio", "series", "level", "gain")
        held = {name: getattr(self, name) for name in names}
        wide = {name: a for name, a in held.items() if a is not None and a.shape[-1] > 1}
        parts: dict[str, Any] = {
            "joints": self.joints and self.joints.take(points),
            "hung": self.hung and self.hung.take(points),
        }
        return replace(self, **parts, **{name: a.take(points, axis=-1) for name, a in wide.items()})


def put(network: Network, forest: Forest) -> Placed:
    """Gathers the rows of a network at the places of its forest.

    network : Network
    forest : Forest, of that network
    Returns : Placed
    """
    supplied = int(forest.depth_zone[1])
    root = network.source_voltage[forest.zone_source[:supplied]]
    ratio, series = fed_transformers(network, forest)
    gain, hung, loose, by, here = None, None, None, None, None
    if network.wires is None:
        power, current, load_y = _loads(network, forest)
        series = series[:, None, :]
        stamps = None if load_y is None else (np.arange(forest.order.size), _diagonal(load_y))
    else:
        hung, stamps = hang(network, forest)
        power, current = np.zeros((0, network.conductors, 1), dtype=np.complex128), None
        gain, series = fed_ports(network.wires, forest)
        by, here = conductors(network, network.wires, forest)
        loose = find_loose(network.wires, forest, by, here)
    lines = network.line_z if network.line_z.shape[0] else np.zeros((1, *network.line_z.shape[1:]), complex)
    z = lines.take(forest.feeder, axis=0, mode="wrap")  # -1 is any: roots have none
    if network.conductors > 1:  # column by column, as `times` reads them
        z = np.moveaxis(np.ascontiguousarray(np.moveaxis(z, 2, 0)), 0, 2)
    z[forest.zone_start[:-1]] = 0
    if network.source_z is not None:  # a supply's own impedance leads into its root
        width = max(z.shape[-1], network.source_z.shape[-1])
        z = np.broadcast_to(z, (*z.shape[:-1], width)).copy()
        z[forest.zone_start[:supplied]] = network.source_z[forest.zone_source[:supplied]]
    return Placed(
        root=root,
        z=z,
        y=_admittance(network, forest, stamps),
        power=power,
        current=current,
        ratio=ratio[:, None, :],
        series=series,
        level=np.abs(_phasors(forest, np.abs(root).max(axis=1), ratio)),
        joints=joints_of(network, forest, by),
        loose=loose,
        hung=hung,
        by=by,
        here=here,
        gain=gain,
    )


def fed_transformers(network: Network, forest: Forest) -> tuple[Complex, Complex]:
    """Ratio (feeding over fed side) and series impedance (at the fed side) of every fed zone's transformer.

    network : Network
    forest : Forest, of that network
    Returns : ratio (fed zone, batch) complex, impedance (fed zone, batch) complex [ohm]
    """
    rows = forest.zone_transformer[int(forest.depth_zone[1]) :]
    a, z = network.transformer_ratio[rows], network.transformer_z[rows]
    if not rows.size:
        return a, z
    back = (forest.transformer_way[rows] < 0)[:, None]
    return np.where(back, 1 / a, a), np.where(back, z * np.abs(a) ** 2, z)


def fed_ports(wires: Wires, forest: Forest) -> tuple[Complex, Complex]:
    """Gain and series impedance of every fed zone's transformer as it is fed.

    wires : Wires
    forest : Forest
    Returns : (fed zone, k, k, batch) complex twice, the second in [ohm]
    """
    rows = forest.zone_transformer[int(forest.depth_zone[1]) :]
    side = (forest.transformer_way[rows] < 0).astype(int)
    return wires.units.gain[rows, side], wires.units.series[rows, side]


def no_load_phasor(forest: Forest, placed: Placed) -> Complex:
    """Volts of the first conductor at the root of every zone with nothing connected.

    forest : Forest
    placed : Placed, of that forest
    Returns : (zone, batch) complex [V]
    """
    return _phasors(forest, placed.root[:, 0], placed.ratio[:, 0])


def _phasors(forest: Forest, root: Complex | Real, ratio: Complex) -> Complex:
    width = max(root.shape[-1], ratio.shape[-1])
    supplied = root.shape[0]
    level = np.empty((forest.zone_source.size, width), dtype=np.complex128)
    level[:supplied] = root
    for start, stop in zip(forest.depth_zone[1:-1], forest.depth_zone[2:], strict=True):
        above = level[forest.zone[forest.zone_fed[start:stop]]]
        level[start:stop] = above / ratio[start - supplied : stop - supplied]
    return level


def _loads(network: Network, forest: Forest) -> tuple[Complex, Complex | None, Complex | None]:
    where, drawn = forest.place[network.load_node], np.conj(network.load_power)
    mix, reference = network.load_mix, network.load_reference
    if (where < 0).any():
        live = where >= 0
        where, drawn, mix, reference = where[live], drawn[live], mix[live], reference[live]
    count = forest.order.size
    steady, flat, square = (mix[:, kind, None, None] for kind in range(3))
    power = gather(where, drawn * steady, count)
    current = gather(where, drawn * flat / reference, count) if flat.any() else None
    admittance = gather(where, drawn * square / reference**2, count) if square.any() else None
    return power, current, admittance


def gather(where: Index, values: Complex | Real, size: int) -> Complex:
    """Adds rows up at their places.

    where : (row,) place of each row
    values : (row, ...) complex
    size : number of places
    Returns : (place, ...) complex
    """
    total = np.zeros((size, *values.shape[1:]), dtype=np.complex128)
    if where.size and np.bincount(where, minlength=1).max() == 1:
        total[where] = values
    else:
        np.add.at(total, where, values)
    return total


def _admittance(network: Network, forest: Forest, stamps: tuple[Index, Complex] | None) -> Complex | None:
    k, live = network.conductors, forest.order.size
    parts: list[tuple[Index, Complex]] = []
    if stamps is not None and stamps[1].any():
        parts.append(stamps)
    shunts = np.flatnonzero(forest.place[network.shunt_node] >= 0)
    if shunts.size:
        parts.append((forest.place[network.shunt_node[shunts]], network.shunt_y[shunts]))
    if network.line_y.any():
        lines = np.flatnonzero(forest.line_way)
        half = network.line_y[lines] / 2
        parts.append((forest.place[network.line_from[lines]], half))
        parts.append((forest.place[network.line_to[lines]], half))
    live_units = np.flatnonzero(forest.transformer_way)
    sides = (network.transformer_from, network.transformer_to) if live_units.size else ()
    for side, ends in enumerate(sides):
        if network.wires is not None:
            iron = network.wires.units.iron[live_units, side]
        else:
            iron = _diagonal(np.repeat(network.transformer_y[live_units, side, None, :], k, axis=1))
        if iron.any():
            parts.append((forest.place[ends[live_units]], iron))
    if not parts:
        return None
    total = gather(*parts[0], live)
    for where, values in parts[1:]:
        total = total + gather(where, values, live)
    return total


def _diagonal(values: Complex) -> Complex:
    row, k, width = values.shape
    matrix = np.zeros((row, k, k, width), dtype=np.complex128)
    matrix[:, np.arange(k), np.arange(k)] = values
    return matrix
