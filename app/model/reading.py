"""JSON text to drawings, parts and clips; whatever is wrong gives one sentence, and nothing comes half."""

import json
from collections.abc import Mapping
from functools import cache
from typing import Any, TypeVar

import msgspec
from msgspec import Struct, structs

from app.model.changes import ends, fault_of_cases, fault_of_frequency, fault_of_limits
from app.model.checks import (
    called,
    fault_of_fields,
    fault_of_id,
    fault_of_part,
    fault_of_symbol,
    fault_of_the_rest,
    fault_of_value,
    fault_of_writing,
    misfit,
    shown,
)
from app.model.drawing import Case, Drawing, Limits, Own, Part, Project, Symbol
from app.model.errors import FileError
from app.model.fields import fields_of
from app.model.following import fault_of_followed, fault_of_profiles, fault_of_year
from app.model.kinds import KIND_WORDS, KINDS, AnyElement, Attachment, Branch, Element
from app.model.profiles import Profile, Year

DEEPEST = 40
MOST_PARTS = 1000
Kind = TypeVar("Kind", bound=Struct)


def drawing_from(raw: dict[str, Any]) -> Drawing:
    """The drawing in a file's object."""
    parts = parts_from(raw.get("parts", []))
    profiles = profiles_from(raw)
    elements = elements_from(raw.get("elements", []), parts, profiles)
    frequency = raw.get("frequency_hz", Drawing().frequency_hz)
    cases = tuple(_case_from(one, f"Case {n}") for n, one in enumerate(_list(raw, "cases", [{}]), 1))
    limits = struct_from(Limits, raw.get("limits", {}), "Limits")
    year = struct_from(Year, raw.get("year", {}), "Year")
    _refuse_if(fault_of_frequency(frequency) or fault_of_cases(cases, elements) or fault_of_limits(limits))
    _refuse_if(fault_of_year(profiles, year))
    return Drawing(
        project=struct_from(Project, raw.get("project", {}), "Project"),
        frequency_hz=float(frequency),
        limits=limits,
        cases=cases,
        elements=elements,
        parts=parts,
        year=year,
        profiles=profiles,
        kept=_kept(raw, _known(Drawing) | {"farend"}, "The file"),
    )


def _case_from(raw: Any, where: str) -> Case:
    """A loading case; what it states of single elements is checked against them later."""
    own = own_from(raw.get("own", {}), where) if isinstance(raw, dict) else {}
    case = struct_from(Case, {**raw, "own": {}} if own else raw, where)
    return structs.replace(case, own=own)


def own_from(said: Any, where: str) -> dict[str, Own]:
    """What a case states of single elements, by id."""
    if not isinstance(said, dict):
        raise FileError(f"{where}: own is {shown(said)}, allowed is an object with ids as keys.")
    return {id: struct_from(Own, one, f"{where}, {id}") for id, one in said.items()}


def _list(raw: Mapping[str, Any], key: str, default: list[Any]) -> list[Any]:
    found = raw.get(key, default)
    if not isinstance(found, list):
        raise FileError(f'"{key}" is {shown(found)}, allowed is a list.')
    return found


def elements_from(
    found: Any, parts: Mapping[str, Part], profiles: Mapping[str, Profile]
) -> dict[str, AnyElement]:
    """The elements of a file, each checked by itself and then against the others."""
    elements: dict[str, AnyElement] = {}
    for number, one in enumerate(_list({"elements": found}, "elements", []), 1):
        if not isinstance(one, dict):
            raise FileError(f"Element {number} is {shown(one)}, allowed is an object with id and kind.")
        id = one.get("id")
        if not isinstance(id, str):
            given = "missing" if id is None else shown(id)
            raise FileError(f"Element {number}: id is {given}, allowed is text such as T1.")
        _refuse_if(fault_of_id(id))
        if id in elements:
            raise FileError(f"The id {shown(id)} is given to two elements, allowed is one.")
        elements[id] = element_from(one, id)
    for id, element in elements.items():
        _refuse_if(misfit(elements, id, element) or fault_of_part(parts, id, element))
        _refuse_if(fault_of_followed(profiles, id, element))
    return elements


def element_from(raw: dict[str, Any], id: str, *, loose: bool = False) -> AnyElement:
    """One element; a `loose` one, in a part, stands on no nodes."""
    kind = raw.get("kind")
    made_of = KINDS.get(kind) if isinstance(kind, str) else None
    if made_of is None:
        given = "missing" if kind is None else shown(kind)
        raise FileError(f"{id}: kind is {given}, allowed is one of {', '.join(KINDS)}.")
    if loose:
        raw = {**_unbound(made_of), **raw}
    where = f"{id} ({KIND_WORDS[str(kind)]})"
    made: Any = struct_from(made_of, raw, where, frozenset({"id", "kind"}))
    if made.assumed:
        known = fields_of(made_of)
        made = structs.replace(made, assumed=tuple(name for name in made.assumed if name in known))
    words = _fault_of_texts(made) or fault_of_the_rest(made)
    _refuse_if(f"{called(id, made)}: {words}" if words else None)
    if loose and any(ends(made)):
        raise FileError(
            f"{where}: stands on {shown(ends(made)[0])}, allowed is a part that stands on no node."
        )
    return made


def _unbound(kind: type[Element]) -> dict[str, Any]:
    if issubclass(kind, Branch):
        return {"start": "", "end": ""}
    return {"node": ""} if issubclass(kind, Attachment) else {}


