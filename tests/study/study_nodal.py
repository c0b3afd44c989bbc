"""An independent nodal solution of a drawing: line volts and whole powers, solved with SciPy.

It reads the drawing itself, node by node, and shares no formula and no row with app.study or solver.
"""

import cmath
import math

import numpy as np
from msgspec.structs import replace
from scipy.sparse import csc_array
from scipy.sparse.linalg import splu

from app.model import assumed
from app.model.drawing import Own
from app.model.kinds import (
    Branch,
    Capacitor,
    Generator,
    Line,
    Load,
    Motor,
    Node,
    Regulator,
    Supply,
    Switch,
    Transformer,
)

ALPHA = {"Cu": 0.00393, "Al": 0.00403}


class Nodal:
    """The nodes that a supply reaches, zero-impedance switches merged, one loading case. `notches` says by
    id where regulators stand."""

    def __init__(self, drawing, case=0, notches=None):
        self.drawing, self.case, self.notches = drawing, drawing.cases[case], notches or {}
        elements = drawing.elements
        self.nodes = [i for i, e in elements.items() if isinstance(e, Node)]
        self.branches = {i: e for i, e in elements.items() if isinstance(e, Branch)}
        self.supplies = {i: e for i, e in elements.items() if isinstance(e, Supply)}
        self.merged = {i: i for i in self.nodes}
        for e in self.branches.values():
            if isinstance(e, Switch) and e.closed:
                self.merged[self.find(e.start)] = self.find(e.end)
        self.nominal, self.wires = {}, {}
        self._walk()
        self.places = sorted({self.find(i) for i in self.nominal})
        self.at = {p: k for k, p in enumerate(self.places)}
        self.held = {}
        for s in self.supplies.values():
            own = self.own(s).percent
            level = self.case.supply_percent if own is None else own
            volts = s.nominal_v * s.held_percent * level / 1e4
            self.held[self.at[self.find(s.node)]] = cmath.rect(volts, math.radians(s.angle_deg))
        self._build()

    def find(self, node):
        while self.merged[node] != node:
            node = self.merged[node]
        return node

    def _walk(self):
        """Spread nominal volts and wires from the supplies."""
        waiting = []
        for s in self.supplies.values():
            self.nominal[s.node], self.wires[s.node] = s.nominal_v, s.wires
            waiting.append(s.node)
        while waiting:
            here = waiting.pop()
            for e in self.branches.values():
                if here not in (e.start, e.end) or (isinstance(e, Switch) and not e.closed):
                    continue
                there = e.end if here == e.start else e.start
                if there in self.nominal:
                    continue
                level = self.nominal[here]
                if isinstance(e, Transformer):
                    level = e.v2_v if here == e.start else e.v1_v
                level = self.drawing.elements[there].nominal_v or level
                self.nominal[there], self.wires[there] = level, self.wires[here]
                waiting.append(there)
        for i in list(self.nominal):
            stated = self.drawing.elements[i].nominal_v
            if stated is not None:
                self.nominal[i] = stated

    def _build(self):
        self.y = np.zeros((len(self.places),) * 2, dtype=complex)
        self.stamps = {}
        for i, e in self.branches.items():
            if e.start not in self.nominal or isinstance(e, Switch | Regulator):
                continue
            stamp = self._line(e) if isinstance(e, Line) else self._transformer(i, e)
            ends = [self.at[self.find(e.start)], self.at[self.find(e.end)]]
            np.add.at(self.y, np.ix_(ends, ends), stamp)  # both ends may be one place
            self.stamps[i] = (ends, stamp)
        self._bind()

    def _bind(self):
        """Which place each follows, and how: beyond an ideal regulator volts are those before it, stepped."""
        self.bound = {
            self.at[self.find(e.end)]: (
                self.at[self.find(e.start)],
                1 + self.notches[i] * e.step_percent / 100,
            )
            for i, e in self.branches.items()
            if isinstance(e, Regulator) and e.start in self.nominal
        }
        self.follows = np.zeros(self.y.shape)
        for place in range(len(self.places)):
            led, factor = place, 1.0
            while led in self.bound:
                led, step = self.bound[led]
                factor *= step
            self.follows[place, led] = factor

    def _line(self, e):
        km, out_and_back = e.length_m / 1000, 2 if self.wires[e.start] == "two-wire" else 1
        r = e.resistance_ohm_per_km * (1 + ALPHA[e.conductor] * (assumed.value(e, "temperature_degc") - 20))
        y = e.side_by_side / (complex(r, e.reactance_ohm_per_km) * km * out_and_back)
        c = assumed.value(e, "capacitance_uf_per_km") * 1e-6 * km * e.side_by_side / out_and_back
        half = 1j * math.pi * self.drawing.frequency_hz * c
        return np.array([[y + half, -y], [-y, y + half]])

    def _transformer(self, i, e):
        tap = 1 + e.tap * e.notch_percent / 100
        v1 = e.v1_v * (tap if e.tapped == "winding 1" else 1)
        v2 = e.v2_v * (tap if e.tapped == "winding 2" else 1)
        clock = int("".join(c for c in e.vector_group if c.isdigit()))
        a = v1 / v2 * cmath.exp(1j * math.radians(30 * clock))
        s, pk = e.rating_kva * 1e3, assumed.value(e, "load_loss_w")
        size = e.uk_percent / 100 * v2**2 / s
        r = pk * v2**2 / s**2
        y = e.side_by_side / complex(r, math.sqrt(size**2 - r**2))
        p0, i0 = assumed.value(e, "no_load_loss_w"), assumed.value(e, "no_load_current_percent")
        quiet = e.side_by_side * complex(p0, -math.sqrt((i0 / 100 * s) ** 2 - p0**2))
        stamp = np.array([[y / abs(a) ** 2, -y / a.conjugate()], [-y / a, y]])
        if e.v1_v >= e.v2_v:
            stamp[0, 0] += quiet / v1**2
        else:
            stamp[1, 1] += quiet / v2**2
        return stamp

    def drawn(self, voltage):
        """Current drawn at each place, as conj(S / U) with whole power and line volts."""
        current = np.zeros(len(self.places), dtype=complex)
        for e in self.drawing.elements.values():
            if getattr(e, "node", None) in self.nominal and isinstance(
                e, Load | Motor | Generator | Capacitor
            ):
                k = self.at[self.find(e.node)]
                current[k] += (self.power(e, voltage[k]) / voltage[k]).conjugate()
        return current

    def own(self, e):
        """What the case states of this element alone."""
        id = next(i for i, other in self.drawing.elements.items() if other is e)
        return self.case.own.get(id, Own())

    def power(self, e, volts):
        """Whole power drawn by one attachment at a voltage, VA."""
        nominal, own = self.nominal[e.node], self.own(e)
        if isinstance(e, Capacitor):
            rated = nominal if e.rated_v is None else e.rated_v
            return (
                -1j
                * e.rating_kvar
                * 1e3
                * (abs(volts) / rated) ** 2
                * (e.connected if own.percent is None else own.percent / 100)
            )
        if isinstance(e, Generator):
            made = self.case.generation_percent if own.percent is None else own.percent
            return -complex(e.output_kw, e.output_kvar) * 1e3 * made / 100
        if isinstance(e, Motor):
            return self.motor_power(e, abs(volts) / (e.rated_v or nominal))
        factor = e.power_factor if own.power_factor is None else own.power_factor
        if own.demand_kva is not None or own.demand_kw is not None:
            e, own = replace(e, demand_kva=own.demand_kva, demand_kw=own.demand_kw), Own(percent=100.0)
        kva = e.demand_kva if e.demand_kva is not None else e.demand_kw / factor
        phi = math.acos(factor) * (-1 if e.leading else 1)
        share = self.case.load_percent if own.percent is None else own.percent
        whole = cmath.rect(kva * 1e3 * share / 100, phi)
        i, z = (e.constant_current_percent or 0) / 100, (e.constant_impedance_percent or 0) / 100
        level = abs(volts) / (e.reference_v or nominal)
        return whole * (1 - i - z + i * level + z * level**2)

    def motor_power(self, e, level):
        """Whole power drawn by a motor as it is drawn, VA."""
        whole = e.rated_kw * 1e3 / e.efficiency / e.power_factor
        if e.state == "running":
            percent = self.case.load_percent if self.case.motor_percent is None else self.case.motor_percent
            percent = percent if self.own(e).percent is None else self.own(e).percent
            return cmath.rect(whole * percent / 100, math.acos(e.power_factor))
        if e.state == "off":
            return 0j
        if e.starter == "direct":
            return cmath.rect(whole * e.starting_current * level**2, math.acos(e.starting_power_factor))
        times, factor = (assumed.value(e, f"limited_{n}") for n in ("current", "power_factor"))
        return cmath.rect(whole * times * level, math.acos(factor))

    def solve(self):
        """Line volts of every live node, complex."""
        held = list(self.held)
        free = [k for k in range(len(self.places)) if k not in self.held and k not in self.bound]
        to_free, to_held = self.follows[:, free], self.follows[:, held]
        fixed = to_held @ np.array([self.held[k] for k in held])
        inner = splu(csc_array(to_free.T @ self.y @ to_free))
        pushed = to_free.T @ (self.y @ fixed)
        now = inner.solve(-pushed)
        for _ in range(500):  # the nodal equations, solved for the voltages that the drawn currents leave
            before = now
            now = inner.solve(-pushed - to_free.T @ self.drawn(fixed + to_free @ before))
            moved = np.abs(now / before - 1).max(initial=0.0)
            if moved < 1e-14:
                break
        assert moved < 1e-13
        self.voltage = fixed + to_free @ now
        return {i: self.voltage[self.at[self.find(i)]] for i in self.nominal}

    def branch_power(self, i):
        """Power that enters a branch at its start and at its end, VA."""
        ends, stamp = self.stamps[i]
        volts = self.voltage[ends]
        return volts * np.conj(stamp @ volts)

    def supplied(self):
        """Power of all supplies, VA."""
        total = self.follows.T @ (self.y @ self.voltage + self.drawn(self.voltage))
        return sum(self.voltage[k] * total[k].conjugate() for k in self.held)
