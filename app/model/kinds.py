"""The kinds of element a drawing can hold; every quantity carries its unit in its name."""

from typing import Annotated, Any, Literal

from msgspec import Struct
from msgspec import field as held

from app.model.fault_fields import (
    FaultTimes,
    FeedsFaults,
    HotDegc,
    LeastMva,
    MostMva,
    ReturnR,
    SupplyXr,
    Trip,
    Withstand,
    ZeroR,
    ZeroX,
)
from app.model.fields import field, plain, text
from app.model.phasing import (
    Build,
    Connection,
    Electrode,
    LinePhases,
    Neutral,
    NeutralR,
    NeutralX,
    Phases,
    ShareA,
    ShareB,
    UnitPhases,
)
from app.model.profiles import Followed
from app.model.spacing import Diameter, Gmr, HungAt, NeutralDiameter, NeutralGmr, Soil
from app.model.stepping import Band, DropR, DropX, Hold, Measured, MeasuredOrEach

Point = tuple[float, float]


class Element(Struct, frozen=True, kw_only=True, tag_field="kind"):
    """What all kinds share. `part` names the part it was made from; `assumed` the fields whose values came
    with a built-in part and nobody confirmed; `kept` holds file keys we do not know."""

    name: Annotated[str, text("Name", longest=80)] = ""
    note: Annotated[str, text("Note", longest=400)] = ""
    part: str = ""
    assumed: tuple[str, ...] = ()
    kept: dict[str, Any] = held(default_factory=dict)


class Node(Element, frozen=True, kw_only=True):
    """A point where branches and attachments meet. x and y are in steps of the drawing grid."""

    x: float = 0.0
    y: float = 0.0
    nominal_v: (
        Annotated[
            float,
            field(
                "Nominal voltage", "V", gt=0, le=500e3, help="Blank: follows from the supply or transformer."
            ),
        ]
        | None
    ) = None
    withstand_ka: Withstand = None
    earth_ohm: Electrode = None


class Joint(Node, frozen=True, kw_only=True, tag="joint"):
    """A bare node: where two branches join, or a branch ends."""


class Busbar(Node, frozen=True, kw_only=True, tag="busbar"):
    """A node drawn as a bar, centred on x, y."""

    length: float = 5.0
    upright: bool = True


class Branch(Element, frozen=True, kw_only=True):
    """Anything that runs from one node to another; `via` are its bends, in grid steps."""

    start: str
    end: str
    via: tuple[Point, ...] = ()


class Line(Branch, frozen=True, kw_only=True):
    """A cable or overhead line from its own data per kilometre."""

    type: Annotated[str, text("Type", help="Such as 4×240 Al; a label for the schedule.")] = ""
    length_m: Annotated[float, field("Length", "m", ge=0, le=1e6)] = 100.0
    phases: LinePhases = "all"
    neutral: Neutral = "usual"
    side_by_side: Annotated[int, field("In parallel", "runs", ge=1, le=50)] = 1
    conductor: Annotated[
        Literal["Al", "Cu"], plain("Conductor", help="Sets how resistance grows when hot.")
    ] = "Al"
    area_mm2: Annotated[float, field("Cross-section", "mm²", gt=0, le=5000)] | None = None
    resistance_ohm_per_km: Annotated[
        float, field("Resistance at 20 °C", "Ω/km", ge=0, le=1000, help="Of one conductor of one run.")
    ] = 0.125
    reactance_ohm_per_km: Annotated[float, field("Reactance", "Ω/km", ge=0, le=1000)] = 0.072
    capacitance_uf_per_km: Annotated[float, field("Capacitance", "µF/km", ge=0, le=100)] | None = None
    temperature_degc: (
        Annotated[
            float, field("Conductor at", "°C", ge=-60, le=250, help="Operating temperature of the conductor.")
        ]
        | None
    ) = None
    rating_a: (
        Annotated[float, field("Rating", "A", gt=0, le=1e6, help="As installed, of one run.")] | None
    ) = None
    trip_a: Trip = None
    neutral_resistance_ohm_per_km: NeutralR = None
    neutral_reactance_ohm_per_km: NeutralX = None
    return_resistance_ohm_per_km: ReturnR = None
    zero_resistance_ohm_per_km: ZeroR = None
    zero_reactance_ohm_per_km: ZeroX = None
    fault_degc: HotDegc = None


