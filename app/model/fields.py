"""What a field of an element is: label, unit, bounds, and what is assumed where it is left blank."""

import types
import typing
from dataclasses import dataclass
from functools import cache
from typing import Annotated, Any, Literal, Union

import msgspec

from app.model.figures import typed


def field(
    label: str,
    unit: str = "",
    *,
    ge: float | None = None,
    gt: float | None = None,
    le: float | None = None,
    lt: float | None = None,
    help: str = "",
) -> msgspec.Meta:
    """Metadata of one field: the card, the file check, the sheet and the docs all read it."""
    bounds: dict[str, Any] = {"ge": ge, "gt": gt, "le": le, "lt": lt}
    return msgspec.Meta(**bounds, extra={"label": label, "unit": unit, "help": help})


def text(label: str, *, longest: int = 120, help: str = "") -> msgspec.Meta:
    """Metadata of a text field."""
    return msgspec.Meta(max_length=longest, extra={"label": label, "unit": "", "help": help})


def plain(label: str, unit: str = "", *, help: str = "", spare: bool = False) -> msgspec.Meta:
    """Metadata of a choice or a yes/no field; a `spare` one is left out of the file at its usual value."""
    return msgspec.Meta(extra={"label": label, "unit": unit, "help": help, "spare": spare})


@dataclass(frozen=True, slots=True)
class Field:
    """One field of a kind as people meet it. `optional` means blank is allowed and a value is assumed."""

    name: str
    label: str
    unit: str
    type: type
    optional: bool
    choices: tuple[str, ...]
    default: Any
    ge: float | None
    gt: float | None
    le: float | None
    lt: float | None
    help: str
    spare: bool = False
    longest: int = 120

    @property
    def allowed(self) -> str:
        """The bounds in words, such as `more than 0 m` or `from 0 to 1`."""
        unit = f" {self.unit}" if self.unit else ""
        if self.choices:
            return "one of " + ", ".join(self.choices)
        if self.type is bool:
            return "yes or no"
        if self.type is str:
            return f"text of at most {self.longest} characters"
        low = f"at least {typed(self.ge)}" if self.ge is not None else ""
        low = f"more than {typed(self.gt)}" if self.gt is not None else low
        high = f"at most {typed(self.le)}" if self.le is not None else ""
        high = f"less than {typed(self.lt)}" if self.lt is not None else high
        words = " and ".join(w for w in (low, high) if w)
        kind = "a whole number" if self.type is int else "a number"
        return f"{kind}, {words}{unit}" if words else f"{kind}{unit and ' in' + unit}"

    def holds(self, value: float) -> bool:
        """True where the value is inside the bounds."""
        return (
            (self.ge is None or value >= self.ge)
            and (self.gt is None or value > self.gt)
            and (self.le is None or value <= self.le)
            and (self.lt is None or value < self.lt)
        )


@cache
def fields_of(kind: type[msgspec.Struct]) -> dict[str, Field]:
    """The labelled fields of a struct, in the order of its card."""
    hints = typing.get_type_hints(kind, include_extras=True)
    defaults = {f.name: f.default for f in msgspec.structs.fields(kind)}
    found = {}
    for name, hint in hints.items():
        read = _read(name, hint, defaults.get(name))
        if read is not None:
            found[name] = read
    return found


def _read(name: str, hint: Any, default: Any) -> Field | None:
    optional = False
    if typing.get_origin(hint) in (Union, types.UnionType):
        kinds = [h for h in typing.get_args(hint) if h is not type(None)]
        optional, hint = len(kinds) < len(typing.get_args(hint)), kinds[0]
    if typing.get_origin(hint) is not Annotated:
        return None
    base, meta = typing.get_args(hint)[:2]
    if not isinstance(meta, msgspec.Meta) or not meta.extra or "label" not in meta.extra:
        return None
    choices = tuple(typing.get_args(base)) if typing.get_origin(base) is Literal else ()
    return Field(
        name=name,
        type=str if choices else base,
        optional=optional,
        choices=choices,
        default=None if default is msgspec.NODEFAULT else default,
        ge=meta.ge,
        gt=meta.gt,
        le=meta.le,
        lt=meta.lt,
        longest=meta.max_length or 120,
        **meta.extra,
    )
