"""The fields that tap changers and regulators share: what they hold, how closely, and where."""

from typing import Annotated, Literal

from app.model.fields import field, plain

Hold = (
    Annotated[
        float,
        field(
            "Holds", "% of nominal", gt=0, le=200, help="Volts that a changer steps towards. Blank: nominal."
        ),
    ]
    | None
)
Band = (
    Annotated[
        float,
        field("Bandwidth", "% of nominal", gt=0, le=50, help="In all. Wider than a step, or it hunts."),
    ]
    | None
)
DropR = (
    Annotated[
        float, field("Line drop R", "Ω", ge=0, le=1e4, help="Of the line to the place whose volts are held.")
    ]
    | None
)
DropX = (
    Annotated[
        float, field("Line drop X", "Ω", ge=0, le=1e4, help="Of the line to the place whose volts are held.")
    ]
    | None
)
Measured = Annotated[
    Literal["first", "A", "B", "C", "mean"],
    plain(
        "Measures",
        help="Where phases are not alike: whose volts it holds, all phases stepping together. First: the "
        "first phase that reaches it. Behind a centre tap A and B are the hot wires.",
        spare=True,
    ),
]
MeasuredOrEach = Annotated[
    Literal["first", "A", "B", "C", "mean", "each"],
    plain(
        "Measures",
        help="Where phases are not alike: whose volts it holds. First: the first phase that reaches it. "
        "Each: single-phase regulators side by side, each steps by its own phase.",
        spare=True,
    ),
]
