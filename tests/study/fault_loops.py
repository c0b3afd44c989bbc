"""The loop that a fault closes between two conductors, out of the independent four-wire solution.

A drawing is made as the fault meets it, cold or hot, its supplies behind a line of their own; then a known
impedance is put between the conductors, and from how far the volts there fall the loop follows.
"""

import math

import numpy as np
from msgspec.structs import replace
from study_wired import Wired
from wired import EARTH, N
from wired_nodal import solution

from app.model import assumed
from app.model.drawing import Drawing
from app.model.kinds import Branch, Line, Node, Supply, Transformer

PUT = 0.05  # ohm
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
        self.idle = solution(self.wired.layout)

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

    def loop(self, node, one, other):
        """Complex [ohm], by how far a known impedance pulls the volts down."""
        row = self.wired.row[node]
        mix = (row, one, other, 1e6 / PUT, 1e3, (0.0, 0.0, 1.0))
        self.wired.layout.loads.append(mix)
        found = solution(self.wired.layout)
        self.wired.layout.loads.pop()
        before, after = (self.across(v, row, one, other) for v in (self.idle, found))
        return PUT * (before / after - 1)

    def across(self, found, row, one, other):
        return found["v", row, one] - (0 if other == EARTH else found["v", row, other])

    def currents(self, node):
        """kA between phases, phase to neutral; phase to earth where only that is there."""
        phases, system, nominal = self.wired.at[node]
        slots = ["ABC".index(p) for p in phases]
        own = self.c(nominal) * nominal / {"three-phase": 3**0.5, "two-wire": 1, "split-phase": 2}[system]
        line = self.c(nominal) * nominal
        pairs = [(a, b) for n, a in enumerate(slots) for b in slots[n + 1 :]]
        two = [line / abs(self.loop(node, a, b)) / 1e3 for a, b in pairs]
        back = N if node in self.wired.neutral else EARTH
        one = [own / abs(self.loop(node, a, back)) / 1e3 for a in slots]
        return two, one, back == N
