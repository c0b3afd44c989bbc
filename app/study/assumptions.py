"""The ledger of assumed values: fields left blank, figures of the shelf, and levels nobody stated."""

from itertools import chain

from app.model import assumed
from app.model.kinds import Element
from app.study.layout import Layout, arrays_of
from app.study.outcome import Assumption
from app.study.zones import Zones, level_assumptions

Made = tuple[Assumption, ...]
_last: tuple[list[str], list[Element], list[float], list[Made]] = ([], [], [], [])


def assumptions_of(layout: Layout, zones: Zones) -> tuple[Assumption, ...]:
    """Every value that was not given and what was put in its place.

    layout : the graph of the drawing
    zones : nominal_v (zone,) float [V]

    Returns : tuple of Assumption: levels first, then branches and attachments in drawing order
    """
    global _last
    nominal = zones.nominal_v[arrays_of(layout).zone].tolist()
    ids = layout.branch_ids + layout.attachment_ids
    elements: list[Element] = [*layout.branches, *layout.attachments]
    volts = [nominal[node] for node in chain(layout.start, layout.at)]
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
