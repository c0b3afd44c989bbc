"""Parts of a layout that nothing holds to earth: there an earth fault finds no way back."""

from collections import defaultdict
from collections.abc import Mapping

from app.model import taps
from app.model.drawing import Drawing
from app.model.fault_data import corner_earth_ohm, star_earth_ohm
from app.model.figures import level
from app.model.kinds import Transformer
from app.model.levels import THREE_PHASE
from app.study.graph import Layout
from app.study.outcome import Finding, Verdict
from app.study.unit_wires import OPEN
from app.study.words import list_of, tell
from app.study.zones import Zones
from solver.fault import ZeroPath, zero_path

AS_GROUP = "as its group"
CHECK = "no earth reference"
UNEARTHED = (
    "An earth fault there cannot clear: it draws next to no current, no fuse or breaker sees it, and the "
    "sound phases rise to line voltage against earth."
)
ZIGZAG = "a zigzag earthing transformer there, or a relay that watches the volts to earth"


def earthing_findings(drawing: Drawing, layout: Layout, zones: Zones) -> list[Finding]:
    """What is joined without a transformer, and held to earth by no supply, star point or zigzag.

    drawing : the drawing
    layout : its graph
    zones : system (zone,)

    Returns : list of ADVICE, one for each such part that is three-phase
    Source : common practice, no source
    """
    lost = unreferenced(layout)
    if not lost:
        return []
    found = []
    for zone in lost:
        if zones.system[zone] == THREE_PHASE:
            row = layout.fed_by[layout.zone_heads[zone]]
            found.append(_finding(drawing, layout, zones, zone, row))
    return found


def unreferenced(layout: Layout) -> list[int]:
    """The zones that nothing holds to earth; of those that hang on one another only the first.

    layout : the graph; its vector groups are known

    Returns : list of zone numbers, live ones
    Source : see held_zones
    """
    reached, linked = held_zones(layout)
    lost = []
    for zone, head in enumerate(layout.zone_heads):
        if zone not in reached and layout.live[head]:
            lost.append(zone)
            reached |= _joined(linked, {zone})
    return lost


def held_zones(layout: Layout) -> tuple[set[int], Mapping[int, list[int]]]:
    """The zones that something holds to earth, and which zones are linked through two earthed stars.

    A zone is held by a supply, by an earthed star that feeds it, by an electrode on the neutral of its star,
    by any earthed star beside a delta or any earthed zigzag, and by an earthed star whose other winding is an
    earthed star in a zone that is held.

    layout : the graph; its vector groups are known

    Returns : set of zone numbers; zone to the zones linked to it
    Source : IEC 60076-8:1997, 5 (from memory)
    """
    held = {layout.zone[layout.at[supply]] for supply in layout.supplies}
    linked: defaultdict[int, list[int]] = defaultdict(list)
    for row in layout.units:
        ends = layout.start[row], layout.end[row]
        one, two = (layout.zone[node] for node in ends)
        path = _path(layout, row)
        if path.through:
            linked[one].append(two)
            linked[two].append(one)
            continue
        for side, zone in ((0, one), (1, two)):
            feeds = layout.fed_by[ends[side]] == row
            if path[1 + side] or feeds and (_winding(layout, row, side)[1] or _electrode(layout, row, side)):
                held.add(zone)
    return _joined(linked, held), linked


def _electrode(layout: Layout, row: int, side: int) -> bool:
    """Whether the star point of a winding is led out to a neutral that an electrode holds."""
    unit = _unit(layout, row)
    group = None if unit.build != AS_GROUP else taps.group(unit.vector_group)
    if group is None or not str(group[side]).upper().endswith("N"):
        return False
    zone = layout.zone[(layout.start[row], layout.end[row])[side]]
    return any(node.earth_ohm is not None and layout.zone[n] == zone for n, node in enumerate(layout.nodes))


def _joined(linked: Mapping[int, list[int]], first: set[int]) -> set[int]:
    """All that can be reached from some zones."""
    reached, waiting = set(first), list(first)
    while waiting:
        for other in linked.get(waiting.pop(), ()):
            if other not in reached:
                reached.add(other)
                waiting.append(other)
    return reached


def _unit(layout: Layout, row: int) -> Transformer:
    unit = layout.branches[row]
    assert isinstance(unit, Transformer)
    return unit


def _winding(layout: Layout, row: int, side: int) -> tuple[str, bool]:
    """The letter of a winding, and whether its star, zigzag or corner is earthed."""
    unit = _unit(layout, row)
    if unit.build in OPEN:
        return "V", side == 1 and corner_earth_ohm(unit) is not None
    group = taps.group(unit.vector_group)
    letter = "?" if group is None or unit.build != AS_GROUP else str(group[side])[0].upper()
    return letter, letter in "YZ" and star_earth_ohm(unit, side + 1) is not None


def _path(layout: Layout, row: int) -> ZeroPath:
    """What the zero sequence finds in a transformer; nothing where it has no known group."""
    unit = _unit(layout, row)
    if taps.group(unit.vector_group) is None or unit.build != AS_GROUP:
        return ZeroPath(False, False, False)
    return zero_path(unit.vector_group, *(star_earth_ohm(unit, w) is not None for w in (1, 2)))


SHAPES = {"D": "a delta", "Z": "a zigzag whose star point is not earthed", "V": "an open delta"}


def _finding(drawing: Drawing, layout: Layout, zones: Zones, zone: int, row: int) -> Finding:
    nodes = tuple(id for id, number in layout.zone_of.items() if number == zone)
    unit = layout.branch_ids[row]
    side = 1 if layout.end[row] == layout.zone_heads[zone] else 0
    letter, other = _winding(layout, row, side)[0], _winding(layout, row, 1 - side)
    of, volts = tell(drawing, unit), level(float(zones.nominal_v[zone]))
    shape = SHAPES.get(letter, "a star whose star point is not earthed")
    words = f"Nothing holds {list_of(drawing, nodes)} ({volts}) to earth: winding {side + 1} of {of}, which "
    words += f"feeds it, is {shape}. {UNEARTHED} Likely cure: {_cure(letter, other, of)}."
    return Finding(CHECK, Verdict.ADVICE, (*nodes, unit), words)


def _cure(letter: str, other: tuple[str, bool], of: str) -> str:
    if letter == "V":
        return f"earth a corner of {of}, or {ZIGZAG}"
    if letter != "D" and (letter == "Z" or other[0] == "D"):
        return f"earth the star point of {of}"
    if letter == "D" and other[0] == "Y":
        return (
            f"a unit in place of {of} with its delta towards the supply and an earthed star here, or {ZIGZAG}"
        )
    return f"a unit in place of {of} with an earthed star here and a delta towards the supply, or {ZIGZAG}"
