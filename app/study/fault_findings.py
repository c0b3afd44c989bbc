"""Boards held against the highest fault current, devices against the least earth-fault current."""

from app.model.drawing import Drawing
from app.model.fault_data import LOW_V
from app.model.figures import amps, plain
from app.model.kinds import Supply
from app.model.levels import SPLIT
from app.study.fault_devices import NOT_FED, Device, devices
from app.study.fault_rows import is_stated
from app.study.graph import Layout
from app.study.outcome import FaultState, Finding, Table, Verdict
from app.study.words import list_of, tell

RATING, DEVICE, UNSTATED = "fault rating", "earth fault", "fault level"
NEAR = 0.1  # of the limit: a margin below this is near it
NONE_KA = 0.005  # prints as 0.00 kA
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
    silent = [id for id, supply in _supplies(layout) if not is_stated(supply)]
    open_ = [id for id, supply in _supplies(layout) if _is_open(supply)]
    unseen = [id for id in drawing.nodes() if open_ and _unseen(table.at(id))]
    found = _worst(_boards(drawing, table, unseen)) + _devices(drawing, layout, table)
    if unseen:
        found.append(_no_way_back(drawing, unseen, open_))
    return tuple(found + ([_unstated(drawing, silent)] if silent else []))


def _supplies(layout: Layout) -> list[tuple[str, Supply]]:
    ids, hung = layout.attachment_ids, layout.attachments
    return [(ids[row], supply) for row in layout.supplies if isinstance(supply := hung[row], Supply)]


def _is_open(supply: Supply) -> bool:
    """Above 1 kV, and counting as unearthed because nobody stated its zero sequence."""
    return supply.z0_ratio is None and supply.nominal_v > LOW_V and supply.wires != SPLIT


def _unseen(state: FaultState) -> bool:
    """On few phases, and no fault of any sort draws a current worth telling."""
    return state.live and state.ik3_max_ka != state.ik3_max_ka and state.ip_ka < NONE_KA


def _no_way_back(drawing: Drawing, nodes: list[str], supplies: list[str]) -> Finding:
    one = len(supplies) == 1
    words = (
        f"Faults at {list_of(drawing, nodes)} find next to no current, because {list_of(drawing, supplies)} "
    )
    words += (
        f"{'has' if one else 'have'} no Z0/Z1 and so {'counts' if one else 'count'} as unearthed: what hangs "
    )
    words += "between a phase and earth is fed through it. No board there is judged; ask the utility."
    return Finding(UNSTATED, Verdict.NOTE, (*nodes, *supplies), words)


def _worst(found: list[Finding]) -> list[Finding]:
    """Those that fail or are near, tightest first; else the tightest of all."""
    judged = sorted(found, key=lambda f: (f.margin or 0.0) / (f.limit or 1.0))
    open_ = [f for f in judged if f.verdict is not Verdict.HOLDS]
    return open_ or judged[:1]


def _verdict(margin: float, limit: float) -> Verdict:
    if margin < 0:
        return Verdict.FAILS
    return Verdict.NEAR if margin < NEAR * limit else Verdict.HOLDS


def _boards(drawing: Drawing, table: Table[FaultState], unseen: list[str]) -> list[Finding]:
    found = []
    for id, node in drawing.nodes().items():
        limit, state = node.withstand_ka, table.at(id)
        if limit is None or not state.live or id in unseen:
            continue
        words, value = greatest(state)
        if value != value:
            continue
        margin = limit - value
        verdict = _verdict(margin, limit)
        shown, allowed = _apart(value, limit)
        told = f"{tell(drawing, id)} sees up to {shown} of {words}, peak {plain(state.ip_ka, 1, 'kA')}; "
        told += f"the most allowed is {allowed} ({BOARD_RULE})."
        earth = to_earth(state)
        if earth > max(limit, value):
            verdict = Verdict.NEAR if margin >= 0 else verdict
            most = plain(earth, 2, "kA")
            told += f" A fault to earth drives more, up to {most}: check the board for it."
        found.append(Finding(RATING, verdict, (id,), told, value, limit, margin, "kA", BOARD_RULE))
    return found


def greatest(state: FaultState) -> tuple[str, float]:
    """The current that a board is held against, in words: three-phase, or else the greatest of a loop.

    state : of a node

    Returns : words and float [kA]
    """
    if state.ik3_max_ka == state.ik3_max_ka:
        return "a three-phase fault", state.ik3_max_ka
    if state.ik2_max_ka != state.ik2_max_ka and state.ikn_max_ka != state.ikn_max_ka:
        return "a fault to earth", state.ik1_max_ka
    if state.ik2_max_ka != state.ik2_max_ka or state.ikn_max_ka > state.ik2_max_ka:
        return "a fault from phase to neutral", state.ikn_max_ka
    return "a fault between the wires", state.ik2_max_ka


def to_earth(state: FaultState) -> float:
    """The greatest current of a fault to earth.

    state : of a node

    Returns : float [kA]; 0 where none is known
    """
    return max((i for i in (state.ik1_max_ka, state.ik2e_max_ka) if i == i), default=0.0)


def _apart(value: float, limit: float) -> tuple[str, str]:
    """kA with enough digits to tell value and limit apart."""
    for digits in range(2, 7):
        shown, allowed = plain(value, digits, "kA"), plain(limit, digits, "kA")
        if shown != allowed or value == limit:
            break
    return shown, allowed


def _devices(drawing: Drawing, layout: Layout, table: Table[FaultState]) -> list[Finding]:
    known = [d for d in devices(layout, table) if d.why != NOT_FED]
    judged = [_device(drawing, d) for d in known if not d.why]
    return _worst(judged) + [_not_judged(drawing, d) for d in known if d.why]


def _device(drawing: Drawing, device: Device) -> Finding:
    at, of, trip = tell(drawing, device.node), tell(drawing, device.line), amps(device.trip_a)
    margin = device.current_a - device.trip_a
    words = f"An earth fault at {at} draws as little as {amps(device.current_a)}; the device of {of} needs "
    words += f"{trip} to trip in 5 s ({DEVICE_RULE})."
    if device.current_a == 0:
        words = f"An earth fault at {at} finds no way back and is not cleared: nothing earths this part of "
        words += f"the layout. The device of {of} needs {trip} to trip."
    return Finding(
        DEVICE,
        _verdict(margin, device.trip_a),
        (device.node, device.line),
        words,
        device.current_a,
        device.trip_a,
        margin,
        "A",
        DEVICE_RULE,
    )


def _not_judged(drawing: Drawing, device: Device) -> Finding:
    words = f"Device of {tell(drawing, device.line)}: not judged, because {device.why}."
    return Finding(DEVICE, Verdict.NOTE, (device.line,), words)
