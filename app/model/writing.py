"""Drawings, parts and clips as JSON text: stable order, one element a line, every number to the last bit."""

import json
import math
from collections.abc import Iterable, Mapping
from functools import cache
from typing import Any

from msgspec import NODEFAULT, UNSET, Struct, structs

from app.model.drawing import Drawing, Part
from app.model.fields import fields_of
from app.model.kinds import AnyElement, kind_of
from app.model.profiles import Profile, Year
from app.model.versions import CURRENT

_ENCODER = json.JSONEncoder(ensure_ascii=False, allow_nan=False)
_BLANK = (None, "", ())
VALUES = 24  # of a profile, on one line


def drawing_text(drawing: Drawing) -> str:
    """The whole file."""
    head = {"frequency_hz": _plain(drawing.frequency_hz), **_unless_known(drawing.kept, Drawing, "farend")}
    lines = [
        f'"farend": {CURRENT}',
        f'"project": {line(body(drawing.project))}',
        *(f"{line(key)}: {line(value)}" for key, value in head.items()),
        f'"limits": {line(body(drawing.limits))}',
        f'"cases": {listed(body(case) for case in drawing.cases)}',
        f'"elements": {listed(element_body(i, e) for i, e in drawing.elements.items())}',
        f'"parts": {listed(part_body(i, p) for i, p in drawing.parts.items())}',
    ]
    if drawing.year != Year():
        lines.append(f'"year": {line(body(drawing.year))}')
    if drawing.profiles:
        lines.append(f'"profiles": {profiles_text(drawing.profiles)}')
    return "{\n" + ",\n".join(lines) + "\n}\n"


def listed(bodies: Iterable[Mapping[str, Any]]) -> str:
    """A list with one entry a line."""
    lines = [line(one) for one in bodies]
    return "[\n" + ",\n".join(lines) + "\n]" if lines else "[]"


def element_body(id: str, element: AnyElement) -> dict[str, Any]:
    """One element as its line in the file; blank fields are left out."""
    return {**({"id": id} if id else {}), "kind": kind_of(element), **body(element, ("id", "kind"))}


def part_body(id: str, part: Part) -> dict[str, Any]:
    """One part as its line in the file."""
    made: dict[str, Any] = {"id": id} if id else {}
    made |= {"name": part.name, "element": element_body("", part.element)}
    if part.symbol is not None:
        made["symbol"] = body(part.symbol)
    return made | _unless_known(part.kept, Part, "id")


def profiles_text(profiles: Mapping[str, Profile]) -> str:
    """A list of profiles, each with its values a day of hours a line."""
    return "[\n" + ",\n".join(_profile_text(name, one) for name, one in profiles.items()) + "\n]"


def _profile_text(name: str, profile: Profile) -> str:
    head = line({"name": name, **body(profile, ("name", "percent"))}).removesuffix("}")
    values = profile.percent
    rows = (line(_plain(values[i : i + VALUES])) for i in range(0, len(values), VALUES))
    return f'{head}, "percent": [\n' + ",\n".join(row[1:-1] for row in rows) + "\n]}"


def body(struct: Struct, reserved: tuple[str, ...] = ()) -> dict[str, Any]:
    """The fields of a struct and the foreign keys it keeps."""
    made = {}
    for name, left_out in _fields(type(struct)):
        value = getattr(struct, name)
        if name not in reserved and value not in left_out:
            made[name] = _plain(value)
    kept = struct.kept  # type: ignore[attr-defined]
    return made | _unless_known(kept, type(struct), *reserved) if kept else made


@cache
def _fields(kind: type[Struct]) -> tuple[tuple[str, tuple[Any, ...]], ...]:
    """Fields in their order, and the values that they have where the file says nothing."""
    blank = {"start", "end", "node"}
    spare = {name: about.default for name, about in fields_of(kind).items() if about.spare}
    return tuple(
        (
            f.name,
            (spare[f.name],)
            if f.name in spare
            else ({},)
            if f.default_factory is dict
            else _BLANK
            if f.default in _BLANK or (f.default in (NODEFAULT, UNSET) and f.name in blank)
            else (),
        )
        for f in structs.fields(kind)
        if f.name != "kept"
    )


def _unless_known(kept: Mapping[str, Any], kind: type[Struct], *reserved: str) -> dict[str, Any]:
    known = {f.name for f in structs.fields(kind)} - {"kept"}
    return {k: v for k, v in kept.items() if k not in known and k not in reserved}


def _plain(value: Any) -> Any:
    """Whole numbers are written as such: 11000, not 11000.0; all else to the last bit."""
    if type(value) is float:
        whole = value.is_integer() and abs(value) < 1e15 and (value or math.copysign(1, value) > 0)
        return int(value) if whole else value
    if isinstance(value, dict):
        return {key: body(one) for key, one in value.items()}
    return tuple(_plain(v) for v in value) if isinstance(value, tuple) else value


def line(value: Any) -> str:
    """Any plain value as one line of JSON."""
    return _ENCODER.encode(value)
