"""The ledger of assumed values: every field left blank, and every level nobody stated."""

from app.model import assumed
from app.model.kinds import Element
from app.study.layout import Layout, arrays_of
from app.study.outcome import Assumption
from app.study.zones import Zones, level_assumptions


def assumptions_of(layout: Layout, zones: Zones) -> tuple[Assumption, ...]:
    """Every value that was not given and what was put in its place.

    layout : the graph of the drawing
    zones : nominal_v (zone,) float [V]

    Returns : tuple of Assumption: levels first, then branches and attachments in drawing order
    """
    found = level_assumptions(layout, zones)
    nominal = zones.nominal_v[arrays_of(layout).zone].tolist()
    keys: list[tuple[str, Element, int]] = [
        *zip(layout.branch_ids, layout.branches, layout.start, strict=True)
    ]
    keys += zip(layout.attachment_ids, layout.attachments, layout.at, strict=True)
    known, fresh = _memory.known, {}
    for id, element, node in keys:
        entry = known.get(id)
        volts = nominal[node]
        if entry is None or entry[0] is not element or entry[1] != volts:
            entry = (element, volts, _assumed(id, element, volts))
        fresh[id] = entry
        found += entry[2]
    _memory.known = fresh
    return tuple(found)


def _assumed(id: str, element: Element, volts: float) -> tuple[Assumption, ...]:
    return tuple(Assumption(id, b.field, b.value, b.unit, b.basis) for b in assumed.blank(element, volts))


class _Memory:
    """What the last call found, so that the next one only looks at what changed."""

    known: dict[str, tuple[Element, float, tuple[Assumption, ...]]] = {}


_memory = _Memory()
