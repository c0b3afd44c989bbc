"""The shapes of our default symbols, after IEC 60617 or ANSI/IEEE 315 (from memory of both standards).

A branch's symbol runs along x, its start at the left. An attachment's is fed from above.
"""

from collections.abc import Callable
from functools import lru_cache

from msgspec import Struct, field
from msgspec.structs import replace
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QPainterPath

from app.canvas.symbol_units import OPEN_DELTA, OPEN_STAR, STEPPING, TAPPED, earths, signs
from app.canvas.symbol_units import path as _path

STROKE = 2.0
RING = 15.0  # a transformer's winding
ROUND = 18.0  # supply and generator


class Glyph(Struct, frozen=True):
    """One symbol. `half` is how far its terminals lie from its middle."""

    half: float
    strokes: QPainterPath
    solid: QPainterPath = field(default_factory=QPainterPath)
    mask: QPainterPath = field(default_factory=QPainterPath)  # hides the line behind
    letters: str = ""
    letters_y: float = 0.0
    upright: tuple[tuple[QPointF, QPainterPath], ...] = ()  # marks that never turn

    @property
    def box(self) -> QRectF:
        """All of it, with the breadth of its strokes."""
        whole = self.strokes.boundingRect().united(self.solid.boundingRect())
        for at, sign in self.upright:
            whole = whole.united(sign.boundingRect().translated(at))
        return whole.adjusted(-STROKE, -STROKE, STROKE, STROKE)


@lru_cache(maxsize=256)
def glyph(kind: str, symbols: str = "IEC", variant: str = "") -> Glyph:
    """The symbol of a kind; `variant` is open or closed, or what `symbol_units.variant` says of a unit."""
    ansi = symbols == "ANSI"
    draw: dict[str, Callable[[], Glyph]] = {
        "supply": _supply,
        "generator": lambda: _machine("G", ansi),
        "motor": lambda: _machine("M", ansi),
        "load": lambda: _load(ansi),
        "capacitor": lambda: _capacitor(ansi, variant == "open"),
        "transformer": lambda: _tapped(_coils(variant) if ansi else _rings(variant), variant),
        "regulator": lambda: _regulator(ansi),
        "switch": lambda: _switch(ansi, variant == "open"),
        "busbar": _busbar,
        "joint": _joint,
        "cable": lambda: _cable(ansi),
        "overhead_line": lambda: _overhead(ansi),
    }
    return draw[kind]()


def _ring(x: float, y: float, radius: float) -> QPainterPath:
    path = QPainterPath()
    path.addEllipse(QPointF(x, y), radius, radius)
    return path


def _wave(width: float, height: float, y: float = 0.0) -> QPainterPath:
    path = QPainterPath(QPointF(-width, y))
    path.cubicTo(-width * 0.6, y - height * 1.9, -width * 0.4, y - height * 1.9, 0, y)
    path.cubicTo(width * 0.4, y + height * 1.9, width * 0.6, y + height * 1.9, width, y)
    return path


def _supply() -> Glyph:
    ring = _ring(0, 0, ROUND)
    return Glyph(ROUND, ring, mask=ring, upright=((QPointF(), _wave(10, 6)),))


def _joined(*paths: QPainterPath) -> QPainterPath:
    whole = QPainterPath()
    for path in paths:
        whole.addPath(path)
    return whole


def _machine(letter: str, ansi: bool) -> Glyph:
    ring = _ring(0, 0, ROUND)
    if ansi:
        return Glyph(ROUND, ring, mask=ring, letters=letter)
    wave = (QPointF(), _wave(5, 3, y=10))
    return Glyph(ROUND, ring, mask=ring, letters=letter, letters_y=-3, upright=(wave,))


def _load(ansi: bool) -> Glyph:
    head = _path(((-8, -8), (8, -8), (0, 8), (-8, -8)))
    return Glyph(8, head, QPainterPath() if ansi else head, mask=head)


def _capacitor(ansi: bool, apart: bool) -> Glyph:
    lower = _path(((-12, 4), (12, 4)))
    if ansi:
        lower = QPainterPath(QPointF(-12, 9))
        lower.quadTo(0, -1, 12, 9)
    lead = ((0, -12), (0, -4)) if not apart else ((0, -12), (7, -5))
    return Glyph(12, _joined(_path(lead, ((-12, -4), (12, -4)), ((0, 4), (0, 12))), lower))


def _rings(group: str) -> Glyph:
    reach = RING * 0.62
    one, two = _ring(-reach, 0, RING), _ring(reach, 0, RING)
    strokes = _joined(one, two, earths(group, reach + 1, RING))
    return Glyph(reach + RING, strokes, mask=one.united(two), upright=signs(group, reach + 3.5, 0))


