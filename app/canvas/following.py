"""What is drawn on from a lateral follows it: moving its first span moves all."""

from app.model import edits
from app.model.drawing import Drawing
from app.model.kinds import Attachment, Line
from app.study.outcome import Outcome


def following(drawing: Drawing, outcome: Outcome | None, id: str, node: str | None) -> Drawing:
    """The drawing in which a fresh element takes as many phases as reach it, where those it would state are
    the ones that reach its node anyway, or do not reach it."""
    if outcome is None or outcome.wires is None or node is None or node not in outcome.wires.nodes:
        return drawing
    one, reach = drawing.elements[id], set(outcome.wires.nodes.at(node).phases)
    phases = getattr(one, "phases", "all") if isinstance(one, Line | Attachment) else "all"
    if phases == "all" or not reach or len(reach) == 3:
        return drawing
    same = set(phases) == reach and (isinstance(one, Line) or len(reach) == 1)
    return edits.change(drawing, id, phases="all") if same or not set(phases) <= reach else drawing
