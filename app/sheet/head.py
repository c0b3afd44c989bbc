"""The head of the sheet, the basis it stands on, what was assumed, and the cautions."""

from app.model.conductors import is_hung
from app.model.fields import fields_of
from app.model.kinds import Branch, Generator, Line, Motor, Transformer
from app.sheet.cases import case_tables
from app.sheet.subject import FAIL, Subject, kind_name
from app.sheet.table import Cell, Cells, Column, Origin, SheetTable, Style, given, put_in, table, text
from app.study.cautions import CAUTIONS
from app.study.changers import is_changer
from app.study.outcome import Verdict
from app.study.phase_basis import BASIS as BASIS_OF_PHASES
from app.version import version
from solver.line import ALPHA

ITEM = Column("item", "Item", style=Style.TEXT, width=24)
SAYS = Column("value", "Value", style=Style.LONG, width=70)
UNITS = (
    "V, A, kW, kvar, kVA; losses of one element in W; lengths in m. Volts are between lines unless headed "
    "otherwise."
)
KINDS_OF_CELL = (
    ("Stated on the drawing", Origin.GIVEN, "an input"),
    ("Assumed", Origin.ASSUMED, "an input left blank, or as the shelf gave it; confirm it"),
    ("Solved", Origin.SOLVED, "a result, or a formula over other cells that gives the same result"),
)


def program() -> str:
    """Program and version as the head states them."""
    return f"Farend {version()}"


def verdict_words(verdict: Verdict) -> str:
    """A verdict as the sheet writes it."""
    return FAIL if verdict is Verdict.FAILS else verdict.value


def head_tables(subject: Subject) -> list[SheetTable]:
    """Project, revision, who and when, and in one line how it came out."""
    project = subject.drawing.project
    rows: dict[str, Cells] = {}
    for name, field in fields_of(type(project)).items():
        if name != "note":
            rows[name] = {"item": text(field.label), "value": given(getattr(project, name))}
    rows["frequency"] = {"item": text("Frequency"), "value": given(f"{subject.drawing.frequency_hz:g} Hz")}
    rows["units"] = {"item": text("Units"), "value": text(UNITS)}
    rows["program"] = {"item": text("Worked out with"), "value": text(program())}
    rows["result"] = {"item": text("Result"), "value": text(result_words(subject))}
    count = len(subject.outcome.assumptions)
    assumed = (
        f"{count}, listed as assumed values; confirm them before relying on this sheet." if count else "none"
    )
    rows["assumed"] = {"item": text("Assumed values"), "value": text(assumed)}
    if project.note:
        rows["note"] = {"item": text("Note"), "value": given(project.note)}
    key = {
        word: {"item": Cell(word, origin=origin), "value": text(meaning)}
        for word, origin, meaning in KINDS_OF_CELL
    }
    title = project.title or "Untitled drawing"
    return [
        table("head", "Head", title, (ITEM, SAYS), rows, held=0, plain=True),
        table("key", "Head", "How cells are marked", (ITEM, SAYS), key, held=0, plain=True),
    ]


def result_words(subject: Subject) -> str:
    """`NOT SOLVED` with the reason, or how many checks fail and which is the worst."""
    outcome = subject.outcome
    if not subject.solved:
        words = unsolved_words(subject)
        if subject.figures:
            return " ".join([words, *(f.sentence for f in outcome.findings if f.verdict is Verdict.BLOCKS)])
        if outcome.largest_share is not None:
            words += (
                f" The largest share of the load that still solves is {outcome.largest_share * 100:.1f} %"
            )
            words += f", set by {subject.tell(outcome.to_blame)}." if outcome.to_blame else "."
        return words
    worst = next((f for f in outcome.findings if f.verdict is Verdict.FAILS), None)
    return f"{outcome.sentence.removesuffix('.')}: {worst.sentence}" if worst else outcome.sentence


