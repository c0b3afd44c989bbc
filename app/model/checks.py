"""What an element may be: every refusal is one sentence naming element, field, value and what is allowed."""

import math
import re
from collections.abc import Mapping
from typing import Any

from msgspec import Struct

from app.model import taps
from app.model.conductors import fault_of_spacing
from app.model.drawing import Part, Symbol
from app.model.fields import Field, fields_of
from app.model.figures import typed
from app.model.kinds import (
    KIND_WORDS,
    Attachment,
    Branch,
    Busbar,
    Element,
    Generator,
    Load,
    Node,
    OverheadLine,
    Supply,
    Transformer,
    kind_of,
)

ID = re.compile(r"[A-Za-z0-9_.-]{1,40}")
ID_ALLOWED = "1 to 40 letters, digits, _ - or ."
FARTHEST = 100_000.0  # grid steps
_UNPRINTABLE = re.compile("[\x00-\x08\x0b-\x1f\x7f-\x9f\ud800-\udfff\ufffe\uffff]")
_GRID = ("x", "y", "dx", "dy")


class EditRefused(ValueError):
    """The reason, as one sentence that names element, field, value and what is allowed."""


def called(id: str, element: Element) -> str:
    """How a sentence names an element: `House, T2 (transformer)`."""
    name = element.name if fault_of_value(fields_of(type(element))["name"], element.name) is None else ""
    lead = f"{name}, " if name and name != id else ""
    return f"{lead}{id} ({KIND_WORDS[kind_of(element)]})"


def fault_of_id(id: str) -> str | None:
    """The sentence against an id, or None."""
    return None if ID.fullmatch(id) else f"The id {shown(id)} is not allowed, allowed is {ID_ALLOWED}."


def fault(id: str, element: Element) -> str | None:
    """The sentence against the values of one element, or None where all is well."""
    words = _fault_of_tap(element) or fault_of_fields(element) or fault_of_the_rest(element)
    return f"{called(id, element)}: {words}" if words else None


def fault_of_the_rest(element: Element) -> str | None:
    """The sentence against what bounds of single fields do not say, without the element's name."""
    return _fault_of_place(element) or _fault_across(element)


def fault_of_part(parts: Mapping[str, Part], id: str, element: Element) -> str | None:
    """The sentence against the part an element says it was made from, or None."""
    if not element.part:
        return None
    part = parts.get(element.part)
    if part is None:
        known = ", ".join(list(parts)[:8]) or "blank, since the drawing carries no parts"
        return f"{called(id, element)}: Part is {shown(element.part)}, allowed is {known}."
    if type(part.element) is not type(element):
        word = KIND_WORDS[kind_of(part.element)]
        return f"{called(id, element)}: Part is {element.part}, a {word}, allowed is a part of its own kind."
    return None


SVG_LONGEST = 256 * 1024
MOST_TERMINALS = 16


def fault_of_symbol(symbol: Symbol) -> str | None:
    """The sentence against a symbol's size and terminals, without its part's name, or None."""
    size = len(symbol.svg.encode("utf-8", "replace"))
    if not symbol.svg.strip():
        return "Symbol is blank, allowed is SVG text."
    if size > SVG_LONGEST:
        return f"Symbol has {size / 1024:.0f} KiB of SVG text, allowed is at most {SVG_LONGEST // 1024} KiB."
    if _UNPRINTABLE.search(symbol.svg.replace("\r", "")):
        return "Symbol holds control characters, allowed is SVG text."
    for label, span in (("width", symbol.width), ("height", symbol.height)):
        if not (_is_number(span, whole=False) and 0 < span <= 1e6):
            return f"Symbol {label} is {quantity(span, '')}, allowed is more than 0 and at most 1000000."
    if len(symbol.terminals) > MOST_TERMINALS:
        return f"Symbol has {len(symbol.terminals)} terminals, allowed are at most {MOST_TERMINALS}."
    for x, y in symbol.terminals:
        if not (_on_paper(x) and _on_paper(y) and 0 <= x <= symbol.width and 0 <= y <= symbol.height):
            return f"Symbol terminal is {shown((x, y))}, allowed is a point inside the picture."
    return None


