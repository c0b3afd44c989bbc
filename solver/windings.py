"""Three-phase transformers with any connection, as two-ports between phases and neutral."""

from collections.abc import Sequence
from dataclasses import dataclass, field, fields
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Flag, Real
from solver.wires import Units

K = 4  # three phases and the neutral
NEUTRAL = 3
ONES = np.ones((3, 1))
MEANLESS = np.eye(3) - 1 / 3  # takes the mean of three phases off
NEXT = np.roll(np.eye(3), 1, axis=1)  # the phase that lags by a third of a turn
DELTA = np.eye(3) - NEXT  # coil volts of a delta from its terminals: ab, bc, ca
ZIGZAG = np.eye(3) - NEXT  # terminal volts of a zigzag from the half coils on its limbs
LEAD = {"Y": 0, "D": -1, "Z": 1}  # hours by which the terminal of phase a leads the coil on its limb
PER_COIL = {"Y": 3**0.5, "D": 1.0, "Z": 3.0}  # line volts over coil volts


class Winding(NamedTuple):
    """How one winding is connected.

    letter : D, Y or Z
    neutral : its star point is brought out to the neutral conductor
    earth : [ohm] between star point and earth; None where it is not earthed
    """

    letter: str
    neutral: bool = False
    earth: complex | None = None

    @property
    def held(self) -> bool:
        """Its star point has a way out."""
        return self.letter != "D" and (self.neutral or self.earth is not None)


@dataclass(frozen=True, slots=True)
class Unit:
    """One transformer as a two-port: a row of `Units`.

    gain : (2, k, k, batch) complex
    series : (2, k, k, batch) complex [ohm]
    iron : (2, k, k, batch) complex [S]
    has : (2, k) bool
    loose : (2, 2, k) float
    own : (2, 2, k) float
    own_z : (2, 2, batch) complex [ohm]
    star : (2,) complex [ohm]
    """

    gain: Complex
    series: Complex
    iron: Complex
    has: Flag
    loose: Real
    own: Real
    own_z: Complex
    star: Complex = field(default_factory=lambda: np.zeros(2, dtype=complex))


def three_phase(
    one: Winding,
    two: Winding,
    clock: int,
    v1: ArrayLike,
    v2: ArrayLike,
    z_at_2: ArrayLike,
    y: ArrayLike = ((0.0,), (0.0,)),
    zero: ArrayLike | None = None,
    z0_over_z1: float = 1.0,
) -> Unit:
    """A three-phase transformer of any connection as a two-port, whichever side is fed.

    Both windings of a limb have the same volts but for the turns: e = H V at the fed side, V' = G e at the
    far one, with H and G made of the connection. So A = G H · turns, and Z is z on each phase, less its mean
    where the winding has no way for a zero sequence. A held star beside a delta, and a held zigzag, draw a
    zero sequence of their own, against z. A star that is not held gives the zero sequence of a held star on
    the other side nothing but the core to go through.

    one : Winding 1
    two : Winding 2
    clock : hours by which winding 2 lags winding 1
    v1 : (batch or 1,) float [V] no-load volts between lines of winding 1, at its tap
    v2 : (batch or 1,) float [V] of winding 2
    z_at_2 : (batch or 1,) complex [ohm] per phase as of a star, seen at winding 2
    y : (2, batch or 1) complex [S] per phase as of a star, at the terminals of each winding
    zero : (batch or 1,) complex [ohm] per phase seen at winding 2, of the core to a zero sequence where a
        star is not held; None where it is beyond all others
    z0_over_z1 : zero over positive sequence of the windings, where the zero sequence passes them
    Returns : Unit
    Raises : ValueError where the clock number cannot come from these letters
    Source : connections as IEC 60076-1:2011, 7 and Annex D; two-port after Kersting, Distribution System
        Modeling and Analysis, ch. 8
    """
    sides, turns = (one, two), (np.eye(3), _turn(clock - LEAD[one.letter] + LEAD[two.letter]))
    volts = np.atleast_1d(np.asarray(v1, dtype=float)), np.atleast_1d(np.asarray(v2, dtype=float))
    z, iron = np.atleast_1d(np.asarray(z_at_2, dtype=complex)), np.asarray(y, dtype=complex)
    core = None if zero is None else np.atleast_1d(np.asarray(zero, dtype=complex))
    ways = []
    for fed, far in ((0, 1), (1, 0)):
        seen = 1.0 if far else (volts[0] / volts[1]) ** 2  # from winding 2 to the far one
        coils = [v / PER_COIL[side.letter] for v, side in zip(volts, sides, strict=True)]
        ratio = coils[far] / coils[fed]
        zs: Complex = np.asarray(z * seen, dtype=complex)
        shape = _far(sides[far], turns[far]) @ _fed(sides[fed], turns[fed])
        own, own_z = _own(sides[fed], sides[far], z0_over_z1 * zs * (volts[fed] / volts[far]) ** 2)
        series = _series(
            sides[fed],
            sides[far],
            zs,
            ratio,
            None if core is None else np.asarray(core * seen, dtype=complex),
            z0_over_z1,
        )
        loose = _loose(sides[fed], sides[far], core is not None)
        ways.append((shape[..., None] * (ratio + 0j), series, loose, own, own_z))
    parts = [even([way[i] for way in ways]) for i in range(5)]
    return Unit(
        gain=parts[0],
        series=parts[1],
        iron=even([_iron(side, row) for side, row in zip(sides, iron, strict=True)]),
        has=np.array([[True, True, True, side.letter != "D" and side.neutral] for side in sides]),
        loose=parts[2][..., 0].real,
        own=parts[3][..., 0].real,
        own_z=parts[4],
        star=np.array([(side.earth or 0) * (side.held and not side.neutral) for side in sides], complex),
    )


