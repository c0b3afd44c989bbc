"""The kinds of branch: lines, transformers, regulators, switches."""

from typing import Annotated, Literal

from app.model.element import Branch
from app.model.fault_fields import HotDegc, ReturnR, Trip, ZeroR, ZeroX
from app.model.fields import field, plain, text
from app.model.phasing import Build, LinePhases, Neutral, NeutralR, NeutralX, UnitPhases
from app.model.spacing import Diameter, Gmr, HungAt, NeutralDiameter, NeutralGmr, Soil
from app.model.stepping import Band, DropR, DropX, Hold, Measured, MeasuredOrEach


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
            "Tap changer holds", help="An on-load tap changer steps by itself; no: the tap stays where it is."
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
                "Star 1 to earth",
                "Ω",
                ge=0,
                le=1e6,
                help="Blank: solid where the group has N, else open. 1 MΩ: not earthed.",
            ),
        ]
        | None
    ) = None
    earth_2_ohm: (
        Annotated[
            float,
            field(
                "Star 2 to earth",
                "Ω",
                ge=0,
                le=1e6,
                help="Blank: solid where the group has n, else open. 1 MΩ: not earthed.",
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
