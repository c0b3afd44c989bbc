"""What a study answers: tables keyed by id, findings, assumptions, balance. Frozen, unrounded."""

import math
from collections.abc import Container
from dataclasses import dataclass, field
from enum import Enum
from typing import TYPE_CHECKING, Any, Generic, TypeVar

from msgspec import Struct
from numpy.typing import NDArray

from app.study.balance import Balance as Balance
from solver.status import Status

if TYPE_CHECKING:
    from app.study.start_table import StartTable

State = TypeVar("State")


class NodeState(Struct, frozen=True):
    """One node in one case. Volts are between lines (three-phase) or between the two wires; where phases
    are solved one by one, those of the lowest phase as if the others were like it."""

    live: bool
    nominal_v: float
    voltage_v: float
    percent: float  # of nominal, of the lowest phase
    high_percent: float  # of the highest phase; the same where phases are alike
    angle_deg: float
    drop_percent: float  # of nominal, below the supply of its tree (percent of supply minus percent here)
    route_m: float  # route length from the supply


class BranchState(Struct, frozen=True):
    """One branch in one case. Powers are those that enter at `start` and leave at `end`, so a branch
    fed from its end carries negative power. `forward`: fed from its start; on a ring, as the power flows."""

    live: bool
    forward: bool
    current_a: float  # worst of both ends; of all parallel runs together; winding fed side for a transformer
    start_a: float
    end_a: float
    start_kw: float
    start_kvar: float
    end_kw: float
    end_kvar: float
    through_kw: float  # that enters it, at the end where it does; negative against the way it is fed
    through_kva: float  # at that end
    loss_kw: float
    copper_kw: float  # series loss of line or winding
    iron_kw: float  # no-load loss of a transformer
    loss_kvar: float
    loaded_percent: float  # nan where no rating is given
    drop_percent: float  # voltage lost along it, % of nominal of each end; negative is a rise
    resistance_ohm: float  # at operating temperature, parallel runs merged, of one phase, or of both wires of
    # a two-wire system; transformer: seen at winding 2
    reactance_ohm: float
    notch: float  # where the tap of a transformer or a regulator stands; nan for other branches


class AttachmentState(Struct, frozen=True):
    """One attachment in one case. Power is drawn by loads (positive) and fed in by supplies,
    generators and capacitors (positive)."""

    live: bool
    kw: float
    kvar: float
    current_a: float
    voltage_v: float


class FaultState(Struct, frozen=True):
    """Fault currents at one node, initial symmetrical, without a loading case; nan for what a node has not.
    Two-wire: between the wires, and to earth. `live`: worked out; else all are nan."""

    live: bool
    ik3_max_ka: float
    ip_ka: float  # peak of the three-phase fault, or of the greatest between two conductors
    xr: float  # X/R seen from here, as for the highest current
    ik2_max_ka: float
    ik1_max_ka: float  # phase to earth; 0 where the zero sequence has no way back
    ik2e_max_ka: float  # two phases and earth, the greater of the two phases
    ik3_min_ka: float
    ik2_min_ka: float
    ik1_min_ka: float
    zs_ohm: float  # earth-fault loop, hot, the supply included; nan where there is none
    c_max: float  # voltage factors
    c_min: float
    r_ohm: float  # seen from here by the highest three-phase current, or round the loop of two conductors
    x_ohm: float
    rx_peak: float  # R/X of the peak, by the equivalent frequency
    ikn_max_ka: float  # phase to neutral, where the node lacks phases
    ikn_min_ka: float


class NodeWires(Struct, frozen=True):
    """One node in one case, conductor by conductor: nan where there is no such conductor."""

    system: str  # three-phase, two-wire or split-phase
    phases: str  # that reach it, such as ABC or B; of a split-phase system A and B are the hot wires
    against: str  # what its phase volts are taken against: neutral, earth or next phase
    base_v: float  # nominal volts between these
    a_v: float
    b_v: float
    c_v: float
    neutral_v: float  # neutral to earth; nan where none is carried, or nothing holds that side to earth
    unbalance_percent: float  # negative over positive sequence of the volts; nan unless three phases
    spread_percent: float  # largest deviation of a line voltage from the mean of the three, over the mean
    a_deg: float = math.nan  # angles of a_v, b_v and c_v
    b_deg: float = math.nan
    c_deg: float = math.nan


class BranchWires(Struct, frozen=True):
    """One branch in one case, conductor by conductor: amperes at the worst of both ends, of all parallel runs
    together; of a transformer those of the winding that is fed."""

    phases: str  # conductors it has, such as ABCN or BN
    a_a: float
    b_a: float
    c_a: float
    n_a: float
    a_notch: float = math.nan  # where regulators stand that step each phase by itself; nan for others
    b_notch: float = math.nan
    c_notch: float = math.nan


class AttachmentWires(Struct, frozen=True):
    """One attachment in one case, conductor by conductor: amperes in its leads."""

    phases: str  # conductors it hangs on, such as ABCN, BN or CA
    a_a: float
    b_a: float
    c_a: float
    n_a: float


@dataclass(frozen=True)
class Table(Generic[State]):
    """Rows by id, one array a column: (row,) or (row, case)."""

    state: type[State]
    ids: tuple[str, ...]
    columns: dict[str, NDArray[Any]]
    rows: dict[str, int]

    def __contains__(self, id: object) -> bool:
        return id in self.rows

    def at(self, id: str, case: int = 0) -> State:
        """The figures of one element in one case."""
        row = self.rows[id]
        return self.state(
            **{
                name: (column[row] if column.ndim == 1 else column[row, case]).item()
                for name, column in self.columns.items()
            }
        )

    def column(self, name: str) -> NDArray[Any]:
        """One column, shape (row,) or (row, case)."""
        return self.columns[name]


