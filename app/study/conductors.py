"""Which conductors reach every node, run in every branch and feed every attachment."""

from msgspec import Struct

from app.model import wire_data
from app.model.conductors import is_hung, wires_of
from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch, Line, Regulator, Supply, Switch, Transformer
from app.model.levels import SPLIT, THREE_PHASE, TWO_WIRE
from app.study.graph import NONE, Layout
from app.study.leads import Leads, Ways, leads_of, ways_of
from app.study.memory import Memory
from app.study.unit_wires import UnitWires, unit_wires
from app.study.wires import ABC, NEUTRAL, OF_SYSTEM, N, bits
from app.study.zones import Zones
from solver.wires import EARTH


class Conductors(Struct, frozen=True):
    """Conductors as bits: A 1, B 2, C 4, N 8.

    node : per node row, those that a supply reaches
    drawn : per node row, those that stand there, a lost neutral among them
    branch : per branch row, those it has; of a transformer those at both windings together
    units : branch row of each live transformer to the conductors at its windings
    leads : attachment row of each live attachment to the conductors between which it hangs
    earthed : node rows at lines whose neutral is earthed along them
    ways : all leads one below the other
    """

    node: list[int]
    drawn: list[int]
    branch: list[int]
    units: dict[int, UnitWires]
    leads: dict[int, Leads]
    earthed: list[int]
    ways: Ways


def is_wired(drawing: Drawing, layout: Layout, zones: Zones) -> bool:
    """Whether phases have to be solved one by one: something live is not alike on all three.

    drawing : the drawing
    layout : its graph
    zones : system (zone,) of each zone

    Returns : bool; false for balanced three-phase and for plain two-wire layouts
    """
    root = [zones.system[layout.zone[node]] for node in layout.roots]
    for zone, head in enumerate(layout.zone_heads):
        system = zones.system[zone]
        if layout.live[head] and (system == SPLIT or system != root[layout.tree[head]]):
            return True
    if TWO_WIRE in root and (_earth_matters(drawing, layout) or _unlike_back(layout, zones)):
        return True
    odd = [layout.start[row] for row, plain in enumerate(_plain_branch.of(layout.branches)) if not plain]
    odd += [layout.at[row] for row, plain in enumerate(_plain_hung.of(layout.attachments)) if not plain]
    return any(layout.live[node] and zones.system[layout.zone[node]] == THREE_PHASE for node in odd)


def _earth_matters(drawing: Drawing, layout: Layout) -> bool:
    return drawing.limits.neutral_v is not None or any(n.earth_ohm is not None for n in layout.nodes)


def _unlike_back(layout: Layout, zones: Zones) -> bool:
    """Whether any line of a two-wire part comes back through something else than an equal wire."""
    odd = [layout.start[row] for row, plain in enumerate(_plain_back.of(layout.branches)) if not plain]
    return any(layout.live[node] and zones.system[layout.zone[node]] == TWO_WIRE for node in odd)


def _equal_back(branch: Branch) -> bool:
    if not isinstance(branch, Line) or is_hung(branch):
        return True
    stated = (
        branch.neutral_resistance_ohm_per_km,
        branch.neutral_reactance_ohm_per_km,
        branch.return_resistance_ohm_per_km,
    )
    return branch.neutral in ("usual", "carried") and all(value is None for value in stated)


def _alike(branch: Branch) -> bool:
    if isinstance(branch, Transformer):
        return branch.build in ("as its group", "centre-tapped")  # the systems of its sides say the rest
    return not isinstance(branch, Line) or branch.phases == "all"


def _balanced(hung: Attachment) -> bool:
    if getattr(hung, "phases", "all") != "all":
        return False
    third = 100 / 3
    shares = getattr(hung, "share_a_percent", None), getattr(hung, "share_b_percent", None)
    return all(share is None or abs(share - third) < 1e-12 for share in shares)


_plain_back: Memory[Branch, bool] = Memory(_equal_back)
_plain_branch: Memory[Branch, bool] = Memory(_alike)
_plain_hung: Memory[Attachment, bool] = Memory(_balanced)