def misfit(elements: Mapping[str, Element], id: str, element: Element) -> str | None:
    """The sentence against the ends of one element in its drawing, or None."""
    if isinstance(element, Branch):
        ends = (("Start", element.start), ("End", element.end))
        if element.start == element.end:
            return (
                f"{called(id, element)}: Start and End are both {shown(element.start)}, allowed is two nodes."
            )
    elif isinstance(element, Attachment):
        ends = (("Node", element.node),)  # type: ignore[assignment]
    else:
        return None
    for label, end in ends:
        met = elements.get(end)
        if met is None:
            return f"{called(id, element)}: {label} is {shown(end)}, which does not exist, allowed is a node."
        if not isinstance(met, Node):
            return f"{called(id, element)}: {label} is {called(end, met)}, allowed is a busbar or joint."
    return None


def fault_of_fields(struct: Struct) -> str | None:
    """The sentence against the labelled fields of any struct, without its name."""
    for name, about in fields_of(type(struct)).items():
        words = fault_of_value(about, getattr(struct, name))
        if words:
            return words
    return None


def fault_of_value(about: Field, value: Any) -> str | None:
    """The sentence against one value of one field, without the element's name."""
    if value is None:
        return None if about.optional else f"{about.label} is blank, allowed is {about.allowed}."
    if about.choices:
        right = value in about.choices
    elif about.type is bool:
        right = isinstance(value, bool)
    elif about.type is str:
        return _fault_of_text(about, value)
    else:
        right = _is_number(value, whole=about.type is int) and about.holds(value)
    return None if right else f"{about.label} is {quantity(value, about.unit)}, allowed is {about.allowed}."


def _is_number(value: Any, *, whole: bool) -> bool:
    if isinstance(value, bool) or not isinstance(value, int if whole else (int, float)):
        return False
    return isinstance(value, int) or math.isfinite(value)


def _fault_of_text(about: Field, value: Any) -> str | None:
    if not isinstance(value, str):
        return f"{about.label} is {shown(value)}, allowed is text."
    if len(value) > about.longest:
        return f"{about.label} has {len(value)} characters, allowed are at most {about.longest}."
    return fault_of_writing(about.label, value, lines=about.name == "note")


def fault_of_writing(label: str, value: str, *, lines: bool = False) -> str | None:
    """The sentence against characters that no sheet or picture could carry, or None."""
    if _UNPRINTABLE.search(value):
        return f"{label} is {shown(value)}, allowed is text without control characters."
    if not lines and "\n" in value:
        return f"{label} is {shown(value)}, allowed is one line of text."
    return None


def quantity(value: Any, unit: str) -> str:
    """A value as a sentence says it: `55 %`, `"x"`, `not a number`."""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if not isinstance(value, int | float) or (isinstance(value, int) and abs(value) > 1e15):
        return shown(value)
    if isinstance(value, float) and not math.isfinite(value):
        return "not a number" if math.isnan(value) else "infinite"
    return f"{typed(value)} {unit}" if unit else typed(value)


def shown(value: Any) -> str:
    """A foreign value in quotes, short, on one line."""
    words = f'"{value}"' if isinstance(value, str) else repr(value)
    words = _UNPRINTABLE.sub("\N{REPLACEMENT CHARACTER}", words.replace("\n", " "))
    return words if len(words) <= 60 else words[:57] + "…" + words[-1]


