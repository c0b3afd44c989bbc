"""Painting the voltage strip."""

from msgspec import Struct
from PySide6.QtCore import QLineF, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPen

from app.canvas.palette import Palette, font
from app.model.drawing import Drawing, label
from app.model.figures import length
from app.model.kinds import Busbar, Transformer
from app.model.taps import by_hand
from app.panels.strip_axes import Axes, Stretch, ticks_m
from app.panels.strip_band import paint_band
from app.panels.strip_phases import PhaseCurve, name_phases, paint_phases
from app.panels.strip_routes import Routes
from app.panels.style import mixed
from app.panels.words import LEFT, RIGHT

CENTRE = Qt.AlignmentFlag.AlignHCenter | Qt.AlignmentFlag.AlignVCenter
HANDLE = 4.6
BEFORE = "before the drag"


class Curve(Struct, frozen=True):
    """One case on the strip."""

    name: str
    stretches: list[Stretch]
    nodes: dict[str, QPointF]


class Shown(Struct, frozen=True):
    """Everything one painting needs; `curves` by case, `before` the shown case when the drag began."""

    drawing: Drawing
    routes: Routes
    axes: Axes
    curves: list[Curve]
    case: int
    before: Curve | None
    selection: frozenset[str]
    hover: str
    held: str  # the transformer whose step is dragged or has the keys
    stale: bool
    phases: list[PhaseCurve]  # of the case shown, where phases are not alike
    system: str
    base_v: float  # that the limits are told in, at the far end; nan where percent say enough


def paint_head(painter: QPainter, width: int, text: str, held: bool, palette: Palette) -> None:
    """The title of the strip and what is told beside it."""
    title = "Volts along the route"
    painter.setFont(font(9, bold=True))
    painter.setPen(palette.ink)
    room = QRectF(18, 8, width - 36, 18)
    painter.drawText(room, int(LEFT), title)
    room.setLeft(room.left() + painter.fontMetrics().horizontalAdvance(title) + 16)
    painter.setFont(font(8.5, bold=held))
    painter.setPen(palette.tap if held else palette.soft)
    metrics = painter.fontMetrics()
    painter.drawText(
        room, int(LEFT), metrics.elidedText(text, Qt.TextElideMode.ElideRight, int(room.width()))
    )


def paint_strip(painter: QPainter, shown: Shown, palette: Palette) -> None:
    """The plot under the head."""
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    paint_band(painter, shown.axes, shown.drawing.limits, palette, shown.base_v)
    _paint_route_axis(painter, shown, palette)
    for case, curve in enumerate(shown.curves):
        if case != shown.case:
            _paint_other_case(painter, curve, case, shown, palette)
    names = name_phases(painter, shown.phases, shown.routes.main, shown.system, palette)
    if len(shown.curves) > 1:
        ink = palette.soft if shown.stale else palette.flow
        _name_curve(painter, shown.curves[shown.case], shown, ink, names)
    for case, curve in enumerate(shown.curves):
        if case != shown.case:
            _name_curve(painter, curve, shown, palette.soft, names)
    if shown.before is not None:
        _paint_before(painter, shown.before, shown, palette, names)
    _paint_curve(painter, shown, palette)
    _paint_handles(painter, shown, palette)
    _paint_names(painter, shown, palette)


def _paint_route_axis(painter: QPainter, shown: Shown, palette: Palette) -> None:
    """Distances from the supply along the main route."""
    routes, axes = shown.routes, shown.axes
    way = [routes.stops[i] for i in routes.main]
    if not way:
        return
    painter.setFont(font(7.5))
    metrics, y = QFontMetricsF(painter.font()), axes.room.bottom() + 31
    free = -1e9
    for distance in ticks_m(way[-1].route_m, axes.room.width()):
        passed = [s for s in way if s.route_m <= distance + 1e-9]
        steps = passed[-1].steps if distance else 0
        x = axes.room.left() + distance * axes.px_per_m + steps * axes.step_px
        text = length(distance) if distance else "0"
        wide = metrics.horizontalAdvance(text)
        if x - wide / 2 < free:
            continue
        free = x + wide / 2 + 8
        painter.setPen(palette.faint)
        painter.drawLine(QPointF(x, axes.room.bottom() + 3), QPointF(x, axes.room.bottom() + 6))
        painter.setPen(palette.soft)
        painter.drawText(QRectF(x - 40, y - 7, 80, 14), int(CENTRE), text)


def _inked(colour: QColor, shown: Shown, palette: Palette) -> QColor:
    return mixed(palette.soft, palette.field, 0.55) if shown.stale else colour


def _polyline(painter: QPainter, stretches: list[Stretch], on: set[str] | None = None) -> None:
    shown = [s.points for s in stretches if on is None or s.node in on]
    painter.drawLines([QLineF(*points) for points in shown if len(points) == 2])
    for points in shown:
        if len(points) > 2:
            painter.drawPolyline(list(points))