def conductors_of(layout: Layout, zones: Zones) -> Conductors:
    """Every conductor as far as it is drawn: from supplies and windings along the lines that have it.

    A line has the phases it states, or as many as reach it; a switch or regulator lets all through. Where
    nothing has changed that bears on them, those of the last call are taken over.

    layout : the graph, live parts
    zones : nominal_v (zone,) float [V], system (zone,)

    Returns : Conductors
    """
    global _last
    levels = zones.system, zones.nominal_v.tobytes()
    bearing = *levels, _told_branch.of(layout.branches), _told_hung.of(layout.attachments)
    last = _last
    if last is not None and last[0] is layout.order and last[1] == bearing:
        return last[2]
    found = _Walk(layout, zones).conductors()
    _last = (layout.order, bearing, found)
    return found


def _of_branch(branch: Branch) -> tuple[object, ...]:
    """All of a branch that bears on conductors."""
    if isinstance(branch, Line):
        return branch.phases, branch.neutral, wires_of(branch)
    if isinstance(branch, Transformer):
        return branch.build, branch.phases, branch.vector_group, branch.v1_v, branch.v2_v
    return (type(branch),)


def _of_hung(hung: Attachment) -> tuple[object, ...]:
    names = ("wires", "phases", "connection", "share_a_percent", "share_b_percent")
    return type(hung), *(getattr(hung, name, None) for name in names)


_told_branch: Memory[Branch, tuple[object, ...]] = Memory(_of_branch)
_told_hung: Memory[Attachment, tuple[object, ...]] = Memory(_of_hung)
_last: tuple[list[int], tuple[object, ...], Conductors] | None = None


