"""Drawing to sequence networks: everything that a fault current meets on its way, cold and hot."""

import numpy as np
from msgspec import Struct
from numpy.typing import NDArray

from app.model import assumed, taps
from app.model.conductors import has_neutral
from app.model.drawing import Drawing, Limits
from app.model.fault_data import LOW_V, PLAIN_V, Put, fault_value, star_earth_ohm
from app.model.fields import fields_of
from app.model.kinds import Branch, Element, Line, OverheadLine, Supply, Switch, Transformer
from app.model.levels import SPLIT
from app.model.wire_data import neutral_value
from app.study.fault_feeders import feeders
from app.study.fault_plain import plain_branches
from app.study.fault_ways import Ways, with_equivalent, with_feeders
from app.study.graph import NONE, Layout, arrays_of
from app.study.line_wires import ZERO_FIELDS
from app.study.outcome import Assumption
from app.study.overhead import sequence_of, series_of
from app.study.zones import Zones
from solver import fault, line, transformer
from solver.sequence import Sequence

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
NEUTRAL_R = "neutral_resistance_ohm_per_km"


class FaultRows(Struct, frozen=True):
    """Both sequence networks, the voltage factors, and whatever had to be assumed for them.

    one : Sequence, columns: highest currents, least currents, highest at the equivalent frequency
    zero : Sequence, columns: highest currents, least currents
    fed : as `one`, with the motors and sets that feed the highest currents; None where there are none
    c_max, c_min : (node,) float, voltage factors
    nominal_v : (node,) float [V]
    two_wire : (node,) bool
    known : (node,) bool, fed, and by supplies whose fault level is stated
    assumptions : of everything that was not given
    counted : ids of the motors and sets that are counted
    """

    one: Sequence
    zero: Sequence
    fed: Sequence | None
    c_max: Real
    c_min: Real
    nominal_v: Real
    two_wire: NDArray[np.bool_]
    known: NDArray[np.bool_]
    assumptions: tuple[Assumption, ...]
    counted: tuple[str, ...]


def voltage_factors(nominal_v: Real, limits: Limits) -> tuple[Real, Real]:
    """Voltage factors for the highest and the least currents.

    Up to 1 kV: cmax 1.05, or 1.10 where the limits allow +10 %; cmin 0.95, or 0.90 where they allow −10 %.
    Above: 1.10 and 1.00.

    nominal_v : (node,) float [V]
    limits : of the drawing; between the steps of the table the nearer one counts

    Returns : cmax, cmin (node,) float
    Source : IEC 60909-0:2016, Table 1 (from memory)
    """
    low = nominal_v <= LOW_V
    most = 1.10 if limits.high_percent > 108 else 1.05
    least = 0.90 if limits.low_percent < 92 else 0.95
    return np.where(low, most, 1.10), np.where(low, least, 1.00)


def fault_rows(drawing: Drawing, layout: Layout, zones: Zones) -> FaultRows:
    """Both sequence networks of a drawing; loads and capacitors are left out, motors and sets not marked too.

    Lines: R at 20 °C for the highest currents, hot for the least. Transformers: at their rated ratio, times
    KT for the highest currents. Supplies: Z = c · U² / S.

    drawing : the drawing; nothing of it bars a solution
    layout : its graph
    zones : nominal_v (zone,) float [V], two_wire (tree,) bool

    Returns : FaultRows
    Source : IEC 60909-0:2016, 5.3 and 6 (from memory)
    """
    graph = arrays_of(layout)
    nominal, two_wire = zones.nominal_v[graph.zone], zones.two_wire[graph.tree]
    c_max, c_min = voltage_factors(nominal, drawing.limits)
    made = _Made(drawing, nominal, two_wire, c_max, c_min)
    plain = plain_branches(layout, zones)
    for row, branch in enumerate(layout.branches):
        if not graph.live[graph.start[row]] or isinstance(branch, Switch) and not branch.closed:
            continue
        ends = int(graph.start[row]), int(graph.end[row])
        if not plain[row]:
            made.note(layout.branch_ids[row], branch, ends)
        elif isinstance(branch, Line):
            made.line(layout.branch_ids[row], branch, ends)
        elif isinstance(branch, Transformer):
            made.transformer(layout.branch_ids[row], branch, ends)
        else:
            made.one.branch(ends, np.zeros(3, dtype=complex))
            made.zero.branch(ends, np.zeros(2, dtype=complex))
    for row in layout.supplies:
        supply = layout.attachments[row]
        assert isinstance(supply, Supply)
        made.supply(layout.attachment_ids[row], supply, layout.at[row])
    one, zero = made.one.network(len(nominal)), made.zero.network(len(nominal))
    known = _known(layout)[graph.tree] & graph.live
    also = feeders(layout, nominal, c_max, known & _met(one))
    fed = with_feeders(one, also) if also else None
    told, counted = tuple(made.assumptions), tuple(feeder.id for feeder in also)
    return FaultRows(one, zero, fed, c_max, c_min, nominal, two_wire, known, told, counted)


