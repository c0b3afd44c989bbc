"""Boards held against the highest fault current, devices against the least earth-fault current."""

from app.model.drawing import Drawing
from app.model.figures import amps, plain
from app.model.kinds import Line, Transformer
from app.study.graph import NONE, Layout
from app.study.outcome import FaultState, Finding, Table, Verdict
from app.study.words import list_of, tell

RATING, DEVICE, UNSTATED = "fault rating", "earth fault", "fault level"
NEAR = 0.1  # of the limit: a margin below this is near it
BOARD_RULE = "the fault rating stated for it"
DEVICE_RULE = "the trip current stated for its device"


def unstated(drawing: Drawing, layout: Layout, barred: bool) -> tuple[Finding, ...]:
    """Why no fault current of a drawing is worked out.

    drawing : the drawing
    layout : its graph
    barred : something bars a solution

    Returns : tuple of one NOTE; none where the drawing has no supply at all
    """
    if not layout.supplies:
        return ()
    if barred:
        words = "Fault currents are not worked out, because the layout as drawn is not valid."
        return (Finding(UNSTATED, Verdict.NOTE, (), words),)
    return (_unstated(drawing, [layout.attachment_ids[row] for row in layout.supplies]),)


def _unstated(drawing: Drawing, supplies: list[str]) -> Finding:
    has = "have no fault level" if len(supplies) > 1 else "has no fault level"
    words = f"Fault currents are not worked out, because {list_of(drawing, supplies)} {has}: ask the utility."
    return Finding(UNSTATED, Verdict.NOTE, tuple(supplies), words)


def fault_findings(drawing: Drawing, layout: Layout, table: Table[FaultState]) -> tuple[Finding, ...]:
    """Judge every board with a fault rating and every device with a trip current.

    Each that fails or is near gets a finding of its own; where none does, the tightest of the check says it
    holds. Near is a margin of less than a tenth of the limit. A board also counts as near where its
    three-phase current is within its rating but another kind of fault drives more.

    drawing : the drawing
    layout : its graph
    table : FaultState by node id

    Returns : tuple of Finding
    Source : IEC 60364-4-41, 411.4.4 for devices; what counts as near is ours
    """
    silent = [
        layout.attachment_ids[row]
        for row in layout.supplies
        if (s := layout.attachments[row]).fault_level_max_mva is None and s.fault_level_min_mva is None  # type: ignore[attr-defined]
    ]
    found = _worst(_boards(drawing, table)) + _devices(drawing, layout, table)
    return tuple(found + ([_unstated(drawing, silent)] if silent else []))


def _worst(found: list[Finding]) -> list[Finding]:
    """Those that fail or are near, tightest first; else the tightest of all."""
    judged = sorted(found, key=lambda f: (f.margin or 0.0) / (f.limit or 1.0))
    open_ = [f for f in judged if f.verdict is not Verdict.HOLDS]
    return open_ or judged[:1]


def _verdict(margin: float, limit: float) -> Verdict:
    if margin < 0:
        return Verdict.FAILS
    return Verdict.NEAR if margin < NEAR * limit else Verdict.HOLDS


def _boards(drawing: Drawing, table: Table[FaultState]) -> list[Finding]:
    found = []
    for id, node in drawing.nodes().items():
        limit, state = node.withstand_ka, table.at(id)
        if limit is None or not state.live:
            continue
        kinds = {"a three-phase fault": state.ik3_max_ka, "a fault between the wires": state.ik2_max_ka}
        words, value = next((w, v) for w, v in kinds.items() if v == v)
        margin = limit - value
        verdict = _verdict(margin, limit)
        shown, allowed = _apart(value, limit)
        told = f"{tell(drawing, id)} sees up to {shown} of {words}, peak {plain(state.ip_ka, 1, 'kA')}; "
        told += f"the most allowed is {allowed} ({BOARD_RULE})."
        if margin >= 0 and max(state.ik1_max_ka, state.ik2e_max_ka) > limit:
            verdict = Verdict.NEAR
            most = plain(_to_earth(state), 2, "kA")
            told += f" A fault to earth drives more, up to {most}: check the board for it."
        found.append(Finding(RATING, verdict, (id,), told, value, limit, margin, "kA", BOARD_RULE))
    return found


def _to_earth(state: FaultState) -> float:
    return max(state.ik1_max_ka, state.ik2e_max_ka)


def _apart(value: float, limit: float) -> tuple[str, str]:
    """kA with enough digits to tell value and limit apart."""
    for digits in range(2, 7):
        shown, allowed = plain(value, digits, "kA"), plain(limit, digits, "kA")
        if shown != allowed or value == limit:
            break
    return shown, allowed


def _devices(drawing: Drawing, layout: Layout, table: Table[FaultState]) -> list[Finding]:
    on_ring = {branch for ring in layout.rings for branch in ring.branches}
    judged, noted = [], []
    for row, nodes in _sections(layout).items():
        line, id = layout.branches[row], layout.branch_ids[row]
        assert isinstance(line, Line)
        assert line.trip_a is not None
        states = {n: table.at(layout.node_ids[n]) for n in nodes}
        live = {n: s.ik1_min_ka * 1e3 for n, s in states.items() if s.live}
        if row in on_ring or any(v != v for v in live.values()):
            noted.append(_not_judged(drawing, id, row in on_ring))
        elif live:
            far = min(live, key=live.__getitem__)
            judged.append(_device(drawing, id, layout.node_ids[far], live[far], line.trip_a))
    return _worst(judged) + noted


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
    for row, branch_ in enumerate(layout.branches):
        closes = row not in found and layout.live[layout.start[row]]
        if closes and isinstance(branch_, Line) and branch_.trip_a is not None:
            found[row] = []  # it closes a ring
    return found


def _device(drawing: Drawing, id: str, node: str, current: float, trip: float) -> Finding:
    margin = current - trip
    words = f"An earth fault at {tell(drawing, node)} draws as little as {amps(current)}; the device of "
    words += f"{tell(drawing, id)} needs {amps(trip)} to trip in 5 s ({DEVICE_RULE})."
    if current == 0:
        words = (
            f"An earth fault at {tell(drawing, node)} finds no way back and is not cleared: nothing earths "
        )
        words += f"this part of the layout. The device of {tell(drawing, id)} needs {amps(trip)} to trip."
    verdict = _verdict(margin, trip)
    return Finding(DEVICE, verdict, (node, id), words, current, trip, margin, "A", DEVICE_RULE)


def _not_judged(drawing: Drawing, id: str, on_ring: bool) -> Finding:
    why = (
        "it stands in a closed ring and sees only a share of the current, so it is not judged; open the ring "
        "to judge it"
        if on_ring
        else "the earth-fault loop of a two-wire layout is not worked out, so it is not judged"
    )
    return Finding(DEVICE, Verdict.NOTE, (id,), f"Device of {tell(drawing, id)}: {why}.")