def _paint_other_case(painter: QPainter, curve: Curve, case: int, shown: Shown, palette: Palette) -> None:
    """Thin, each case with a dash of its own."""
    dashes: tuple[list[float], ...] = ([], [6.0, 3.0], [2.0, 2.5], [8.0, 3.0, 1.5, 3.0])
    pen = QPen(_inked(palette.soft, shown, palette), 1.2)
    dash = dashes[case % len(dashes)]
    if dash:
        pen.setDashPattern(dash)
    painter.setPen(pen)
    _polyline(painter, curve.stretches, set(shown.routes.main))


def _paint_before(
    painter: QPainter, curve: Curve, shown: Shown, palette: Palette, names: list[QRectF]
) -> None:
    """The curve as it was, and its name where nothing else is."""
    painter.setPen(QPen(palette.tap, 1.2, Qt.PenStyle.DotLine))
    _polyline(painter, curve.stretches, set(shown.routes.main))
    end = curve.nodes.get(shown.routes.main[-1]) if shown.routes.main else None
    now = shown.curves[shown.case].nodes.get(shown.routes.main[-1]) if shown.routes.main else None
    if end is None or now is None or abs(end.y() - now.y()) < 3:
        return
    painter.setFont(font(7.5))
    painter.setPen(palette.soft)
    wide = QFontMetricsF(painter.font()).horizontalAdvance(BEFORE) + 2
    sides = (1, -15) if end.y() > now.y() else (-15, 1)
    rooms = [QRectF(end.x() - wide, end.y() + dy, wide, 14) for dy in sides]
    free = (r for r in rooms if not _crossings(r, shown) and not any(r.intersects(n) for n in names))
    room = next(free, None)
    if room is not None:
        painter.drawText(room, int(RIGHT), BEFORE)


def _paint_curve(painter: QPainter, shown: Shown, palette: Palette) -> None:
    """The case shown: the main route strong, other branches faint, the selection and hover lit."""
    curve, main = shown.curves[shown.case], set(shown.routes.main)
    if shown.phases:
        lit_ids = {shown.hover, *shown.selection}
        paint_phases(painter, shown.phases, main, lit_ids, palette, shown.stale)
        return
    faint = QPen(_inked(mixed(palette.flow, palette.field, 0.4), shown, palette), 1.2)
    painter.setPen(faint)
    _polyline(painter, [s for s in curve.stretches if s.node not in main])
    strong = QPen(_inked(palette.flow, shown, palette), 2.2)
    strong.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
    strong.setCapStyle(Qt.PenCapStyle.RoundCap)
    painter.setPen(strong)
    _polyline(painter, curve.stretches, main)
    for stretch in curve.stretches:
        if stretch.branch == shown.hover or stretch.branch in shown.selection:
            lit = QPen(strong)
            lit.setWidthF(4.2 if stretch.branch in shown.selection else 3.4)
            painter.setPen(lit)
            painter.drawPolyline(list(stretch.points))
    _paint_nodes(painter, curve, shown, palette)


def _paint_nodes(painter: QPainter, curve: Curve, shown: Shown, palette: Palette) -> None:
    for id, at in curve.nodes.items():
        on_main = id in shown.routes.main
        lit = id == shown.hover or id in shown.selection
        if not on_main and not lit:
            continue
        painter.setPen(QPen(_inked(palette.flow, shown, palette), 1.4))
        painter.setBrush(palette.field if not lit else _inked(palette.flow, shown, palette))
        size = 4.2 if lit else 2.6 if isinstance(shown.drawing.elements.get(id), Busbar) else 1.8
        painter.drawEllipse(at, size, size)
    painter.setBrush(Qt.BrushStyle.NoBrush)


def _name_curve(painter: QPainter, curve: Curve, shown: Shown, colour: QColor, names: list[QRectF]) -> None:
    """The case's name at the far end, above or below its line, where no line and no other name is."""
    end = curve.nodes.get(shown.routes.main[-1]) if shown.routes.main else None
    if end is None:
        return
    painter.setFont(font(8, bold=curve is shown.curves[shown.case]))
    painter.setPen(colour)
    wide = min(QFontMetricsF(painter.font()).horizontalAdvance(curve.name), 260.0)
    ends = [end, *_before_steps(curve, shown)]
    rooms = [QRectF(at.x() - wide - 2, at.y() + dy, wide + 2, 14) for at in ends for dy in (-18, 5)]
    room = min(rooms, key=lambda r: _crossings(r, shown) + 3 * sum(r.intersects(n) for n in names))
    names.append(room)
    shown_name = QFontMetricsF(painter.font()).elidedText(curve.name, Qt.TextElideMode.ElideRight, wide + 1)
    painter.drawText(room, int(RIGHT), shown_name)


def _before_steps(curve: Curve, shown: Shown) -> list[QPointF]:
    """Ends of the long stretches of the main route, the last first: where else a name may stand."""
    main = [s for s in curve.stretches if s.node in shown.routes.main and len(s.points) == 2]
    return [s.points[1] - QPointF(8, 0) for s in reversed(main) if s.points[1].x() - s.points[0].x() > 80]


