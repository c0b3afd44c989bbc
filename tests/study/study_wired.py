"""A drawing with phases and neutral as plain rows for the independent four-wire solution of tests/solver.

It reads the drawing itself: which conductor goes where, every ohm and every volt by formulas of its own, and
shares nothing with app.study or solver but the classes in which rows are written down.
"""

import math

import numpy as np
from msgspec.structs import replace
from wired import EARTH, Bank, CentreTapped, Layout, N, Unit
from wired_nodal import solution

from app.model import assumed
from app.model.drawing import Own
from app.model.kinds import Branch, Capacitor, Generator, Line, Load, Motor, Node, Supply, Switch, Transformer
from solver.windings import Winding

ALPHA = {"Cu": 0.00393, "Al": 0.00403}
ROUND = {"AB": (0, 1), "BC": (1, 2), "CA": (2, 0)}
TURN = np.exp(-2j * np.pi / 3)


class Wired:
    """Nodes by their row; `at` has for each the phases that reach it, its system and its nominal volts."""

    def __init__(self, drawing, case=0):
        self.drawing, self.case, e = drawing, drawing.cases[case], drawing.elements
        self.row = {id: n for n, id in enumerate(i for i, x in e.items() if isinstance(x, Node))}
        self.branches = {i: b for i, b in e.items() if isinstance(b, Branch)}
        self.at, self.neutral, self.along = {}, set(), set()
        self.sides = {}
        self.layout, self.line_row = Layout(len(self.row), []), {}
        for s in e.values():
            if isinstance(s, Supply):
                self.supply(s)
        for id, hung in e.items():
            if isinstance(hung, Load | Motor | Generator | Capacitor):
                self.hang(id, hung)
        for id, node in e.items():
            if isinstance(node, Node) and node.earth_ohm is not None:
                self.layout.earths.append((self.row[id], N, complex(node.earth_ohm)))

    def supply(self, s):
        id = next(i for i, e in self.drawing.elements.items() if e is s)
        own = self.case.own.get(id, Own()).percent
        volts = s.nominal_v * s.held_percent * (self.case.supply_percent if own is None else own) / 1e4
        volts = volts * np.exp(1j * math.radians(s.angle_deg))
        shape = {
            "three-phase": np.array([1, TURN, TURN**2, 0]) / 3**0.5,
            "two-wire": np.array([1, 0, 0, 0]),
            "split-phase": np.array([0.5, -0.5, 0, 0]),
        }
        self.layout.sources.append((self.row[s.node], volts * shape[s.wires]))
        phases = {"three-phase": "ABC", "two-wire": "A", "split-phase": "AB"}[s.wires]
        self.at[s.node] = (phases, s.wires, s.nominal_v)
        if s.nominal_v <= 1000 or s.wires != "three-phase":
            self.neutral.add(s.node)
        self.spread(s.node)

    def spread(self, here):
        phases, system, nominal = self.at[here]
        for id, b in self.branches.items():
            if here not in (b.start, b.end) or id in self.sides:
                continue
            if isinstance(b, Switch) and not b.closed:
                continue
            there = b.end if here == b.start else b.start
            self.sides[id] = here
            if isinstance(b, Transformer):
                self.across(b, here, there)
            else:
                self.line_row[id] = len(self.layout.lines)
                led = [p for p in phases if isinstance(b, Switch) or b.phases == "all" or p in b.phases]
                back = self.line(b, led, system, nominal) if isinstance(b, Line) else self.switch(b, led)
                self.at.setdefault(there, ("".join(led), system, nominal))
                if back:
                    self.neutral |= {b.start, b.end}
            self.spread(there)

    def switch(self, b, led):
        has = ["ABC".index(p) for p in led] + ([N] if self.neutral & {b.start, b.end} else [])
        self.layout.lines.append((self.row[b.start], self.row[b.end], has, 0.0))
        return N in has

    def line(self, b, led, system, nominal):
        """Ohms of the conductors it has; whether a neutral is carried."""
        warm = 1 + ALPHA[b.conductor] * (assumed.value(b, "temperature_degc") - 20)
        km = b.length_m / 1e3 / b.side_by_side
        has = ["ABC".index(p) for p in led]
        own = complex(b.resistance_ohm_per_km * warm, b.reactance_ohm_per_km) * km
        carried = b.neutral == "carried"
        if b.neutral == "usual":
            carried = nominal <= 1000 or system != "three-phase"
        z = np.eye(len(has)) * own
        if b.neutral == "earthed along":
            self.along.add(b.end)
            r0 = (b.zero_resistance_ohm_per_km - b.resistance_ohm_per_km) + b.resistance_ohm_per_km * warm
            zero = complex(r0, b.zero_reactance_ohm_per_km) * km
            z = z + (zero - own) / 3
        if carried:
            r = b.neutral_resistance_ohm_per_km
            x = b.neutral_reactance_ohm_per_km
            r = b.resistance_ohm_per_km if r is None else r
            x = b.reactance_ohm_per_km if x is None else x
            z = np.block([[z, np.zeros((len(has), 1))], [np.zeros((1, len(has))), complex(r * warm, x) * km]])
            has = [*has, N]
        farads = (b.capacitance_uf_per_km or 0.0) * 1e-6 * b.length_m / 1e3 * b.side_by_side
        y = 2j * math.pi * self.drawing.frequency_hz * farads * np.diag([1.0 * (c != N) for c in has])
        self.layout.lines.append((self.row[b.start], self.row[b.end], has, z, y))
        return carried

    def across(self, t, here, there):
        factor = 1 + t.tap * t.notch_percent / 100
        v1, v2 = (t.v1_v * factor, t.v2_v) if t.tapped == "winding 1" else (t.v1_v, t.v2_v * factor)
        rated = t.rating_kva * 1e3 / t.side_by_side**-1
        low = t.v2_v if t.tapped == "winding 1" else v2  # ohms stay on the winding without taps
        r = assumed.value(t, "load_loss_w") * t.side_by_side * t.v2_v**2 / rated**2
        x = math.sqrt((t.uk_percent / 100 * t.v2_v**2 / rated) ** 2 - r**2)
        z = complex(r, x) * (low / t.v2_v) ** 2
        phases, system, _ = self.at[here]
        start, end = self.row[t.start], self.row[t.end]
        if t.build == "centre-tapped":
            one = self.ends(t, phases, system, here)
            self.at[there] = ("AB", "split-phase", t.v2_v)
            self.layout.units.append(CentreTapped(start, end, one, v1, v2, z, t.earth_2_ohm or 0.0))
            self.neutral.add(there)
        elif t.build == "open delta":
            pairs = [
                pair for name, pair in ROUND.items() if name != (t.phases if t.phases != "all" else "CA")
            ]
            coils = [(p, p, v1, v2, 2 * z) for p in pairs]
            self.at[there] = ("ABC", "three-phase", t.v2_v)
            corner = None if t.earth_2_ohm is None else (1, t.earth_2_ohm)
            self.layout.units.append(Bank(start, end, coils, None, corner))
        elif t.vector_group.startswith("I"):
            one = self.ends(t, phases, system, here)
            self.at[there] = ("ABC"[one[0]], "two-wire", t.v2_v)
            self.layout.units.append(
                Bank(start, end, [(one, (one[0], N), v1, v2, z)], None, (N, t.earth_2_ohm or 0.0))
            )
            self.neutral.add(there)
        else:
            self.three_phase(t, v1, v2, z, here, there)

    def ends(self, t, phases, system, here):
        if t.phases in ROUND:
            return ROUND[t.phases]
        chosen = phases[0] if t.phases == "all" else t.phases
        return "ABC".index(chosen), N if here in self.neutral else EARTH

    def three_phase(self, t, v1, v2, z, here, there):
        far = "YZ"
        one, rest = (
            (t.vector_group[:2], t.vector_group[2:])
            if t.vector_group[1] == "N"
            else (t.vector_group[0], t.vector_group[1:])
        )
        two = rest.rstrip("0123456789")
        clock = int(rest[len(two) :])
        volts = {t.start: t.v1_v, t.end: t.v2_v}
        made = []
        for letters, node, given in ((one, t.start, t.earth_1_ohm), (two.upper(), t.end, t.earth_2_ohm)):
            star = letters.endswith("N")
            out = star and (node in self.neutral or volts[node] <= 1000)
            earth = given if given is not None else 0.0 if star else None
            earth = None if earth is not None and earth >= 1e6 else earth
            made.append(
                Winding(letters[0], out, complex(earth) if earth is not None and letters[0] in far else None)
            )
            if out:
                self.neutral.add(node)
        zero = z * (t.z0_ratio or 10.0) if one[0] == "Y" and two[0] == "y" else None
        self.layout.units.append(Unit(self.row[t.start], self.row[t.end], *made, clock, v1, v2, z, zero=zero))
        self.at[there] = ("ABC", "three-phase", t.v2_v if there == t.end else t.v1_v)
        self.iron(t, made, v1, v2)

    def iron(self, t, made, v1, v2):
        """Magnetising admittance at the winding of higher rated volts, round or to the star point."""
        rated = t.rating_kva * 1e3 * t.side_by_side
        first = t.v1_v >= t.v2_v
        winding, node, volts, plate = (
            (made[0], t.start, v1, t.v1_v) if first else (made[1], t.end, v2, t.v2_v)
        )
        g = assumed.value(t, "no_load_loss_w") * t.side_by_side / volts**2
        size = assumed.value(t, "no_load_current_percent") / 100 * rated / volts**2
        y = complex(g, -math.sqrt(size**2 - g**2))
        matrix = np.zeros((4, 4), dtype=complex)
        for i in range(3):
            if winding.letter == "Y" and winding.held:
                matrix[i, i] += y
                if winding.neutral:
                    matrix[N, N] += y
                    matrix[i, N] -= y
                    matrix[N, i] -= y
            else:
                j = (i + 1) % 3
                for a, b, sign in ((i, i, 1), (j, j, 1), (i, j, -1), (j, i, -1)):
                    matrix[a, b] += sign * y / 3
        assert plate > 0
        self.layout.shunts.append((self.row[node], matrix))

    def hang(self, id, hung):
        phases, system, nominal = self.at[hung.node]
        own = nominal / {"three-phase": 3**0.5, "two-wire": 1, "split-phase": 2}[system]
        back = N if hung.node in self.neutral else EARTH if hung.node in self.along else None
        chosen = phases if hung.phases == "all" else hung.phases
        delta = isinstance(hung, Motor) or getattr(hung, "connection", "star") == "delta"
        if system == "two-wire":
            leads = [("ABC".index(phases[0]), back, 1.0, nominal)]
        elif len(chosen) == 2 and (hung.phases != "all" or delta or back is None):
            pair = ROUND["".join(chosen)] if "".join(chosen) in ROUND else (2, 0)
            leads = [(*pair, 1.0, nominal)]
        elif len(chosen) == 3 and (delta or back is None):
            leads = [
                (*pair, share, nominal) for pair, share in zip(ROUND.values(), self.shares(hung), strict=True)
            ]
        else:
            shares = self.shares(hung) if len(chosen) == 3 else [1 / len(chosen)] * len(chosen)
            leads = [("ABC".index(p), back, s, own) for p, s in zip(chosen, shares, strict=True)]
        self.draw(hung, leads, nominal)

    def shares(self, hung):
        a, b = getattr(hung, "share_a_percent", None), getattr(hung, "share_b_percent", None)
        return [1 / 3] * 3 if a is None else [a / 100, b / 100, 1 - (a + b) / 100]

    def draw(self, hung, leads, nominal):
        id = next(i for i, e in self.drawing.elements.items() if e is hung)
        own = self.case.own.get(id, Own())
        node = self.row[hung.node]
        scale = (self.case.load_percent if own.percent is None else own.percent) / 100
        if isinstance(hung, Capacitor):
            matrix = np.zeros((4, 4), dtype=complex)
            for one, other, share, volts in leads:
                on = float(hung.connected) if own.percent is None else own.percent / 100
                y = 1j * on * share * hung.rating_kvar * 1e3 / volts**2
                matrix[one, one] += y
                if other != EARTH:
                    matrix[other, other] += y
                    matrix[one, other] -= y
                    matrix[other, one] -= y
            self.layout.shunts.append((node, matrix))
            return
        if isinstance(hung, Generator):
            made = self.case.generation_percent if own.percent is None else own.percent
            power = -complex(hung.output_kw, hung.output_kvar) * 1e3 * made / 100
        elif isinstance(hung, Motor):
            kw = hung.rated_kw / hung.efficiency
            power = complex(kw, kw * math.tan(math.acos(hung.power_factor))) * 1e3 * scale
        else:
            factor = hung.power_factor if own.power_factor is None else own.power_factor
            if own.demand_kva is not None or own.demand_kw is not None:
                hung, scale = replace(hung, demand_kva=own.demand_kva, demand_kw=own.demand_kw), 1.0
            kva = hung.demand_kva if hung.demand_kva is not None else hung.demand_kw / factor
            power = kva * 1e3 * scale * complex(factor, math.sqrt(1 - factor**2))
        i, z = (
            (getattr(hung, f"constant_{what}_percent", None) or 0) / 100 for what in ("current", "impedance")
        )
        for one, other, share, volts in leads:
            self.layout.loads.append((node, one, other, share * power, volts, (1 - i - z, i, z)))

    def volts(self):
        """(node, 4) complex volts to earth, nan where there is no conductor."""
        found, volts = solution(self.layout), np.full((len(self.row), 4), complex(np.nan, np.nan))
        assert found is not None
        for name, value in found.items():
            if name[0] == "v":
                volts[name[1], name[2]] = value
        return volts, found
