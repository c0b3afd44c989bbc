"""The shelf: one plain part a kind, the user's own in a file, and parts and clips as bytes."""

from collections.abc import Iterable
from functools import cache
from pathlib import Path
from typing import Any

from msgspec.structs import replace

from app.model.assumed import figures_of
from app.model.checks import fault_of_symbol
from app.model.clipboard import Clip
from app.model.drawing import Drawing, Part
from app.model.errors import FileError
from app.model.file import read_bytes, sentence, write_bytes
from app.model.keeping import carried
from app.model.kinds import (
    AnyElement,
    Busbar,
    Cable,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    OverheadLine,
    Regulator,
    Supply,
    Switch,
    Transformer,
)
from app.model.overhead_parts import spaced_parts
from app.model.phase_parts import phase_parts
from app.model.raw import raw_object
from app.model.reading import MOST_PARTS, elements_from, own_from, part_from, parts_from, profiles_from
from app.model.versions import CURRENT
from app.model.writing import body, element_body, line, listed, part_body, profiles_text

Unbound: dict[str, Any] = {"start": "", "end": ""}


def is_american(frequency_hz: float) -> bool:
    """60 Hz: North American habits."""
    return frequency_hz > 55


@cache
def builtin_parts(frequency_hz: float = 50.0) -> tuple[Part, ...]:
    """One plain part a kind, in shelf order, with values usual at the frequency. Values of the cable and
    the overhead line: IEC 60228 class 2 aluminium and common practice, no source; all may be changed."""
    american = is_american(frequency_hz)
    made: tuple[tuple[str, AnyElement], ...] = (
        ("Supply", Supply(node="", nominal_v=208.0 if american else 400.0, dy=-3.0)),
        ("Busbar", Busbar()),
        ("Joint", Joint()),
        ("Cable", _cable(american)),
        ("Overhead line", _overhead(american)),
        ("Transformer", _transformer(american)),
        ("Regulator", Regulator(**Unbound)),
        ("Load", Load(node="")),
        ("Motor", Motor(node="")),
        ("Generator", Generator(node="")),
        ("Capacitor", Capacitor(node="")),
        ("Switch", Switch(**Unbound)),
    )
    return tuple(
        Part(name=name, element=replace(element, assumed=figures_of(type(element)))) for name, element in made
    )


def _transformer(american: bool) -> Transformer:
    if not american:
        return Transformer(**Unbound, rating_kva=100.0, v1_v=11000.0, v2_v=400.0, uk_percent=4.0)
    return Transformer(
        **Unbound, rating_kva=75.0, v1_v=12470.0, v2_v=208.0, uk_percent=3.0, vector_group="Dyn1"
    )


def _cable(american: bool) -> Cable:
    """240 mm² (IEC 60228: 0.125 Ω/km at 20 °C), or 4/0 AWG: 0.100 Ω/kft at 75 °C brought back to 20 °C."""
    if not american:
        return Cable(
            **Unbound,
            type="4×240 Al",
            area_mm2=240.0,
            resistance_ohm_per_km=0.125,
            reactance_ohm_per_km=0.072,
        )
    return Cable(
        **Unbound, type="4/0 AWG Al", area_mm2=107.2, resistance_ohm_per_km=0.269, reactance_ohm_per_km=0.135,
        length_m=30.48,
    )  # fmt: skip


def _overhead(american: bool) -> OverheadLine:
    """50 mm² steel-reinforced aluminium, or 1/0 AWG (ASTM B232: 0.536 Ω/km); reactance: common practice,
    no source."""
    if not american:
        return OverheadLine(
            **Unbound,
            type="ACSR 50/8",
            area_mm2=48.3,
            resistance_ohm_per_km=0.5946,
            reactance_ohm_per_km=0.37,
            length_m=500.0,
        )
    return OverheadLine(
        **Unbound,
        type="1/0 AWG ACSR",
        area_mm2=53.5,
        resistance_ohm_per_km=0.536,
        reactance_ohm_per_km=0.44,
        length_m=304.8,
    )