class Cable(Line, frozen=True, kw_only=True, tag="cable"):
    """A cable between two nodes."""


class OverheadLine(Line, frozen=True, kw_only=True, tag="overhead_line"):
    """An overhead line between two nodes; where it states what hangs on its poles, its reactance and its zero
    sequence follow from that."""

    hung_at_m: HungAt = ""
    gmr_mm: Gmr = None
    diameter_mm: Diameter = None
    neutral_gmr_mm: NeutralGmr = None
    neutral_diameter_mm: NeutralDiameter = None
    soil_ohm_m: Soil = None


class Transformer(Branch, frozen=True, kw_only=True, tag="transformer"):
    """A two-winding transformer; winding 1 is at `start`, winding 2 at `end`."""

    rating_kva: Annotated[float, field("Rating", "kVA", gt=0, le=1e6)] = 100.0
    v1_v: Annotated[float, field("Winding 1", "V", gt=0, le=500e3, help="Rated no-load voltage.")] = 11000.0
    v2_v: Annotated[float, field("Winding 2", "V", gt=0, le=500e3, help="Rated no-load voltage.")] = 400.0
    vector_group: Annotated[
        str, text("Vector group", longest=8, help="Such as Dyn11; Ii0 for single-phase.")
    ] = "Dyn11"
    build: Build = "as its group"
    phases: UnitPhases = "all"
    uk_percent: Annotated[
        float, field("Impedance uk", "%", ge=0, le=40, help="Short-circuit voltage at rated current.")
    ] = 4.0
    load_loss_w: Annotated[float, field("Load loss Pk", "W", ge=0, le=1e7)] | None = None
    no_load_loss_w: Annotated[float, field("No-load loss P0", "W", ge=0, le=1e7)] | None = None
    no_load_current_percent: Annotated[float, field("No-load current i0", "%", ge=0, le=50)] | None = None
    side_by_side: Annotated[int, field("In parallel", "units", ge=1, le=20)] = 1
    tapped: Annotated[Literal["winding 1", "winding 2"], plain("Taps on")] = "winding 1"
    notch_percent: Annotated[float, field("Tap step", "%", gt=0, le=20)] = 2.5
    taps_up: Annotated[int, field("Taps above", "notches", ge=0, le=40)] = 2
    taps_down: Annotated[int, field("Taps below", "notches", ge=0, le=40)] = 2
    tap: Annotated[
        int,
        field("Tap", "notch", ge=-40, le=40, help="Notches above (+) or below (−) the nameplate voltage."),
    ] = 0
    regulates: Annotated[
        Literal["no", "winding 1", "winding 2"],
        plain(
            "Holds volts of", help="An on-load tap changer steps by itself; no: the tap stays where it is."
        ),
    ] = "no"
    hold_percent: Hold = None
    bandwidth_percent: Band = None
    drop_r_ohm: DropR = None
    drop_x_ohm: DropX = None
    measures: Measured = "first"
    earth_1_ohm: (
        Annotated[
            float,
            field(
                "Star 1 to earth", "Ω", ge=0, le=1e6, help="Blank: solid where the group has N, else open."
            ),
        ]
        | None
    ) = None
    earth_2_ohm: (
        Annotated[
            float,
            field(
                "Star 2 to earth", "Ω", ge=0, le=1e6, help="Blank: solid where the group has n, else open."
            ),
        ]
        | None
    ) = None
    z0_ratio: (
        Annotated[float, field("Z0/Z1", "", gt=0, le=100, help="Zero over positive sequence.")] | None
    ) = None


