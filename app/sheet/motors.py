"""Motors: what each draws as drawn, and what its start does to itself, its board and its supply."""

from collections.abc import Callable
from dataclasses import replace

from app.model.drawing import label
from app.model.kinds import Motor
from app.sheet.attachments import AMPS, KVA, KVAR, KW, NODE, STATE, VOLTS, flow
from app.sheet.cases import share_ref
from app.sheet.elements import Entry, Extreme, Plan, by_element
from app.sheet.nodes import VERDICT
from app.sheet.phase_attachments import hung_tables
from app.sheet.subject import FAIL, PASSED, Subject, limit
from app.sheet.table import Cell, Cells, Column, SheetTable, Style, given, text
from app.study.checking import margin_of
from app.study.outcome import AttachmentState
from app.study.start_table import StartState

MOTORS = "motors"
STARTS = "starts"
JUDGED = (  # column of the extreme, field of the limits, whether it must not fall below
    ("supply_max", "start_supply_percent", False),
    ("board_max", "start_step_percent", False),
    ("percent_min", "start_motor_percent", True),
)


def motor_tables(subject: Subject) -> list[SheetTable]:
    """Every motor in operation, and every start that was worked out."""
    motors = {i: e for i, e in subject.drawing.elements.items() if isinstance(e, Motor)}
    if not motors:
        return []
    data = (
        NODE,
        Column("out", "Rated output", "kW", digits=2),
        Column("efficiency", "Efficiency", digits=3, width=10),
        Column("pf", "Power factor", digits=2, width=8),
        Column("drawn", "As drawn", style=Style.TEXT, width=10),
    )
    plan = Plan(
        MOTORS, "Motors", "Motors", data, (VOLTS, KW, KVAR, KVA, AMPS),
        (Extreme("kw_max", "kw", True, "P, most"),), (STATE,),
        note="Running: P = rated output / efficiency · case %, whatever the voltage.",
    )  # fmt: skip
    return hung_tables(subject, plan, [_motor(subject, i, e) for i, e in motors.items()]) + _starts(subject)


def _motor(subject: Subject, id: str, motor: Motor) -> Entry:
    states = [subject.outcome.attachments.at(id, c) for c in range(len(subject.cases))]
    data = subject.identity(id) | {
        "node": text(label(subject.drawing, motor.node)),
        "out": subject.value(id, "rated_kw"),
        "efficiency": subject.value(id, "efficiency"),
        "pf": subject.value(id, "power_factor"),
        "drawn": given(motor.state),
    }
    figures = [_drawn(subject, id, motor, s, c) for c, s in enumerate(states)]
    fed = text("off" if motor.state == "off" else "fed")
    return Entry(id, data, figures, lambda worst: {"state": fed if worst else subject.unfed()})


def _drawn(subject: Subject, id: str, motor: Motor, state: AttachmentState, case: int) -> Cells:
    if not state.live:
        return {}
    found = flow(subject, motor, state, case)
    if motor.state == "running":
        scaled = {"case_percent": share_ref(subject, id, case, "motor_percent")}
        found["kw"] = Cell(state.kw, "{out}/{efficiency}*{case_percent}/100", scaled)
    if not state.voltage_v:
        del found["current"]
    return found


