"""What a case states of one element, as people type it and read it: `5 kVA at 0.98`, `off`."""

import re

from app.model import figures
from app.model.by_case import ONE_OF, Scaled, percent_of, set_own, share_of, stated, states_demand
from app.model.checks import EditRefused, called
from app.model.drawing import Case, Drawing, Own, label
from app.model.kinds import Capacitor, Load, Motor, Supply
from app.model.units import UnitError, parse

FACTOR = re.compile(r"(.*?)\s*\b(?:at|pf)\b\s*(.*)", re.IGNORECASE)
SWITCHED = {"off": 0.0, "on": 100.0}


def set_own_text(drawing: Drawing, number: int, id: str, text: str) -> Drawing:
    """Say what one element is in case `number`, from what was typed: an amount, a share, off or on; of a
    load its power factor besides, after `at`. Empty: as the case has it for all."""
    element = drawing.elements.get(id)
    if not isinstance(element, Scaled):
        return set_own(drawing, number, id, percent=100.0)  # refuses, in its own words
    words, factor = text.strip(), None
    try:
        if isinstance(element, Load) and (found := FACTOR.fullmatch(words)):
            words, factor = found[1], parse(found[2], "")
        said = {**dict.fromkeys(ONE_OF), **(_said(element, words) if words else {})}
    except UnitError as error:
        raise EditRefused(f"{called(id, element)}, in case {drawing.cases[number].name}: {error}") from None
    return set_own(drawing, number, id, **said, power_factor=factor)


def _said(element: Scaled, words: str) -> dict[str, float]:
    """What was typed: a share, the demand of a load, or the share that an amount of anything else makes."""
    if words.casefold() in SWITCHED and not isinstance(element, Supply):
        return {"percent": SWITCHED[words.casefold()]}
    if words.endswith("%"):
        return {"percent": parse(words, "%")}
    whole, unit = stated(element)
    if isinstance(element, Load):
        return _demand(words, unit)
    part = parse(words, unit)
    if not whole:
        raise UnitError(f"nothing is a share of 0 {unit}, allowed is a percentage.")
    return {"percent": share_of(part, whole)}


def _demand(words: str, unit: str) -> dict[str, float]:
    """A demand in the unit that was typed, which a bare number leaves to the drawing."""
    for tried in (unit, "kW" if unit == "kVA" else "kVA"):
        try:
            return {f"demand_{tried.lower()}": parse(words, tried)}
        except UnitError:
            pass
    return {"percent": parse(words, unit)}  # raises, in the words of the unit that the drawing has


def typed_words(case: Case, id: str, element: Scaled) -> str:
    """What a case states of an element, as it would be typed; nothing where it is as for all."""
    own = case.own.get(id)
    if own is None:
        return ""
    words = amount(case, id, element) if own.percent is not None or states_demand(own) else ""
    if own.percent and isinstance(element, Load):  # a share of a load was typed as such
        words = figures.stated(own.percent, "%")
    factor = "" if own.power_factor is None else f"at {figures.stated(own.power_factor)}"
    return f"{words} {factor}".strip()


def amount(case: Case, id: str, element: Scaled) -> str:
    """What an element stands at in a case: `5 kVA`, `off`."""
    own = case.own.get(id)
    if own is not None and states_demand(own):
        return _amount_of(own)
    percent, (whole, unit) = percent_of(case, id, element), stated(element)
    if percent == 0 and isinstance(element, Capacitor | Motor | Load):
        return "off"
    return figures.stated(whole * percent / 100, unit)


def _amount_of(own: Own) -> str:
    if own.demand_kva is None:
        return figures.stated(own.demand_kw or 0.0, "kW")
    return figures.stated(own.demand_kva, "kVA")


def settings(case: Case, drawing: Drawing) -> str:
    """All that a case states: `supply 97 %, loads 10 %; House load 5 kVA (6.25 %)`."""
    shares = [("supply", case.supply_percent), ("loads", case.load_percent)]
    shares += [("generation", case.generation_percent)]
    if case.motor_percent is not None:
        shares.append(("motors", case.motor_percent))
    general = ", ".join(f"{word} {figures.stated(percent, '%')}" for word, percent in shares)
    return "; ".join([general, *own_told(case, drawing)])


def own_told(case: Case, drawing: Drawing) -> list[str]:
    """What a case states of single elements, each by its name."""
    hung = [(i, e) for i, e in drawing.elements.items() if i in case.own and isinstance(e, Scaled)]
    return [f"{label(drawing, i)} {told(case, i, e)}" for i, e in hung]


def rounded(percent: float) -> str:
    """A share to three figures: 21.4 %."""
    return figures.stated(float(f"{percent:.3g}"), "%")


def told(case: Case, id: str, element: Scaled) -> str:
    """The same in a sentence: `5 kVA (6.25 %), power factor 0.98`."""
    own = case.own[id]
    parts = []
    if own.percent is not None or states_demand(own):
        words, percent = amount(case, id, element), percent_of(case, id, element)
        parts.append(words if words == "off" else f"{words} ({rounded(percent)})")
    if own.power_factor is not None:
        parts.append(f"power factor {figures.stated(own.power_factor)}")
    return ", ".join(parts)