class Regulator(Branch, frozen=True, kw_only=True, tag="regulator"):
    """A step voltage regulator; without impedance of its own. Forward is from `start` to `end`."""

    hold_percent: Hold = None
    bandwidth_percent: Band = None
    mode: Annotated[
        Literal["forward", "with the power", "idle in reverse"],
        plain("Holds volts at", help="Forward: always at its end. With the power: where the power goes."),
    ] = "forward"
    step_percent: Annotated[float, field("Step", "%", gt=0, le=10)] = 0.625
    steps_up: Annotated[int, field("Steps up", "notches", ge=0, le=40)] = 16
    steps_down: Annotated[int, field("Steps down", "notches", ge=0, le=40)] = 16
    drop_r_ohm: DropR = None
    drop_x_ohm: DropX = None
    measures: MeasuredOrEach = "first"
    rating_a: Annotated[float, field("Rating", "A", gt=0, le=1e6)] | None = None


class Switch(Branch, frozen=True, kw_only=True, tag="switch"):
    """A switch; open, it parts the layout."""

    closed: Annotated[bool, plain("Closed")] = True
    rating_a: Annotated[float, field("Rating", "A", gt=0, le=1e6)] | None = None


class Attachment(Element, frozen=True, kw_only=True):
    """Anything that hangs on one node; dx, dy say where it is drawn from the node, in grid steps."""

    node: str
    dx: float = 0.0
    dy: float = 3.0


class Supply(Attachment, frozen=True, kw_only=True, tag="supply"):
    """Where power comes in; its voltage is held."""

    nominal_v: Annotated[float, field("Nominal voltage", "V", gt=0, le=500e3)] = 400.0
    held_percent: Annotated[
        float, field("Held at", "% of nominal", gt=0, le=200, help="Voltage at the supply point.")
    ] = 100.0
    angle_deg: Annotated[float, field("Angle", "°", ge=-360, le=360)] = 0.0
    profile: Followed = ""
    wires: Annotated[
        Literal["three-phase", "two-wire", "split-phase"],
        plain(
            "System",
            help="Two-wire: one circuit out and back, single-phase or two phases. Split-phase: two hot "
            "wires, the nominal voltage between them, and the neutral midway.",
        ),
    ] = "three-phase"
    fault_level_max_mva: MostMva = None
    fault_level_min_mva: LeastMva = None
    xr: SupplyXr = None
    z0_ratio: (
        Annotated[
            float,
            field(
                "Z0/Z1 of the supply", "", ge=0, le=1e9, help="For earth faults. Blank above 1 kV: unearthed."
            ),
        ]
        | None
    ) = None


class Load(Attachment, frozen=True, kw_only=True, tag="load"):
    """A demand. Exactly one of demand_kva and demand_kw is given."""

    demand_kva: Annotated[float, field("Demand", "kVA", ge=0, le=1e6)] | None = 10.0
    demand_kw: Annotated[float, field("Demand", "kW", ge=0, le=1e6)] | None = None
    profile: Followed = ""
    power_factor: Annotated[float, field("Power factor", "", ge=0, le=1)] = 0.95
    leading: Annotated[bool, plain("Leading", help="Current ahead of voltage.")] = False
    constant_current_percent: Annotated[float, field("Constant current", "%", ge=0, le=100)] | None = None
    constant_impedance_percent: (
        Annotated[
            float, field("Constant impedance", "%", ge=0, le=100, help="What is left over is constant power.")
        ]
        | None
    ) = None
    reference_v: (
        Annotated[float, field("Stated at", "V", gt=0, le=500e3, help="Voltage the demand is stated at.")]
        | None
    ) = None
    phases: Phases = "all"
    connection: Connection = "star"
    share_a_percent: ShareA = None
    share_b_percent: ShareB = None


