"""What an SVG from outside must not hold before it may be a symbol. Each refusal is one sentence."""

import math
import re
from collections import Counter
from dataclasses import dataclass, field

LARGEST_BYTES = 256_000
MOST_ELEMENTS = 5_000
MOST_DRAWN = 20_000  # elements after every <use> is written out
DEEPEST = 60
LARGEST_SIDE = 100_000.0
LONGEST_ASPECT = 20.0
SVG = "http://www.w3.org/2000/svg"
DRAWABLE = frozenset(
    "svg g defs symbol use path rect circle ellipse line polyline polygon text tspan title desc metadata "
    "linearGradient radialGradient stop clipPath mask pattern marker style switch".split()
)
_OUTSIDE_URL = re.compile(r"url\(\s*['\"]?\s*(?!#)", re.IGNORECASE)
_INNER_URL = re.compile(r"url\(\s*['\"]?\s*#([^'\")\s]+)")
_LENGTH = re.compile(r"^\s*([0-9.eE+-]+)\s*(px|pt|mm|cm|in)?\s*$")
_PIXELS = {None: 1.0, "px": 1.0, "pt": 4 / 3, "mm": 96 / 25.4, "cm": 96 / 2.54, "in": 96.0}


class SymbolRefused(ValueError):
    """Why a picture cannot be a symbol, as one sentence."""


@dataclass
class Contents:
    """What a checked SVG holds: its viewBox, its ids in order, and what refers to what."""

    view: tuple[float, float, float, float] = (0.0, 0.0, 0.0, 0.0)
    ids: list[str] = field(default_factory=list)
    links: set[str] = field(default_factory=set)
    within: dict[str, Counter[str]] = field(default_factory=dict)  # id -> ids used inside it
    weight: Counter[str] = field(default_factory=Counter)  # id -> elements inside it


def check(data: bytes) -> Contents:
    """The contents of an SVG that may be a symbol; raises SymbolRefused."""
    if len(data) > LARGEST_BYTES:
        most = LARGEST_BYTES // 1000
        raise SymbolRefused(f"The picture has more than {most} kB, which is the most a symbol may have.")
    try:
        data.decode("utf-8")
    except UnicodeDecodeError:
        raise SymbolRefused("The picture is not UTF-8 text; save it as a plain SVG.") from None
    reader = _Reader()
    reader.read(data)
    found = reader.contents
    missing = sorted(found.links - set(found.ids))
    if missing:
        raise SymbolRefused(f"The picture refers to #{missing[0]}, which it does not hold.")
    _weigh(found)
    return found


class _Reader:
    """Walks the picture once and stops at the first thing that is not allowed."""

    def __init__(self) -> None:
        self.contents = Contents()
        self._open: list[tuple[str, str]] = []  # tag, id
        self._count = 0

    def read(self, data: bytes) -> None:
        from xml.parsers import expat  # most drawings hold no picture

        parser = expat.ParserCreate("utf-8", " ")
        parser.StartDoctypeDeclHandler = self._doctype
        parser.EntityDeclHandler = self._doctype
        parser.ProcessingInstructionHandler = self._instruction
        parser.StartElementHandler = self._start
        parser.EndElementHandler = self._end
        parser.CharacterDataHandler = self._text
        parser.buffer_text = True
        try:
            parser.Parse(data, True)
        except expat.ExpatError as error:
            raise SymbolRefused(
                f"The picture is not well-formed SVG: line {error.lineno}, {expat.ErrorString(error.code)}."
            ) from None

    def _doctype(self, *_: object) -> None:
        raise SymbolRefused("The picture declares a DOCTYPE or entities; a symbol may not.")

    def _instruction(self, target: str, _: str) -> None:
        raise SymbolRefused(f"The picture holds the processing instruction {target[:40]}; a symbol may not.")

    def _start(self, name: str, attributes: dict[str, str]) -> None:
        space, _, tag = name.rpartition(" ")
        self._count += 1
        if self._count > MOST_ELEMENTS:
            raise SymbolRefused(f"The picture has more than {MOST_ELEMENTS} elements.")
        if len(self._open) >= DEEPEST:
            raise SymbolRefused(f"The picture is nested more than {DEEPEST} deep.")
        if not self._open:
            self._root(space, tag, attributes)
        elif space in ("", SVG) and tag not in DRAWABLE:
            raise SymbolRefused(
                f"The picture holds <{tag[:40]}>; a symbol may hold plain shapes and text only."
            )
        id = attributes.get("id", "")
        self._open.append((tag if space in ("", SVG) else "", id))
        self._note(id)
        for key, value in attributes.items():
            self._attribute(tag, key.rpartition(" ")[2], value)

    def _end(self, _: str) -> None:
        self._open.pop()

    def _text(self, text: str) -> None:
        if self._open and self._open[-1][0] == "style":
            self._style(text)

    def _root(self, space: str, tag: str, attributes: dict[str, str]) -> None:
        if tag != "svg" or space not in ("", SVG):
            raise SymbolRefused(f"The file is no SVG picture: it starts with <{tag[:40]}>.")
        self.contents.view = _view(attributes)

    def _note(self, id: str) -> None:
        if id:
            self.contents.ids.append(id)
        for outer in self._outer():
            self.contents.weight[outer] += 1

    def _outer(self) -> set[str]:
        """The ids we are inside of; "" is the whole picture."""
        return {id for _, id in self._open} | {""}

    def _attribute(self, tag: str, key: str, value: str) -> None:
        if key.lower().startswith("on"):
            raise SymbolRefused(f"The picture has the event handler {key[:40]}; a symbol may not.")
        if key == "href":
            self._link(tag, value)
        elif key == "base":
            raise SymbolRefused("The picture names a base address; a symbol may not refer outside itself.")
        elif key == "style" or "(" in value or "\\" in value:
            self._style(value)
        if key in ("stroke-dasharray", "style"):
            self._dashes(key, value)

    def _link(self, tag: str, value: str) -> None:
        if not value.startswith("#"):
            raise SymbolRefused(
                f"The picture refers outside itself ({value[:60]}); a symbol may refer to its own parts only."
            )
        self.contents.links.add(value[1:])
        if tag == "use":
            for outer in self._outer():
                self.contents.within.setdefault(outer, Counter())[value[1:]] += 1

    def _style(self, text: str) -> None:
        if "\\" in text or "@import" in text.lower() or _OUTSIDE_URL.search(text):
            raise SymbolRefused("The picture's style refers outside itself; a symbol may not.")
        self.contents.links.update(_INNER_URL.findall(text))

    def _dashes(self, key: str, value: str) -> None:
        given = value if key != "style" else "".join(re.findall(r"stroke-dasharray\s*:([^;]*)", value))
        dashes = [abs(float(d)) for d in re.findall(r"[0-9.]+(?:[eE][+-]?\d+)?", given) if _number(d)]
        side = max(self.contents.view[2:])
        if dashes and sum(dashes) < side / 2000:
            raise SymbolRefused("The picture has a dash pattern too fine to be drawn.")


