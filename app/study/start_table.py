"""What a study of motor starts answers: each motor started in turn, one row a motor, one column a case."""

from dataclasses import dataclass

from msgspec import Struct

from app.study.outcome import Table


class StartState(Struct, frozen=True):
    """One motor's start in one case; nan where it finds no operating point, and then not solved, or where
    motors stand still in the case. Steps are falls from the volts
    before, in percent of these; volts are between lines, or between the two wires."""

    solved: bool
    motor_before_v: float
    motor_v: float
    motor_percent: float  # of its rated voltage
    motor_step_percent: float
    board_before_v: float
    board_v: float
    board_step_percent: float
    supply_before_v: float
    supply_v: float
    supply_step_percent: float  # nan where no fault level is stated
    current_a: float
    times_rated: float
    torque_percent: float  # of the locked-rotor torque at rated voltage; nan for a drive, which makes its own
    motor_phase: str = ""  # the way that falls most, such as B, L1 or B–C; blank where phases are alike
    board_phase: str = ""
    supply_phase: str = ""


@dataclass(frozen=True)
class StartTable(Table[StartState]):
    """Starts by the id of the motor.

    boards : (motor,) id of the nearest node towards the supply that serves something else too
    supplies : (motor,) id of the supply that feeds it
    board_over, supply_over : (motor,) float, the volts told over those of one phase; empty where alike
    """

    boards: tuple[str, ...] = ()
    supplies: tuple[str, ...] = ()
    board_over: tuple[float, ...] = ()
    supply_over: tuple[float, ...] = ()
