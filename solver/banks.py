"""Single-phase transformers between any two conductors: alone, as banks, as open delta, with a centre tap."""

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from solver.arrays import Complex, Flag, Real
from solver.windings import NEUTRAL, K, Unit, even
from solver.wires import EARTH


class Coil(NamedTuple):
    """One single-phase unit of a bank.

    one : conductors at which winding 1 begins and ends, 0 to 3, -1 for earth
    two : conductors of winding 2
    v1 : [V] no-load volts across winding 1, at its tap
    v2 : [V] across winding 2
    z_at_2 : [ohm] seen at winding 2
    y : [S] at the terminals of winding 1 and of winding 2
    """

    one: tuple[int, int]
    two: tuple[int, int]
    v1: ArrayLike
    v2: ArrayLike
    z_at_2: ArrayLike
    y: tuple[ArrayLike, ArrayLike] = (0.0, 0.0)


Earthed = tuple[int, complex] | None


def bank(coils: Sequence[Coil], earth_1: Earthed = None, earth_2: Earthed = None) -> Unit:
    """Single-phase units as one two-port, whichever side is fed.

    Coil volts are e = N V · turns. The far side has V' = G (e - z i) with i = K I', where G is the inverse of
    its incidence N' against its earthed conductor, and K shares the current of a closed delta by the
    impedances round it. Coils closed in a ring on the far side draw a current of their own where the fed
    volts do not sum to nothing.

    coils : each a Coil; those of a side hang together, and close one ring at most
    earth_1 : conductor and [ohm] to earth at winding 1, None where nothing is earthed there
    earth_2 : the same at winding 2
    Returns : Unit
    Raises : ValueError where the coils of a side do not hang together
    Source : Kersting, Distribution System Modeling and Analysis, ch. 8
    """
    incidence = _incidence([c.one for c in coils]), _incidence([c.two for c in coils])
    volts = even([_row(c.v1) for c in coils]).real, even([_row(c.v2) for c in coils]).real
    volts = volts[0][:, 0], volts[1][:, 0]
    z = even([_row(c.z_at_2) for c in coils])[:, 0]
    earths = earth_1, earth_2
    ways = []
    for fed, far in ((0, 1), (1, 0)):
        seen = z if far else z * (volts[0] / volts[1]) ** 2
        turns: Complex = np.asarray(volts[far] / volts[fed], dtype=complex)
        ways.append(_way(incidence[fed], incidence[far], turns, seen, earths[fed], earths[far]))
    gain, series, loose, own, own_z = (even([w[i] for w in ways]) for i in range(5))
    iron = [
        sum(
            _row(c.y[side])[0] * np.einsum("i,j->ij", n, n)[..., None]
            for c, n in zip(coils, rows, strict=True)
        )
        for side, rows in enumerate(incidence)
    ]
    has = np.array([rows.any(axis=0) for rows in incidence])
    return Unit(gain, series, even(iron), has, loose[..., 0].real, own[..., 0].real, own_z)


