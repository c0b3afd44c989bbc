"""What every element has, nodes whole, and what all branches and all attachments share."""

from typing import Annotated, Any

from msgspec import Struct
from msgspec import field as held

from app.model.fault_fields import Withstand
from app.model.fields import field, text
from app.model.phasing import Electrode

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


class Attachment(Element, frozen=True, kw_only=True):
    """Anything that hangs on one node; dx, dy say where it is drawn from the node, in grid steps."""

    node: str
    dx: float = 0.0
    dy: float = 3.0
