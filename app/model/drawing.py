"""The drawing: one immutable value that holds everything the file holds."""

from typing import Annotated, Any, Literal

from msgspec import Struct
from msgspec import field as held

from app.model.fields import field, plain, text
from app.model.kinds import LETTERS, AnyElement, Attachment, Branch, Element, Node, Point
from app.model.profiles import Profile, Year


class Project(Struct, frozen=True, kw_only=True):
    """The head of the sheet."""

    title: Annotated[str, text("Project")] = ""
    place: Annotated[str, text("Place")] = ""
    number: Annotated[str, text("Drawing no.", longest=40)] = ""
    revision: Annotated[str, text("Revision", longest=20)] = ""
    date: Annotated[str, text("Date", longest=20)] = ""
    author: Annotated[str, text("Author", longest=80)] = ""
    checker: Annotated[str, text("Checked by", longest=80)] = ""
    status: Annotated[Literal["preliminary", "for approval", "as built"], plain("Status")] = "preliminary"
    note: Annotated[str, text("Note", longest=2000)] = ""
    kept: dict[str, Any] = held(default_factory=dict)


class Limits(Struct, frozen=True, kw_only=True):
    """What results are judged against; the set is chosen per project."""

    name: Annotated[str, text("Limit set", help="Whose limits of voltage these are, with the edition.")] = ""
    low_percent: Annotated[float, field("Lowest voltage", "% of nominal", gt=0, le=100)] = 94.0
    high_percent: Annotated[float, field("Highest voltage", "% of nominal", ge=100, le=200)] = 110.0
    drop_percent: (
        Annotated[float, field("Drop in all", "%", gt=0, le=100, help="Below the supply. Blank: not judged.")]
        | None
    ) = None
    drop_name: Annotated[str, text("Drop limit from", help="Whose limit of the drop it is.")] = ""
    rise_percent: (
        Annotated[
            float,
            field(
                "Rise by generation", "%", gt=0, le=100, help="Over the same case without. Blank: not judged."
            ),
        ]
        | None
    ) = None
    rise_name: Annotated[str, text("Rise limit from", help="Whose limit of the rise it is.")] = ""
    most_loaded_percent: Annotated[float, field("Highest loading", "%", gt=0, le=1000)] = 100.0
    unbalance_percent: (
        Annotated[
            float,
            field("Unbalance", "%", gt=0, le=100, help="Negative over positive sequence. Blank: not judged."),
        ]
        | None
    ) = None
    unbalance_name: Annotated[str, text("Unbalance limit from", help="Whose limit of unbalance it is.")] = ""
    neutral_v: (
        Annotated[
            float,
            field("Neutral to earth", "V", gt=0, le=1000, help="At every node. Blank: not judged."),
        ]
        | None
    ) = None
    neutral_name: Annotated[str, text("Neutral limit from", help="Whose limit of the neutral it is.")] = ""
    start_name: Annotated[str, text("Start limits from", help="Whose limits of motor starts these are.")] = ""
    start_supply_percent: (
        Annotated[
            float, field("Step at the supply", "%", gt=0, le=100, help="At a motor start. Blank: not judged.")
        ]
        | None
    ) = None
    start_step_percent: (
        Annotated[
            float,
            field(
                "Step at the board", "%", gt=0, le=100, help="Nearest that serves others. Blank: not judged."
            ),
        ]
        | None
    ) = None
    start_motor_percent: (
        Annotated[
            float,
            field(
                "Volts to start",
                "% of rated",
                gt=0,
                le=100,
                help="At the motor, of its rated volts. Blank: not judged.",
            ),
        ]
        | None
    ) = None
    kept: dict[str, Any] = held(default_factory=dict)


class Own(Struct, frozen=True, kw_only=True):
    """What a case states of one element: a share of what the drawing states of it, or the demand of a load
    itself; and a load's power factor. Blank: as the case has it for all."""

    percent: (
        Annotated[float, field("Share", "%", ge=0, le=1000, help="Of what the drawing states of it.")] | None
    ) = None
    demand_kva: Annotated[float, field("Demand", "kVA", ge=0, le=1e6)] | None = None
    demand_kw: Annotated[float, field("Demand", "kW", ge=0, le=1e6)] | None = None
    power_factor: Annotated[float, field("Power factor", "", ge=0, le=1)] | None = None
    kept: dict[str, Any] = held(default_factory=dict)


class Case(Struct, frozen=True, kw_only=True):
    """One loading case: a column of the batch. Percentages scale what the drawing states; `own` says by id
    what stands otherwise in this case alone."""

    name: Annotated[str, text("Case", longest=60)] = "As drawn"
    supply_percent: Annotated[float, field("Supply voltage", "%", gt=0, le=200)] = 100.0
    load_percent: Annotated[float, field("Loads", "%", ge=0, le=1000)] = 100.0
    generation_percent: Annotated[float, field("Generation", "%", ge=0, le=1000)] = 100.0
    motor_percent: (
        Annotated[float, field("Motors", "%", ge=0, le=1000, help="Of running motors. Blank: as the loads.")]
        | None
    ) = None
    own: dict[str, Own] = held(default_factory=dict)
    kept: dict[str, Any] = held(default_factory=dict)


class Symbol(Struct, frozen=True, kw_only=True):
    """The user's own picture: SVG text and the points, in its viewBox units, where branches meet it."""

    svg: str
    width: float
    height: float
    terminals: tuple[Point, ...] = ()
    kept: dict[str, Any] = held(default_factory=dict)


class Part(Struct, frozen=True, kw_only=True):
    """A shelf part: a named element to start from, and perhaps a symbol of the user's own."""

    name: Annotated[str, text("Part", longest=80)]
    element: AnyElement
    symbol: Symbol | None = None
    kept: dict[str, Any] = held(default_factory=dict)


class Drawing(Struct, frozen=True, kw_only=True):
    """The whole document. `elements` keeps the order in which things were drawn."""

    project: Project = Project()
    frequency_hz: Annotated[float, field("Frequency", "Hz", ge=10, le=400)] = 50.0
    limits: Limits = Limits()
    cases: tuple[Case, ...] = (Case(),)
    elements: dict[str, AnyElement] = held(default_factory=dict)
    parts: dict[str, Part] = held(default_factory=dict)
    year: Year = Year()
    profiles: dict[str, Profile] = held(default_factory=dict)
    kept: dict[str, Any] = held(default_factory=dict)

    def nodes(self) -> dict[str, Node]:
        """All nodes by id."""
        return {i: e for i, e in self.elements.items() if isinstance(e, Node)}

    def branches(self) -> dict[str, Branch]:
        """All branches by id."""
        return {i: e for i, e in self.elements.items() if isinstance(e, Branch)}

    def attachments(self) -> dict[str, Attachment]:
        """All attachments by id."""
        return {i: e for i, e in self.elements.items() if isinstance(e, Attachment)}


def label(drawing: Drawing, id: str) -> str:
    """What people call an element: its name, or its id where it has none."""
    element = drawing.elements.get(id)
    return element.name if element is not None and element.name else id


def fresh_id(taken: object, element: Element) -> str:
    """The first free id of the element's letter, such as T2; `taken` is anything that knows `in`."""
    letter = LETTERS[str(element.__struct_config__.tag)]
    number = 1
    while f"{letter}{number}" in taken:  # type: ignore[operator]
        number += 1
    return f"{letter}{number}"
