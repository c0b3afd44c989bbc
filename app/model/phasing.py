"""The fields that say which conductors an element has; at their usual value they stay out of the file."""

from typing import Annotated, Literal, get_args

from app.model.fields import field, plain

Chosen = Literal["all", "A", "B", "C", "AB", "BC", "CA"]
CHOICES: tuple[str, ...] = get_args(Chosen)

Phases = Annotated[
    Chosen,
    plain(
        "Phases",
        help="All: as many as reach it. A letter: that phase and the neutral. Two: between them. "
        "Behind a centre tap A and B are the hot wires.",
        spare=True,
    ),
]
LinePhases = Annotated[
    Chosen,
    plain("Phases", help="All: as many as reach it, so that a lateral follows its first span.", spare=True),
]
UnitPhases = Annotated[
    Chosen,
    plain(
        "Phases",
        help="Of winding 1, where it is a single-phase unit or a bank of two. All: A, or A and B.",
        spare=True,
    ),
]
Neutral = Annotated[
    Literal["usual", "carried", "earthed along", "none"],
    plain(
        "Neutral",
        help="Usual: carried up to 1 kV and in single-phase systems, none above. Carried: a conductor of its "
        "own. Earthed along: its return is within R0 and X0. None: phases alone; a neutral beyond is lost.",
        spare=True,
    ),
]
NeutralR = (
    Annotated[
        float,
        field(
            "Neutral at 20 °C", "Ω/km", ge=0, le=1000, help="Of one run. Blank: as the return, or a phase."
        ),
    ]
    | None
)
NeutralX = (
    Annotated[float, field("Neutral reactance", "Ω/km", ge=0, le=1000, help="Blank: as a phase.")] | None
)
Connection = Annotated[
    Literal["star", "delta"],
    plain("Connection", help="Of three phases. Star: to the neutral where there is one.", spare=True),
]
ShareA = (
    Annotated[
        float,
        field("On A", "%", ge=0, le=100, help="Of a three-phase demand; in delta on AB. Blank: a third."),
    ]
    | None
)
ShareB = (
    Annotated[
        float,
        field("On B", "%", ge=0, le=100, help="In delta on BC. What A and B leave is on C, or CA."),
    ]
    | None
)
Build = Annotated[
    Literal["as its group", "centre-tapped", "open delta", "open star to open delta"],
    plain(
        "Build",
        help="Centre-tapped: one unit, two hot wires and a neutral between. Open: two units serve three "
        "phases; the rating is that of both.",
        spare=True,
    ),
]
Electrode = (
    Annotated[
        float,
        field(
            "Earth electrode",
            "Ω",
            ge=0,
            le=1e6,
            help="Electrode that holds the neutral here. Blank: none besides that of supply and star points.",
        ),
    ]
    | None
)
