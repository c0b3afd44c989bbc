"""Each device with a trip current: how far it guards, and the least earth-fault current it is left with."""

from msgspec import Struct

from app.model.kinds import Line, Transformer
from app.study.graph import NONE, Layout
from app.study.outcome import FaultState, Table

ON_RING = "it stands in a closed ring and sees only a share of the current; open the ring to judge it"
NO_LOOP = "the earth-fault loop behind it is not known"
NOT_FED = "nothing feeds it"


class Device(Struct, frozen=True):
    """The device at the fed end of a line.

    line : id of the line
    node : id of the node behind it where an earth fault draws least; blank where it is not judged
    current_a : float [A] least earth-fault current there; 0 where it finds no way back, nan where not judged
    trip_a : float [A] at which it trips in 5 s
    why : why it is not judged; blank where it is
    """

    line: str
    node: str
    current_a: float
    trip_a: float
    why: str = ""


def devices(layout: Layout, table: Table[FaultState]) -> tuple[Device, ...]:
    """Every line with a trip current, in the order of the drawing.

    A device guards what lies behind it up to the next device or transformer.

    layout : the graph of the drawing
    table : FaultState by node id

    Returns : tuple of Device
    """
    on_ring = {branch for ring in layout.rings for branch in ring.branches}
    behind = _sections(layout)
    found = []
    for row, line in enumerate(layout.branches):
        if isinstance(line, Line) and line.trip_a is not None:
            ids = [layout.node_ids[node] for node in behind.get(row, [])]
            id, trip = layout.branch_ids[row], line.trip_a
            found.append(_device(id, trip, ids, table, row in on_ring, layout.live[layout.start[row]]))
    return tuple(found)


def _device(
    id: str, trip: float, nodes: list[str], table: Table[FaultState], on_ring: bool, fed: bool
) -> Device:
    unjudged = float("nan")
    if on_ring:
        return Device(id, "", unjudged, trip, ON_RING)
    if not fed:
        return Device(id, "", unjudged, trip, NOT_FED)
    currents = {node: table.at(node).ik1_min_ka * 1e3 for node in nodes}
    if not currents or any(value != value for value in currents.values()):
        return Device(id, "", unjudged, trip, NO_LOOP)
    far = min(currents, key=currents.__getitem__)
    return Device(id, far, currents[far], trip)


def _sections(layout: Layout) -> dict[int, list[int]]:
    """For each line with a device the nodes behind it, up to the next device or transformer."""
    by: list[int] = [NONE] * len(layout.nodes)
    found: dict[int, list[int]] = {}
    for node in layout.order:
        branch = layout.fed_by[node]
        if branch == NONE or not layout.live[node]:
            continue
        fed = layout.branches[branch]
        if isinstance(fed, Transformer):
            continue
        own = isinstance(fed, Line) and fed.trip_a is not None
        by[node] = branch if own else by[layout.fed_from[node]]
        if by[node] != NONE:
            found.setdefault(by[node], []).append(node)
    return found
