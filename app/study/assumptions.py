"""The ledger of assumed values: every field left blank, and every level nobody stated."""

from app.model import assumed
from app.study.layout import Layout
from app.study.outcome import Assumption
from app.study.zones import Zones, level_assumptions


def assumptions_of(layout: Layout, zones: Zones) -> tuple[Assumption, ...]:
    """Every value that was not given and what was put in its place.

    layout : the graph of the drawing
    zones : nominal_v (zone,) float [V]

    Returns : tuple of Assumption: levels first, then branches and attachments in drawing order
    """
    nominal = zones.nominal_v.tolist()
    found = level_assumptions(layout, zones)
    for ids, elements, nodes in (
        (layout.branch_ids, layout.branches, layout.start),
        (layout.attachment_ids, layout.attachments, layout.at),
    ):
        for id, element, node in zip(ids, elements, nodes, strict=True):
            for put in assumed.blank(element, nominal[layout.zone[node]]):
                found.append(Assumption(id, put.field, put.value, put.unit, put.basis))
    return tuple(found)
