"""Fault currents: what each board must bear, what is left at the ends of circuits, which device clears it."""

import math

from app.model.kinds import Line
from app.sheet.subject import FAIL, FROM_TO, HOLDS, IDENTITY, PASSED, Subject
from app.sheet.table import Cell, Cells, Column, Origin, Ref, SheetTable, Style, given, table, text
from app.study.checking import NOISE
from app.study.fault_basis import CAUTION
from app.study.fault_devices import Device, devices
from app.study.fault_findings import greatest, to_earth
from app.study.outcome import FaultState

MOST, LEAST, DEVICES = "faults", "circuit_ends", "devices"
TO_EARTH = "near, to earth"
ROOTS = ((3**0.5, "/SQRT(3)"), (1.0, ""), (2.0, "/2"))  # Un over the volts that drive a loop
UN = Column("un", "Un", "V", digits=0, width=8)
KA = {"unit": "kA", "digits": 2, "width": 8}
MOST_COLUMNS = (
    *IDENTITY, UN,
    Column("c", "cmax", digits=2, width=6),
    Column("r", "R seen", "Ω", digits=5, width=9),
    Column("x", "X seen", "Ω", digits=5, width=9),
    Column("ik3", "Ik3 max", near="rating", **KA),  # type: ignore[arg-type]
    Column("xr", "X/R", digits=2, width=7),
    Column("rx", "R/X of peak", digits=3, width=8),
    Column("kappa", "κ", digits=3, width=7),
    Column("ip", "Peak ip", **KA),  # type: ignore[arg-type]
    Column("ik2", "Ik2 max", near="rating", **KA),  # type: ignore[arg-type]
    Column("ikn", "Phase to neutral", near="rating", **KA),  # type: ignore[arg-type]
    Column("ik1", "Ik1 max", near="rating", **KA),  # type: ignore[arg-type]
    Column("ik2e", "Ik2E max", near="rating", **KA),  # type: ignore[arg-type]
    Column("rating", "Board rated", **KA),  # type: ignore[arg-type]
    Column("margin", "Margin", near="0", **KA),  # type: ignore[arg-type]
    Column("verdict", "Verdict", style=Style.VERDICT, width=14),
)  # fmt: skip
LEAST_COLUMNS = (
    *IDENTITY, UN,
    Column("c", "cmin", digits=2, width=6),
    Column("ik3", "Ik3 min", **KA),  # type: ignore[arg-type]
    Column("ik2", "Ik2 min", **KA),  # type: ignore[arg-type]
    Column("ikn", "Phase to neutral", **KA),  # type: ignore[arg-type]
    Column("zs", "Zs", "Ω", digits=3, width=9),
    Column("ik1", "Ik1 min", **KA),  # type: ignore[arg-type]
)  # fmt: skip
DEVICE_COLUMNS = (
    *IDENTITY, *FROM_TO,
    Column("at", "Least at", style=Style.TEXT, width=14),
    Column("ik2", "Ik2 min there", "A", style=Style.AMPS),
    Column("zs", "Zs there", "Ω", digits=3),
    Column("ik1", "Ik1 min there", "A", style=Style.AMPS, near="trip"),
    Column("trip", "Trips at Ia", "A", style=Style.AMPS),
    Column("time", "within", "s", digits=0, width=7),
    Column("margin", "Margin", "A", style=Style.AMPS, near="0"),
    Column("verdict", "Verdict", style=Style.VERDICT, width=24),
)  # fmt: skip
MOST_NOTE = (
    "Ik3 = cmax·Un/(√3·|Z|), Ik2 = √3/2·Ik3, ip = κ·√2·Ik3; between two conductors I = cmax·U/|Z| of their "
    f"loop and ip = κ·√2·I. Initial symmetrical values. {CAUTION}"
)
LEAST_NOTE = (
    "At the end of each circuit, conductors hot. Ik2 = √3/2·Ik3, Ik1 = cmin·U/Zs with U from phase to earth. "
    f"An Ik1 of 0 finds no way back. {CAUTION}"
)
DEVICE_NOTE = (
    "The least earth-fault current behind each device, up to the next device or transformer, against the "
    f"current stated to trip it in 5 s. {CAUTION}"
)


def fault_tables(subject: Subject) -> list[SheetTable]:
    """What boards must bear, what is left at circuit ends, and every device with a trip current."""
    states = subject.outcome.faults
    if states is None:
        return []
    at = {id: states.at(id) for id in states.ids}
    most = {id: _most(subject, id, state) for id, state in at.items()}
    least = {id: _least(subject, id, state) for id, state in at.items()}
    guarded = {d.line: _device(subject, d, at) for d in devices(subject.layout, states)}
    made = [
        table(
            MOST,
            "Faults",
            "Highest fault currents and boards",
            _filled(MOST_COLUMNS, most),
            most,
            note=MOST_NOTE,
        ),
        table(
            LEAST,
            "Circuit ends",
            "Least fault currents",
            _filled(LEAST_COLUMNS, least),
            least,
            note=LEAST_NOTE,
        ),
    ]
    if guarded:
        title = "Devices and earth faults"
        made.append(table(DEVICES, "Devices", title, DEVICE_COLUMNS, guarded, note=DEVICE_NOTE))
    return made


def _filled(columns: tuple[Column, ...], rows: dict[str, Cells]) -> list[Column]:
    """The columns, phase to neutral only where a node has it."""
    figures = [cells["ikn"].value for cells in rows.values() if "ikn" in cells]
    any_ = any(isinstance(value, float) and not math.isnan(value) for value in figures)
    return [c for c in columns if c.key != "ikn" or any_]


def _level(subject: Subject, id: str) -> Cells:
    nominal = subject.outcome.nodes.at(id).nominal_v
    return subject.identity(id) | {"un": Cell(nominal, origin=Origin.GIVEN)}


