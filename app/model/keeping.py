"""Parts of the user's own: an element kept with its values and symbol, carried by the drawings it is in."""

from msgspec.structs import replace

from app.model.changes import element, refuse_if, with_elements
from app.model.checks import EditRefused, fault, fault_of_fields, fault_of_symbol, shown
from app.model.drawing import Drawing, Part, Symbol
from app.model.following import Follower
from app.model.kinds import AnyElement, Attachment, Branch, Node


def loosened(one: AnyElement) -> AnyElement:
    """An element as a part holds it: its values, without a place, a name or ends."""
    bare = replace(one, name="", note="", part="", assumed=(), kept={})
    if isinstance(bare, Node):
        return replace(bare, x=0.0, y=0.0, nominal_v=None)
    if isinstance(bare, Branch):
        return replace(bare, start="", end="", via=())
    if isinstance(bare, Follower):
        bare = replace(bare, profile="")
    return replace(bare, node="") if isinstance(bare, Attachment) else bare


def keep_part(drawing: Drawing, id: str, name: str) -> Drawing:
    """Keep an element as a part of that name, and say that it is made from it. A part of the same name
    and kind takes the new values and keeps its symbol."""
    one = element(drawing, id)
    name = name.strip()
    if not name:
        raise EditRefused("Part: the name is blank, allowed is a name.")
    was = next((i for i, p in drawing.parts.items() if p.name == name), None)
    if was is not None and type(drawing.parts[was].element) is not type(one):
        raise EditRefused(
            f"Part: {shown(name)} is the name of a part of another kind, allowed is another name."
        )
    own = drawing.parts.get(was or one.part)
    made = Part(name=name, element=loosened(one), symbol=own.symbol if own else None)
    words = fault_of_fields(made)
    refuse_if(f"Part: {words}" if words else None)
    part_id = was or fresh_part_id(drawing)
    drawing = replace(drawing, parts={**drawing.parts, part_id: made})
    return with_elements(drawing, {**drawing.elements, id: replace(one, part=part_id)})


def set_symbol(drawing: Drawing, part_id: str, symbol: Symbol | None) -> Drawing:
    """Give a part a picture of the user's own, or take it away again."""
    part = _part(drawing, part_id)
    words = fault_of_symbol(symbol) if symbol is not None else None
    refuse_if(f"Part {part.name}, {part_id}: {words}" if words else None)
    return replace(drawing, parts={**drawing.parts, part_id: replace(part, symbol=symbol)})


def rename_part(drawing: Drawing, part_id: str, name: str) -> Drawing:
    """Give a part another name; elements made from it stay made from it."""
    made = replace(_part(drawing, part_id), name=name.strip())
    words = fault_of_fields(made) if made.name else "Part is blank, allowed is a name."
    refuse_if(f"Part {part_id}: {words}" if words else None)
    return replace(drawing, parts={**drawing.parts, part_id: made})


def forget_part(drawing: Drawing, part_id: str) -> Drawing:
    """Take a part out of the drawing; elements made from it stay, with their values."""
    _part(drawing, part_id)
    made = {i: replace(e, part="") for i, e in drawing.elements.items() if e.part == part_id}
    parts = {i: p for i, p in drawing.parts.items() if i != part_id}
    return replace(drawing, parts=parts, elements={**drawing.elements, **made})


def carried(drawing: Drawing, part: Part) -> tuple[Drawing, str]:
    """The drawing with this part in it, and the part's id there; nothing new where it has it already."""
    same = next((i for i, p in drawing.parts.items() if p == part), None)
    if same is not None:
        return drawing, same
    words = fault(part.name, part.element) or fault_of_fields(part)
    words = words or (fault_of_symbol(part.symbol) if part.symbol else None)
    refuse_if(f"Part {part.name}: {words}" if words else None)
    id = fresh_part_id(drawing)
    return replace(drawing, parts={**drawing.parts, id: part}), id


def fresh_part_id(drawing: Drawing) -> str:
    """The first free part id, such as P2."""
    number = 1
    while f"P{number}" in drawing.parts:
        number += 1
    return f"P{number}"


def _part(drawing: Drawing, part_id: str) -> Part:
    part = drawing.parts.get(part_id)
    if part is None:
        raise EditRefused(f"There is no part {shown(part_id)} in this drawing.")
    return part
