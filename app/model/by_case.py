"""What a loading case states of single elements, over the percentages that it has for all."""

import math
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from msgspec.structs import replace

from app.model.checks import EditRefused, called, fault_of_fields, shown
from app.model.drawing import Case, Drawing, Own
from app.model.kinds import Capacitor, Element, Generator, Load, Motor, Supply

Scaled = Supply | Load | Motor | Generator | Capacitor
ONE_OF = ("percent", "demand_kva", "demand_kw")
SCALED = "a supply, load, motor, generator or capacitor"


def percent_of(case: Case, id: str, element: Element) -> float:
    """Share of what the drawing states of an element at which it stands in a case, %."""
    if isinstance(element, Motor) and element.state == "off":
        return 0.0
    own = case.own.get(id)
    if own is not None and isinstance(element, Load) and states_demand(own):
        return _share(as_in(case, id, element), element)
    if own is None or own.percent is None:
        return general_percent(case, element)
    starts = isinstance(element, Motor) and element.state == "starting"
    return 100.0 if starts and own.percent else own.percent


def general_percent(case: Case, element: Element) -> float:
    """The share that a case has for all elements of this kind, %."""
    if isinstance(element, Load):
        return case.load_percent
    if isinstance(element, Motor):
        if element.state == "starting":
            return 100.0
        return case.load_percent if case.motor_percent is None else case.motor_percent
    if isinstance(element, Generator):
        return case.generation_percent
    if isinstance(element, Supply):
        return case.supply_percent
    return 100.0 if not isinstance(element, Capacitor) or element.connected else 0.0


def states_demand(own: Own) -> bool:
    """True where a case states the demand of a load itself, so that no share scales it."""
    return own.demand_kva is not None or own.demand_kw is not None


def as_in(case: Case, id: str, load: Load) -> Load:
    """A load with the demand and the power factor that a case states of it, before any share."""
    own = case.own.get(id)
    if own is None:
        return load
    if own.power_factor is not None:
        load = replace(load, power_factor=own.power_factor)
    return replace(load, demand_kva=own.demand_kva, demand_kw=own.demand_kw) if states_demand(own) else load


def scale_of(case: Case, id: str, element: Element) -> float:
    """Share at which an element stands in a case of what it is `as_in` that case, %."""
    own = case.own.get(id)
    return 100.0 if own is not None and states_demand(own) else percent_of(case, id, element)


def _share(part: Load, whole: Load) -> float:
    """Demand of a load in percent of another, in the unit of the second; 100 where that is nought."""
    amount, unit = stated(whole)
    given = part.demand_kw if unit == "kW" else part.demand_kva
    if given is None and unit == "kW":
        given = (part.demand_kva or 0.0) * part.power_factor
    elif given is None:
        given = (part.demand_kw or 0.0) / part.power_factor if part.power_factor else 0.0
    return 100 * given / amount if amount else 100.0


def stated(element: Scaled) -> tuple[float, str]:
    """What the share is a share of, and its unit: 80 kVA, 100 kvar."""
    if isinstance(element, Supply):
        return element.nominal_v * element.held_percent / 100, "V"
    if isinstance(element, Capacitor):
        return element.rating_kvar, "kvar"
    if isinstance(element, Generator):
        return element.output_kw, "kW"
    if isinstance(element, Motor):
        return element.rated_kw, "kW"
    if element.demand_kva is None:
        return element.demand_kw or 0.0, "kW"
    return element.demand_kva, "kVA"


def share_of(part: float, whole: float) -> float:
    """The percentage that gives a part of a whole back, to the last bit wherever there is one that does."""
    percent = 100 * part / whole
    near = (percent, math.nextafter(percent, math.inf), math.nextafter(percent, -math.inf))
    return next((p for p in near if whole * p / 100 == part), percent)


