"""Fault currents as text: the figures of every node, the devices that clear them, how it was worked out."""

import math

from app.model.drawing import Drawing
from app.model.figures import amps, plain
from app.model.kinds import KIND_WORDS, kind_of
from app.study.fault_devices import Device, devices
from app.study.layout import lay_out
from app.study.outcome import Outcome
from app.study.words import tell

TO_NEUTRAL = ("phase-N max kA", "phase-N min kA")  # only where a node has it
COLUMNS = (
    ("Ik3 max kA", "ik3_max_ka", 2),
    ("peak kA", "ip_ka", 2),
    ("X/R", "xr", 2),
    ("Ik2 max kA", "ik2_max_ka", 2),
    (TO_NEUTRAL[0], "ikn_max_ka", 2),
    ("Ik1 max kA", "ik1_max_ka", 2),
    ("Ik2 min kA", "ik2_min_ka", 2),
    (TO_NEUTRAL[1], "ikn_min_ka", 2),
    ("Ik1 min kA", "ik1_min_ka", 2),
    ("Zs ohm", "zs_ohm", 3),
)


def fault_lines(drawing: Drawing, outcome: Outcome) -> tuple[list[list[str]], int]:
    """Every node with its figures, heads first, and how many columns are figures; a dead one says so."""
    states = outcome.faults
    assert states is not None
    lateral = any(not math.isnan(value) for value in states.column("ikn_max_ka"))
    columns = [c for c in COLUMNS if lateral or c[0] not in TO_NEUTRAL]
    lines = [["id", "name", "kind", *(head for head, _, _ in columns)]]
    for id in states.ids:
        element, state = drawing.elements[id], states.at(id)
        figures = [plain(float(getattr(state, name)), digits) for _, name, digits in columns]
        if not state.live:
            figures = ["none", *[""] * (len(columns) - 1)]
        lines.append([id, element.name, KIND_WORDS[kind_of(element)], *figures])
    return lines, len(columns)


def fault_notes(drawing: Drawing, outcome: Outcome) -> list[str]:
    """Devices, then the basis with its caution."""
    if outcome.faults is None:
        return []
    told = [f"  {_device(drawing, d)}" for d in devices(lay_out(drawing), outcome.faults)]
    head = "Devices, least earth-fault current against what trips them in 5 s"
    basis = [f"  {item}: {words}" for item, words in outcome.fault_basis]
    return ["\n".join([head, *told]) if told else "", "\n".join(["How faults were worked out", *basis])]


def _device(drawing: Drawing, device: Device) -> str:
    words = f"{tell(drawing, device.line)} trips at {amps(device.trip_a)}: "
    if device.why:
        return words + f"not judged, because {device.why}"
    margin = amps(device.current_a - device.trip_a)
    return words + f"{amps(device.current_a)} at {tell(drawing, device.node)}, margin {margin}"