def stacked(units: Sequence[Unit]) -> Units:
    """Transformers one below the other, as a network holds them.

    units : (transformer,) each a Unit
    Returns : Units
    """
    if not units:
        return none()
    found: dict[str, Any] = {}
    for name in (f.name for f in fields(Unit)):
        rows = [getattr(unit, name) for unit in units]
        found[name] = np.stack(rows) if name in ("has", "loose", "own", "star") else even(rows)
    return Units(**found)


def passing(has: Sequence[bool]) -> Unit:
    """A step regulator at ratio 1: auto-transformers between phases and neutral, the neutral led through.

    has : (k,) its conductors
    Returns : Unit without impedance; `tapping.retapped` moves its phases against the neutral
    """
    square, flat = np.diag(np.asarray(has, dtype=complex)), np.zeros((2, 2, K))
    nothing = np.zeros((2, K, K, 1), dtype=complex)
    gain = np.stack((square, square))[..., None]
    both = np.array([has, has], dtype=bool)
    return Unit(gain, nothing, nothing, both, flat, flat, np.zeros((2, 2, 1), dtype=complex))


def none() -> Units:
    """No transformers at all.

    Returns : Units without a row
    """
    square, flat = np.zeros((0, 2, K, K, 1), dtype=complex), np.zeros((0, 2, 2, K))
    has = np.zeros((0, 2, K), dtype=bool)
    own_z, star = np.zeros((0, 2, 2, 1), dtype=complex), np.zeros((0, 2), dtype=complex)
    return Units(square, square, square, has, flat, flat, own_z, star)


def even(rows: Sequence[Complex | Real]) -> Complex:
    """Stacks arrays whose last axis, the batch, may be 1.

    rows : arrays (..., batch or 1)
    Returns : (row, ..., batch)
    """
    width = max(row.shape[-1] for row in rows)
    return np.stack([np.broadcast_to(row, (*row.shape[:-1], width)) for row in rows]).astype(complex)


