"""A drawing's phases and neutral as a fault meets them: cold or hot, supplies behind their impedance."""

from dataclasses import replace as with_fields

import numpy as np
from msgspec import Struct
from msgspec.structs import replace
from numpy.typing import NDArray

from app.model import assumed
from app.model.drawing import Case, Drawing
from app.model.fault_data import LOW_V, fault_value, figure, star_earth_ohm
from app.model.kinds import Branch, Line, OverheadLine, Regulator, Supply, Switch, Transformer
from app.model.levels import SPLIT, THREE_PHASE
from app.model.wire_data import is_star_star, neutral_of
from app.study.conductors import Conductors, conductors_of
from app.study.graph import Layout
from app.study.wire_rows import wire_network
from app.study.zones import Zones
from solver import fault, line, transformer
from solver.fault import zero_path
from solver.network import Network

Complex = NDArray[np.complex128]
Real = NDArray[np.float64]
COLD = 20.0
BLOCKED = 1e6  # Z0 / Z1 of what lets no zero sequence through


class Way(Struct, frozen=True):
    """Which of the networks of conductors is asked for.

    largest : the highest currents are sought, else the least
    earth : the return conductor stands in the place of the neutral
    """

    largest: bool
    earth: bool


def fault_network(
    drawing: Drawing, layout: Layout, zones: Zones, factors: tuple[Real, Real], way: Way
) -> tuple[Network, Conductors]:
    """The network of all conductors that a fault meets, with nothing connected.

    R at 20 °C or hot; transformers at their rated ratio, times KT for the highest currents; supplies behind
    c · U² / S. As a way to earth the return conductor of a line has (Z0 - Z1) / 3, and a line above 1 kV
    without a neutral returns through earth.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V], system (zone,)
    factors : cmax, cmin (node,) float
    way : which of the networks

    Returns : Network with k = 4 [V, ohm], and the conductors it has
    Source : IEC 60909-0:2016, 5.3 and 6 (from memory); that a return lies in Z0 as R0 = R1 + 3 R is usual
    """
    made = [_branch(drawing, layout, zones, row, factors[0], way) for row in range(len(layout.branches))]
    bare = with_fields(layout, branches=made, forest=None)
    conductors = conductors_of(bare, zones)
    lines = [row for row, b in enumerate(made) if isinstance(b, Line) or isinstance(b, Switch) and b.closed]
    units = [*layout.units, *(row for row, b in enumerate(made) if isinstance(b, Regulator))]
    at, among, sources, none = (np.array(r, dtype=np.intp) for r in (lines, units, layout.supplies, []))
    plain = replace(drawing, cases=(Case(),))
    network = wire_network(plain, bare, zones, conductors, (at, among, sources, none, none))
    return with_fields(network, source_z=_behind(layout, factors, way)), conductors


def _branch(drawing: Drawing, layout: Layout, zones: Zones, row: int, c_max: Real, way: Way) -> Branch:
    branch = layout.branches[row]
    if isinstance(branch, Line):
        zone = layout.zone[layout.start[row]]
        single, nominal = zones.system[zone] != THREE_PHASE, float(zones.nominal_v[zone])
        hot = COLD if way.largest else figure(fault_value(branch, "fault_degc", nominal))
        branch = replace(branch, temperature_degc=hot)
        return _returning(branch, nominal, single, drawing.frequency_hz) if way.earth else branch
    if not isinstance(branch, Transformer):
        return branch
    ends = layout.start[row], layout.end[row]
    low = min(ends, key=lambda node: float(zones.nominal_v[layout.zone[node]]))
    pk, rating = assumed.value(branch, "load_loss_w"), branch.rating_kva * 1e3
    z = transformer.short_circuit(branch.uk_percent, pk, rating, branch.v2_v)
    kt = float(fault.correction(rating, branch.v2_v, z, c_max[low])) if way.largest else 1.0
    made = replace(branch, tap=0, regulates="no", uk_percent=branch.uk_percent * kt, load_loss_w=pk * kt)
    earths = [star_earth_ohm(branch, winding) is not None for winding in (1, 2)]
    grouped = branch.build == "as its group" and branch.vector_group[0] != "I"
    if grouped and is_star_star(branch) and not zero_path(branch.vector_group, earths[0], earths[1]).through:
        made = replace(made, z0_ratio=BLOCKED)  # the core is not counted
    return made


def _returning(run: Line, nominal_v: float, single: bool, frequency_hz: float) -> Line:
    """The line with its return conductor where its neutral was."""
    if isinstance(run, OverheadLine) and run.hung_at_m:
        return run
    kind = neutral_of(run, nominal_v, single)
    if not single and nominal_v > LOW_V:
        return replace(run, neutral="earthed along") if kind == "none" else run
    if kind == "earthed along":
        return run
    r0, x0 = (
        figure(fault_value(run, f"zero_{name}_ohm_per_km", nominal_v, frequency_hz))
        for name in ("resistance", "reactance")
    )
    return replace(
        run,
        neutral="carried",
        neutral_resistance_ohm_per_km=max(r0 - run.resistance_ohm_per_km, 0.0) / 3,
        neutral_reactance_ohm_per_km=max(x0 - run.reactance_ohm_per_km, 0.0) / 3,
    )


def _behind(layout: Layout, factors: tuple[Real, Real], way: Way) -> Complex:
    """(source, k, k, 1) impedance of each supply; an unearthed one lets next to no zero sequence by."""
    found = np.zeros((len(layout.supplies), 4, 4, 1), dtype=np.complex128)
    for n, row in enumerate(layout.supplies):
        supply = layout.attachments[row]
        assert isinstance(supply, Supply)
        if supply.fault_level_max_mva is None and supply.fault_level_min_mva is None:
            continue  # what it feeds is not worked out
        c = factors[0 if way.largest else 1][layout.at[row]]
        z = supply_z(supply, float(c), way.largest)
        if supply.wires == THREE_PHASE:
            open_ = supply.z0_ratio is None and supply.nominal_v > LOW_V
            z0 = z * (BLOCKED if open_ else figure(fault_value(supply, "z0_ratio", supply.nominal_v)))
            found[n, :3, :3, 0] = line.symmetric(z, z0)
        else:
            legs = 2 if supply.wires == SPLIT else 1
            found[n, range(legs), range(legs), 0] = z / legs
    return found


def supply_z(supply: Supply, c: float, largest: bool) -> complex:
    """Impedance of a supply out of its fault level.

    Z = c · U² / S, X / R as stated or assumed

    supply : one that states a fault level
    c : voltage factor
    largest : its highest level, else its least

    Returns : complex [ohm], of one phase, or of the loop between two wires
    Source : IEC 60909-0:2016, 6.2
    """
    name, volts = f"fault_level_{'max' if largest else 'min'}_mva", supply.nominal_v
    level = figure(fault_value(supply, name, volts)) * 1e6
    ratio = figure(fault_value(supply, "xr", volts))
    return complex(fault.feeder(volts, level / (3**0.5 * volts), c, ratio))


def slowed_network(network: Network, share: float) -> Network:
    """All reactances as at another frequency.

    network : as `fault_network` makes it
    share : of the system's frequency

    Returns : Network
    """

    def slow(z: Complex) -> Complex:
        return np.asarray(z.real + 1j * share * z.imag)

    assert network.wires is not None
    assert network.source_z is not None
    units = network.wires.units
    units = with_fields(units, series=slow(units.series), own_z=slow(units.own_z))
    return with_fields(
        network,
        line_z=slow(network.line_z),
        source_z=slow(network.source_z),
        wires=with_fields(network.wires, units=units),
    )