def _met(one: Sequence) -> NDArray[np.bool_]:
    """(node,) whether a branch or a supply of the sequence network stands there."""
    found = np.zeros(one.node_count, dtype=bool)
    for nodes in (one.branch_from, one.branch_to, one.earth_node):
        found[nodes] = True
    return found


def is_stated(supply: Supply) -> bool:
    """Whether a supply states any fault level.

    supply : any

    Returns : bool
    """
    return supply.fault_level_max_mva is not None or supply.fault_level_min_mva is not None


def _known(layout: Layout) -> NDArray[np.bool_]:
    """(tree,) whether every supply that feeds a tree, or is joined to it, states its fault level."""
    group = list(range(len(layout.roots)))

    def first(tree: int) -> int:
        while group[tree] != tree:
            tree = group[tree]
        return tree

    for ring in layout.rings:
        if ring.supplies:
            one, other = (layout.tree[layout.at[s]] for s in ring.supplies)
            group[first(other)] = first(one)
    known = np.array([supply != NONE for supply in layout.supply_of], dtype=bool)
    for row in layout.supplies:
        supply = layout.attachments[row]
        if isinstance(supply, Supply) and not is_stated(supply):
            known[first(layout.tree[layout.at[row]])] = False
    return np.array([known[first(tree)] for tree in range(len(group))], dtype=bool)