def _coils(group: str) -> Glyph:
    half, loop = 18.0, 10.0
    path = _path(((-half, 0), (-8, 0)), ((half, 0), (8, 0)))
    for k in range(4):
        top = (k - 2) * loop
        path.arcMoveTo(QRectF(-8 - loop / 2, top, loop, loop), 90)
        path.arcTo(QRectF(-8 - loop / 2, top, loop, loop), 90, -180)
        path.arcMoveTo(QRectF(8 - loop / 2, top, loop, loop), 90)
        path.arcTo(QRectF(8 - loop / 2, top, loop, loop), 90, 180)
    odd = any(sign in group for sign in (TAPPED, OPEN_DELTA, OPEN_STAR))  # the set leaves others to words
    upright = signs(group, 11, -27) if odd else ()
    return Glyph(half, _joined(path, earths(group, 8 + loop / 2, 20)), upright=upright)


def _tapped(whole: Glyph, variant: str) -> Glyph:
    """The arrow of what can be set, drawn through a transformer that sets itself."""
    if STEPPING not in variant:
        return whole
    return replace(whole, strokes=_joined(whole.strokes, _through(RING + 6)))


def _through(reach: float) -> QPainterPath:
    """An arrow from below left to above right."""
    tip = reach * 0.42
    return _path(
        ((-reach, reach), (reach, -reach)), ((reach - tip, -reach), (reach, -reach), (reach, -reach + tip))
    )


def _regulator(ansi: bool) -> Glyph:
    """One winding that can be set: a ring, or the loops of a coil, with the arrow through it."""
    if not ansi:
        ring = _ring(0, 0, RING)
        return Glyph(RING, _joined(ring, _through(RING + 3)), mask=ring)
    coil = _path(((-22, 0), (-16, 0)), ((22, 0), (16, 0)))
    for k in range(4):
        room = QRectF(-16 + 8 * k, -4, 8, 8)
        coil.arcMoveTo(room, 180)
        coil.arcTo(room, 180, -180)
    return Glyph(22, _joined(coil, _through(13)), mask=_path(((-16, 0), (16, 0))))


def _switch(ansi: bool, apart: bool) -> Glyph:
    tip = 3.2 if ansi else 0.0
    blade = ((-12 + tip * 0.8, -tip * 0.5), (10, -11)) if apart else ((-12 + tip, 0), (12 - tip, 0))
    path = _path(((-20, 0), (-12 - tip, 0)), blade, ((12 + tip, 0), (20, 0)))
    if ansi:
        ends = _joined(_ring(-12, 0, tip), _ring(12, 0, tip))
        return Glyph(20, _joined(path, ends), mask=ends)
    return Glyph(20, _joined(path, _path(((12, -6), (12, 6)))), _ring(-12, 0, 2.6))


def _busbar() -> Glyph:
    bar = QPainterPath()
    bar.addRoundedRect(QRectF(-18, -3, 36, 6), 3, 3)
    return Glyph(18, bar, bar)


def _joint() -> Glyph:
    return Glyph(18, _path(((-18, 0), (18, 0))), _ring(0, 0, 5))


def _cable(ansi: bool) -> Glyph:
    """A run between its two ends: ticks, or the half circles of sealing ends."""
    if not ansi:
        return Glyph(20, _joined(_wave(17, 6), _path(((-17, -5), (-17, 5)), ((17, -5), (17, 5)))))
    ends = QPainterPath()
    for x, way in ((-19, 180), (7, -180)):
        ends.arcMoveTo(QRectF(x, -6, 12, 12), 90)
        ends.arcTo(QRectF(x, -6, 12, 12), 90, way)
    return Glyph(20, _joined(_wave(11, 5), ends))


def _overhead(ansi: bool) -> Glyph:
    """A run on its poles."""
    run = _path(((-20, -4), (20, -4)))
    if ansi:
        poles = _path(
            ((-11, -9), (-11, 11)), ((11, -9), (11, 11)), ((-15, -4), (-7, -4)), ((7, -4), (15, -4))
        )
        return Glyph(20, _joined(run, poles))
    rings = _joined(_ring(-10, -4, 4), _ring(10, -4, 4))
    gaps = _path(((-20, -4), (-14, -4)), ((-6, -4), (6, -4)), ((14, -4), (20, -4)))
    feet = _path(((-10, 0), (-10, 11)), ((10, 0), (10, 11)))
    return Glyph(20, _joined(gaps, rings, feet))
