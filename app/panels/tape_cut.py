"""The loss tape before it is painted: what the pieces are and where they lie. No painting here."""

from typing import NamedTuple

from msgspec import Struct

from app.model.drawing import Drawing
from app.model.kinds import Cable, Generator, Load, Motor, OverheadLine, Transformer
from app.panels.strip_routes import column
from app.study.outcome import Outcome

FACTORS = tuple(m * 10**k for k in range(5) for m in (1, 2, 4, 5))
SMALLEST_PX = 9.0  # a piece narrower than this joins the others
LOSS_SHARE = 0.30  # of the tape's width, for the losses drawn larger
GAP = 2.0
FAN = 26.0  # between the bar and the losses drawn larger


class Piece(NamedTuple):
    """One cut of the tape. `ids` are the elements in it; what: load, export, copper, iron, lines, feed."""

    what: str
    ids: tuple[str, ...]
    kw: float
    name: str
    left: float = 0.0
    width: float = 0.0

    def at(self, left: float, width: float) -> "Piece":
        """The same piece with its place."""
        return self._replace(left=left, width=width)


class Cut(Struct, frozen=True):
    """The whole tape. `thread` is where the losses lie in the bar to scale, left and width."""

    bar: tuple[Piece, ...] = ()
    losses: tuple[Piece, ...] = ()
    feeds: tuple[Piece, ...] = ()
    factor: int = 1
    thread: tuple[float, float] = (0.0, 0.0)
    total_kw: float = 0.0
    pieces: tuple[Piece, ...] = ()


def cut(drawing: Drawing, outcome: Outcome, case: int, width: float) -> Cut:
    """Cut the power of all supplies and generators to scale into a width."""
    found = _gather(drawing, outcome, case)
    feeds = found["feed"] + found["infeed"]
    loads = found["load"] + found["export"]
    losses = [piece for what in LOSSES for piece in found[what]]
    total = sum(p.kw for p in loads) + sum(p.kw for p in losses)
    if total <= 0 or width < 120:
        return Cut()
    lost = sum(p.kw for p in losses)
    factor = _factor(lost / total)
    scale = (width - FAN) / (total - lost + lost * (1 + factor)) if factor > 1 else width / total
    bar = _lay(loads, 0.0, scale)
    end = bar[-1].left + bar[-1].width + GAP if bar else 0.0
    thread = (end, max(lost * scale, 1.0))
    laid = _lay(losses, thread[0] + thread[1] + FAN if factor > 1 else end, scale * factor)
    inlets = _lay(feeds, 0.0, (end + thread[1]) / max(sum(p.kw for p in feeds), 1e-12))
    return Cut(bar, laid, inlets, factor, thread, total, (*bar, *laid))


def _factor(share: float) -> int:
    """The largest round factor at which the losses still leave the loads most of the tape."""
    if share <= 0:
        return 1
    most = LOSS_SHARE / (1 - LOSS_SHARE) / share
    fitting = [f for f in FACTORS if f <= most]
    return fitting[-1] if fitting else 1


def _lay(pieces: list[Piece], left: float, scale: float) -> tuple[Piece, ...]:
    """Side by side in order; the small ones of a kind joined into `others n`."""
    kept: list[Piece] = []
    kinds = list(dict.fromkeys(p.what for p in pieces))
    for kind in kinds:
        alike = [p for p in pieces if p.what == kind]
        large = [p for p in alike if p.kw * scale >= SMALLEST_PX]
        small = [p for p in alike if p.kw * scale < SMALLEST_PX]
        if len(small) == 1:
            large, small = large + small, []
        kept += large
        if small:
            ids = tuple(i for p in small for i in p.ids)
            kept.append(Piece(kind, ids, sum(p.kw for p in small), f"others {len(small)}"))
    placed = []
    for piece in kept:
        wide = piece.kw * scale
        placed.append(piece.at(left, max(wide - GAP, min(wide, 1.0))))
        left += wide
    return tuple(placed)


def _gather(drawing: Drawing, outcome: Outcome, case: int) -> dict[str, list[Piece]]:
    """Every piece by what it is, the largest first; what is dead or nought makes no piece."""
    found: dict[str, list[Piece]] = {w: [] for w in ("feed", "infeed", "load", "export", *LOSSES)}
    power = column(outcome.attachments, "kw", case)
    lost = {what: column(outcome.branches, name, case) for what, name in LOSSES.items()}
    for id, element in drawing.elements.items():
        for what in _WHAT.get(type(element), ()):
            kw = (lost[what] if what in lost else power).get(id, 0.0)
            if kw > 0:
                found[what].append(Piece(what, (id,), kw, element.name or id))
    for pieces in found.values():
        pieces.sort(key=lambda p: -p.kw)
    supply = float(outcome.balance.supply_kw[case])
    if supply > 0:
        found["feed"].append(Piece("feed", (), supply, "supply"))
    elif supply < 0:
        found["export"].append(Piece("export", (), -supply, "back to the supply"))
    return found


LOSSES = {"copper": "copper_kw", "iron": "iron_kw", "lines": "loss_kw"}
_WHAT: dict[type, tuple[str, ...]] = {
    Load: ("load",),
    Motor: ("load",),
    Generator: ("infeed",),
    Transformer: ("copper", "iron"),
    Cable: ("lines",),
    OverheadLine: ("lines",),
}