def set_own(drawing: Drawing, number: int, id: str, **fields: Any) -> Drawing:
    """Say what one element is in case `number` (from 0) alone; a field set to None is as for all again."""
    if not 0 <= number < len(drawing.cases):
        raise EditRefused(f"Case {number + 1} does not exist, allowed is 1 to {len(drawing.cases)}.")
    if id not in drawing.elements:
        raise EditRefused(f"There is no element {shown(id)} in this drawing.")
    case = drawing.cases[number]
    if any(fields.get(name) is not None for name in ONE_OF):
        fields = {**dict.fromkeys(ONE_OF), **fields}
    made = replace(case.own.get(id, Own()), **fields)
    words = fault_of_own(drawing.elements, {id: made})
    if words:
        raise EditRefused(words.removesuffix(".") + f", in case {case.name}.")
    own = {i: one for i, one in {**case.own, id: made}.items() if _says_something(one)}
    cases = list(drawing.cases)
    cases[number] = replace(case, own=own)
    return replace(drawing, cases=tuple(cases))


def _says_something(own: Own) -> bool:
    return own != Own()


def fault_of_own(elements: Mapping[str, Element], own: Mapping[str, Own]) -> str | None:
    """The sentence against what a case states of single elements, or None."""
    for id, one in own.items():
        element = elements.get(id)
        if element is None:
            return f"own is of {shown(id)}, which does not exist, allowed is {SCALED}."
        words = _fault_of_one(element, one)
        if words:
            return f"{called(id, element)}: {words}"
    return None


def _fault_of_one(element: Element, own: Own) -> str | None:
    if not isinstance(element, Scaled):
        return f"has no share of its own in a case, allowed is {SCALED}."
    words = fault_of_fields(own)
    if words:
        return words
    if isinstance(element, Supply) and own.percent is not None and not 0 < own.percent <= 200:
        return f"Share is {own.percent:g} %, allowed is a number, more than 0 and at most 200 %."
    if isinstance(element, Load):
        return _fault_of_demand(as_in(Case(own={"": own}), "", element), own)
    if own.power_factor is not None:
        return "has no power factor of its own in a case, allowed is a load."
    return "has no demand of its own in a case, allowed is a load." if states_demand(own) else None


def _fault_of_demand(load: Load, own: Own) -> str | None:
    if sum(getattr(own, name) is not None for name in ONE_OF) > 1:
        return "Share, Demand in kVA and Demand in kW are more than one given, allowed is one of them."
    if load.power_factor == 0 and load.demand_kw:
        return f"Power factor is 0 with a demand of {load.demand_kw:g} kW, allowed is more than 0."
    return None


def tidied(drawing: Drawing) -> Drawing:
    """The drawing whose cases say nothing of elements that are gone, or are something else now."""
    elements = drawing.elements
    if all(_fits(elements, id, one) for case in drawing.cases for id, one in case.own.items()):
        return drawing
    left = [{i: one for i, one in c.own.items() if _fits(elements, i, one)} for c in drawing.cases]
    cases = (replace(case, own=own) for case, own in zip(drawing.cases, left, strict=True))
    return replace(drawing, cases=tuple(cases))


def _fits(elements: Mapping[str, Element], id: str, own: Own) -> bool:
    return id in elements and _fault_of_one(elements[id], own) is None


def taken_over(drawing: Drawing, said: Mapping[str, Mapping[str, Own]], fresh: Mapping[str, str]) -> Drawing:
    """The drawing in which copies are in each case what their originals were in the case of that name.

    `said` is what each case, by name, states of the originals; `fresh` the id of each copy."""
    cases = []
    for case in drawing.cases:
        copied = {fresh[i]: own for i, own in said.get(case.name, {}).items() if i in fresh}
        copied = {i: own for i, own in copied.items() if _fits(drawing.elements, i, own)}
        cases.append(replace(case, own={**case.own, **copied}) if copied else case)
    return replace(drawing, cases=tuple(cases))


def said_of(cases: Iterable[Case], ids: Iterable[str]) -> dict[str, dict[str, Own]]:
    """What the cases, by name, state of some elements."""
    chosen = set(ids)
    found = {case.name: {i: own for i, own in case.own.items() if i in chosen} for case in cases}
    return {name: own for name, own in found.items() if own}


def owned(cases: Iterable[Case]) -> Iterator[tuple[int, str, Own]]:
    """Every case's number with what it states of single elements."""
    for number, case in enumerate(cases):
        for id, own in case.own.items():
            yield number, id, own
