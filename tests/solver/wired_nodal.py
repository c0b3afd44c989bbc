"""An independent four-wire solution: nodal equations over every conductor, star point and coil, by Newton.

It knows windings as coils on limbs, nothing of two-ports: on each limb all coils have the same volts a turn
and no ampere-turns are left over. It reads the tests' own layout, and shares no formula with the solver.
"""

import itertools

import numpy as np
from scipy.linalg import lstsq
from wired import EARTH, Bank, CentreTapped, N, Unit, balanced

GROUND = None


class Equations:
    """Linear equations of nodes and currents, row by row; loads come on top."""

    def __init__(self):
        self.names, self.rows = {}, []

    def unknown(self, name):
        return self.names.setdefault(name, len(self.names))

    def equation(self, terms, right=0):
        """terms: (unknown name, factor)"""
        self.rows.append((terms, right))

    def current(self, name, out_of, into):
        """Declares a current that flows out of one node and into another."""
        for node, sign in ((out_of, 1), (into, -1)):
            if node is not GROUND:
                self.unknown(node)
                self.kirchhoff.setdefault(node, []).append((name, sign))
        self.unknown(name)

    kirchhoff: dict


def assemble(layout, point=0):
    def at(value):
        value = np.asarray(value)
        return value[..., min(point, value.shape[-1] - 1)] if value.ndim else value

    eq = Equations()
    eq.kirchhoff = {}
    for s, (node, volts) in enumerate(layout.sources):
        volts = np.asarray(volts)
        volts = at(volts) if volts.ndim == 2 else volts
        for i in range(4):
            eq.current(("source", s, i), GROUND, ("v", node, i))
            eq.equation([(("v", node, i), 1)], volts[i])
    for row, (a, b, has, z, *y) in enumerate(layout.lines):
        z = np.asarray(z, dtype=complex) * (np.eye(len(has)) if np.ndim(z) == 0 else 1)
        for i, c in enumerate(has):
            eq.current(("line", row, c), ("v", a, c), ("v", b, c))
            terms = [(("v", a, c), 1), (("v", b, c), -1)]
            eq.equation(terms + [(("line", row, d), -z[i, j]) for j, d in enumerate(has)])
            if y:
                for node in (a, b):
                    eq.current(("charge", row, node, c), ("v", node, c), GROUND)
                    terms = [(("v", node, d), np.asarray(y[0])[i, j] / 2) for j, d in enumerate(has)]
                    eq.equation([(("charge", row, node, c), -1), *terms])
    for row, (node, c, z) in enumerate(layout.earths):
        eq.current(("earth", row), ("v", node, c), GROUND)
        eq.equation([(("v", node, c), 1), (("earth", row), -at(z))])
    for row, (node, y) in enumerate(layout.shunts):
        for i in range(4):
            if np.any(np.asarray(y)[i]):
                eq.current(("shunt", row, i), ("v", node, i), GROUND)
                terms = [(("v", node, j), np.asarray(y)[i, j]) for j in range(4) if np.asarray(y)[i, j]]
                eq.equation([(("shunt", row, i), -1), *terms])
    for row, unit in enumerate(layout.units):
        {Unit: _unit, Bank: _bank, CentreTapped: _centre_tapped}[type(unit)](eq, row, unit, at)
    return eq


def _terminal(node, conductor):
    return GROUND if conductor == EARTH else ("v", node, conductor)


def _coil(eq, row, limb, name, turns, one, other, z):
    """A coil of so many turns on a limb, with an impedance in series."""
    eq.current(name, one, other)
    ends = [(end, sign) for end, sign in ((one, 1), (other, -1)) if end is not GROUND]
    eq.equation([*ends, (name, -z), (("flux", row, limb), -turns)])
    eq.unknown(("flux", row, limb))
    eq.kirchhoff.setdefault(("turns", row, limb), []).append((name, turns))


