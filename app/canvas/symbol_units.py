"""What the symbol of a transformer says of its build: centre tap, open banks, star points to earth.

After IEC 60617 and ANSI/IEEE 315 (from memory of both): an open bank is a delta or star with a limb missing.
"""

import math

from PySide6.QtCore import QPointF
from PySide6.QtGui import QPainterPath

from app.model.fault_data import stated_earth_ohm
from app.model.kinds import Transformer

STEPPING = "↕"  # in the variant of a transformer whose tap changer steps by itself
TAPPED, OPEN_DELTA, OPEN_STAR = "⊥", "∠", "⋎"
EARTHS = ("⏚", "⏛")  # of winding 1, of winding 2
_BUILDS = {"centre-tapped": TAPPED, "open delta": OPEN_DELTA, "open star to open delta": OPEN_STAR}


def variant(unit: Transformer) -> str:
    """Its vector group and the signs of all that its symbol shows besides."""
    signs = _BUILDS.get(unit.build, "") + (STEPPING if unit.regulates != "no" else "")
    given = (stated_earth_ohm(unit, winding) for winding in (1, 2))
    return (
        unit.vector_group
        + signs
        + "".join(s for s, ohm in zip(EARTHS, given, strict=True) if ohm is not None and ohm < math.inf)
    )


def path(*strokes: tuple[tuple[float, float], ...]) -> QPainterPath:
    """Strokes through points."""
    made = QPainterPath()
    for first, *rest in strokes:
        made.moveTo(*first)
        for point in rest:
            made.lineTo(*point)
    return made


def earth(x: float, y: float, turn: float = 0.0) -> QPainterPath:
    """The sign of earth hanging from a point; `turn` leans its lead aside."""
    foot = (x + turn, y + 7)
    bars = [
        ((foot[0] - w, foot[1] + k), (foot[0] + w, foot[1] + k)) for w, k in ((6, 0), (3.8, 3.2), (1.5, 6.4))
    ]
    return path(((x, y), foot), *bars)


def connections(variant: str) -> tuple[QPainterPath | None, QPainterPath | None]:
    """The small sign of either winding: delta, star, zigzag, one with its middle led out, a limb missing."""
    if TAPPED in variant:
        return _single(), _middle()
    if OPEN_DELTA in variant:
        return _open_delta(), _open_delta()
    if OPEN_STAR in variant:
        return _open_star(), _open_delta()
    made = [_CONNECTION[c.lower()]() for c in variant if c in "DYZdyz"]
    return (made[0], made[1]) if len(made) > 1 else (None, None)


def _delta() -> QPainterPath:
    return path(((0, -4.6), (4.4, 3), (-4.4, 3), (0, -4.6)))


def _star() -> QPainterPath:
    return path(((0, 0), (0, 4.8)), ((0, 0), (-4.2, -3.4)), ((0, 0), (4.2, -3.4)))


def _zigzag() -> QPainterPath:
    return path(((-3.5, -4), (3.5, -4), (-3.5, 4), (3.5, 4)))


def _single() -> QPainterPath:
    return path(((0, -5), (0, 5)))


def _middle() -> QPainterPath:
    return path(((-2, -5), (-2, 5)), ((-2, 0), (4, 0)))


def _open_delta() -> QPainterPath:
    return path(((4.4, 3.2), (-4.4, 3.2), (0, -4.6)))


def _open_star() -> QPainterPath:
    return path(((-4.6, -4), (0, 3), (4.6, -4)))


_CONNECTION = {"d": _delta, "y": _star, "z": _zigzag}


def signs(variant: str, aside: float, y: float) -> tuple[tuple[QPointF, QPainterPath], ...]:
    """The signs of both windings, `aside` to either side of the middle."""
    made = zip((-1, 1), connections(variant), strict=True)
    return tuple((QPointF(side * aside, y), sign) for side, sign in made if sign is not None)


def earths(variant: str, aside: float, y: float) -> QPainterPath:
    """The star points that are earthed as stated."""
    made = QPainterPath()
    for side, sign in zip((-1, 1), EARTHS, strict=True):
        if sign in variant:
            made.addPath(earth(side * aside, y))
    return made
