"""Lines whose spacing does not hang as many conductors as run along them."""

from app.model.conductors import is_hung, wires_of
from app.model.drawing import Drawing
from app.model.kinds import Line
from app.model.levels import SPLIT, THREE_PHASE
from app.study.conductors import conductors_of, is_wired
from app.study.layout import Layout
from app.study.outcome import Finding, Verdict
from app.study.wires import ABC
from app.study.words import tell
from app.study.zones import Zones

WORDS = {1: "one phase", 2: "two phases", 3: "three phases"}


def spacing_findings(drawing: Drawing, layout: Layout, zones: Zones) -> list[Finding]:
    """Every live line that takes all phases that reach it, and hangs too few or too many conductors for them.

    drawing : the drawing
    layout : its graph
    zones : system (zone,) of each zone

    Returns : list of Finding; each BLOCKS, as nothing says what runs along such a line
    """
    spaced = [row for row, b in enumerate(layout.branches) if is_hung(b) and layout.live[layout.start[row]]]
    if not spaced:
        return []
    bits = conductors_of(layout, zones).branch if is_wired(drawing, layout, zones) else None
    found = []
    for row in spaced:
        run, system = layout.branches[row], zones.system[layout.zone[layout.start[row]]]
        assert isinstance(run, Line)
        if run.phases != "all":
            continue  # the drawing holds these to what they state
        usual = 3 if system == THREE_PHASE else 2 if system == SPLIT else 1
        phases, hangs = usual if bits is None else (bits[row] & ABC).bit_count(), wires_of(run)
        if not phases or hangs in (phases, phases + 1):
            continue
        words = (
            f"{tell(drawing, layout.branch_ids[row])} hangs {hangs} conductor{'s' if hangs > 1 else ''}, but "
            f"{WORDS[phases]} reach{'es' if phases == 1 else ''} it; allowed are {phases}, "
            f"or {phases + 1} with a neutral."
        )
        found.append(Finding("spacing", Verdict.BLOCKS, (layout.branch_ids[row],), words))
    return found