class Motor(Attachment, frozen=True, kw_only=True, tag="motor"):
    """A motor by its nameplate: constant power while it runs; its starter says what it draws at first."""

    rated_kw: Annotated[
        float,
        field("Rated output", "kW", gt=0, le=1e6, help="At the shaft, as on the nameplate; hp may be typed."),
    ] = 11.0
    efficiency: Annotated[float, field("Efficiency", "", gt=0, le=1)] = 0.9
    power_factor: Annotated[float, field("Power factor", "", gt=0, le=1, help="At rated output.")] = 0.85
    rated_v: Annotated[float, field("Rated voltage", "V", gt=0, le=500e3)] | None = None
    starting_current: Annotated[
        float,
        field("Starting current", "× rated", gt=0, le=20, help="With the rotor locked, at rated voltage."),
    ] = 6.5
    starting_power_factor: Annotated[float, field("Power factor at start", "", gt=0, le=1)] = 0.25
    starter: Annotated[Literal["direct", "soft starter", "drive"], plain("Starter")] = "direct"
    limited_current: (
        Annotated[
            float, field("Starter limits to", "× rated", gt=0, le=20, help="Of a soft starter or a drive.")
        ]
        | None
    ) = None
    limited_power_factor: (
        Annotated[float, field("Power factor so", "", gt=0, le=1, help="While the starter limits.")] | None
    ) = None
    state: Annotated[Literal["running", "starting", "off"], plain("State")] = "running"
    feeds_faults: FeedsFaults = False
    profile: Followed = ""
    phases: Phases = "all"


class Generator(Attachment, frozen=True, kw_only=True, tag="generator"):
    """Fixed infeed: PV, hydro or a set running at fixed power."""

    output_kw: Annotated[float, field("Output", "kW", ge=0, le=1e6)] = 10.0
    output_kvar: Annotated[
        float, field("Reactive output", "kvar", ge=-1e6, le=1e6, help="Positive feeds in, negative absorbs.")
    ] = 0.0
    profile: Followed = ""
    hold_percent: (
        Annotated[
            float,
            field(
                "Holds",
                "% of nominal",
                gt=0,
                le=200,
                help="Volts, while it runs: not where a case or its profile has it at 0 %. "
                "Blank: fixed reactive output.",
            ),
        ]
        | None
    ) = None
    q_min_kvar: Annotated[float, field("Least reactive", "kvar", ge=-1e6, le=1e6)] | None = None
    q_max_kvar: Annotated[float, field("Most reactive", "kvar", ge=-1e6, le=1e6)] | None = None
    fault_current: FaultTimes = None
    phases: Phases = "all"


class Capacitor(Attachment, frozen=True, kw_only=True, tag="capacitor"):
    """A shunt capacitor; its kvar go with the square of the voltage."""

    rating_kvar: Annotated[float, field("Rating", "kvar", ge=0, le=1e6)] = 10.0
    rated_v: Annotated[float, field("Rated voltage", "V", gt=0, le=500e3)] | None = None
    connected: Annotated[bool, plain("Connected")] = True
    phases: Phases = "all"
    connection: Connection = "star"


AnyElement = (
    Joint
    | Busbar
    | Cable
    | OverheadLine
    | Transformer
    | Regulator
    | Switch
    | Supply
    | Load
    | Motor
    | Generator
    | Capacitor
)
KINDS: dict[str, type[Element]] = {
    "supply": Supply,
    "busbar": Busbar,
    "joint": Joint,
    "cable": Cable,
    "overhead_line": OverheadLine,
    "transformer": Transformer,
    "regulator": Regulator,
    "switch": Switch,
    "load": Load,
    "motor": Motor,
    "generator": Generator,
    "capacitor": Capacitor,
}
KIND_WORDS = {k: k.replace("_", " ") for k in KINDS}
LETTERS = {
    "supply": "S",
    "busbar": "B",
    "joint": "J",
    "cable": "C",
    "overhead_line": "O",
    "transformer": "T",
    "regulator": "V",
    "switch": "W",
    "load": "L",
    "motor": "M",
    "generator": "G",
    "capacitor": "K",
}


def kind_of(element: Element) -> str:
    """The kind's word as it stands in the file."""
    return str(element.__struct_config__.tag)
