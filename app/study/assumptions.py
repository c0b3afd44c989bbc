"""The ledger of assumed values: fields left blank, figures of the shelf, and levels nobody stated."""

from itertools import chain

from app.model import assumed
from app.model.drawing import Drawing
from app.model.kinds import Element
from app.study.conductors import Conductors
from app.study.layout import Layout, arrays_of
from app.study.outcome import Assumption
from app.study.wire_assumptions import wire_assumptions
from app.study.zones import Zones, level_assumptions, nominal_of

Made = tuple[Assumption, ...]
_last: tuple[list[str], list[Element], list[float], list[Made]] = ([], [], [], [])


def assumptions_of(
    drawing: Drawing, layout: Layout, zones: Zones, conductors: Conductors | None, also: Made
) -> Made:
    """Every value that was not given and what was put in its place.

    drawing : the drawing
    layout : its graph
    zones : nominal_v (zone,) float [V]
    conductors : where phases are solved one by one, else None
    also : what was assumed besides, for fault currents

    Returns : tuple of Assumption: levels first, then branches and attachments in drawing order, then what
        only phases and faults need; each field of an element once
    """
    made = _blank(layout, zones, conductors)
    wired = () if conductors is None else wire_assumptions(drawing, layout, zones, conductors)
    if not wired and not also:
        return made
    found: dict[tuple[str, str], Assumption] = {}
    for one in (*made, *wired, *also):
        found.setdefault((one.id, one.field), one)
    return tuple(found.values())


def _blank(layout: Layout, zones: Zones, conductors: Conductors | None) -> Made:
    global _last
    nominal = nominal_of(layout, zones)
    ids = layout.branch_ids + layout.attachment_ids
    elements: list[Element] = [*layout.branches, *layout.attachments]
    hung = nominal[arrays_of(layout).at]
    if conductors is not None:  # what hangs on one phase alone is stated at the volts of that
        ways = conductors.ways
        hung[ways.row[ways.alone]] /= ways.over[ways.alone]
    volts = [*nominal[arrays_of(layout).start].tolist(), *hung.tolist()]
    old_ids, were, old_volts, last = _last
    if ids == old_ids and volts == old_volts:  # a level that is not a number is never equal
        both = zip(ids, elements, volts, were, last, strict=True)
        made = [done if was is now else _assumed(id, now, level) for id, now, level, was, done in both]
    else:
        made = [_assumed(*entry) for entry in zip(ids, elements, volts, strict=True)]
    _last = (ids, elements, volts, made)
    return (*level_assumptions(layout, zones), *chain.from_iterable(made))


def _assumed(id: str, element: Element, volts: float) -> Made:
    unsure = (*assumed.unconfirmed(element), *assumed.blank(element, volts))
    return tuple(Assumption(id, b.field, b.value, b.unit, b.basis) for b in unsure)