def _crossings(room: QRectF, shown: Shown) -> int:
    """How much would run through a name here."""
    limits, main = shown.drawing.limits, set(shown.routes.main)
    levels = [shown.axes.y(p) for p in (limits.low_percent, limits.high_percent)]
    crossed = 2 * sum(room.top() - 1 <= y <= room.bottom() + 1 for y in levels)
    crossed += 5 * (room.bottom() > shown.axes.room.bottom() + 3)  # names of nodes stand there
    inner = room.adjusted(2, 2, -2, -2)
    drawn = [c.stretches for c in shown.curves] + [p.stretches for p in shown.phases]
    for stretch in (s for stretches in drawn for s in stretches if s.node in main):
        pairs = zip(stretch.points, stretch.points[1:], strict=False)
        crossed += sum(passes(a, b, inner) for a, b in pairs)
    return crossed


def passes(a: QPointF, b: QPointF, room: QRectF) -> bool:
    """True where the straight line between two points passes through a room."""
    left, right = max(min(a.x(), b.x()), room.left()), min(max(a.x(), b.x()), room.right())
    if left > right:
        return False
    run = b.x() - a.x()
    heights = [a.y() + (b.y() - a.y()) * (x - a.x()) / run for x in (left, right)] if run else [a.y(), b.y()]
    return min(heights) <= room.bottom() and max(heights) >= room.top()


def _paint_handles(painter: QPainter, shown: Shown, palette: Palette) -> None:
    """The dot that drags a tap: filled at the fed winding's side of the step, ringed at the other."""
    for stretch in shown.curves[shown.case].stretches:
        if not by_hand(shown.drawing.elements.get(stretch.branch)):
            continue
        held = stretch.branch == shown.held
        near = held or stretch.branch == shown.hover or stretch.branch in shown.selection
        on_main = stretch.node in shown.routes.main
        colour = _inked(palette.tap, shown, palette)
        if not on_main and not near:
            colour = mixed(colour, palette.field, 0.5)
        before, after = stretch.points[1], stretch.points[2]
        painter.setPen(QPen(colour, 1.5))
        painter.drawLine(before, after)
        painter.setBrush(palette.field)
        painter.drawEllipse(before, HANDLE * 0.62, HANDLE * 0.62)
        painter.setBrush(colour)
        size = HANDLE + (1.4 if near else 0)
        painter.drawEllipse(after, size, size)
        if held:
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.setPen(QPen(colour, 1))
            painter.drawEllipse(after, size + 3, size + 3)
    painter.setBrush(Qt.BrushStyle.NoBrush)


def _paint_names(painter: QPainter, shown: Shown, palette: Palette) -> None:
    """Names under the main route, the weightier first; one for which there is no room is left out."""
    taken: list[tuple[float, float]] = []
    y = shown.axes.room.bottom() + 16
    for text, x, strong in _names(shown):
        painter.setFont(font(8, bold=strong))
        wide = QFontMetricsF(painter.font()).horizontalAdvance(text)
        left = _free(x - wide / 2, wide, taken, shown.axes.room.right() + 20)
        if left is None:
            continue
        taken.append((left, left + wide))
        painter.setPen(palette.ink if strong else palette.soft)
        painter.drawText(QRectF(left, y - 8, wide + 2, 15), int(LEFT), text)


def _free(left: float, wide: float, taken: list[tuple[float, float]], right: float) -> float | None:
    """The place nearest to where a name belongs that no other has taken, not far from it."""
    for shift in (0, -8, 8, -14, 14, -20, 20):
        at = min(max(left + shift, 2.0), right - wide)
        if all(at >= b + 6 or at + wide <= a - 6 for a, b in taken):
            return at
    return None


def _names(shown: Shown) -> list[tuple[str, float, bool]]:
    routes, axes, drawing = shown.routes, shown.axes, shown.drawing
    ranked = []
    for k, id in enumerate(routes.main):
        stop = routes.stops[id]
        chosen = id in shown.selection or id == shown.hover
        end = k in (0, len(routes.main) - 1)
        plain_joint = not isinstance(drawing.elements[id], Busbar) and not drawing.elements[id].name
        ranked.append(
            (0 if chosen else 1 if end else 4 if plain_joint else 3, label(drawing, id), axes.x(stop), chosen)
        )
        if stop.steps and isinstance(drawing.elements.get(stop.feeder), Transformer):
            chosen = stop.feeder in shown.selection or stop.feeder == shown.hover
            middle = axes.x(stop) - axes.step_px / 2
            ranked.append((0 if chosen else 2, label(drawing, stop.feeder), middle, chosen))
    ranked.sort(key=lambda r: r[0])
    return [(text if len(text) <= 18 else text[:17] + "…", x, strong) for _rank, text, x, strong in ranked]
