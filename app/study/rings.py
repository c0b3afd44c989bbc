"""Closed rings and supplies that are joined: what runs as a ring, and which rounds have no solution."""

from app.model.drawing import Drawing
from app.model.figures import plain
from app.model.kinds import Switch, Transformer
from app.model.levels import SPLIT, THREE_PHASE, TWO_WIRE, is_single, system_behind
from app.study.around import HOUR, bare_rings, systems_by_tree, times_rated, turned_by, units_of
from app.study.graph import Layout, Ring, is_bare
from app.study.outcome import Finding, Verdict
from app.study.rows import Rows
from app.study.words import list_of, tell
from app.study.zones import Zones
from solver import Trouble

HAS = {THREE_PHASE: "three phases", TWO_WIRE: "two wires", SPLIT: "two hot wires and a neutral"}
MOST = 12  # rings that are named one by one


def ring_findings(drawing: Drawing, layout: Layout, zones: Zones) -> list[Finding]:
    """What runs as a ring or joins supplies, noted; what of it has no solution, barred.

    drawing : the drawing
    layout : its graph
    zones : its voltage levels

    Returns : list of Finding; BLOCKS for a round without impedance, for supplies on one node or of unlike
        wires, for transformers that turn the phases round a loop; NOTE for every other round
    """
    barred = [_doubled(drawing, layout, pair) for pair in layout.doubled]
    if not layout.rings:
        return barred
    barred += [_bare(drawing, layout, ring) for ring in bare_rings(layout)]
    noted: list[Ring] = []
    for ring in layout.rings:
        if all(is_bare(layout.branches[b]) for b in ring.branches):
            continue  # one of those above
        found = _looped(drawing, layout, ring) or _unlike(drawing, layout, zones, ring)
        found = found or _turned(drawing, layout, zones, ring)
        if found is None:
            noted.append(ring)
        else:
            barred.append(found)
    return barred + _notes(drawing, layout, noted)


def _ids(layout: Layout, branches: tuple[int, ...] | list[int]) -> tuple[str, ...]:
    return tuple(layout.branch_ids[b] for b in branches)


def _pair(layout: Layout, ring: Ring) -> tuple[str, ...]:
    return tuple(layout.attachment_ids[s] for s in ring.supplies or ())


def _doubled(drawing: Drawing, layout: Layout, pair: tuple[int, int]) -> Finding:
    ids = tuple(layout.attachment_ids[s] for s in pair)
    node = tell(drawing, layout.node_ids[layout.at[pair[1]]])
    words = (
        f"Supplies {list_of(drawing, ids)} both stand on {node}: "
        "how they share what it draws is not determined. Leave one of them."
    )
    return Finding("supplies joined", Verdict.BLOCKS, ids, words)


def _bare(drawing: Drawing, layout: Layout, ring: Ring) -> Finding:
    ids, pair = _ids(layout, ring.branches), _pair(layout, ring)
    named = list_of(drawing, ids)
    if pair:
        words = (
            f"Supplies {list_of(drawing, pair)} are joined through {named} without any impedance: how they "
            f"share what is drawn is not determined. Open or remove {list_of(drawing, ids, 'or')}."
        )
        return Finding("supplies joined", Verdict.BLOCKS, (*pair, *ids), words)
    if len(ids) == 1:
        return _on_itself(drawing, ids[0])
    words = (
        f"{named} form a loop without any impedance: how it shares the current is not determined. "
        "Open or remove one of them."
    )
    return Finding("zero-impedance loop", Verdict.BLOCKS, ids, words)


def _on_itself(drawing: Drawing, id: str) -> Finding:
    words = f"{tell(drawing, id)} begins and ends on the same node. Move one end or remove it."
    return Finding("closed loop", Verdict.BLOCKS, (id,), words)


def _looped(drawing: Drawing, layout: Layout, ring: Ring) -> Finding | None:
    if ring.supplies or len(ring.branches) > 1:
        return None
    return _on_itself(drawing, layout.branch_ids[ring.branches[0]])


def _unlike(drawing: Drawing, layout: Layout, zones: Zones, ring: Ring) -> Finding | None:
    """Where systems of unlike wires meet: three phases, two wires, two hot wires and a neutral."""
    met = _met(layout, zones, ring)
    if met is None:
        return None
    ids, named = _ids(layout, ring.branches), _pair(layout, ring)
    told = f"{list_of(drawing, named)} are joined through {list_of(drawing, ids)}" if named else ""
    told = told or f"{list_of(drawing, ids)} form{'s' if len(ids) == 1 else ''} a closed loop"
    one, other = sorted((HAS[system] for system in met), reverse=True)
    words = f"{told}, but one has {one} and the other {other}. Open or remove what joins them."
    return Finding("supplies joined" if named else "closed loop", Verdict.BLOCKS, (*named, *ids), words)


def _met(layout: Layout, zones: Zones, ring: Ring) -> tuple[str, str] | None:
    """The two systems that meet where a round closes; None where they are one."""
    by_tree = systems_by_tree(layout, zones)
    for row in ring.branches:
        unit, ends = layout.branches[row], (layout.start[row], layout.end[row])
        if row in (layout.fed_by[ends[0]], layout.fed_by[ends[1]]):
            continue
        one, two = by_tree[ends[0]], by_tree[ends[1]]
        if isinstance(unit, Transformer):
            if system_behind(unit, 2, one) == two or system_behind(unit, 1, two) == one:
                continue
            return (system_behind(unit, 2, one), two)
        if one != two:
            return (one, two)
    return None