def _most(subject: Subject, id: str, state: FaultState) -> Cells:
    found = _level(subject, id) | {"rating": subject.value(id, "withstand_ka")}
    if not state.live:
        return found | {"verdict": text("not worked out")}
    un, whole = float(found["un"].value or 0), "SQRT({r}^2+{x}^2)"
    size = math.hypot(state.r_ohm, state.x_ohm)
    three = not math.isnan(state.ik3_max_ka)
    judged = _greatest(state)
    found |= {
        "c": Cell(state.c_max),
        "r": Cell(state.r_ohm),
        "x": Cell(state.x_ohm),
        "ik3": Cell(state.ik3_max_ka, redone(state.c_max * un, size, state.ik3_max_ka, "c", whole)),
        "xr": Cell(state.xr, "{x}/{r}" if state.r_ohm else ""),
        "rx": Cell(state.rx_peak),
        "kappa": Cell(_kappa(state), "1.02+0.98*EXP(-3*{rx})" if math.isfinite(state.rx_peak) else ""),
        "ip": Cell(state.ip_ka, f"{{kappa}}*SQRT(2)*{{{judged}}}" if greatest(state)[1] else ""),
        "ik2": Cell(state.ik2_max_ka, _two_phase(state, un, size, whole, three)),
        "ikn": Cell(state.ikn_max_ka, redone(state.c_max * un, size, state.ikn_max_ka, "c", whole)),
        "ik1": Cell(state.ik1_max_ka),
        "ik2e": Cell(state.ik2e_max_ka),
    }
    return found | _board(found, judged, state)


def _two_phase(state: FaultState, un: float, size: float, whole: str, three: bool) -> str:
    if three and math.isclose(state.ik2_max_ka, 3**0.5 / 2 * state.ik3_max_ka, rel_tol=1e-9):
        return "SQRT(3)/2*{ik3}"
    return redone(state.c_max * un, size, state.ik2_max_ka, "c", whole)


def redone(volts: float, ohms: float, kiloamps: float, factor: str, whole: str) -> str:
    """c · Un over what of it drives the loop, over the loop: the formula that gives this current, if any."""
    if not ohms or not kiloamps > 0 or not math.isfinite(kiloamps):
        return ""
    over = volts / ohms / kiloamps / 1e3
    found = (w for share, w in ROOTS if math.isclose(over, share, rel_tol=1e-9))
    return next((f"{{{factor}}}*{{un}}{w}/{whole}/1000" for w in found), "")


def _greatest(state: FaultState) -> str:
    """The column of the current that a board is held against: three-phase, or else the greatest of a loop."""
    value = greatest(state)[1]
    return next((k for k in ("ik3", "ik2", "ikn", "ik1") if getattr(state, k + "_max_ka") == value), "ik1")


def _kappa(state: FaultState) -> float:
    current = greatest(state)[1]
    return state.ip_ka / (2**0.5 * current) if current else math.nan


def _board(cells: Cells, judged: str, state: FaultState) -> Cells:
    """The margin and the verdict of a board; near where a fault to earth drives more than it is rated for."""
    rating, current = cells["rating"].value, cells[judged].value
    if not isinstance(rating, float) or not isinstance(current, float):
        return {"verdict": text("no rating")}
    margin = rating - current
    held = TO_EARTH if to_earth(state) > rating else HOLDS
    redo = f'IF({{margin}}{PASSED},"FAIL",IF(MAX({{ik1}},{{ik2e}})>{{rating}},"{TO_EARTH}","holds"))'
    return {
        "margin": Cell(margin, f"{{rating}}-{{{judged}}}"),
        "verdict": Cell(FAIL if margin <= -NOISE else held, redo),
    }


def _least(subject: Subject, id: str, state: FaultState) -> Cells:
    found = _level(subject, id)
    if not state.live:
        return found
    un = float(found["un"].value or 0)
    three = math.isclose(state.ik2_min_ka, 3**0.5 / 2 * state.ik3_min_ka, rel_tol=1e-9)
    return found | {
        "c": Cell(state.c_min),
        "ik3": Cell(state.ik3_min_ka),
        "ik2": Cell(state.ik2_min_ka, "SQRT(3)/2*{ik3}" if three else ""),
        "ikn": Cell(state.ikn_min_ka),
        "zs": Cell(state.zs_ohm),
        "ik1": Cell(state.ik1_min_ka, redone(state.c_min * un, state.zs_ohm, state.ik1_min_ka, "c", "{zs}")),
    }


def _device(subject: Subject, device: Device, at: dict[str, FaultState]) -> Cells:
    line = subject.drawing.elements[device.line]
    assert isinstance(line, Line)
    found = subject.identity(device.line) | subject.ends(device.line, line)
    found |= {"trip": subject.value(device.line, "trip_a"), "time": given(5.0)}
    if device.why:
        return found | {"verdict": text(f"not judged: {device.why}")}
    state, margin = at[device.node], device.current_a - device.trip_a
    there = {name: Ref(name, LEAST, device.node) for name in ("ik1", "ik2", "zs")}
    return found | {
        "at": text(subject.tell(device.node)),
        "ik2": Cell(state.ik2_min_ka * 1e3, "{there}*1000", {"there": there["ik2"]}),
        "zs": Cell(state.zs_ohm, "{there}", {"there": there["zs"]}),
        "ik1": Cell(device.current_a, "{there}*1000", {"there": there["ik1"]}),
        "margin": Cell(margin, "{ik1}-{trip}"),
        "verdict": Cell(FAIL if margin <= -NOISE else HOLDS, f'IF({{margin}}{PASSED},"FAIL","holds")'),
    }
