"""The fields of boards, lines and supplies that only fault currents need."""

from typing import Annotated

from app.model.fields import field, plain

Trip = (
    Annotated[
        float,
        field(
            "Device trips at",
            "A",
            gt=0,
            le=1e6,
            help="Current at which the fuse or breaker at its fed end trips in 5 s. Blank: not judged.",
        ),
    ]
    | None
)
ReturnR = (
    Annotated[
        float,
        field("Return at 20 °C", "Ω/km", ge=0, le=1000, help="PE, PEN or neutral of one run, for faults."),
    ]
    | None
)
ZeroR = Annotated[float, field("R0 at 20 °C", "Ω/km", ge=0, le=1e4, help="Zero sequence, of one run.")] | None
ZeroX = Annotated[float, field("X0", "Ω/km", ge=0, le=1e4, help="Zero sequence, of one run.")] | None
HotDegc = (
    Annotated[float, field("Hot conductor at", "°C", ge=-60, le=400, help="For the least fault current.")]
    | None
)
MostMva = (
    Annotated[
        float,
        field("Highest fault level", "MVA", gt=0, le=1e6, help="For board ratings; kA may be typed."),
    ]
    | None
)
LeastMva = (
    Annotated[
        float,
        field("Least fault level", "MVA", gt=0, le=1e6, help="For dips at a start, and protection."),
    ]
    | None
)
SupplyXr = Annotated[float, field("X/R of the supply", "", ge=0, le=1000)] | None
Withstand = (
    Annotated[
        float,
        field("Fault rating", "kA", gt=0, le=1000, help="Of the board, three-phase. Blank: not judged."),
    ]
    | None
)
FeedsFaults = Annotated[
    bool,
    plain("Feeds faults", help="Counts towards the highest fault currents by its locked rotor.", spare=True),
]
FaultTimes = (
    Annotated[
        float,
        field(
            "Fault current",
            "× rated",
            gt=0,
            le=20,
            help="Of a rotating set, 1/x″d. Blank: it does not feed faults.",
        ),
    ]
    | None
)