def _fault_of_place(element: Element) -> str | None:
    for name in _GRID:
        value = getattr(element, name, 0.0)
        if not _on_paper(value):
            return f"{name} is {quantity(value, '')}, allowed is a number from −{FARTHEST:g} to {FARTHEST:g}."
    if isinstance(element, Branch) and not all(_is_point(p) for p in element.via):
        return (
            f"via is {shown(element.via)}, allowed are pairs of numbers from −{FARTHEST:g} to {FARTHEST:g}."
        )
    if isinstance(element, Busbar) and not (_on_paper(element.length) and 0 < element.length <= 1000):
        return f"length is {quantity(element.length, '')}, allowed is more than 0 and at most 1000 steps."
    if isinstance(element, Busbar) and not isinstance(element.upright, bool):
        return f"upright is {shown(element.upright)}, allowed is yes or no."
    return None


def _on_paper(value: Any) -> bool:
    if type(value) is float:  # a shortcut: a drawing has a great many of these
        return abs(value) <= FARTHEST
    return _is_number(value, whole=False) and abs(value) <= FARTHEST


def _is_point(point: Any) -> bool:
    return isinstance(point, tuple) and len(point) == 2 and all(_on_paper(c) for c in point)


def _fault_across(element: Element) -> str | None:
    if isinstance(element, Load):
        return _fault_of_load(element)
    if isinstance(element, Transformer):
        return _fault_of_transformer(element)
    if isinstance(element, Generator):
        return _fault_of_generator(element)
    if isinstance(element, OverheadLine):
        return fault_of_spacing(element)
    return _fault_of_supply(element) if isinstance(element, Supply) else None


def _fault_of_generator(generator: Generator) -> str | None:
    least, most = generator.q_min_kvar, generator.q_max_kvar
    if least is not None and most is not None and least > most:
        return f"Least reactive is {typed(least)} kvar, allowed is at most the most, {typed(most)} kvar."
    return None


def _fault_of_supply(supply: Supply) -> str | None:
    least, most = supply.fault_level_min_mva, supply.fault_level_max_mva
    if least is not None and most is not None and least > most:
        return (
            f"Least fault level is {typed(least)} MVA, "
            f"allowed is at most the Highest fault level, {typed(most)} MVA."
        )
    return None


def _fault_of_load(load: Load) -> str | None:
    if (load.demand_kva is None) == (load.demand_kw is None):
        both = "both given" if load.demand_kva is not None else "both blank"
        return f"Demand in kVA and Demand in kW are {both}, allowed is exactly one of them."
    if load.demand_kw and load.power_factor == 0:
        return f"Power factor is 0 with a demand of {typed(load.demand_kw)} kW, allowed is more than 0."
    total = (load.constant_current_percent or 0) + (load.constant_impedance_percent or 0)
    if total > 100:
        return f"Constant current and impedance are {typed(total)} % together, allowed is at most 100 %."
    return _fault_of_shares(load)


def _fault_of_shares(load: Load) -> str | None:
    a, b = load.share_a_percent, load.share_b_percent
    if a is None and b is None:
        return None
    if a is None or b is None:
        return "Of the shares on A and B one is given and one blank, allowed is both or neither."
    if load.phases != "all":
        return f"Shares on A and B stand beside Phases {load.phases}, allowed is Phases all."
    if a + b > 100:
        return f"On A and On B are {typed(a + b)} % together, allowed is at most 100 %."
    return None


def _fault_of_transformer(t: Transformer) -> str | None:
    if taps.group(t.vector_group) is None:
        return f"Vector group is {shown(t.vector_group)}, allowed is {taps.GROUP_ALLOWED}."
    deepest = t.taps_down * t.notch_percent
    if deepest >= 100:
        return f"Taps below reach down {typed(deepest)} %, allowed is less than 100 %."
    return _fault_of_tap(t)


def _fault_of_tap(element: Element) -> str | None:
    """The sentence against a notch that the ladder does not have, however far off; else None."""
    if not isinstance(element, Transformer):
        return None
    t = element
    whole = all(_is_number(notches, whole=True) for notches in (t.tap, t.taps_down, t.taps_up))
    if not whole or t.tap in taps.notches(t):
        return None
    return (
        f"Tap is {quantity(t.tap, 'notches')}, allowed is a whole number, "
        f"at least {-t.taps_down} and at most {t.taps_up} notches."
    )
