"""The fields that tap changers and regulators share: what they hold, how closely, and where."""

from typing import Annotated

from app.model.fields import field

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
