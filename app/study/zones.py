"""Voltage zones: the nominal voltage of each, how many wires its supply has, and what contradicts it."""

import math

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.model.drawing import Drawing
from app.model.kinds import Capacitor, Load, Motor, Supply, Transformer
from app.model.levels import THREE_PHASE, TWO_WIRE, is_single, system_behind
from app.study.layout import NONE, Layout, arrays_of
from app.study.outcome import Assumption, Finding, Verdict
from app.study.wires import PER_PHASE
from app.study.words import slip, tell

USUAL_RESERVE = 1.6  # of a capacitor's rated voltage over the level, as 525 V or 600 V on 400 V
APART = 1.15  # a winding this far from the level of its node is at the wrong level; 433 V on 400 V is not


class Zones(Struct, frozen=True):
    """What holds in each zone and each tree.

    nominal_v : (zone,) float [V], between lines or between the two wires; nan where nothing says
    two_wire : (tree,) bool, the supply of the tree has two wires
    system : (zone,) three-phase, two-wire or split-phase
    basis : per zone, whose voltage it is, as words
    assumed : per zone, true where no supply and no node states the voltage
    """

    nominal_v: NDArray[np.float64]
    two_wire: NDArray[np.bool_]
    system: tuple[str, ...]
    basis: tuple[str, ...]
    assumed: tuple[bool, ...]


def zones_of(drawing: Drawing, layout: Layout) -> Zones:
    """The nominal voltage of every zone: its supply's, else a node's, else the rated voltage that feeds it.

    drawing : the drawing
    layout : its graph

    Returns : Zones, nominal_v (zone,) float [V]
    Source : common practice, no source
    """
    count = len(layout.zone_heads)
    nominal, basis, assumed = [math.nan] * count, [""] * count, [False] * count

    def settle(zone: int, volts: float, whose: str, by_winding: bool = False) -> None:
        if math.isnan(nominal[zone]):
            nominal[zone], basis[zone], assumed[zone] = volts, whose, by_winding

    for id, zone, volts in _statements(layout):
        settle(zone, volts, tell(drawing, id))
    windings = list(_windings(layout))
    for fed_only in (True, False):  # the winding that feeds the zone speaks before those that leave it
        for branch, at, number, volts in windings:
            if not fed_only or layout.fed_by[at] == branch:
                words = f"rated voltage of winding {number} of {tell(drawing, layout.branch_ids[branch])}"
                settle(layout.zone[at], volts, words, True)
    two_wire = [_wires(layout, supply) == TWO_WIRE for supply in layout.supply_of]
    system = _systems(layout)
    return Zones(
        np.array(nominal, dtype=np.float64),
        np.array(two_wire, dtype=bool),
        system,
        tuple(basis),
        tuple(assumed),
    )


def level_findings(drawing: Drawing, layout: Layout, zones: Zones) -> list[Finding]:
    """What contradicts the level of its zone: a node that states another, a winding of another level.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V]

    Returns : list of findings that block
    """
    found = []
    for id, zone, states in _statements(layout):
        volts, whose = zones.nominal_v[zone], zones.basis[zone]
        if not math.isclose(states, volts, rel_tol=1e-9):
            sentence = (
                f"{tell(drawing, id)} states {states:g} V but is joined without a transformer to "
                f"{whose}, which states {volts:g} V.{slip(states, volts)}"
            )
            found.append(Finding("mixed levels", Verdict.BLOCKS, (id,), sentence))
    return found + _winding_findings(drawing, layout, zones)


def _statements(layout: Layout) -> list[tuple[str, int, float]]:
    """Id, zone and volts of all that states a level: supplies, and nodes where not blank."""
    found = []
    for row in layout.supplies:
        supply = layout.attachments[row]
        assert isinstance(supply, Supply)
        found.append((layout.attachment_ids[row], layout.zone[layout.at[row]], supply.nominal_v))
    for row, node in enumerate(layout.nodes):
        if node.nominal_v is not None:
            found.append((layout.node_ids[row], layout.zone[row], node.nominal_v))
    return found


