"""What is drawn from an element, and so changes with it."""

from app.model.drawing import Drawing
from app.model.kinds import Attachment, Branch


def with_neighbours(drawing: Drawing, ids: frozenset[str]) -> set[str]:
    """The elements and all that is drawn from them: branches and attachments of nodes, side by side lines."""
    found = set(ids)
    pairs = set()
    for id, element in drawing.elements.items():
        if isinstance(element, Branch):
            if element.start in ids or element.end in ids:
                found.add(id)
            if id in ids:
                pairs.add(frozenset((element.start, element.end)))
        elif isinstance(element, Attachment) and element.node in ids:
            found.add(id)
    return found | {
        i for i, e in drawing.branches().items() if pairs and frozenset((e.start, e.end)) in pairs
    }