class Verdict(Enum):
    """How a finding judges, worst first; differs on screen by shape as well as colour."""

    BLOCKS = "not solved"
    FAILS = "fails"
    ADVICE = "advice exceeded"  # beyond what is advised; no limit of the drawing, so that it fails nothing
    NEAR = "near the limit"
    HOLDS = "holds"
    NOTE = "note"

    @property
    def rank(self) -> int:
        """0 is the worst."""
        return _RANK[self]


_RANK = {verdict: rank for rank, verdict in enumerate(Verdict)}


class Finding(Struct, frozen=True):
    """One judged check. `margin` is signed: negative fails. Structural findings carry only the sentence."""

    check: str  # such as "voltage low", "loading", "closed loop"
    verdict: Verdict
    ids: tuple[str, ...]
    sentence: str
    value: float | None = None
    limit: float | None = None
    margin: float | None = None
    unit: str = ""
    whose: str = ""  # whose limit it is
    case: str = ""  # of value and sentence: the worst one
    by_case: tuple[Verdict, ...] = ()  # where the cases differ; NOTE where one is not judged

    def in_case(self, case: int) -> Verdict:
        """How it judges one case."""
        return self.by_case[case] if self.by_case else self.verdict


class Assumption(Struct, frozen=True):
    """A value that was not given and what was put in its place."""

    id: str
    field: str
    value: float
    unit: str
    basis: str


@dataclass(frozen=True)
class Wired:
    """What phases and neutral do each for themselves, where a layout is solved so."""

    nodes: Table[NodeWires]
    branches: Table[BranchWires]
    attachments: Table[AttachmentWires]


@dataclass(frozen=True)
class Outcome:
    """Everything one solve of a drawing yields. A case that is not solved has no figures: its columns are
    nan and not live; `status` is the worst of all cases. Where none is solved every row is dead."""

    status: Status
    sentence: str
    cases: tuple[str, ...]
    nodes: Table[NodeState]
    branches: Table[BranchState]
    attachments: Table[AttachmentState]
    balance: Balance
    findings: tuple[Finding, ...]
    assumptions: tuple[Assumption, ...]
    upstream: dict[str, str]  # node id -> branch id that feeds it
    zones: dict[str, int]  # node id -> number of its voltage zone (parted by transformers)
    largest_share: float | None  # of the load that still solves, where there is no operating point
    to_blame: str | None  # the branch that sets it
    seconds: dict[str, float]  # timings by stage
    fed_from: dict[str, str] = field(
        default_factory=dict
    )  # node id -> the node before it, seen from the supply
    starts: "StartTable | None" = None  # motor starts, where there are motors and figures
    faults: "Table[FaultState] | None" = None  # by node id; None where no supply states a fault level
    fault_basis: tuple[tuple[str, str], ...] = ()  # items and sentences: how they were worked out
    wires: Wired | None = None  # phases and neutral; None where all phases are alike
    case_status: tuple[Status, ...] = ()  # of each case
    supply_sides: dict[str, int] = field(default_factory=dict)  # transformer id on a ring -> that winding

    def solved(self, case: int) -> bool:
        """Whether a case has an operating point, and so figures."""
        return (self.case_status[case] if self.case_status else self.status) is Status.SOLVED

    @property
    def solved_cases(self) -> tuple[int, ...]:
        """The cases that have figures."""
        return tuple(case for case in range(len(self.cases)) if self.solved(case))

    def fed_winding(self, id: str, case: int) -> int:
        """The winding of a transformer that power enters, 1 or 2; 1 where nothing feeds it."""
        if id not in self.branches:
            return 1
        return 1 if self.branches.at(id, min(case, len(self.cases) - 1)).forward else 2

    def supply_winding(self, id: str, case: int) -> int:
        """The winding of a transformer that a supply holds, 1 or 2; a tap moves the volts of the other."""
        return self.supply_sides.get(id) or self.fed_winding(id, case)

    def verdict(self, case: int) -> Verdict:
        """The worst in one case; a note where nothing is judged."""
        found = (self._judged(finding, case) for finding in self.findings)
        return min(found, key=_RANK.__getitem__, default=Verdict.NOTE)

    def verdicts(self, case: int) -> dict[str, Verdict]:
        """The worst on each element in one case; elements that no finding names are left out."""
        worst: dict[str, Verdict] = {}
        for finding in self.findings:
            verdict = self._judged(finding, case)
            for id in finding.ids:
                if id not in worst or verdict.rank < worst[id].rank:
                    worst[id] = verdict
        return worst

    def verdict_of(self, id: str, case: int, checks: Container[str]) -> Verdict | None:
        """The worst of some checks on one element in one case."""
        found = (self._judged(f, case) for f in self.findings if id in f.ids and f.check in checks)
        return min(found, key=_RANK.__getitem__, default=None)

    def _judged(self, finding: Finding, case: int) -> Verdict:
        """How a finding judges one case; what is not solved neither holds nor is near."""
        verdict = finding.in_case(case)
        good = verdict in (Verdict.HOLDS, Verdict.NEAR)
        return Verdict.BLOCKS if good and not self.solved(case) else verdict
