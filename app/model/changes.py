"""Edits of what elements are: put, change, remove, rename, tap; and of what stands around them."""

from collections.abc import Collection, Iterable, Mapping
from typing import Any, TypeVar, cast

from msgspec import Struct
from msgspec.structs import replace

from app.model.by_case import fault_of_own, tidied
from app.model.checks import (
    EditRefused,
    called,
    fault,
    fault_of_fields,
    fault_of_id,
    fault_of_part,
    fault_of_value,
    misfit,
    shown,
)
from app.model.drawing import Case, Drawing, Limits
from app.model.fields import fields_of
from app.model.figures import typed
from app.model.following import fault_of_followed
from app.model.kinds import AnyElement, Attachment, Branch, Busbar, Element, Load, Node, Transformer

Kind = TypeVar("Kind", bound=Struct)


def with_elements(drawing: Drawing, elements: dict[str, AnyElement]) -> Drawing:
    """The drawing with other elements."""
    return replace(drawing, elements=elements)


def element(drawing: Drawing, id: str) -> AnyElement:
    """An element that must be there."""
    found = drawing.elements.get(id)
    if found is None:
        raise EditRefused(f"There is no element {shown(id)} in this drawing.")
    return found


def refuse_if(sentence: str | None) -> None:
    """Refuse where there is a sentence against it."""
    if sentence:
        raise EditRefused(sentence)


def put(drawing: Drawing, fresh: Mapping[str, Element]) -> Drawing:
    """Add elements, or replace those of the same id; all of them or none."""
    elements: dict[str, AnyElement] = {**drawing.elements, **cast(dict[str, AnyElement], fresh)}
    for id, one in fresh.items():
        refuse_if(fault_of_id(id) or fault(id, one) or misfit(elements, id, one))
        refuse_if(fault_of_part(drawing.parts, id, one) or fault_of_followed(drawing.profiles, id, one))
    ousted = {
        i for i in fresh if isinstance(drawing.elements.get(i), Node) and not isinstance(fresh[i], Node)
    }
    if ousted:
        for id, one in elements.items():
            refuse_if(misfit(elements, id, one) if ousted & set(ends(one)) else None)
    return tidied(with_elements(drawing, elements))


def ends(one: Element) -> tuple[str, ...]:
    """The nodes an element stands on."""
    if isinstance(one, Branch):
        return one.start, one.end
    return (one.node,) if isinstance(one, Attachment) else ()


def change(drawing: Drawing, id: str, **fields: Any) -> Drawing:
    """Set fields of one element; what is set is no longer assumed. Of a load's two demands, setting one
    clears the other."""
    one = element(drawing, id)
    if isinstance(one, Load):
        fields = _one_demand(fields)
    for name in fields:
        if name not in one.__struct_fields__ or name == "kept":
            raise EditRefused(f"{called(id, one)}: there is no field {shown(name)}.")
    unsure = fields.pop("assumed", tuple(name for name in one.assumed if name not in fields))
    return put(drawing, {id: replace(one, **_as_typed(one, fields), assumed=unsure)})


def _one_demand(fields: dict[str, Any]) -> dict[str, Any]:
    for given, other in (("demand_kva", "demand_kw"), ("demand_kw", "demand_kva")):
        if fields.get(given) is not None and other not in fields:
            return {**fields, other: None}
    return fields


def _as_typed(struct: Struct, fields: Mapping[str, Any]) -> dict[str, Any]:
    """Whole numbers where a field holds any number become floats, and the other way where equal."""
    about = fields_of(type(struct))
    made = {}
    for name, value in fields.items():
        kind = about[name].type if name in about else None
        if name in ("x", "y", "dx", "dy", "length"):
            kind = float
        if kind is float and isinstance(value, int) and not isinstance(value, bool) and abs(value) < 2**53:
            value = float(value)
        elif kind is int and isinstance(value, float) and value.is_integer():
            value = int(value)
        made[name] = value
    return made


def rename(drawing: Drawing, id: str, name: str) -> Drawing:
    """Give an element another name; its id stays."""
    return change(drawing, id, name=name.strip())


def set_tap(drawing: Drawing, id: str, notch: int) -> Drawing:
    """Move a transformer's tap to a notch of its ladder."""
    one = element(drawing, id)
    if not isinstance(one, Transformer):
        raise EditRefused(f"{called(id, one)}: has no taps, allowed is a transformer.")
    return change(drawing, id, tap=notch)


def remove(drawing: Drawing, ids: Iterable[str]) -> Drawing:
    """Take elements away, and with a node everything that stands on it."""
    gone = set(ids)
    for id in gone:
        element(drawing, id)
    left = {i: e for i, e in drawing.elements.items() if i not in gone and not (gone and gone & set(ends(e)))}
    return tidied(with_elements(drawing, left))


def set_project(drawing: Drawing, **fields: Any) -> Drawing:
    """Set fields of the sheet's head."""
    return replace(drawing, project=_changed("Project", drawing.project, fields))


