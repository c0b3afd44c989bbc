"""What a person typed into a field, turned into an edit; `80 kW` typed as kVA goes where it belongs."""

import math
from typing import Any

from app.model.changes import change, element
from app.model.checks import EditRefused, called, quantity, shown
from app.model.drawing import Drawing
from app.model.fields import Field, fields_of
from app.model.figures import stated, typed
from app.model.kinds import AnyElement, Load, Supply, Transformer
from app.model.levels import TWO_WIRE, nominal_levels
from app.model.spacing import in_metres
from app.model.units import UnitError, parse, parse_ratio

YES = ("yes", "true", "on", "1", "y", "closed", "connected", "leading")
NO = ("no", "false", "off", "0", "n", "open", "disconnected", "lagging")


def change_text(drawing: Drawing, id: str, field: str, text: str) -> Drawing:
    """Set one field from what was typed, with or without a unit; empty blanks an optional field."""
    one = element(drawing, id)
    about = fields_of(type(one)).get(field)
    if about is None:
        raise EditRefused(f"{called(id, one)}: there is no field {shown(field)}.")
    try:
        return change(drawing, id, **_read(one, about, text.strip()))
    except UnitError as error:
        raise EditRefused(f"{called(id, one)}, {about.label}: {error}") from None


def value_of(about: Field, text: str) -> Any:
    """The value of one field from what was typed; raises UnitError with the reason."""
    if about.choices:
        return _choice(about, text)
    if about.type is str:
        return text
    if not text and about.optional:
        return None
    if about.type is bool:
        return _yes_or_no(about, text)
    number = parse(text, about.unit)
    if about.type is int:
        if not number.is_integer():
            raise UnitError(f"{quantity(number, about.unit)} is not allowed, allowed is {about.allowed}.")
        return int(number)
    return number


def limit_percent(drawing: Drawing, about: Field, text: str) -> float | None:
    """A voltage limit typed in volts as percent of nominal: of line volts, or of phase volts where those
    lie nearer. None where no volts were typed; raises UnitError where not one low voltage is nominal."""
    if about.unit != "% of nominal" or not text.strip().lower().endswith("v"):
        return None
    volts = parse(text, "V")
    levels = {(level.volts, level.wires) for level in nominal_levels(drawing).values() if level.volts < 1000}
    if len(levels) != 1:
        known = ", ".join(f"{typed(v)} V" for v, _wires in sorted(levels)) or "none"
        raise UnitError(f"volts need one nominal voltage below 1 kV in the drawing, known is {known}.")
    nominal, wires = levels.pop()
    bases = (nominal,) if wires == TWO_WIRE else (nominal, nominal / math.sqrt(3))
    return 100 * volts / min(bases, key=lambda base: abs(math.log(max(volts, 1e-9) / base)))


def _read(one: AnyElement, about: Field, text: str) -> dict[str, Any]:
    if isinstance(one, Transformer) and about.name in ("v1_v", "v2_v") and "/" in text:
        return _both_windings(text, about)
    if isinstance(one, Transformer) and about.name == "tap" and text.endswith("%"):
        return {about.name: _notch(one, text)}
    if about.name == "hung_at_m":
        return {about.name: in_metres(text)}
    try:
        return {about.name: value_of(about, text)}
    except UnitError:
        if isinstance(one, Supply) and about.unit == "MVA":
            return {about.name: _from_current(one, text, about)}
        other = {"demand_kva": "demand_kw", "demand_kw": "demand_kva"}.get(about.name)
        if other is None or not isinstance(one, Load):
            raise
        try:
            return {other: value_of(fields_of(Load)[other], text)}
        except UnitError:
            pass
        raise


def _from_current(supply: Supply, text: str, about: Field) -> float:
    """MVA of a fault level typed as a current: √3·U·I, or U·I between two wires."""
    try:
        kiloamps = parse(text, "kA")
    except UnitError:
        return float(value_of(about, text))  # raises, in the words of its own unit
    root = math.sqrt(3) if supply.wires == "three-phase" else 1.0
    return root * supply.nominal_v / 1e3 * kiloamps


def _both_windings(text: str, about: Field) -> dict[str, Any]:
    try:
        first, second = parse_ratio(text)
    except UnitError:
        return {about.name: value_of(about, text)}
    return {"v1_v": first, "v2_v": second}


def _notch(transformer: Transformer, text: str) -> int:
    """The notch that a percentage stands for: −2.5 % is −1 where a notch is 2.5 %."""
    percent, step = parse(text, "%"), transformer.notch_percent
    if abs(percent / step - round(percent / step)) > 1e-9:
        raise UnitError(f"{quantity(percent, '%')} is not allowed, allowed are steps of {stated(step, '%')}.")
    return round(percent / step)


def _choice(about: Field, text: str) -> str:
    wanted = text.casefold()
    exact = [c for c in about.choices if c.casefold() == wanted]
    near = exact or [c for c in about.choices if wanted and c.casefold().startswith(wanted)]
    if len(near) != 1:
        raise UnitError(f"{shown(text)} is not allowed, allowed is {about.allowed}.")
    return near[0]


def _yes_or_no(about: Field, text: str) -> bool:
    if text.casefold() in YES:
        return True
    if text.casefold() in NO:
        return False
    raise UnitError(f"{shown(text)} is not allowed, allowed is {about.allowed}.")
