"""Loads as drawn and as served, and everything that feeds in: supplies, generators, capacitors."""

import math

from app.model.by_case import percent_of, stated
from app.model.drawing import label
from app.model.kinds import Attachment, Capacitor, Generator, Load, Supply
from app.sheet.cases import factor_ref, share_ref
from app.sheet.elements import Entry, Extreme, Plan
from app.sheet.nodes import node_cell
from app.sheet.phase_attachments import hung_tables
from app.sheet.subject import Subject, kind_name
from app.sheet.table import Cell, Cells, Column, Origin, SheetTable, Style, given, text
from app.study.outcome import AttachmentState

LOADS = "loads"
SOURCES = "supplies"
NODE = Column("node", "At", style=Style.TEXT, width=12)
VOLTS = Column("u", "U", "V", style=Style.VOLTS, width=9)
KW = Column("kw", "P", "kW", digits=2, width=8)
KVAR = Column("kvar", "Q", "kvar", digits=2, width=8)
KVA = Column("kva", "S", "kVA", digits=2, width=8)
AMPS = Column("current", "I", "A", style=Style.AMPS, width=8)
STATE = Column("state", "State", style=Style.VERDICT, width=10)


def load_tables(subject: Subject) -> list[SheetTable]:
    """Every load: what is stated, how it follows the voltage, what it draws."""
    loads = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Load)}
    data = (
        NODE,
        Column("demand", "Demand", "kW", digits=2),
        Column("demand_kva", "Demand", "kVA", digits=2),
        Column("pf", "Power factor", digits=2, width=8),
        Column("side", "Current", style=Style.TEXT, width=8),
        Column("model", "Load model", style=Style.TEXT, width=15),
        Column("i_share", "Constant current", "%", digits=0, width=8),
        Column("z_share", "Constant impedance", "%", digits=0, width=9),
        Column("reference", "Stated at", "V", digits=0, width=8),
    )
    plan = Plan(
        LOADS, "Loads", "Loads", data, (VOLTS, KW, KVAR, KVA, AMPS),
        (Extreme("kw_max", "kw", True, "P, most"),), (STATE,),
        note="P = demand · case % · (shares of constant power + current · U/Us + impedance · (U/Us)²); Us "
        "is the voltage the demand is stated at.",
    )  # fmt: skip
    return hung_tables(subject, plan, [_load(subject, i, e) for i, e in loads.items()])


def _load(subject: Subject, id: str, load: Load) -> Entry:
    states = [subject.outcome.attachments.at(id, c) for c in range(len(subject.cases))]
    data = subject.identity(id) | {
        "node": text(label(subject.drawing, load.node)),
        "pf": subject.value(id, "power_factor"),
        "side": given("leading" if load.leading else "lagging" if load.power_factor < 1 else ""),
        "i_share": _share(subject, id, "constant_current_percent"),
        "z_share": _share(subject, id, "constant_impedance_percent"),
        "reference": subject.value(id, "reference_v"),
        "model": text(model_words(load)),
    }
    if load.demand_kw is not None:
        data["demand"] = subject.value(id, "demand_kw")
        if load.power_factor > 0:
            data["demand_kva"] = Cell(load.demand_kw / load.power_factor, "{demand}/{pf}")
    elif load.demand_kva is not None:
        data["demand_kva"] = subject.value(id, "demand_kva")
        data["demand"] = Cell(load.demand_kva * load.power_factor, "{demand_kva}*{pf}")
    figures = [_served(subject, id, load, s, c) for c, s in enumerate(states)]
    return Entry(id, data, figures, lambda worst: {"state": text("fed") if worst else subject.unfed()})


def _share(subject: Subject, id: str, field: str) -> Cell:
    """A share of a load; none is left where all of it is stated to be the other."""
    found = subject.value(id, field)
    return Cell(0.0) if found.value is None else found


def model_words(load: Load) -> str:
    """`constant power`, or the shares: `60 % P, 40 % I`."""
    current = load.constant_current_percent or 0.0
    impedance = load.constant_impedance_percent or 0.0
    shares = {"power": 100 - current - impedance, "current": current, "impedance": impedance}
    for word, share in shares.items():
        if share == 100:
            return f"constant {word}"
    letters = zip("PIZ", shares.values(), strict=True)
    return ", ".join(f"{share:g} % {letter}" for letter, share in letters if share)


def _served(subject: Subject, id: str, load: Load, state: AttachmentState, case: int) -> Cells:
    if not state.live:
        return {}
    found = flow(subject, load, state, case)
    share = "((100-{i_share}-{z_share})+{i_share}*{u}/{reference}+{z_share}*({u}/{reference})^2)/100"
    refs = {"case_percent": share_ref(subject, id, case, "load_percent")}
    demand, factor = "{demand}", factor_ref(subject, id, case)
    if factor is not None and load.demand_kva is not None:
        demand, refs = "{demand_kva}*{case_pf}", {**refs, "case_pf": factor}
    formula = demand + "*{case_percent}/100*" + share if stated(load)[0] else ""  # no share of nothing
    found["kw"] = Cell(state.kw, formula, refs)
    return found