def _turn(hours: int) -> Real:
    """Terminals of winding 2 from those that lead by so many hours: the phases moved on, or reversed."""
    hours %= 12
    if hours % 2:
        raise ValueError("these windings cannot have that clock number")
    reverse = hours % 4 == 2
    return (-1.0) ** reverse * np.linalg.matrix_power(NEXT, (hours - 6 * reverse) // 4 % 3)


def _fed(side: Winding, turn: Real) -> Real:
    """(3, k) coil volts from terminal volts."""
    phases = {"D": DELTA, "Y": np.eye(3) if side.held else MEANLESS, "Z": np.linalg.pinv(ZIGZAG)}[side.letter]
    through = phases @ turn.T
    neutral = -phases @ turn.T @ ONES if side.held and side.neutral else 0 * ONES
    return np.hstack((through, neutral))


def _far(side: Winding, turn: Real) -> Real:
    """(k, 3) terminal volts from coil volts; against the star point, or with no mean."""
    star = np.eye(3) if side.held else MEANLESS
    phases = {"D": np.linalg.pinv(DELTA), "Y": star, "Z": ZIGZAG}[side.letter]
    return np.vstack((turn @ phases, np.zeros((1, 3))))


def _series(
    fed: Winding, far: Winding, z: Complex, ratio: Real, core: Complex | None, z0_over_z1: float
) -> Complex:
    """(k, k, batch) drop at the far side."""
    passed = 1.0 if _blocked(fed, far) else z0_over_z1
    phases = MEANLESS + passed / 3 if far.held else MEANLESS
    matrix = _square(phases)[..., None] * z
    if far.held and far.earth is not None:
        matrix = matrix + _square(np.ones((3, 3)), far.neutral)[..., None] * far.earth
    if _blocked(fed, far):
        matrix = matrix + _square(np.ones((3, 3)) / 3)[..., None] * (0 if core is None else core)
    elif far.held and (fed.letter, far.letter) == ("Y", "Y") and not fed.neutral:
        matrix = matrix + _square(np.ones((3, 3)))[..., None] * (fed.earth or 0) * ratio**2
    return matrix


def _square(phases: Real, neutral: bool = False) -> Real:
    """(k, k) out of (3, 3); with the neutral alike to the phases, or without."""
    matrix = np.full((K, K), 1.0 if neutral else 0.0)
    matrix[:3, :3] = phases
    return matrix


def _blocked(fed: Winding, far: Winding) -> bool:
    """The zero sequence of a held star at the far side finds no balance at the fed one."""
    return far.letter == "Y" and far.held and fed.letter != "D" and not (fed.letter == "Y" and fed.held)


def _loose(fed: Winding, far: Winding, core: bool) -> Real:
    """(2, k, 1) directions of the far side without a reference, and without a way for the current."""
    found = np.zeros((2, K, 1))
    if not far.held or far.earth is None:
        found[0, :3] = 1
        found[0, NEUTRAL] = far.held
    if _blocked(fed, far) and not core:
        found[1, :3] = 1
    return found


def _own(fed: Winding, far: Winding, z: Complex) -> tuple[Real, Complex]:
    """(2, k, 1) and (2, batch) currents that the fed side draws alone: zero sequence, against z, and its
    earthing."""
    how, own_z = np.zeros((2, K, 1)), np.zeros((2, z.shape[-1]), dtype=complex)
    earth = fed.earth or 0
    if fed.held and (fed.letter == "Z" or far.letter == "D"):
        how[0, :3], how[0, NEUTRAL] = 1, -3.0 * fed.neutral
        own_z[0] = 3 * z + (0 if fed.neutral else 9 * earth)
    if fed.held and fed.neutral and fed.earth is not None:
        how[1, NEUTRAL], own_z[1] = 1, earth
    return how, own_z


def _iron(side: Winding, y: Complex) -> Complex:
    """(k, k, batch) magnetising admittance at the terminals."""
    own = _square(np.eye(3) if side.letter == "Y" and side.held else MEANLESS)
    if side.letter == "Y" and side.held and side.neutral:
        own[:3, NEUTRAL] = own[NEUTRAL, :3] = -1
        own[NEUTRAL, NEUTRAL] = 3
    return own[..., None] * y
