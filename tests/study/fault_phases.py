"""Fault currents of a drawing once more: three phases to earth in one nodal matrix, solved with SciPy.

It reads the drawing itself, winds every transformer coil by coil, and knows neither sequence networks nor the
table of which connection lets a zero sequence through. Blank fields take the usual stand-ins, restated here.
"""

import cmath
import math

import numpy as np
from scipy.sparse import csc_array
from scipy.sparse.linalg import splu
from study_nodal import ALPHA, Nodal

from app.model import assumed
from app.model.kinds import Generator, Line, Motor, OverheadLine, Supply, Transformer

A = cmath.rect(1, 2 * math.pi / 3)
E = np.array([1, A**2, A])
STRAY = 1e-9  # S from every phase to earth, so that a part without earth can be solved
FIRST_HOUR = {"DY": 11, "YD": 1, "YY": 0, "DD": 0}  # with every coil between the terminals of its own limb


class PhaseFaults(Nodal):
    """All supplies shorted behind their impedance, nothing connected; `at(node)` gives its currents."""

    def __init__(self, drawing, largest, slowed=1.0):
        self.largest, self.slowed = largest, slowed
        super().__init__(drawing)

    def _build(self):
        stars = sum(isinstance(e, Transformer) for e in self.branches.values()) * 2
        self.size = 3 * len(self.places) + stars
        self.free = iter(range(3 * len(self.places), self.size))
        self.matrix = STRAY * np.eye(self.size, dtype=complex)
        for e in self.branches.values():
            if e.start in self.nominal and isinstance(e, Line):
                z = self.line(e)
                self.branch(self.of(e.start), self.of(e.end), np.linalg.inv(phases(*z)))
            elif e.start in self.nominal and isinstance(e, Transformer):
                self.wound(e)
        for s in self.supplies.values():
            self.shorted(s)
        for e in self.drawing.elements.values() if self.largest else ():
            if isinstance(e, Motor) and e.feeds_faults and e.state != "off" and e.starter != "drive":
                self.turning(e, 0.42, 0.15, self.motor_size(e))
            elif isinstance(e, Generator) and e.fault_current is not None:
                self.turning(e, 0.15, 0.07, self.set_size(e))
        self.solved = splu(csc_array(self.matrix))

    def of(self, node):
        return 3 * self.at[self.find(node)] + np.arange(3)

    def factors(self, node):
        low, limits = self.nominal[node] <= 1000, self.drawing.limits
        if not low:
            return 1.10 if self.largest else 1.00
        if self.largest:
            return 1.10 if limits.high_percent > 108 else 1.05
        return 0.90 if limits.low_percent < 92 else 0.95

    def branch(self, one, two, y):
        for a, b, sign in ((one, one, 1), (two, two, 1), (one, two, -1), (two, one, -1)):
            np.add.at(self.matrix, np.ix_(a, b), sign * y)

    def slow(self, z):
        return complex(z.real, z.imag * self.slowed)

    def line(self, e):
        km, bare = e.length_m / 1000 / e.side_by_side, isinstance(e, OverheadLine)
        hot = e.fault_degc if e.fault_degc is not None else 80 if bare else 90
        warm = 1 + ALPHA[e.conductor] * (20 if self.largest else hot) - ALPHA[e.conductor] * 20
        r, x = e.resistance_ohm_per_km, e.reactance_ohm_per_km
        back = e.return_resistance_ohm_per_km
        r0 = e.zero_resistance_ohm_per_km or (r + 3 * back if back is not None else 4 * r)
        x0 = e.zero_reactance_ohm_per_km or (3 if bare else 4) * x
        return self.slow(complex(r * warm, x) * km), self.slow(complex(r0 * warm, x0) * km)

    def wound(self, e):
        """Coil by coil: one of each winding on every limb, coupled by the short-circuit impedance."""
        letters = "".join(c for c in e.vector_group.upper() if c in "DY")
        turn = (int("".join(c for c in e.vector_group if c.isdigit())) - FIRST_HOUR[letters]) % 12
        sign, moved = (-1, (turn - 6) // 4 % 3) if turn % 4 == 2 else (1, turn // 4)
        limbs = np.arange(3)
        coils = []
        for side, letter in enumerate(letters):
            terminals = self.of(e.start if side == 0 else e.end)
            if side == 1:
                terminals = np.roll(terminals, moved)
            given = (e.earth_1_ohm, e.earth_2_ohm)[side]
            earthed = given is not None or "Nn"[side] in e.vector_group
            star = None if letter == "D" or (earthed and not given) else next(self.free)
            if star is not None and earthed:
                self.matrix[star, star] += e.side_by_side / given
            coils.append((terminals, letter, star))
        volts = [
            v / (1 if x == "D" else math.sqrt(3)) for v, x in zip((e.v1_v, e.v2_v), letters, strict=True)
        ]
        n, s = volts[0] / volts[1] * sign, e.rating_kva * 1e3
        size, r = e.uk_percent / 100 * e.v2_v**2 / s, assumed.value(e, "load_loss_w") * e.v2_v**2 / s**2
        z = complex(r, math.sqrt(size**2 - r**2))
        if self.largest:
            low = min((e.start, e.end), key=self.nominal.__getitem__)
            z *= 0.95 * self.factors(low) / (1 + 0.6 * z.imag * s / e.v2_v**2)
        y = e.side_by_side / (self.slow(z) * (3 if letters[1] == "D" else 1))
        stamp = y * np.array([[1 / n**2, -1 / n], [-1 / n, 1]])
        for limb in limbs:
            ways = np.zeros((2, self.size))
            for side, (terminals, letter, star) in enumerate(coils):
                ways[side, terminals[limb]] += 1
                far = terminals[(limb + 1) % 3] if letter == "D" else star
                if far is not None:
                    ways[side, far] -= 1
            self.matrix += ways.T @ stamp @ ways

    def shorted(self, s: Supply):
        levels = (s.fault_level_max_mva, s.fault_level_min_mva)
        mva = levels[0 if self.largest else 1] or levels[1 if self.largest else 0]
        ratio = 10.0 if s.xr is None else s.xr
        size = self.factors(s.node) * s.nominal_v**2 / (mva * 1e6)
        z = self.slow(size * complex(1, ratio) / math.hypot(1, ratio))
        if s.z0_ratio is None and s.nominal_v > 1000:
            y = (np.eye(3) - np.ones((3, 3)) / 3) / z
        else:
            y = np.linalg.inv(phases(z, z * (s.z0_ratio or 1.0)))
        at = self.of(s.node)
        np.add.at(self.matrix, np.ix_(at, at), y)

    def motor_size(self, e):
        volts = e.rated_v or self.nominal[e.node]
        return volts**2 / (e.rated_kw * 1e3 / e.efficiency / e.power_factor) / e.starting_current

    def set_size(self, e):
        rated, share = 1e3 * math.hypot(e.output_kw, e.output_kvar), 1 / e.fault_current
        k = self.factors(e.node) / (1 + share * abs(e.output_kvar) * 1e3 / rated)
        return k * share * self.nominal[e.node] ** 2 / rated

    def turning(self, e, low, high, size):
        """A motor or set: an impedance between its phases, its star point not earthed."""
        ratio = low if self.nominal[e.node] <= 1000 else high
        z = self.slow(size * complex(ratio, 1) / math.hypot(ratio, 1))
        at = self.of(e.node)
        np.add.at(self.matrix, np.ix_(at, at), (np.eye(3) - np.ones((3, 3)) / 3) / z)

    def seen(self, node):
        """(3, 3) impedances that the phases of a node see."""
        asked = np.zeros((self.size, 3), dtype=complex)
        asked[self.of(node), np.arange(3)] = 1
        return self.solved.solve(asked)[self.of(node)]

    def z1(self, node):
        """What a balanced current sees; solved for itself, as nothing of it goes to earth."""
        asked = np.zeros(self.size, dtype=complex)
        asked[self.of(node)] = E
        return E.conj() @ self.solved.solve(asked)[self.of(node)] / 3

    def currents(self, node):
        """kA: three-phase, two-phase, phase to earth, the greater of two phases to earth; and R/X."""
        e = self.factors(node) * self.nominal[node] / math.sqrt(3) * E
        z, z1 = self.seen(node), self.z1(node)
        asked = np.zeros(self.size, dtype=complex)
        asked[self.of(node)] = [0, 1, -1]
        apart = np.array([0, 1, -1]) @ self.solved.solve(asked)[self.of(node)]
        both = np.linalg.solve(z[1:, 1:], e[1:])
        found = e[0] / z1, (e[1] - e[2]) / apart, e[0] / z[0, 0], max(both, key=abs)
        return *(abs(i) / 1e3 for i in found), z1.real / z1.imag


def phases(z1, z0):
    """(3, 3) of a symmetrical element."""
    return (z0 - z1) / 3 * np.ones((3, 3)) + z1 * np.eye(3)