def _turned(drawing: Drawing, layout: Layout, zones: Zones, ring: Ring) -> Finding | None:
    """A round on which the phases come back turned by an hour or more."""
    apart = turned_by(layout, zones, ring)
    return _turned_finding(drawing, layout, zones, ring, apart) if round(apart / HOUR) else None


def _turned_finding(drawing: Drawing, layout: Layout, zones: Zones, ring: Ring, apart: float) -> Finding:
    rows = units_of(layout, ring)
    ids, pair = _ids(layout, rows), _pair(layout, ring)
    groups = [f"{tell(drawing, i)} with vector group {_group(drawing, i)}" for i in ids]
    told = " and ".join(filter(None, [", ".join(groups[:-1]), *groups[-1:]]))
    if pair:
        angles = [f"{tell(drawing, s)} held at {_angle(drawing, s):g}°" for s in pair]
        told = f"{' and '.join(angles)} are joined{' through ' + told if told else ''}; their phases"
    else:
        told += " stand in one closed loop; the phases" if len(ids) > 1 else " closes a loop; its phases"
    words = f"{told} meet {plain(apart, 0)}° apart{_driven(drawing, layout, zones, ring, apart)}. "
    words += (
        "Give them groups that agree, and phases, or open the loop."
        if any(is_single(unit) for i in ids if isinstance(unit := drawing.elements[i], Transformer))
        else "Give them groups that agree, or open the loop."
        if ids
        else "Let their angles agree, or part them."
    )
    return Finding("vector group", Verdict.BLOCKS, (*pair, *ids), words)


def _group(drawing: Drawing, id: str) -> str:
    unit = drawing.elements[id]
    assert isinstance(unit, Transformer)
    lies = f" on {unit.phases}" if is_single(unit) and unit.phases != "all" else ""
    return f"{unit.vector_group}{lies}"


def _angle(drawing: Drawing, id: str) -> float:
    return float(getattr(drawing.elements[id], "angle_deg", 0.0))


def _driven(drawing: Drawing, layout: Layout, zones: Zones, ring: Ring, apart: float) -> str:
    rated = times_rated(drawing, layout, zones, ring, apart)
    if rated is None:
        return ""
    times, unit = rated
    return f", which would drive about {times:.1f} times the rated current of {tell(drawing, unit)}"


def _notes(drawing: Drawing, layout: Layout, rings: list[Ring]) -> list[Finding]:
    found: list[Finding] = []
    pairs: dict[tuple[int, ...], list[Ring]] = {}
    loops = []
    for ring in rings:
        if ring.supplies:
            pairs.setdefault(ring.supplies, []).append(ring)
        else:
            loops.append(ring)
    found += [_joined_note(drawing, layout, ways) for ways in pairs.values()]
    found += [_loop_note(drawing, layout, ring) for ring in loops[:MOST]]
    if more := loops[MOST:]:
        ids = _ids(layout, sorted({branch for ring in more for branch in ring.branches}))
        words = f"{len(more)} more closed loop{'s' if len(more) > 1 else ''} run as closed rings."
        found.append(Finding("closed loop", Verdict.NOTE, ids, words))
    return found


def _joined_note(drawing: Drawing, layout: Layout, ways: list[Ring]) -> Finding:
    pair, ids = _pair(layout, ways[0]), _ids(layout, ways[0].branches)
    words = f"Supplies {list_of(drawing, pair)} are joined through {list_of(drawing, ids)}"
    if len(ways) > 1:
        words += f" and by {len(ways) - 1} way{'s' if len(ways) > 2 else ''} more"
    words += ": they feed into each other, and protection and fault level change."
    return Finding("supplies joined", Verdict.NOTE, (*pair, *ids), words + _opened(drawing, ids))


def _loop_note(drawing: Drawing, layout: Layout, ring: Ring) -> Finding:
    ids = _ids(layout, ring.branches)
    named = list_of(drawing, ids)
    if len(ids) == 2:
        words = f"{named} run side by side and share the current as their impedances let them: "
        words += "protection and fault level change."
        if len({type(layout.branches[b]) for b in ring.branches}) == 1:
            words += " Where they are equal, one with 2 in parallel says the same."
    else:
        words = f"{named} run as a closed ring: protection and fault level change.{_opened(drawing, ids)}"
    return Finding("closed loop", Verdict.NOTE, ids, words)


def _opened(drawing: Drawing, ids: tuple[str, ...]) -> str:
    """What would part what is joined, where a switch is at hand."""
    switches = [i for i in ids if isinstance(drawing.elements[i], Switch)]
    return f" Opening {list_of(drawing, switches, 'or')} parts it." if switches else ""


def trouble_finding(layout: Layout, rows: Rows, trouble: Trouble) -> Finding:
    """What keeps the solver from a solution that nothing above has named, by its elements.

    layout : the graph of the drawing
    rows : which element each row of the solver is
    trouble : as the solver tells it

    Returns : Finding that blocks
    """
    rounds = (*trouble.loops, *trouble.joined, *trouble.groups)
    ids = [layout.branch_ids[rows.lines[n]] for r in rounds for n in r.lines]
    ids += [layout.branch_ids[rows.units[n]] for r in rounds for n in r.transformers]
    words = "Round these branches the volts do not close, or nothing limits the current: open the round."
    return Finding("closed loop", Verdict.BLOCKS, tuple(dict.fromkeys(ids)), words)