def unsolved_words(subject: Subject) -> str:
    """`NOT SOLVED` and what the outcome says; where some cases are solved, in which."""
    return f"NOT SOLVED{' in ' + subject.unsolved if subject.unsolved else ''}. {subject.outcome.sentence}"


def basis_tables(subject: Subject) -> list[SheetTable]:
    """Limits, constants, rules, cases and every assumed value."""
    return [
        _limits(subject),
        *_constants(subject),
        _rules(subject),
        *case_tables(subject, BASIS),
        _assumed(subject),
    ]


BASIS = "Basis"
VALUE = Column("value", "Value", digits=1, width=12)
UNIT = Column("unit", "Unit", style=Style.TEXT, width=18)


NO_CLAIM = "chosen for this drawing; no standard is claimed"


def _limits(subject: Subject) -> SheetTable:
    limits = subject.drawing.limits
    names_of = {"low": limits.name, "high": limits.name, "drop": limits.drop_name, "rise": limits.rise_name}
    columns = (ITEM, VALUE, UNIT, Column("whose", "Whose limit", style=Style.LONG, width=84))
    rows: dict[str, Cells] = {}
    names: tuple[str, ...] = ("low", "high", "drop", "rise", "most_loaded")
    if any(isinstance(e, Motor) for e in subject.drawing.elements.values()):
        names += ("start_supply", "start_step", "start_motor")
    if subject.outcome.wires is not None:
        names += ("unbalance", "neutral")
        names_of |= {"unbalance": limits.unbalance_name, "neutral": limits.neutral_name}
    for name in names:
        field = fields_of(type(limits))[name + ("_v" if name == "neutral" else "_percent")]
        value = getattr(limits, field.name)
        named = limits.start_name if name.startswith("start") else names_of.get(name)
        rows[name] = {
            "item": text(field.label),
            "value": given("not judged" if value is None else value),
            "unit": text("" if value is None else field.unit),
            "whose": given(named or NO_CLAIM) if value is not None else text(""),
        }
    return table("limits", BASIS, "Limits", columns, rows, held=0)


RULES = (
    (
        "Network",
        "Backward/forward sweep of the trees below the supplies, the currents that close rings by "
        "compensation, to a closure below 1e-6 of the supply.",
    ),
    (
        "Load model",
        "Each load states its shares of constant power, current and impedance; blank is constant power.",
    ),
    (
        "Motor",
        "Running: constant power, rated output over efficiency. Starting straight on the line: the locked "
        "rotor as an impedance; behind a soft starter or a drive: a held current. Each is started in turn "
        "while the others run, with every supply behind U²/Sk at its least fault level.",
    ),
    (
        "Tap changer, regulator",
        "Steps notch by notch, those nearest the supply first, until the volts it holds, less the line drop, "
        "are within half its bandwidth of its setting, or until its end stop.",
    ),
    (
        "Generator that holds volts",
        "Makes the reactive power that holds its node, within its limits. At 0 % in a case, or of its "
        "profile, it is off and holds nothing; drawn with no output it is a condenser, and holds.",
    ),
    (
        "Conductor temperature",
        "R = R20·[1 + α·(θ − 20 °C)] at the stated operating temperature, the same in every case "
        "(IEC 60287-1-1:2006, from memory). R20 is the maker's or the table's value as typed in.",
    ),
    (
        "Overhead line with a spacing",
        "Series impedance by modified Carson's equations (Carson 1926), its phases changing places along the "
        "way where all phases are alike; a neutral earthed along by Kron's reduction; charging by images in "
        "the earth. Resistance, GMR and soil as stated or assumed; a reactance typed besides is not used.",
    ),
    (
        "Transformer",
        "Short-circuit impedance from uk and Pk, magnetising branch from i0 and P0 "
        "(IEC 60076-1:2011 and IEC 60076-8:1997, editions from memory); uk and Pk are the nameplate's, the "
        "same at every tap.",
    ),
    ("Voltage drop", "Difference of the volts at both ends, not a projection."),
    ("Judging", "On unrounded figures; a figure close to its limit is printed with more digits."),
    (
        "Demand",
        "Used as stated on the drawing; no diversity is applied beyond the percentages of the case.",
    ),
)


