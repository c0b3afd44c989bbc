"""What a year answers: energies, extremes with their hour, hours beyond limits. Frozen, unrounded."""

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from app.study.outcome import Finding, Table
from app.study.year_points import Points
from solver.status import Status

Real = NDArray[np.float64]
Index = NDArray[np.intp]


@dataclass(frozen=True, slots=True)
class NodeYear:
    """One node through the year. `_at_h`: when, in hours since 1 January 00:00; nan where it never was."""

    live: bool
    nominal_v: float
    lowest_v: float  # of the lowest phase, as in the tables of a case
    lowest_percent: float  # of nominal
    lowest_at_h: float
    highest_v: float
    highest_percent: float
    highest_at_h: float
    hours_below: float  # h under the lowest voltage allowed
    hours_above: float  # h over the highest voltage allowed
    most_drop_percent: float  # of nominal, below the supply
    most_drop_at_h: float
    hours_drop: float  # h beyond the drop allowed; nan where none is set


@dataclass(frozen=True, slots=True)
class BranchYear:
    """One branch through the year."""

    live: bool
    through_kwh: float  # that entered it the way it is fed
    back_kwh: float  # that entered it the other way
    loss_kwh: float
    line_kwh: float  # loss of a cable or line; 0 for others
    copper_kwh: float  # load loss of a transformer; 0 for others
    iron_kwh: float  # no-load loss of a transformer; 0 for others
    most_a: float
    most_a_at_h: float
    most_loaded_percent: float  # nan where no rating is given
    most_loaded_at_h: float
    hours_over: float  # h loaded beyond what is allowed
    least_notch: float  # where a tap changer or regulator stood; nan for others
    most_notch: float
    hours_at_stop: float  # h at an end stop and out of its band; nan for others


@dataclass(frozen=True, slots=True)
class AttachmentYear:
    """One attachment through the year. Drawn by loads and motors, fed in by the others, as in a case."""

    live: bool
    kwh: float
    back_kwh: float  # that a supply took back, part of kwh with a minus; else 0
    mean_kw: float
    most_kw: float
    most_at_h: float
    load_factor: float  # mean over most; nan where it draws nothing


@dataclass(frozen=True, slots=True)
class YearBalance:
    """Where the energy of all supplies goes. supply + generation = load + loss, in kWh."""

    supply_kwh: float
    generation_kwh: float
    load_kwh: float
    line_kwh: float
    copper_kwh: float
    iron_kwh: float
    loss_kwh: float
    closure: float  # |supply + generation − load − loss| over what is fed in
    worst_closure: float  # of any point, of complex power
    peak_kw: float  # most that all supplies together gave
    peak_at_h: float
    peak_loss_kw: float  # most that lines and windings lost together
    load_factor: float  # mean over peak of all supplies
    loss_factor: float  # mean over peak of what lines and windings lose: the loss load factor
    utilisation_h: float  # h at peak that would take as much energy
    iron_percent: float  # of all losses
    loss_percent: float  # of what is fed in
    cost: float  # of the losses; nan without a price


@dataclass(frozen=True)
class Course:
    """Point by point: (point,) each, nan where there is no answer. `_row`: of the table, −1 for none."""

    supply_kw: Real
    generation_kw: Real
    load_kw: Real
    line_kw: Real
    copper_kw: Real
    iron_kw: Real
    lowest_percent: Real
    lowest_row: Index
    highest_percent: Real
    highest_row: Index
    loaded_percent: Real
    loaded_row: Index


@dataclass(frozen=True, slots=True)
class Gap:
    """Points in a row without an answer."""

    first: int
    last: int
    hours: float
    status: Status


@dataclass(frozen=True)
class YearOutcome:
    """A year of a drawing. Figures are those of the points that solved; `gaps` names the others, and
    `status` is SOLVED only where there are none. `solved_h` is 0 where there are no figures at all.
    `done` is less than all points where it was stopped."""

    status: Status
    sentence: str
    basis: tuple[str, ...]  # what it stands on, in words
    points: Points
    done: int
    solved_h: float
    nodes: Table[NodeYear]
    branches: Table[BranchYear]
    attachments: Table[AttachmentYear]
    balance: YearBalance
    course: Course
    gaps: tuple[Gap, ...]
    findings: tuple[Finding, ...]
    price: float | None = None  # of a kWh lost
    money: str = ""
    seconds: dict[str, float] = field(default_factory=dict)

    @property
    def stopped(self) -> bool:
        """True where it was stopped before its end."""
        return self.done < self.points.count
