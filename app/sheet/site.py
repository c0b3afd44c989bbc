"""What to verify on site before anything is energised: as counted here, and room for what is found."""

from app.model import taps
from app.model.kinds import (
    Capacitor,
    Element,
    Generator,
    Line,
    Motor,
    Regulator,
    Supply,
    Switch,
    Transformer,
)
from app.sheet.phase_lines import branch_wires
from app.sheet.regulators import regulator_words
from app.sheet.subject import Subject, kind_name
from app.sheet.table import Cells, Column, SheetTable, Style, table, text
from app.study.changers import is_changer
from app.study.wire_words import conductors

KEY = "site"
COLUMNS = (
    Column("item", "What", style=Style.LONG, width=30),
    Column("kind", "Kind", style=Style.TEXT, width=13),
    Column("counted", "As counted here", style=Style.LONG, width=64),
    Column("found", "Found on site", style=Style.TEXT, width=22),
    Column("by", "By, date", style=Style.TEXT, width=14),
)
GENERAL = (
    (
        "earth",
        "Earth and neutral",
        "earthed at supplies, star points and electrodes as drawn; joined, measured",
    ),
    ("phases", "Phases", "marks and rotation the same at both ends of every part, before it is closed"),
    ("volts", "Volts at the far ends", "as in the table of busbars, by night and at full load"),
)
NOTE = "Found and calculated side by side make the next revision. Work on live parts is for those who may."


def site_tables(subject: Subject) -> list[SheetTable]:
    """The list for the site, supplies first, then every part whose figures count."""
    rows: dict[str, Cells] = {}
    for kind in (Supply, Transformer, Regulator, Line, Switch, Motor, Generator, Capacitor):
        for id, element in subject.drawing.elements.items():
            if isinstance(element, kind):
                told = {"item": subject.tell(id), "kind": kind_name(element)}
                rows[id] = {name: text(words) for name, words in told.items()}
                rows[id]["counted"] = text(counted(subject, id, element))
    if not rows:
        return []
    rows |= {f"\x1f{key}": {"item": text(what), "counted": text(words)} for key, what, words in GENERAL}
    return [table(KEY, "Site", "To verify on site", COLUMNS, rows, note=NOTE, held=0)]


def counted(subject: Subject, id: str, element: Element) -> str:
    """What the figures of an element stand on, as a person can check it beside the part."""
    if isinstance(element, Supply):
        return _supply(subject, id, element)
    if isinstance(element, Transformer):
        how = (
            "steps by itself"
            if is_changer(element)
            else f"tap at {taps.nameplate_v(element, element.tap):g} V"
        )
        units = f"{element.side_by_side} × " if element.side_by_side > 1 else ""
        plate = f"{element.v1_v:g}/{element.v2_v:g} V, {element.vector_group}, uk {element.uk_percent:g} %"
        return f"{units}{element.rating_kva:g} kVA, {plate}, {how}"
    if isinstance(element, Regulator):
        return regulator_words(subject, id, element)
    if isinstance(element, Line):
        return _line(subject, id, element)
    if isinstance(element, Switch):
        return "closed" if element.closed else "OPEN POINT, kept open"
    if isinstance(element, Motor):
        times = subject.value(id, "starting_current" if element.starter == "direct" else "limited_current")
        return (
            f"{element.rated_kw:g} kW, power factor {element.power_factor:g}, {element.starter}, "
            f"{times.value:g} × rated current at start"
        )
    if isinstance(element, Generator):
        holds = f", holds {element.hold_percent:g} % of nominal" if element.hold_percent is not None else ""
        way = "feeds in" if element.output_kvar >= 0 else "absorbs"
        return f"{element.output_kw:g} kW, {way} {abs(element.output_kvar):g} kvar{holds}"
    assert isinstance(element, Capacitor)
    return f"{element.rating_kvar:g} kvar" + ("" if element.connected else ", switched off")


def _supply(subject: Subject, id: str, supply: Supply) -> str:
    shares = [case.supply_percent * supply.held_percent / 100 for case in subject.drawing.cases]
    words = f"{supply.nominal_v:g} V, {supply.wires}, held at {min(shares):g} to {max(shares):g} %"
    levels = [subject.value(id, f"fault_level_{end}_mva").value for end in ("min", "max")]
    known = [f"{level:.4g}" for level in levels if isinstance(level, float)]
    return words + (
        f", fault level {' to '.join(dict.fromkeys(known))} MVA" if known else ", no fault level stated"
    )


def _line(subject: Subject, id: str, line: Line) -> str:
    runs = f"{line.side_by_side} runs of " if line.side_by_side > 1 else ""
    words = f"{round(line.length_m, 1):g} m, {runs}{line.type or 'type not stated'}"
    if subject.outcome.wires is not None:
        system = subject.outcome.wires.nodes.at(line.start, subject.first).system
        has = branch_wires(subject, id, subject.first).phases
        words += f", on {conductors(has, system)}" if has else ""
    trip = f", its device trips at {line.trip_a:g} A in 5 s" if line.trip_a is not None else ""
    return words + (f", Iz {line.rating_a:g} A" if line.rating_a is not None else ", no rating") + trip