def _view(attributes: dict[str, str]) -> tuple[float, float, float, float]:
    given = attributes.get("viewBox")
    if given is not None:
        numbers = [float(n) for n in re.split(r"[\s,]+", given.strip()) if _number(n)]
        if len(numbers) != 4:
            raise SymbolRefused(f"The picture's viewBox is {given[:40]!r}; it needs four numbers.")
    else:
        sides = [_pixels(attributes.get(side, "")) for side in ("width", "height")]
        if None in sides:
            raise SymbolRefused("The picture states no size: it needs a viewBox, or width and height.")
        numbers = [0.0, 0.0, *(s for s in sides if s is not None)]
    x, y, width, height = numbers
    if not all(math.isfinite(n) for n in numbers) or not 0 < min(width, height):
        raise SymbolRefused("The picture's viewBox must have a width and a height above 0.")
    if max(width, height, abs(x), abs(y)) > LARGEST_SIDE:
        raise SymbolRefused(f"The picture's viewBox is larger than {LARGEST_SIDE:.0f} units.")
    if max(width, height) > LONGEST_ASPECT * min(width, height):
        raise SymbolRefused(f"The picture is more than {LONGEST_ASPECT:.0f} times as long as it is wide.")
    return x, y, width, height


def _number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _pixels(text: str) -> float | None:
    found = _LENGTH.match(text)
    return float(found[1]) * _PIXELS[found[2]] if found and _number(found[1]) else None


def _weigh(contents: Contents) -> None:
    """Writes out every <use> in thought: refuses circles and pictures that would grow too large."""
    known: dict[str, tuple[int, int]] = {}  # id -> elements and depth once written out

    def weigh(id: str, path: tuple[str, ...]) -> tuple[int, int]:
        if id in path:
            raise SymbolRefused(f"The picture's part #{id} uses itself.")
        if id not in known:
            if len(path) > DEEPEST:
                raise SymbolRefused(f"The picture's parts use each other more than {DEEPEST} deep.")
            uses = [(n, weigh(used, (*path, id))) for used, n in contents.within.get(id, Counter()).items()]
            drawn = 1 + contents.weight[id] + sum(n * inner for n, (inner, _) in uses)
            known[id] = drawn, 1 + max((deep for _, (_, deep) in uses), default=0)
        return known[id]

    drawn, deep = weigh("", ())
    if drawn > MOST_DRAWN:
        raise SymbolRefused(f"The picture would draw more than {MOST_DRAWN} elements.")
    if deep > DEEPEST:
        raise SymbolRefused(f"The picture's parts use each other more than {DEEPEST} deep.")