def _starts(subject: Subject) -> list[SheetTable]:
    table = subject.outcome.starts
    if table is None:
        return []
    data = (
        Column("starter", "Starter", style=Style.TEXT, width=12),
        Column("times", "Start, locked or limited", "× rated", digits=1, width=12),
        Column("factor", "Power factor at start", digits=2, width=9),
        Column("rated_v", "Rated", "V", digits=0),
        Column("board", "Board", style=Style.TEXT, width=16),
        Column("supply", "Supply", style=Style.TEXT, width=16),
    )
    figures = (
        replace(AMPS, key="amps", head="I at start"),
        Column("before", "Motor, before", "V", style=Style.VOLTS, width=10),
        Column("u", "Motor, starting", "V", style=Style.VOLTS, width=10),
        Column("percent", "Of rated", "%", digits=1, near="percent_limit"),
        Column("board_before", "Board, before", "V", style=Style.VOLTS, width=10),
        Column("board_u", "Board, starting", "V", style=Style.VOLTS, width=10),
        Column("board_step", "Step, board", "%", digits=2),
        Column("supply_before", "Supply, before", "V", style=Style.VOLTS, width=10),
        Column("supply_u", "Supply, starting", "V", style=Style.VOLTS, width=10),
        Column("supply_step", "Step, supply", "%", digits=2),
        Column("torque", "Torque", "% of locked rotor", digits=0, width=10),
    )
    extremes = (
        Extreme("supply_max", "supply_step", True, "Step, supply, most"),
        Extreme("board_max", "board_step", True, "Step, board, most"),
        Extreme("percent_min", "percent", False, "Of rated, least"),
    )
    plan = Plan(
        STARTS, "Motor starts", "Motor starts", data, figures, extremes, (VERDICT,),
        note="Each motor in turn while the others run. Supplies stand behind their least fault level, where "
        "it is stated. Steps are of the volts before. The board is the nearest node towards the supply that "
        "serves something else. A case in which motors stand still has no start.",
    )  # fmt: skip
    return by_element(subject, plan, [_start(subject, id, row) for id, row in table.rows.items()])


def _start(subject: Subject, id: str, row: int) -> Entry:
    table, motor = subject.outcome.starts, subject.drawing.elements[id]
    assert isinstance(motor, Motor)
    assert table is not None
    straight = motor.starter == "direct"
    data = subject.identity(id) | {
        "starter": given(motor.starter),
        "times": subject.value(id, "starting_current" if straight else "limited_current"),
        "factor": subject.value(id, "starting_power_factor" if straight else "limited_power_factor"),
        "rated_v": subject.value(id, "rated_v"),
        "board": text(label(subject.drawing, table.boards[row])),
        "supply": text(label(subject.drawing, table.supplies[row])),
    }
    states = [table.at(id, c) for c in range(len(subject.cases))]
    solved = all(states[case].solved for case in subject.outcome.solved_cases)
    return Entry(id, data, [_figures(s) for s in states], _judge(subject, solved))


def _figures(state: StartState) -> Cells:
    if state.motor_v != state.motor_v:
        return {}
    return {
        "amps": Cell(state.current_a),
        "before": Cell(state.motor_before_v),
        "u": Cell(state.motor_v),
        "percent": Cell(state.motor_percent, "{u}/{rated_v}*100"),
        "board_before": Cell(state.board_before_v),
        "board_u": Cell(state.board_v),
        "board_step": Cell(state.board_step_percent, "({board_before}-{board_u})/{board_before}*100"),
        "supply_before": Cell(state.supply_before_v),
        "supply_u": Cell(state.supply_v),
        "supply_step": Cell(state.supply_step_percent, "({supply_before}-{supply_u})/{supply_before}*100"),
        "torque": Cell(state.torque_percent),
    }


def _judge(subject: Subject, solved: bool) -> Callable[[dict[str, float]], Cells]:
    def judge(worst: dict[str, float]) -> Cells:
        if not solved:
            return {"verdict": text(FAIL)}
        broken, tests, refs = False, [], {}
        for key, name, low in JUDGED:
            most = getattr(subject.drawing.limits, name)
            if most is None or key not in worst:
                continue
            broken |= bool(margin_of(worst[key], most, low) < 0)
            short = name.removesuffix("_percent")
            tests.append(f"{{{key}}}-{{{short}}}{PASSED}" if low else f"{{{short}}}-{{{key}}}{PASSED}")
            refs[short] = limit(short)
        if not tests:
            return {"verdict": text("not judged" if worst else "no start")}
        good = subject.held
        return {"verdict": Cell(FAIL if broken else good, f'IF(OR({",".join(tests)}),"FAIL","{good}")', refs)}

    return judge