def _bank(eq, row, unit, at):
    for limb, (one, two, v1, v2, z, *_) in enumerate(unit.coils):
        for side, (node, ends, volts, own) in enumerate(
            ((unit.start, one, at(v1), 0), (unit.end, two, at(v2), at(z)))
        ):
            ends = [_terminal(node, c) for c in ends]
            _coil(eq, row, limb, ("coil", row, side, limb), volts, *ends, own)
    for side, (node, earth) in enumerate(((unit.start, unit.earth_1), (unit.end, unit.earth_2))):
        if earth is not None:
            eq.current(("starearth", row, side), ("v", node, earth[0]), GROUND)
            eq.equation([(("v", node, earth[0]), 1), (("starearth", row, side), -earth[1])])


def _centre_tapped(eq, row, unit, at):
    v1, half, whole = at(unit.v1), at(unit.v2) / 2, at(unit.z) / 4
    ends = [_terminal(unit.start, c) for c in unit.one]
    common = complex(0.5 * whole.real, 0.8 * whole.imag) * (v1 / half) ** 2
    each = complex(whole.real, 0.4 * whole.imag)
    _coil(eq, row, 0, ("coil", row, 0, 0), v1, *ends, common)
    a, b, n = (("v", unit.end, c) for c in (0, 1, N))
    _coil(eq, row, 0, ("coil", row, 1, 0), half, a, n, each)
    _coil(eq, row, 0, ("coil", row, 1, 1), half, n, b, each)
    if unit.earth is not None:
        eq.current(("starearth", row, 1), n, GROUND)
        eq.equation([(n, 1), (("starearth", row, 1), -unit.earth)])


def _coils(side, name, node, volts):
    """Coils on limbs: (limb, turns, node, node), turns per volt between lines; and the star point."""
    phase = [("v", node, i) for i in range(3)]
    star = ("v", node, N) if side.neutral and side.letter != "D" else (name, "star")
    found = []
    for i in range(3):
        if side.letter == "Y":
            found.append((i, volts / 3**0.5, phase[i], star))
        elif side.letter == "D":
            found.append((i, volts, phase[i], phase[(i + 1) % 3]))
        else:
            found.append((i, volts / 3, phase[i], (name, "half", i)))
            found.append(((i + 1) % 3, -volts / 3, (name, "half", i), star))
    return found, star


def _phase_lead(side):
    """Angle of terminal a over the limb volts, from the coils themselves, limbs a third of a turn apart."""
    limb = balanced(1.0)[:3]
    if side.letter == "Y":
        return np.angle(limb[0])
    if side.letter == "Z":
        return np.angle(limb[0] - limb[1])
    v = np.linalg.lstsq(np.array([[1, -1, 0], [0, 1, -1], [-1, 0, 1]]), limb, rcond=None)[0]
    return np.angle(v[0])


def _unit(eq, row, unit, at):
    v1, v2, z = at(np.atleast_1d(unit.v1)), at(np.atleast_1d(unit.v2)), at(np.atleast_1d(unit.z))
    wanted = -np.pi / 6 * unit.clock + _phase_lead(unit.one) - _phase_lead(unit.two)
    for moved, sign in itertools.product(range(3), (1, -1)):
        turn = np.angle(sign * balanced(1.0)[moved])
        if abs(np.angle(np.exp(1j * (turn - wanted)))) < 1e-6:
            break
    else:
        raise AssertionError("no such clock number")
    zigzag = unit.one.letter == "Z"
    for side, (winding, node, volts) in enumerate(((unit.one, unit.start, v1), (unit.two, unit.end, v2))):
        coils, star = _coils(winding, ("unit", row, side), node, volts)
        if winding.letter != "D":
            eq.unknown(star)
            if winding.earth is not None:
                eq.current(("starearth", row, side), star, GROUND)
                eq.equation([(star, 1), (("starearth", row, side), -winding.earth)])
        for number, (limb, turns, one, other) in enumerate(coils):
            if side == 1:  # limbs of winding 2 go to other terminals, or the other way round
                limb, turns = (limb + moved) % 3, turns * sign
            name = ("coil", row, side, number)
            own = 0
            if side == (0 if zigzag else 1):
                own = z * {"Y": 1, "D": 3, "Z": 0.5}[winding.letter] * ((v1 / v2) ** 2 if zigzag else 1)
            _coil(eq, row, limb, name, turns, one, other, own)
    if unit.zero is not None:
        for limb in range(3):
            share = v2**2 / 3 / at(np.atleast_1d(unit.zero)) / 3
            eq.kirchhoff[("turns", row, limb)] += [(("flux", row, other), -share) for other in range(3)]