def flow(subject: Subject, hung: Attachment, state: AttachmentState, case: int) -> Cells:
    """Volts, kW, kvar, kVA and amps of anything that hangs on a node."""
    root = subject.root(hung.node)
    return {
        "u": Cell(state.voltage_v, "{at}", {"at": node_cell(subject, hung.node, "u", case)}),
        "kw": Cell(state.kw),
        "kvar": Cell(state.kvar),
        "kva": Cell(math.hypot(state.kw, state.kvar), "SQRT({kw}^2+{kvar}^2)"),
        "current": Cell(state.current_a, f"{{kva}}*1000/({root}*{{u}})"),
    }


def source_tables(subject: Subject) -> list[SheetTable]:
    """Everything that feeds in, as stated and as found."""
    kinds = (Supply, Generator, Capacitor)
    hung = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, kinds)}
    data = (
        NODE,
        Column("kind", "Kind", style=Style.TEXT, width=9),
        Column("rating", "Stated", digits=0),
        Column("unit", "", style=Style.TEXT, width=6),
        Column("rest", "As", style=Style.TEXT, width=22),
    )
    pf = Column("pf", "Power factor", digits=3, width=8)
    plan = Plan(
        SOURCES, "Supplies", "Supplies, generators and capacitors", data, (VOLTS, KW, KVAR, KVA, pf, AMPS),
        (Extreme("kva_max", "kva", True, "S, most"),), (STATE,),
        note="Power is counted as fed into the layout.",
    )  # fmt: skip
    return hung_tables(subject, plan, [_source(subject, i, e) for i, e in hung.items()])


def _source(subject: Subject, id: str, hung: Supply | Generator | Capacitor) -> Entry:
    states = [subject.outcome.attachments.at(id, c) for c in range(len(subject.cases))]
    data = subject.identity(id) | {
        "kind": text(kind_name(hung)),
        "node": text(label(subject.drawing, hung.node)),
    }
    figures = [_fed_in(subject, id, hung, s, c) for c, s in enumerate(states)]
    shares = [percent_of(case, id, hung) for case in subject.drawing.cases]
    off = text("off") if isinstance(hung, Capacitor) and not any(shares) else subject.unfed()
    data |= _stated(subject, id, hung)
    return Entry(id, data, figures, lambda worst: {"state": text("connected") if worst else off})


def _stated(subject: Subject, id: str, hung: Supply | Generator | Capacitor) -> Cells:
    if isinstance(hung, Supply):
        angle = f", {hung.angle_deg:g}°" if hung.angle_deg else ""
        words = f"{hung.wires}, held at {hung.held_percent:g} %{angle}"
        return {"rating": subject.value(id, "nominal_v"), "unit": text("V"), "rest": given(words)}
    if isinstance(hung, Generator):
        way = "feeds in" if hung.output_kvar >= 0 else "absorbs"
        words = f"fixed output, {way} {abs(hung.output_kvar):g} kvar"
        if hung.hold_percent is not None:
            words = f"holds {hung.hold_percent:g} % of nominal"
        return {"rating": subject.value(id, "output_kw"), "unit": text("kW"), "rest": given(words)}
    rest = text("at nominal voltage, assumed", Origin.ASSUMED)
    if hung.rated_v is not None:
        rest = given(f"at {hung.rated_v:g} V")
    return {"rating": subject.value(id, "rating_kvar"), "unit": text("kvar"), "rest": rest}


def _fed_in(
    subject: Subject, id: str, hung: Supply | Generator | Capacitor, state: AttachmentState, case: int
) -> Cells:
    share = 100.0
    if isinstance(hung, Capacitor):
        share = percent_of(subject.drawing.cases[case], id, hung)
    if not state.live or not share:
        return {}
    found = flow(subject, hung, state, case)
    kva = math.hypot(state.kw, state.kvar)
    if kva and not isinstance(hung, Capacitor):
        found["pf"] = Cell(abs(state.kw) / kva, "ABS({kw})/{kva}")
    rated = subject.value(id, "rated_v").value if isinstance(hung, Capacitor) else None
    if isinstance(rated, float):
        part, refs = (
            ("", {}) if share == 100 else ("*{share}/100", {"share": share_ref(subject, id, case, "")})
        )
        found["kvar"] = Cell(state.kvar, f"{{rating}}{part}*({{u}}/{rated!r})^2", refs)
    return found