class _Walk:
    """Goes round the layout until nothing more is reached."""

    def __init__(self, layout: Layout, zones: Zones) -> None:
        self.layout, self.zones = layout, zones
        count = len(layout.nodes)
        self.node, self.drawn = [0] * count, [0] * count
        self.neutral = [
            self._neutral(row, b) if isinstance(b, Line) else "" for row, b in enumerate(layout.branches)
        ]
        self.may = [self._allowed(row, branch) for row, branch in enumerate(layout.branches)]
        along = [row for row, kind in enumerate(self.neutral) if kind == "earthed along"]
        ends = {layout.start[row] for row in along} | {layout.end[row] for row in along}
        self.earthed = self._joined(ends)
        self.to_earth = self._joined(self.earthed | {layout.at[row] for row in layout.supplies})
        self.units: dict[int, UnitWires] = {}
        self.feeders = set(layout.fed_by)

    def conductors(self) -> Conductors:
        layout = self.layout
        self._supplied()
        self._neutrals()
        before = None
        while before != (state := (list(self.node), list(self.drawn), dict(self.units))):
            before = state
            self._pass()
        branch = [self._has(row, b) if self._is_live(row, b) else 0 for row, b in enumerate(layout.branches)]
        leads = {row: self._leads(row, hung) for row, hung in enumerate(layout.attachments)}
        live = {row: found for row, found in leads.items() if found is not None}
        self._forget(live)
        earthed = sorted(self.earthed)
        return Conductors(self.node, self.drawn, branch, self.units, live, earthed, ways_of(live))

    def _forget(self, leads: dict[int, Leads]) -> None:
        """A neutral that nothing reaches and nothing hangs on has no volts that anybody could tell."""
        lost = [n for n, has in enumerate(self.drawn) if has & NEUTRAL and not self.node[n] & NEUTRAL]
        if lost and not any(self._on_neutral(row, found, lost) for row, found in leads.items()):
            for node in lost:
                self.drawn[node] &= ABC

    def _on_neutral(self, row: int, leads: Leads, nodes: list[int]) -> bool:
        return self.layout.at[row] in nodes and any(N in pair for pair in leads.pairs)

    def system(self, node: int) -> str:
        return self.zones.system[self.layout.zone[node]]

    def _allowed(self, row: int, branch: Branch) -> int:
        """Conductors that a line, switch or regulator can lead on."""
        if not isinstance(branch, Line):
            return 0 if isinstance(branch, Transformer) else ABC | NEUTRAL
        phases = ABC if branch.phases == "all" else bits(branch.phases)
        return phases | (NEUTRAL if self.neutral[row] == "carried" else 0)

    def _neutral(self, row: int, line: Line) -> str:
        node = self.layout.start[row]
        nominal = float(self.zones.nominal_v[self.layout.zone[node]])
        return wire_data.neutral_of(line, nominal, self.system(node) != THREE_PHASE)

    def _joined(self, nodes: set[int]) -> set[int]:
        """Some nodes, and all that switches and regulators join to them."""
        layout = self.layout
        bare = [row for row, b in enumerate(layout.branches) if isinstance(b, Switch | Regulator)]
        ends = [{layout.start[r], layout.end[r]} for r in bare if getattr(layout.branches[r], "closed", True)]
        while more := [pair for pair in ends if len(pair & nodes) == 1]:
            nodes = nodes.union(*more)
        return nodes

    def _is_live(self, row: int, branch: Branch) -> bool:
        closed = not isinstance(branch, Switch) or branch.closed
        return closed and self.layout.live[self.layout.start[row]] and self.layout.live[self.layout.end[row]]

    def _supplied(self) -> None:
        for row in self.layout.supplies:
            supply, node = self.layout.attachments[row], self.layout.at[row]
            assert isinstance(supply, Supply)
            self.node[node] |= OF_SYSTEM[supply.wires] | NEUTRAL
            low = wire_data.is_low(float(self.zones.nominal_v[self.layout.zone[node]]))
            self.drawn[node] |= OF_SYSTEM[supply.wires]
            self.drawn[node] |= NEUTRAL if low or supply.wires != THREE_PHASE else 0

    def _neutrals(self) -> None:
        """Neutrals stand where lines carry them, whether or not anything reaches them."""
        for row, branch in enumerate(self.layout.branches):
            if isinstance(branch, Line) and self.may[row] & NEUTRAL and self._is_live(row, branch):
                self.drawn[self.layout.start[row]] |= NEUTRAL
                self.drawn[self.layout.end[row]] |= NEUTRAL

    def _pass(self) -> None:
        layout = self.layout
        feeders = [layout.fed_by[node] for node in layout.order if layout.fed_by[node] != NONE]
        rest = sorted({b for ring in layout.rings for b in ring.branches} - self.feeders)
        for row in (*feeders, *rest):
            branch = layout.branches[row]
            if not self._is_live(row, branch):
                continue
            start, end = layout.start[row], layout.end[row]
            if isinstance(branch, Transformer):
                self._across(row, branch, start, end)
                continue
            led = self.may[row] & (self.node[start] | self.node[end])
            if not isinstance(branch, Line):
                stand = (self.drawn[start] | self.drawn[end]) & NEUTRAL
                led &= ABC | stand
                self.drawn[start] |= stand
                self.drawn[end] |= stand
            for node in (start, end):
                self.node[node] |= led
                self.drawn[node] |= led

    def _across(self, row: int, unit: Transformer, start: int, end: int) -> None:
        ends = (start, end)
        found = unit_wires(
            unit,
            [self.system(n) for n in ends],
            [self.drawn[n] for n in ends],
            [float(self.zones.nominal_v[self.layout.zone[n]]) for n in ends],
            fed=1 if self.layout.fed_by[start] == row else 0,
        )
        if found is None:
            return
        self.units[row] = found
        for node, has in zip(ends, (found.one, found.two), strict=True):
            if self.layout.fed_by[node] == row or row not in self.feeders:
                self.node[node] |= has
                self.drawn[node] |= has
            self.drawn[node] |= has & NEUTRAL

    def _has(self, row: int, branch: Branch) -> int:
        if isinstance(branch, Transformer):
            unit = self.units.get(row)
            return 0 if unit is None else unit.one | unit.two
        start, end = self.layout.start[row], self.layout.end[row]
        both = self.drawn[start] & self.drawn[end]
        phases = self.may[row] & self.node[start] & self.node[end] & ABC
        return phases | (self.may[row] & both & NEUTRAL)

    def _leads(self, row: int, hung: Attachment) -> Leads | None:
        node = self.layout.at[row]
        if isinstance(hung, Supply) or not self.layout.live[node]:
            return None
        return leads_of(hung, self.system(node), self.node[node], self.back(node))

    def back(self, node: int) -> int | None:
        """Where a load between phase and neutral goes back: the neutral, earth, or nowhere."""
        if self.drawn[node] & NEUTRAL:
            return N
        return EARTH if node in self.to_earth else None