def centre_tapped(
    one: tuple[int, int],
    v1: ArrayLike,
    v2: ArrayLike,
    z_at_2: ArrayLike,
    earth: complex | None = 0.0,
    y_at_1: ArrayLike = 0.0,
) -> Unit:
    """A single-phase unit with a centre tap, its halves interlaced: hot a, hot b, and the neutral between.

    Z0 = 0.5 R + j 0.8 X on the way to winding 1, Z1 = Z2 = R + j 0.4 X in each half, seen at one half

    one : conductors of winding 1
    v1 : (batch or 1,) float [V] across winding 1
    v2 : (batch or 1,) float [V] across both halves
    z_at_2 : (batch or 1,) complex [ohm] R + jX of the whole unit seen across both halves
    earth : [ohm] between the centre tap and earth; None where it is not earthed
    y_at_1 : (batch or 1,) complex [S] magnetising admittance at winding 1
    Returns : Unit
    Source : Kersting, Distribution System Modeling and Analysis, section 8.12 (from memory)
    """
    whole, primary = _row(z_at_2)[0] / 4, _incidence([one])[0]
    common, half = 0.5 * whole.real + 0.8j * whole.imag, whole.real + 0.4j * whole.imag
    turns = _row(v1)[0].real / (_row(v2)[0].real / 2) + 0j
    hot = np.array([1.0, -1.0, 0, 0])
    series = np.einsum("i,j,b->ijb", hot, hot, common) + np.diag((1.0, 1, 0, 0))[..., None] * half
    back = np.einsum("i,j,b->ijb", primary, primary, turns**2 * (common + half / 2))
    neutral = np.zeros((2, K, 1), dtype=complex)
    reference = np.array([1.0, 1, 0, 1])
    if earth is None:
        neutral[0, :, 0] = reference
    else:
        series = series + np.einsum("i,j->ij", reference, reference)[..., None] * earth
    own, own_z = np.zeros((2, K, 1), dtype=complex), np.zeros((2, whole.size), dtype=complex)
    own[0, :, 0], own_z[0] = (1, 1, 0, -2), 2 * half
    if earth is not None:
        own[1, NEUTRAL], own_z[1] = 1, earth
    back_loose = np.zeros((2, K, 1), dtype=complex)
    if EARTH not in one:
        back_loose[0, :, 0] = np.abs(primary)
    iron = np.einsum("i,j,b->ijb", primary, primary, _row(y_at_1)[0])
    return Unit(
        gain=even(
            [
                np.einsum("i,j,b->ijb", hot, primary, 1 / turns),
                np.einsum("i,j,b->ijb", primary / (primary**2).sum(), hot / 2, turns),
            ]
        ),
        series=even([series, back / (primary**2).sum() ** 2]),
        iron=even([iron, 0 * iron]),
        has=np.array([primary != 0, reference != 0]),
        loose=even([neutral, back_loose])[..., 0].real,
        own=even([0 * own, own])[..., 0].real,
        own_z=even([0 * own_z, own_z]),
    )


def _row(values: ArrayLike) -> Complex:
    return np.atleast_1d(np.asarray(values, dtype=complex))[None]


def _incidence(pairs: Sequence[tuple[int, int]]) -> Real:
    """(coil, k) +1 where a coil begins, -1 where it ends; earth is no conductor."""
    found = np.zeros((len(pairs), K))
    for row, (one, other) in zip(found, pairs, strict=True):
        if one != EARTH:
            row[one] += 1
        if other != EARTH:
            row[other] -= 1
    return found


def _way(
    fed: Real, far: Real, turns: Complex, z: Complex, fed_earth: Earthed, far_earth: Earthed
) -> tuple[Complex, ...]:
    """Gain, series impedance, loose ways, own currents and their impedance, with one side fed."""
    touched: Flag = np.asarray(far.any(axis=0))
    grounded = bool((far.sum(axis=1) != 0).any())
    held = touched.copy()
    if far_earth is not None:
        held[far_earth[0]] = False
    against = np.zeros((K, len(far)))
    against[held] = np.linalg.pinv(far[:, held])
    if np.linalg.matrix_rank(far) != touched.sum() - (not grounded):
        raise ValueError("the coils of a bank must hang together on each side")
    loose, own = np.zeros((2, K, 1), dtype=complex), np.zeros((2, K, 1), dtype=complex)
    if far_earth is None and not grounded:
        loose[0, touched] = 1
    ring, around = _ring(far, z)
    share = np.eye(len(far))[..., None] - np.einsum("c,d,db->cdb", ring, ring, z) / around
    current = np.einsum("cdb,dk->ckb", share, against.T)
    gain = np.einsum("ckb,cb,cj->kjb", current, turns, fed)
    series = np.einsum("kc,cb,cjb->kjb", against, z, current)
    if far_earth is not None:
        series = series + np.einsum("i,j->ij", 1.0 * touched, 1.0 * touched)[..., None] * far_earth[1]
    own_z = np.zeros((2, z.shape[-1]), dtype=complex)
    drawn = np.einsum("cb,c,ck->kb", turns / turns[0], ring, fed)[:, :1]
    if np.abs(drawn).max() > 1e-9:
        own[0], own_z[0] = drawn, around / turns[0] ** 2
    if fed_earth is not None:
        own[1, fed_earth[0]], own_z[1] = 1, fed_earth[1]
    return gain, series, loose, own, own_z


def _ring(far: Real, z: Complex) -> tuple[Real, Complex]:
    """(coil,) way round the coils that close a ring, noughts where none do, and the impedance round it."""
    left, size, _ = np.linalg.svd(far)
    rank = int((size > 1e-9).sum())
    if rank == len(far):
        return np.zeros(len(far)), np.ones(z.shape[-1], dtype=complex)
    ring = left[:, rank]
    ring = ring / np.abs(ring).max()
    return ring, np.einsum("c,cb->b", ring**2, z)