def _fault_of_texts(element: Element) -> str | None:
    """Characters; all else about labelled fields is held by their bounds."""
    words = fault_of_writing("Name", element.name) if element.name else None
    if not words and element.note:
        words = fault_of_writing("Note", element.note, lines=True)
    written = getattr(element, "type", "")
    return words or (fault_of_writing("Type", written) if written else None)


def parts_from(found: Any) -> dict[str, Part]:
    """The parts that a file carries, by id."""
    parts: dict[str, Part] = {}
    entries = _list({"parts": found}, "parts", [])
    if len(entries) > MOST_PARTS:
        raise FileError(f"There are {len(entries)} parts, allowed are at most {MOST_PARTS}.")
    for number, one in enumerate(entries, 1):
        id = one.get("id") if isinstance(one, dict) else None
        if not isinstance(id, str):
            raise FileError(f"Part {number}: id is missing, allowed is text such as P1.")
        _refuse_if(fault_of_id(id))
        if id in parts:
            raise FileError(f"The id {shown(id)} is given to two parts, allowed is one.")
        parts[id] = part_from(one, id)
    return parts


def profiles_from(raw: Mapping[str, Any]) -> dict[str, Profile]:
    """The profiles that a file or clip carries, by name."""
    profiles: dict[str, Profile] = {}
    for number, one in enumerate(_list(raw, "profiles", []), 1):
        name = one.get("name") if isinstance(one, dict) else None
        if not isinstance(name, str):
            raise FileError(f"Profile {number}: name is missing, allowed is text such as household.")
        if name in profiles:
            raise FileError(f"The name {shown(name)} is given to two profiles, allowed is one.")
        if not isinstance(one.get("percent"), list):
            raise FileError(
                f"Profile {shown(name)}: percent is {shown(one.get('percent'))}, "
                "allowed is a list of numbers."
            )
        values = {k: v for k, v in one.items() if k != "name"}
        made = struct_from(Profile, values, f"Profile {shown(name)}")
        profiles[name] = structs.replace(made, percent=tuple(map(float, made.percent)))
    _refuse_if(fault_of_profiles(profiles))
    return profiles


def part_from(raw: Any, where: str) -> Part:
    """One part, with its symbol."""
    element = raw.get("element") if isinstance(raw, dict) else None
    if not isinstance(element, dict):
        raise FileError(f"Part {where}: element is {shown(element)}, allowed is an object with its kind.")
    symbol = raw.get("symbol")
    drawn = None if symbol is None else struct_from(Symbol, symbol, f"Part {where}")
    words = fault_of_symbol(drawn) if drawn else None
    made = Part(
        name=raw.get("name"),
        element=element_from(element, where, loose=True),
        symbol=drawn,
        kept=_kept(raw, _known(Part) | {"id"}, f"Part {where}"),
    )
    words = words or fault_of_fields(made)
    _refuse_if(f"Part {where}: {words}" if words else None)
    return made


def struct_from(kind: type[Kind], raw: Any, where: str, reserved: frozenset[str] = frozenset()) -> Kind:
    """A struct from its object: known keys by type and bounds, foreign keys kept."""
    if not isinstance(raw, dict):
        raise FileError(f"{where} is {shown(raw)}, allowed is an object.")
    known = _known(kind)
    if raw.keys() <= known | reserved:
        fields: dict[str, Any] = raw
    else:
        kept = _kept(raw, known | reserved, where)
        fields = {**{k: v for k, v in raw.items() if k in known or k in reserved}, "kept": kept}
    try:
        made = msgspec.convert(fields, kind)
    except msgspec.ValidationError as error:
        raise FileError(f"{where}: {_diagnosis(kind, raw, str(error))}") from None
    if not reserved:
        words = fault_of_fields(made)
        _refuse_if(f"{where}: {words}" if words else None)
    return made


@cache
def _known(kind: type[Struct]) -> frozenset[str]:
    return frozenset(f.name for f in structs.fields(kind)) - {"kept"}


def _kept(raw: Mapping[str, Any], known: frozenset[str], where: str) -> dict[str, Any]:
    """Keys we do not know, to be written back as they came."""
    kept = {k: v for k, v in raw.items() if k not in known}
    if kept and _depth(kept) > DEEPEST:
        raise FileError(f"{where}: is nested deeper than {DEEPEST} levels.")
    try:
        json.dumps(kept, ensure_ascii=False).encode()
    except UnicodeEncodeError:
        raise FileError(f"{where}: holds half a character, allowed is whole text.") from None
    return kept


def _depth(value: Any) -> int:
    level, depth = [value], 0
    while level:
        depth += 1
        level = [
            inner
            for one in level
            if isinstance(one, dict | list)
            for inner in (one.values() if isinstance(one, dict) else one)
        ]
    return depth


def _diagnosis(kind: type[Struct], raw: Mapping[str, Any], said: str) -> str:
    """Which field it was, in our words; `said` is what the type check had to say."""
    for name, about in fields_of(kind).items():
        if name in raw and (words := fault_of_value(about, raw[name])):
            return words
    for name in ("start", "end", "node"):
        if name in _known(kind) and not isinstance(raw.get(name), str):
            given = "missing" if name not in raw else shown(raw[name])
            return f"{name} is {given}, allowed is the id of a node."
    path = said.rpartition("`$.")[2].rstrip("`") if "`$." in said else ""
    field = path.split("[")[0].split(".")[0]
    if field in raw:
        return f"{field} is {shown(raw[field])}, allowed is: {said.split(' - at ')[0].lower()}."
    return f"{said}."


def _refuse_if(sentence: str | None) -> None:
    if sentence:
        raise FileError(sentence)