def _winding_findings(drawing: Drawing, layout: Layout, zones: Zones) -> list[Finding]:
    found = []
    for branch, node, number, volts in _windings(layout):
        level = zones.nominal_v[layout.zone[node]]
        unit = layout.branches[branch]
        assert isinstance(unit, Transformer)
        if any(
            1 / APART <= volts / at <= APART for at in _fits(unit, level, zones.system[layout.zone[node]])
        ):
            continue
        id, at = layout.branch_ids[branch], layout.node_ids[node]
        other = unit.v2_v if number == 1 else unit.v1_v
        turned = 1 / APART <= other / level <= APART
        cure = " Its other winding fits: turn its ends round." if turned else slip(volts, level)
        sentence = (
            f"Winding {number} of {tell(drawing, id)} is rated {volts:g} V but stands at "
            f"{tell(drawing, at)}, which is at {level:g} V.{cure}"
        )
        found.append(Finding("mixed levels", Verdict.BLOCKS, (id, at), sentence))
    return found


def _fits(unit: Transformer, level: float, system: str) -> list[float]:
    """Volts that a winding may be rated for at a level: those of a phase too, where it is single-phase."""
    if not is_single(unit) or system == TWO_WIRE:
        return [level]
    phase = level / PER_PHASE[system]
    if unit.phases == "all" or system != THREE_PHASE:  # its phases are those of the three-phase side
        return [level, phase]
    return [level if len(unit.phases) == 2 else phase]


def stated_voltages(drawing: Drawing, layout: Layout, zones: Zones) -> list[Finding]:
    """Loads stated, motors and capacitors rated for a voltage that is not their node's, with the likely slip.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V]

    Returns : list of findings that bar nothing
    """
    found = []
    for row, attachment in enumerate(layout.attachments):
        if isinstance(attachment, Load):
            volts, most, words = attachment.reference_v, APART, "states its demand at"
        elif isinstance(attachment, Motor):
            volts, most, words = attachment.rated_v, APART, "is rated"
        elif isinstance(attachment, Capacitor):
            volts, most, words = attachment.rated_v, USUAL_RESERVE, "is rated"
        else:
            continue
        zone = layout.zone[layout.at[row]]
        level = zones.nominal_v[zone]
        phase = level / PER_PHASE[zones.system[zone]] if len(attachment.phases) == 1 else level
        if (
            volts is None
            or math.isnan(level)
            or any(1 / APART <= volts / at <= most for at in (level, phase))
        ):
            continue
        id, at = layout.attachment_ids[row], layout.node_ids[layout.at[row]]
        sentence = f"{tell(drawing, id)} {words} {volts:g} V but hangs on {tell(drawing, at)}, which is at "
        sentence += f"{level:g} V.{slip(volts, level)}"
        found.append(Finding("stated voltage", Verdict.NOTE, (id, at), sentence))
    return found


def nominal_of(layout: Layout, zones: Zones) -> NDArray[np.float64]:
    """Nominal voltage of the zone of every node.

    layout : the graph
    zones : nominal_v (zone,) float [V]

    Returns : (node,) float [V]
    """
    return np.asarray(zones.nominal_v[arrays_of(layout).zone])


def level_assumptions(layout: Layout, zones: Zones) -> list[Assumption]:
    """The zones whose nominal voltage nobody states, with the winding it was taken from.

    layout : the graph of the drawing
    zones : nominal_v (zone,) float [V]

    Returns : list of Assumption, one a zone, at the first node of the zone
    """
    return [
        Assumption(layout.node_ids[node], "nominal_v", float(zones.nominal_v[zone]), "V", zones.basis[zone])
        for zone, node in enumerate(layout.zone_heads)
        if zones.assumed[zone]
    ]


def _windings(layout: Layout) -> list[tuple[int, int, int, float]]:
    """Every winding: branch row, node row, winding number, rated volts."""
    found = []
    for row in layout.units:
        unit = layout.branches[row]
        assert isinstance(unit, Transformer)
        found.append((row, layout.start[row], 1, unit.v1_v))
        found.append((row, layout.end[row], 2, unit.v2_v))
    return found


def _wires(layout: Layout, supply: int) -> str:
    held = None if supply == NONE else layout.attachments[supply]
    return held.wires if isinstance(held, Supply) else THREE_PHASE


def _systems(layout: Layout) -> tuple[str, ...]:
    """The system of every zone: its supply's, or what the transformer that feeds it makes of it."""
    found = [THREE_PHASE] * len(layout.zone_heads)
    for node in layout.order:
        zone, by = layout.zone[node], layout.fed_by[node]
        if by == NONE:
            found[zone] = _wires(layout, layout.supply_of[layout.tree[node]])
        elif isinstance(unit := layout.branches[by], Transformer) and layout.zone_heads[zone] == node:
            winding = 2 if layout.end[by] == node else 1
            found[zone] = system_behind(unit, winding, found[layout.zone[layout.fed_from[node]]])
    return tuple(found)
