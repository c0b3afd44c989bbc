"""What there is to say of the layout as drawn, before anything is solved: rings, dead parts, wrong levels."""

from app.model import assumed, taps
from app.model.drawing import Drawing
from app.model.figures import typed
from app.model.kinds import Generator, Joint, Load, Motor, Transformer
from app.study.earthing import earthing_findings
from app.study.layout import NONE, Layout
from app.study.outcome import Finding, Verdict
from app.study.rings import ring_findings
from app.study.spacing_findings import spacing_findings
from app.study.wire_findings import phase_findings
from app.study.words import DEAD, list_of, tell
from app.study.zones import Zones, level_findings, stated_voltages


def structure_findings(drawing: Drawing, layout: Layout, zones: Zones) -> list[Finding]:
    """Everything that bars a solution or parts the layout, worst first.

    drawing : the drawing
    layout : its graph
    zones : its voltage levels

    Returns : list of Finding; BLOCKS bars a solution, FAILS and NOTE do not
    """
    if not drawing.elements:
        return [Finding("nothing drawn", Verdict.NOTE, (), "Nothing is drawn yet. Begin with a supply.")]
    if not layout.supplies:
        words = "No supply: nothing feeds this layout. Put a supply on the node where power comes in."
        return [Finding("no supply", Verdict.BLOCKS, (), words)]
    first = [
        *ring_findings(drawing, layout, zones),
        *level_findings(drawing, layout, zones),
        *_groups(drawing, layout, zones),
    ]
    blamed = {id for finding in first if finding.verdict is Verdict.BLOCKS for id in finding.ids}
    return [
        *first,
        *phase_findings(drawing, layout, zones, blamed),
        *spacing_findings(drawing, layout, zones),
        *_plates(drawing, layout),
        *_dead(drawing, layout),
        *_loose_ends(drawing, layout),
        *earthing_findings(drawing, layout, zones),
        *stated_voltages(drawing, layout, zones),
    ]


def _groups(drawing: Drawing, layout: Layout, zones: Zones) -> list[Finding]:
    found = []
    for row in layout.units:
        branch, tree = layout.branches[row], layout.tree[layout.start[row]]
        assert isinstance(branch, Transformer)
        id, read = layout.branch_ids[row], taps.group(branch.vector_group)
        if read is None:
            words = (
                f"{tell(drawing, id)}: vector group {branch.vector_group!r} is not known. "
                f"Allowed is {taps.GROUP_ALLOWED}."
            )
        elif layout.supply_of[tree] == NONE or not zones.two_wire[tree] or _is_single(branch, read[0]):
            continue
        else:
            supply = tell(drawing, layout.attachment_ids[layout.supply_of[tree]])
            words = (
                f"{tell(drawing, id)} has the three-phase vector group {branch.vector_group}, but {supply} "
                "is two-wire. Allowed there is Ii0 or Ii6."
            )
        found.append(Finding("vector group", Verdict.BLOCKS, (id,), words))
    return found


def _is_single(unit: Transformer, winding_1: str) -> bool:
    return winding_1 == "I" or unit.build == "centre-tapped"


def _plates(drawing: Drawing, layout: Layout) -> list[Finding]:
    """Transformer figures that contradict each other: more loss than the impedance or current can carry."""
    found = []
    for row in layout.units:
        unit = layout.branches[row]
        assert isinstance(unit, Transformer)
        id, hundredth = layout.branch_ids[row], unit.rating_kva * 10
        for loss, limit, words in (
            (
                "load_loss_w",
                "uk_percent",
                "load loss Pk of {} is more than its impedance uk of {} % allows",
            ),
            (
                "no_load_loss_w",
                "no_load_current_percent",
                "no-load loss P0 of {} is more than its no-load current i0 of {} % carries",
            ),
        ):
            watts, most = assumed.value(unit, loss), assumed.value(unit, limit)
            if watts > most * hundredth * (1 + 1e-12):
                blank = " W, assumed," if getattr(unit, loss) is None else " W"
                told = words.format(typed(watts) + blank, typed(most))
                sentence = f"{tell(drawing, id)}: {told}; at {typed(unit.rating_kva)} kVA it is at most "
                sentence += f"{typed(most * hundredth)} W."
                found.append(Finding("transformer data", Verdict.BLOCKS, (id,), sentence))
    return found


def _dead(drawing: Drawing, layout: Layout) -> list[Finding]:
    parts: dict[int, list[str]] = {tree: [] for tree, supply in enumerate(layout.supply_of) if supply == NONE}
    if not parts:
        return []
    needy: dict[int, list[str]] = {tree: [] for tree in parts}
    for row, id in enumerate(layout.node_ids):
        if layout.tree[row] in parts:
            parts[layout.tree[row]].append(id)
    for row, id in enumerate(layout.attachment_ids):
        tree = layout.tree[layout.at[row]]
        if tree in parts:
            parts[tree].append(id)
            if isinstance(layout.attachments[row], Load | Generator | Motor):
                needy[tree].append(id)
    for row, id in enumerate(layout.branch_ids):
        tree = layout.tree[layout.start[row]]
        if tree in parts and tree == layout.tree[layout.end[row]]:
            parts[tree].append(id)
    return [_dead_finding(drawing, tuple(ids), needy[tree]) for tree, ids in parts.items()]


def _dead_finding(drawing: Drawing, ids: tuple[str, ...], needy: list[str]) -> Finding:
    named = list_of(drawing, ids)
    verb = "is" if len(ids) == 1 else "are"
    if needy:
        words = f"No supply reaches {list_of(drawing, needy)}: {named} {verb} dead."
        return Finding(DEAD, Verdict.FAILS, ids, words)
    return Finding(DEAD, Verdict.NOTE, ids, f"No supply reaches {named}: dead, and nothing draws there.")


def _loose_ends(drawing: Drawing, layout: Layout) -> list[Finding]:
    """Live joints where one branch ends and nothing hangs."""
    found = []
    for row in layout.loose:
        if isinstance(layout.nodes[row], Joint):
            id, branch = layout.node_ids[row], layout.branch_ids[layout.fed_by[row]]
            words = f"{tell(drawing, branch)} ends at {tell(drawing, id)}, where nothing is connected."
            found.append(Finding("loose end", Verdict.NOTE, (id, branch), words))
    return found
