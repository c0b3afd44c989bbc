"""The kinds of element a drawing can hold; every quantity carries its unit in its name."""

from app.model.attachments import Capacitor, Generator, Load, Motor, Supply
from app.model.branches import Cable, Line, OverheadLine, Regulator, Switch, Transformer
from app.model.element import Attachment, Branch, Busbar, Element, Joint, Node, Point

__all__ = [
    "AnyElement",
    "Attachment",
    "Branch",
    "Busbar",
    "Cable",
    "Capacitor",
    "Element",
    "Generator",
    "Joint",
    "KINDS",
    "KIND_WORDS",
    "LETTERS",
    "Line",
    "Load",
    "Motor",
    "Node",
    "OverheadLine",
    "Point",
    "Regulator",
    "Supply",
    "Switch",
    "Transformer",
    "kind_of",
]

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