def solution(layout, point=0, tolerance=1e-12, start=None, sweeps=60):
    """{name: value} of all volts and currents at one operating point; None where Newton does not settle."""
    eq = assemble(layout, point)
    for node, *pair, _, _, _ in ((row[0], row[1], row[2], 0, 0, 0) for row in layout.loads):
        for c in pair:
            if c != EARTH:
                eq.unknown(("v", node, c))
                eq.kirchhoff.setdefault(("v", node, c), [])
    for terms, _ in eq.rows:
        for name, _ in terms:
            eq.unknown(name)
    order = list(eq.kirchhoff)
    count = len(order) + len(eq.rows)
    a, b = np.zeros((count, len(eq.names)), dtype=complex), np.zeros(count, dtype=complex)
    where = {node: i for i, node in enumerate(order)}
    for node, terms in eq.kirchhoff.items():
        for name, sign in terms:
            a[where[node], eq.names[name]] += sign
    for i, (terms, right) in enumerate(eq.rows, len(order)):
        b[i] = right
        for name, factor in terms:
            a[i, eq.names[name]] += factor
    b[: len(order)] = 0
    size = np.abs(a).max(axis=1)
    x = lstsq(a / size[:, None], b / size)[0] if start is None else start(eq.names)
    for _ in range(sweeps):
        drawn, straight, turned = _drawn(layout, point, eq, where, x, a.shape)
        miss = (a @ x + drawn - b) / size
        plus = (a + straight + turned) / size[:, None]
        minus = (a + straight - turned) / size[:, None]
        real = np.block([[plus.real, -minus.imag], [plus.imag, minus.real]])
        column = np.maximum(np.abs(real).max(axis=0), 1e-300)
        step = (
            lstsq(real / column, np.concatenate((miss.real, miss.imag)), cond=1e-13, lapack_driver="gelsy")[0]
            / column
        )
        step = step[: x.size] + 1j * step[x.size :]
        x = x - step
        volts = [i for name, i in eq.names.items() if name[0] == "v"]
        if np.abs(step[volts]).max() < tolerance * np.abs(x[volts]).max():
            return {name: x[i] for name, i in eq.names.items()}
    return None


def _drawn(layout, point, eq, where, x, shape):
    drawn = np.zeros(shape[0], dtype=complex)
    straight, turned = np.zeros(shape, dtype=complex), np.zeros(shape, dtype=complex)
    for node, near, far, power, reference, (p, i, z) in layout.loads:
        s = np.conj(np.atleast_1d(power)[min(point, np.atleast_1d(power).size - 1)])
        ends = [(("v", node, near), 1)] + ([(("v", node, far), -1)] if far != EARTH else [])
        u = sum(sign * x[eq.names[name]] for name, sign in ends)
        current, slope, other = z * s / reference**2 * u, z * s / reference**2, 0
        if p or i:
            current += p * s / np.conj(u) + i * s / reference * u / abs(u)
            slope += i * s / reference / (2 * abs(u))
            other = -p * s / np.conj(u) ** 2 - i * s / reference * u**2 / (2 * abs(u) ** 3)
        for name, sign in ends:
            drawn[where[name]] += sign * current
            for second, again in ends:
                straight[where[name], eq.names[second]] += sign * again * slope
                turned[where[name], eq.names[second]] += sign * again * other
    return drawn, straight, turned
