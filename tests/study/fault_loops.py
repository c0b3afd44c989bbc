"""The loop that a fault closes between two conductors, out of the independent four-wire equations.

A drawing is made as the fault meets it, cold or hot, its supplies behind a line of their own; then a current
is drawn from one conductor to another, and how far the volts between them fall is the loop.
"""

import math

import numpy as np
from msgspec.structs import replace
from study_wired import Wired
from wired import EARTH, N
from wired_nodal import assemble

from app.model import assumed
from app.model.drawing import Drawing
from app.model.kinds import Branch, Line, Node, Supply, Transformer

HOT = 90.0


class FaultLoops:
    """Loops of one drawing: largest or least, with the neutral or with the return in its place."""

    def __init__(self, drawing, largest, earth=False):
        self.factor = {True: (1.10, 1.10), False: (0.95, 1.00)}[largest]
        self.largest, self.earth, self.whole = largest, earth, drawing
        supplies = [e for e in drawing.elements.values() if isinstance(e, Supply)]
        self.phased = all(s.wires != "two-wire" for s in supplies)
        if drawing.limits.low_percent < 92:
            self.factor = self.factor if largest else (0.90, 1.00)
        kept = {i: e for i, e in drawing.elements.items() if isinstance(e, Node | Branch | Supply)}
        made = Drawing(elements={i: self.met(e) for i, e in kept.items()}, frequency_hz=drawing.frequency_hz)
        self.wired = Wired(made)
        self.wired.layout.shunts.clear()
        self.behind(made)
        self.solve()

    def c(self, volts):
        return self.factor[volts > 1000]

    def met(self, e):
        if isinstance(e, Line):
            hot = e.fault_degc if e.fault_degc is not None else HOT
            e = replace(e, temperature_degc=20.0 if self.largest else hot, capacitance_uf_per_km=0.0)
            back = e.return_resistance_ohm_per_km
            if e.neutral_resistance_ohm_per_km is None and back is not None and self.phased:
                e = replace(
                    e, neutral_resistance_ohm_per_km=back
                )  # blank: as the return; two wires are alike
            if self.earth and e.neutral != "earthed along":
                r = e.resistance_ohm_per_km if back is None else back
                x = e.reactance_ohm_per_km
                e = replace(e, neutral_resistance_ohm_per_km=r, neutral_reactance_ohm_per_km=x)
            return e
        if isinstance(e, Transformer):
            pk, rated = assumed.value(e, "load_loss_w"), e.rating_kva * 1e3
            x = math.sqrt((e.uk_percent / 100) ** 2 - (pk / rated) ** 2)
            kt = 0.95 * self.c(min(e.v1_v, e.v2_v)) / (1 + 0.6 * x) if self.largest else 1.0
            return replace(e, tap=0, uk_percent=e.uk_percent * kt, load_loss_w=pk * kt)
        return e

    def behind(self, made):
        layout = self.wired.layout
        supplies = [e for e in made.elements.values() if isinstance(e, Supply)]
        for row, s in enumerate(supplies):
            node, volts = layout.sources[row]
            levels = s.fault_level_max_mva, s.fault_level_min_mva or s.fault_level_max_mva
            size = self.c(s.nominal_v) * s.nominal_v**2 / levels[0 if self.largest else 1] / 1e6
            z = size * complex(1, s.xr) / math.hypot(1, s.xr)
            matrix = np.zeros((4, 4), dtype=complex)
            if s.wires == "three-phase":
                z0 = z * (s.z0_ratio or (1.0 if s.nominal_v <= 1000 else 1e6))
                matrix[:3, :3] = (z0 - z) / 3 + z * np.eye(3)
            else:
                legs = [0] if s.wires == "two-wire" else [0, 1]
                matrix[legs, legs] = z / len(legs)
            layout.lines.append((layout.nodes, node, [0, 1, 2, N], matrix))
            layout.sources[row] = (layout.nodes, volts)
            layout.nodes += 1

    def solve(self):
        """The nodal equations of every conductor, star point and coil, solved once for any current."""
        eq = assemble(self.wired.layout)
        for terms, _ in eq.rows:
            for name, _ in terms:
                eq.unknown(name)
        self.order, self.names = {node: i for i, node in enumerate(eq.kirchhoff)}, eq.names
        a = np.zeros((len(self.order) + len(eq.rows), len(eq.names)), dtype=complex)
        for node, terms in eq.kirchhoff.items():
            for name, sign in terms:
                a[self.order[node], eq.names[name]] += sign
        for i, (terms, _) in enumerate(eq.rows, len(self.order)):
            for name, factor in terms:
                a[i, eq.names[name]] += factor
        self.size = np.abs(a).max(axis=1)
        self.inverse = np.linalg.pinv(a / self.size[:, None], rcond=1e-14)

    def loop(self, node, one, other):
        """Complex [ohm], by how far a current of 1 A from one conductor to another pulls the volts down."""
        drawn = np.zeros(len(self.size))
        ends = [(("v", self.wired.row[node], c), sign) for c, sign in ((one, 1), (other, -1)) if c != EARTH]
        for end, sign in ends:
            drawn[self.order[end]] = -sign
        volts = self.inverse @ (drawn / self.size)
        return -sum(sign * volts[self.names[end]] for end, sign in ends)

    def currents(self, node):
        """kA between phases, then as `single`."""
        phases, _, nominal = self.wired.at[node]
        slots = ["ABC".index(p) for p in phases]
        line = self.c(nominal) * nominal
        pairs = [(a, b) for n, a in enumerate(slots) for b in slots[n + 1 :]]
        return [line / abs(self.loop(node, a, b)) / 1e3 for a, b in pairs], *self.single(node)

    def single(self, node):
        """kA of each phase to the neutral, or to earth where there is none; whether there is one."""
        phases, system, nominal = self.wired.at[node]
        slots = ["ABC".index(p) for p in phases]
        own = self.c(nominal) * nominal / {"three-phase": 3**0.5, "two-wire": 1, "split-phase": 2}[system]
        back = N if node in self.wired.neutral else EARTH
        return [own / abs(self.loop(node, a, back)) / 1e3 for a in slots], back == N