def _rules(subject: Subject) -> SheetTable:
    phases = () if subject.outcome.wires is None else BASIS_OF_PHASES
    told = (*_applying(subject), *phases, *subject.outcome.fault_basis)
    rows = {item: {"item": text(item), "value": text(words)} for item, words in told}
    return table("rules", BASIS, "Methods and standards", (ITEM, SAYS), rows, held=0, plain=True)


def _applying(subject: Subject) -> list[tuple[str, str]]:
    """The rules of what the drawing has."""
    elements = subject.drawing.elements.values()
    has = {
        "Motor": any(isinstance(e, Motor) for e in elements),
        "Tap changer, regulator": any(is_changer(e) for e in elements if isinstance(e, Branch)),
        "Generator that holds volts": any(isinstance(e, Generator) and e.hold_percent for e in elements),
        "Overhead line with a spacing": any(is_hung(e) for e in elements),
        "Transformer": any(isinstance(e, Transformer) for e in elements),
    }
    return [(item, words) for item, words in RULES if has.get(item, True)]


def _constants(subject: Subject) -> list[SheetTable]:
    """Of the metals that lines are drawn in."""
    metals = {e.conductor for e in subject.drawing.elements.values() if isinstance(e, Line)}
    columns = (ITEM, VALUE, UNIT, Column("source", "Source", style=Style.LONG, width=40))
    names = {"Cu": "α of copper", "Al": "α of aluminium"}
    rows: dict[str, Cells] = {
        metal: {
            "item": text(names[metal]),
            "value": given(alpha),
            "unit": text("per K at 20 °C"),
            "source": text("IEC 60287-1-1, from memory"),
        }
        for metal, alpha in sorted(ALPHA.items())
        if metal in metals
    }
    return [table("constants", BASIS, "Constants", columns, rows, held=0)] if rows else []


def _assumed(subject: Subject) -> SheetTable:
    columns = (
        Column("item", "Field", style=Style.TEXT, width=26),
        VALUE,
        UNIT,
        Column("of", "Of", style=Style.LONG, width=40),
        Column("basis", "Assumed because", style=Style.LONG, width=50),
    )
    alike: dict[tuple[str, float, str, str], list[str]] = {}
    for put in subject.outcome.assumptions:
        element = subject.drawing.elements.get(put.id)
        field = None if element is None else fields_of(type(element)).get(put.field)
        shared = (field.label if field else put.field, put.value, put.unit, put.basis)
        alike.setdefault(shared, []).append(put.id)
    rows: dict[str, Cells] = {}
    for number, ((field_name, value, unit, basis), ids) in enumerate(alike.items()):
        rows[str(number)] = {
            "item": text(field_name),
            "value": put_in(float(value)),
            "unit": text(unit),
            "of": text(", ".join(subject.tell(i) for i in ids)),
            "basis": text(basis),
        }
    note = "" if rows else "Nothing was assumed: every value is stated."
    return table("assumed", BASIS, "Assumed values, to be confirmed", columns, rows, note=note, held=0)


def note_tables(subject: Subject) -> list[SheetTable]:
    """Cautions, and the remarks people wrote beside elements."""
    rows = {str(n): {"item": text(f"{n}."), "value": text(words)} for n, words in enumerate(CAUTIONS, 1)}
    found = [table("cautions", "Cautions", "Cautions", (ITEM, SAYS), rows, held=0, plain=True)]
    remarks = {
        id: {"item": text(f"{subject.tell(id)}, {kind_name(e)}"), "value": given(e.note)}
        for id, e in subject.drawing.elements.items()
        if e.note
    }
    if remarks:
        found.append(
            table("remarks", "Cautions", "Remarks on elements", (ITEM, SAYS), remarks, held=0, plain=True)
        )
    return found