class _Made:
    """Puts element by element into both networks and notes what was assumed."""

    def __init__(
        self,
        drawing: Drawing,
        nominal: Real,
        two_wire: NDArray[np.bool_],
        c_max: Real,
        c_min: Real,
    ) -> None:
        self.one, self.zero = Ways(3), Ways(2)
        self.assumptions: list[Assumption] = []
        self._frequency = drawing.frequency_hz
        self._nominal, self._two_wire, self._c_max, self._c_min = nominal, two_wire, c_max, c_min

    def _value(self, id: str, element: Element, name: str, nominal: float) -> float:
        value = fault_value(element, name, nominal, self._frequency)
        if not isinstance(value, Put):
            return value
        unit = fields_of(type(element))[name].unit
        self.assumptions.append(Assumption(id, name, value.value, unit, value.basis))
        return value.value

    def note(self, id: str, branch: Branch, ends: tuple[int, int]) -> None:
        """What is assumed for a branch whose conductors are looked at one by one."""
        hung = isinstance(branch, OverheadLine) and branch.hung_at_m
        for name in ("fault_degc",) if hung else ("fault_degc", *ZERO_FIELDS):
            if isinstance(branch, Line):
                self._value(id, branch, name, float(self._nominal[ends[0]]))

    def line(self, id: str, run: Line, ends: tuple[int, int]) -> None:
        nominal, two_wire = float(self._nominal[ends[0]]), bool(self._two_wire[ends[0]])
        hot, alpha = self._value(id, run, "fault_degc", nominal), line.ALPHA[run.conductor]
        degrees = np.array([20.0, hot, 20.0])
        if isinstance(run, OverheadLine) and run.hung_at_m:
            self._hung_line(id, run, ends, degrees)
            return
        z = line.series(
            run.resistance_ohm_per_km,
            run.reactance_ohm_per_km,
            run.length_m,
            degrees,
            alpha,
            run.side_by_side,
            two_wire,
        )
        self.one.branch(ends, with_equivalent(z))
        r0, x0 = (self._value(id, run, name, nominal) for name in ZERO_FIELDS)
        if not two_wire:
            self.zero.branch(ends, line.series(r0, x0, run.length_m, degrees[:2], alpha, run.side_by_side))

    def _hung_line(self, id: str, run: OverheadLine, ends: tuple[int, int], degrees: Real) -> None:
        """Both sequences from the spacing; a neutral that hangs there without its resistance is assumed."""
        nominal, two_wire = float(self._nominal[ends[0]]), bool(self._two_wire[ends[0]])
        if has_neutral(run) and isinstance(put := neutral_value(run, NEUTRAL_R), Put):
            self.assumptions.append(Assumption(id, NEUTRAL_R, put.value, "Ω/km", put.basis))
        how = self._frequency, nominal
        one = np.array([series_of(run, two_wire, *how, float(at)) for at in degrees], np.complex128)
        self.one.branch(ends, with_equivalent(one))
        if not two_wire:
            zero = np.array([sequence_of(run, *how, float(at))[1] for at in degrees[:2]], np.complex128)
            self.zero.branch(ends, zero * run.length_m / 1e3 / run.side_by_side)

    def transformer(self, id: str, t: Transformer, ends: tuple[int, int]) -> None:
        rating, pk = t.rating_kva * 1e3, assumed.value(t, "load_loss_w")
        z = complex(transformer.short_circuit(t.uk_percent, pk, rating, t.v2_v))
        c = self._c_max[min(ends, key=lambda n: self._nominal[n])]
        kt = float(fault.correction(rating, t.v2_v, z, c))
        both = np.array([z * kt, z, z * kt]).astype(np.complex128) / float(t.side_by_side)
        group = taps.group(t.vector_group)
        assert group is not None  # barred before
        ratio = t.v1_v / t.v2_v
        self.one.branch(ends, with_equivalent(both), ratio * np.exp(1j * np.pi / 6 * group[2]))
        if group[0] != "I":
            self._zero_of(id, t, ends, both[:2], group[2])

    def _zero_of(self, id: str, t: Transformer, ends: tuple[int, int], z: Complex, hours: int) -> None:
        earths = [star_earth_ohm(t, winding) for winding in (1, 2)]
        path = fault.zero_path(t.vector_group, earths[0] is not None, earths[1] is not None)
        if not any(path):
            return
        ratio = t.v1_v / t.v2_v
        own = z * self._value(id, t, "z0_ratio", t.v2_v)
        at_1, at_2 = (3 * (ohms or 0.0) / t.side_by_side for ohms in earths)
        if path.through:
            self.zero.branch(ends, own + at_2 + at_1 / ratio**2, ratio * (-1 if hours % 4 == 2 else 1))
        if path.earth_1:
            self.zero.earth(ends[0], own * ratio**2 + at_1)
        if path.earth_2:
            self.zero.earth(ends[1], own + at_2)

    def supply(self, id: str, supply: Supply, node: int) -> None:
        if not is_stated(supply):
            return
        volts, levels = supply.nominal_v, ("fault_level_max_mva", "fault_level_min_mva")
        most, least = (self._value(id, supply, name, volts) * 1e6 for name in levels)
        ratio = self._value(id, supply, "xr", volts)
        current = np.array([most, least, most]) / (3**0.5 * volts)
        c = np.array([self._c_max[node], self._c_min[node], self._c_max[node]])
        z = fault.feeder(volts, current, c, ratio)
        if supply.wires == SPLIT or (bool(self._two_wire[node]) and volts <= PLAIN_V):
            self._value(id, supply, "z0_ratio", volts)
        if supply.wires == SPLIT:
            return
        self.one.earth(node, with_equivalent(z))
        if bool(self._two_wire[node]) or (supply.z0_ratio is None and volts > LOW_V):
            return
        self.zero.earth(node, z[:2] * self._value(id, supply, "z0_ratio", volts))
