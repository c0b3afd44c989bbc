"""What to build where phases are not alike: which lateral and load goes on which phase, and what that adds up
to."""

from collections.abc import Mapping

from app.model.drawing import label
from app.model.kinds import Attachment, Capacitor, Line, Load, Motor, Transformer
from app.model.taps import group
from app.sheet.attachments import LOADS
from app.sheet.motors import MOTORS
from app.sheet.phase_attachments import hung_wires
from app.sheet.phase_lines import branch_wires, neutral_kind
from app.sheet.subject import FROM_TO, Subject
from app.sheet.table import Cell, Cells, Column, Ref, SheetTable, Style, table, text
from app.sheet.wires import each, node_wires
from app.study.wire_words import conductors

TAB = "Build list"
KEY = "allocation"
WHAT = Column("item", "What", style=Style.LONG, width=34)
OF_SYSTEM = {"three-phase": "ABC", "split-phase": "AB"}
LOAD_NOTE = (
    "Connected load as the drawing states it, whatever the case; between two phases half counts on each. "
    "Unbalance is the largest step of a phase off the mean of the phases, over that mean."
)


def allocation_tables(subject: Subject) -> list[SheetTable]:
    """Laterals with the phase to join them to, and the connected load of each phase."""
    if subject.outcome.wires is None:
        return []
    return [t for t in (_laterals(subject), _loads(subject)) if t.rows]


def _laterals(subject: Subject) -> SheetTable:
    columns = (
        WHAT, *FROM_TO,
        Column("on", "Join to", style=Style.TEXT, width=10),
        Column("neutral", "Neutral", style=Style.TEXT, width=14),
    )  # fmt: skip
    rows: dict[str, Cells] = {}
    for id, line in subject.drawing.elements.items():
        if not isinstance(line, Line) or line.phases == "all":
            continue
        system = node_wires(subject, line.start).system
        rows[id] = subject.ends(id, line) | {
            "item": text(subject.tell(id)),
            "on": text(conductors(line.phases, system)),
            "neutral": text(neutral_kind(subject, line)),
        }
    note = "What lies beyond follows its first span."
    return table("laterals", TAB, "Laterals and their phases", columns, rows, note=note, held=0)


def shares_of(hung: Attachment, has: str) -> dict[str, float]:
    """Share of its power that each phase brings, by the conductors it hangs on, such as ABCN, BN or CA."""
    phases = [letter for letter in "ABC" if letter in has]
    if len(phases) < 3:
        return dict.fromkeys(phases, 1 / len(phases)) if phases else {}
    a, b = getattr(hung, "share_a_percent", None), getattr(hung, "share_b_percent", None)
    if a is None or b is None:
        return dict.fromkeys(phases, 1 / 3)
    first, second, third = a / 100, b / 100, 1 - (a + b) / 100
    closed = isinstance(hung, Load | Capacitor) and (hung.connection == "delta" or "N" not in has)
    if closed:
        return {"A": (first + third) / 2, "B": (first + second) / 2, "C": (second + third) / 2}
    return {"A": first, "B": second, "C": third}


def _loads(subject: Subject) -> SheetTable:
    columns = (
        WHAT,
        Column("at", "At", style=Style.TEXT, width=14),
        Column("on", "On", style=Style.TEXT, width=10),
        *each(subject, Column("kw", "P on", "kW", digits=2, width=14), neutral=False),
        Column("kw", "P", "kW", digits=2, width=14),
        Column("unbalance", "Unbalance of the connected load", "%", digits=1, width=14),
    )
    zones: dict[int, dict[str, Cells]] = {}
    for id, hung in subject.drawing.elements.items():
        if isinstance(hung, Load | Motor) and (wires := hung_wires(subject, id, 0)).phases:
            row = _load(subject, id, hung, wires.phases)
            zones.setdefault(subject.outcome.zones[hung.node], {})[id] = row
    rows: dict[str, Cells] = {}
    for zone, found in zones.items():
        rows |= found
        rows[f"all {zone}"] = _total(subject, found, len(zones) > 1)
    return table(KEY, TAB, "Connected load by phase", columns, rows, note=LOAD_NOTE, held=0)


def _load(subject: Subject, id: str, hung: Load | Motor, has: str) -> Cells:
    refs: Mapping[str, Ref]
    if isinstance(hung, Motor):
        whole, redo = hung.rated_kw / hung.efficiency, "{out}/{efficiency}"
        refs = {name: Ref(name, MOTORS, id) for name in ("out", "efficiency")}
    else:
        whole = hung.demand_kw if hung.demand_kw is not None else (hung.demand_kva or 0) * hung.power_factor
        redo, refs = "{demand}", {"demand": Ref("demand", LOADS, id)}
    cells = {
        "item": text(subject.tell(id)),
        "at": text(label(subject.drawing, hung.node)),
        "on": text(conductors(has, node_wires(subject, hung.node).system)),
        "kw": Cell(float(whole), redo, refs),
    }
    for letter, share in shares_of(hung, has).items():
        cells[f"kw_{letter.lower()}"] = Cell(whole * share, f"{{kw}}*{share!r}")
    return cells


def _total(subject: Subject, found: dict[str, Cells], several: bool) -> Cells:
    """The sums of one voltage level, and how far its phases are from alike."""
    ids = list(found)
    hung = subject.drawing.elements[ids[0]]
    assert isinstance(hung, Attachment)
    level, system = subject.outcome.nodes.at(hung.node).nominal_v, node_wires(subject, hung.node).system
    named = f"All at {level:g} V beside {label(subject.drawing, hung.node)}" if several else "All"
    cells: Cells = {"item": text(named)}
    phases = OF_SYSTEM.get(system, "")
    keys = {"kw": "kw", **{letter: f"kw_{letter.lower()}" for letter in phases}}
    first, last = ids[0], ids[-1]
    for key in keys.values():
        parts = [cell.value for cells in found.values() if (cell := cells.get(key))]
        total = sum(part for part in parts if isinstance(part, float))
        cells[key] = Cell(total, "SUM({span})", {"span": Ref(key, KEY, first, last)})
    sums = [float(cells[keys[letter]].value or 0.0) for letter in phases]
    mean = sum(sums) / len(sums) if sums else 0.0
    if mean:
        span = ",".join(f"{{{keys[letter]}}}" for letter in phases)
        redo = f"MAX(MAX({span})-AVERAGE({span}),AVERAGE({span})-MIN({span}))/AVERAGE({span})*100"
        cells["unbalance"] = Cell(max(abs(part - mean) for part in sums) / mean * 100, redo)
    return cells


def line_words(subject: Subject, id: str) -> tuple[int, str]:
    """How many conductors a line has, and what its neutral is."""
    line = subject.drawing.elements[id]
    assert isinstance(line, Line)
    return len(branch_wires(subject, id, 0).phases), neutral_kind(subject, line)


def unit_words(t: Transformer) -> str:
    """What to order beside a three-phase unit: single-phase, centre-tapped, a bank of two."""
    if t.build == "centre-tapped":
        return f"single-phase, winding 2 centre-tapped, {t.v2_v:g}/{t.v2_v / 2:g} V"
    if t.build != "as its group":
        return f"two single-phase units of {t.rating_kva / 2:g} kVA for {t.build}"
    read = group(t.vector_group)
    return "single-phase" if read is not None and read[0] == "I" else ""