def made_from(drawing: Drawing, part: Part) -> tuple[Drawing, AnyElement]:
    """What to draw with a shelf part: the drawing that carries it where it is the user's own, and an
    element to start from. Give the element to `extend` or `drop`."""
    if any(part in _offered(hertz) for hertz in (50.0, 60.0)):
        return drawing, part.element
    drawing, id = carried(drawing, part)
    return drawing, replace(part.element, part=id)


def _offered(frequency_hz: float) -> tuple[Part, ...]:
    """All that the shelf offers by itself at a frequency."""
    american = is_american(frequency_hz)
    return (*builtin_parts(frequency_hz), *spaced_parts(american), *phase_parts(american))


def load_shelf(path: str | Path) -> tuple[Part, ...]:
    """The user's own parts; none where there is no shelf file yet. Raises FileError."""
    path = Path(path)
    if not path.exists():
        return ()
    data = read_bytes(path)
    try:
        raw = raw_object(data, "farend_shelf", "shelf")
        return tuple(parts_from(raw.get("parts", [])).values())
    except FileError as error:
        raise FileError(sentence(path.name, str(error))) from None


def save_shelf(path: str | Path, parts: Iterable[Part]) -> None:
    """Write the user's own parts. A damaged shelf is not written over: FileError."""
    path, parts = Path(path), tuple(parts)
    load_shelf(path)
    if len(parts) > MOST_PARTS:
        raise FileError(f"{path.name}: there are {len(parts)} parts, allowed are at most {MOST_PARTS}.")
    for part in parts:
        words = fault_of_symbol(part.symbol) if part.symbol else None
        if words:
            raise FileError(f"{path.name}: Part {part.name}: {words}")
    bodies = (part_body(f"P{number}", part) for number, part in enumerate(parts, 1))
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise FileError(f"{path.name} cannot be saved: {error.strerror or error}.") from None
    write_bytes(path, f'{{\n"farend_shelf": {CURRENT},\n"parts": {listed(bodies)}\n}}\n'.encode())


def encode_part(part: Part) -> bytes:
    """A part as bytes, for drag and drop."""
    return f'{{"farend_part": {CURRENT}, "part": {line(part_body("", part))}}}'.encode()


def decode_part(data: bytes) -> Part:
    """The part in dragged bytes, checked as a file is; raises FileError."""
    try:
        return part_from(raw_object(data, "farend_part", "part").get("part"), "dropped")
    except FileError as error:
        raise FileError(sentence("The part", str(error))) from None


def encode_clip(clip: Clip) -> bytes:
    """A clip as bytes, for the clipboard."""
    elements = listed(element_body(i, e) for i, e in clip.elements.items())
    parts = listed(part_body(i, p) for i, p in clip.parts.items())
    head = f'"farend_clip": {CURRENT},\n"x": {line(clip.x)},\n"y": {line(clip.y)}'
    if clip.own:
        said = {case: {i: body(one) for i, one in own.items()} for case, own in clip.own.items()}
        head += f',\n"own": {line(said)}'
    carried = f',\n"profiles": {profiles_text(clip.profiles)}' if clip.profiles else ""
    return f'{{\n{head},\n"elements": {elements},\n"parts": {parts}{carried}\n}}\n'.encode()


def decode_clip(data: bytes) -> Clip:
    """The clip in bytes from the clipboard, checked as a file is; raises FileError."""
    try:
        raw = raw_object(data, "farend_clip", "clip")
        parts = parts_from(raw.get("parts", []))
        profiles = profiles_from(raw)
        elements = elements_from(raw.get("elements", []), parts, profiles)
        said = raw.get("own", {})
        own = {case: own_from(one, case) for case, one in said.items()} if isinstance(said, dict) else {}
        x, y = _spot(raw, "x"), _spot(raw, "y")
        return Clip(x=x, y=y, elements=elements, parts=parts, own=own, profiles=profiles)
    except FileError as error:
        raise FileError(sentence("The clip", str(error))) from None


def _spot(raw: dict[str, Any], key: str) -> float:
    value = raw.get(key)
    if isinstance(value, bool) or not isinstance(value, int | float) or not abs(value) <= 1e6:
        raise FileError(f"{key} is {str(value)[:40]}, allowed is a number from −1000000 to 1000000.")
    return float(value)
