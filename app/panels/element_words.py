"""How panels name elements, where they sit, and the undo steps made on them."""

from collections.abc import Sequence

from app.model.drawing import Drawing, label
from app.model.fields import Field
from app.model.figures import MINUS, typed
from app.model.kinds import KIND_WORDS, Attachment, Branch, kind_of

PLURALS = {"busbar": "busbars", "switch": "switches", "supply": "supplies", "capacitor": "capacitors"}


def many(kind: str, count: int) -> str:
    """`1 cable`, `3 switches`."""
    word = KIND_WORDS[kind]
    return f"{count} {word if count == 1 else PLURALS.get(kind, word + 's')}"


def where(drawing: Drawing, id: str) -> str:
    """The kind and where it sits: `transformer, J3 to HS`, `load on HS`."""
    element = drawing.elements[id]
    word = KIND_WORDS[kind_of(element)]
    called = f"{word} {id}" if element.name and element.name != id else word
    if isinstance(element, Branch):
        return f"{called}, {label(drawing, element.start)} to {label(drawing, element.end)}"
    if isinstance(element, Attachment):
        return f"{called} on {label(drawing, element.node)}"
    return called


def subject(drawing: Drawing, ids: Sequence[str]) -> str:
    """Who an undo step is about: `C2`, `3 cables`, `5 elements`."""
    if len(ids) == 1:
        return label(drawing, ids[0])
    kinds = {kind_of(drawing.elements[id]) for id in ids}
    return many(kinds.pop(), len(ids)) if len(kinds) == 1 else f"{len(ids)} elements"


NOUNS = {  # where the label reads on into its box
    "fault_degc": "Temperature of the hot conductor",
    "held_percent": "Volts held",
    "hung_at_m": "Spacing",
    "hold_percent": "Volts held",
    "load_profile": "Profile of the loads",
    "generation_profile": "Profile of the generators",
    "limited_current": "Current that the starter lets through",
    "limited_power_factor": "Power factor behind the starter",
    "reference_v": "Voltage of the demand",
    "return_resistance_ohm_per_km": "Resistance of the return",
    "temperature_degc": "Temperature of the conductor",
    "trip_a": "Tripping current",
}


def noun(field: Field) -> str:
    """What a sentence calls a field."""
    return NOUNS.get(field.name, field.label)


def step_text(field: Field, value: object, who: str) -> str:
    """The undo text: `Length of C2 to 900 m`."""
    if field.type is str and not field.choices and not value:
        return f"{noun(field)} of {who} cleared"
    if value is None:
        return f"{noun(field)} of {who} left blank"
    if field.name == "note":
        return f"Note of {who}"
    return f"{noun(field)} of {who} to {worded(field, value)}"


def worded(field: Field, value: object) -> str:
    """A value in words, with its unit."""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int | float):
        number = typed(value).replace("-", MINUS)
        unit = field.unit[:-1] if field.unit.endswith("s") and value == 1 else field.unit
        return f"{number} {unit}" if unit else number
    return str(value)
