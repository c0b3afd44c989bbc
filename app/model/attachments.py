"""The kinds of attachment: supplies, loads, motors, generators, capacitors."""

from typing import Annotated, Literal

from app.model.element import Attachment
from app.model.fault_fields import FaultTimes, FeedsFaults, LeastMva, MostMva, SupplyXr
from app.model.fields import field, plain
from app.model.phasing import Connection, Phases, ShareA, ShareB
from app.model.profiles import Followed


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
        Annotated[float, field("Power factor then", "", gt=0, le=1, help="While the starter limits.")] | None
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