def set_limits(drawing: Drawing, **fields: Any) -> Drawing:
    """Set what results are judged against."""
    made = _changed("Limits", drawing.limits, fields)
    refuse_if(fault_of_limits(made))
    return replace(drawing, limits=made)


def fault_of_limits(limits: Limits) -> str | None:
    """The sentence against a limit set, or None."""
    words = fault_of_fields(limits)
    if not words and limits.low_percent >= limits.high_percent:
        low, high = typed(limits.low_percent), typed(limits.high_percent)
        words = f"Lowest voltage is {low} % of nominal, allowed is less than Highest voltage, {high} %."
    return f"Limits: {words}" if words else None


def set_case(drawing: Drawing, number: int, case: Case | None = None, **fields: Any) -> Drawing:
    """Put a case in place of case `number` (from 0) or, one past the last, beside the others; or set
    fields of it. To take one away: `remove_case`."""
    cases = list(drawing.cases)
    if not 0 <= number <= len(cases):
        raise EditRefused(f"Case {number + 1} does not exist, allowed is 1 to {len(cases) + 1}.")
    was = case or (cases[number] if number < len(cases) else Case(name=f"Case {number + 1}"))
    cases[number : number + 1] = [_changed(f"Case {number + 1}", was, fields)]
    refuse_if(fault_of_cases(cases, drawing.elements))
    return replace(drawing, cases=tuple(cases))


def remove_case(drawing: Drawing, number: int) -> Drawing:
    """Take one case away; the last one stays."""
    cases = drawing.cases
    if not 0 <= number < len(cases):
        raise EditRefused(f"Case {number + 1} does not exist, allowed is 1 to {len(cases)}.")
    if len(cases) == 1:
        raise EditRefused(f"{cases[0].name}: is the only case, at least one must stay.")
    return replace(drawing, cases=cases[:number] + cases[number + 1 :])


def fault_of_cases(cases: Collection[Case], elements: Mapping[str, Element]) -> str | None:
    """The sentence against the cases of a drawing, or None."""
    if not 1 <= len(cases) <= 100:
        return f"There are {len(cases)} cases, allowed are 1 to 100."
    names: set[str] = set()
    for number, case in enumerate(cases, 1):
        words = fault_of_fields(case)
        if not words and not case.name.strip():
            words = "Case is blank, allowed is a name."
        if not words and case.name in names:
            words = f"Case is {shown(case.name)}, which another case is called, allowed is a name of its own."
        words = words or fault_of_own(elements, case.own)
        if words:
            return f"Case {number}: {words}"
        names.add(case.name)
    return None


def set_frequency(drawing: Drawing, frequency_hz: float) -> Drawing:
    """Set the frequency of the whole drawing."""
    refuse_if(fault_of_frequency(frequency_hz))
    return replace(drawing, frequency_hz=float(frequency_hz))


def fault_of_frequency(frequency_hz: Any) -> str | None:
    """The sentence against a frequency, or None."""
    words = fault_of_value(fields_of(Drawing)["frequency_hz"], frequency_hz)
    return f"Drawing: {words}" if words else None


def _changed(what: str, struct: Kind, fields: Mapping[str, Any]) -> Kind:
    for name in fields:
        if name not in fields_of(type(struct)):
            raise EditRefused(f"{what}: there is no field {shown(name)}.")
    made = replace(struct, **_as_typed(struct, fields))
    words = fault_of_fields(made)
    refuse_if(f"{what}: {words}" if words else None)
    return made


def reconnect(drawing: Drawing, branch_id: str, end: str, node_id: str) -> Drawing:
    """Put one end of a branch ("start" or "end") on another node."""
    one = element(drawing, branch_id)
    if not isinstance(one, Branch) or end not in ("start", "end"):
        raise EditRefused(f"{called(branch_id, one)}: has no {end}, allowed is the start or end of a branch.")
    return change(drawing, branch_id, **{end: node_id})


def reattach(drawing: Drawing, attachment_id: str, node_id: str) -> Drawing:
    """Hang an attachment on another node."""
    one = element(drawing, attachment_id)
    if not isinstance(one, Attachment):
        raise EditRefused(f"{called(attachment_id, one)}: hangs on no node, allowed is an attachment.")
    return change(drawing, attachment_id, node=node_id)


def swap_ends(drawing: Drawing, id: str) -> Drawing:
    """Turn a branch round: what was at its start is at its end. A transformer's windings change places."""
    one = element(drawing, id)
    if not isinstance(one, Branch):
        raise EditRefused(f"{called(id, one)}: has no ends, allowed is a branch.")
    return put(drawing, {id: replace(one, start=one.end, end=one.start, via=one.via[::-1])})


def turn_bar(drawing: Drawing, id: str) -> Drawing:
    """Lay an upright busbar down, or stand it up."""
    one = element(drawing, id)
    if not isinstance(one, Busbar):
        raise EditRefused(f"{called(id, one)}: cannot be turned, allowed is a busbar.")
    return change(drawing, id, upright=not one.upright)
