"""Copy and paste: a clip is a small drawing of its own, with the parts it needs."""

from collections.abc import Iterable

from msgspec import Struct
from msgspec import field as held
from msgspec.structs import replace

from app.model.by_case import said_of, taken_over
from app.model.changes import element, ends, put
from app.model.checks import EditRefused
from app.model.drawing import Drawing, Own, Part
from app.model.following import Follower
from app.model.keeping import carried
from app.model.kinds import LETTERS, AnyElement, Attachment, Branch, Element, Joint, Node, kind_of
from app.model.profile_edits import carry_profiles
from app.model.profiles import Profile


class Clip(Struct, frozen=True, kw_only=True):
    """Elements that fit together, and the point, in grid steps, that lands where they are pasted. `own` is
    what the cases, by name, state of them."""

    x: float = 0.0
    y: float = 0.0
    elements: dict[str, AnyElement] = held(default_factory=dict)
    parts: dict[str, Part] = held(default_factory=dict)
    profiles: dict[str, Profile] = held(default_factory=dict)
    own: dict[str, dict[str, Own]] = held(default_factory=dict)


def copy(drawing: Drawing, ids: Iterable[str]) -> Clip:
    """The chosen elements; where a node they stand on is not chosen, a bare joint takes its place."""
    chosen = {i: element(drawing, i) for i in ids}
    if not chosen:
        raise EditRefused("Nothing is chosen, allowed is at least one element.")
    kept: dict[str, AnyElement] = {}
    for id, one in drawing.elements.items():
        if id in chosen:
            for end in ends(one):
                met = drawing.elements[end]
                if end not in chosen and isinstance(met, Node):
                    kept[end] = Joint(x=met.x, y=met.y)
            kept[id] = one
    nodes = [e for e in kept.values() if isinstance(e, Node)]
    parts = {i: drawing.parts[i] for i in sorted({e.part for e in kept.values() if e.part})}
    x, y = _middle(n.x for n in nodes), _middle(n.y for n in nodes)
    named = {getattr(e, "profile", "") for e in kept.values()}
    profiles = {name: one for name, one in drawing.profiles.items() if name in named}
    said = said_of(drawing.cases, kept)
    return Clip(x=x, y=y, elements=kept, parts=parts, own=said, profiles=profiles)


def _middle(along: Iterable[float]) -> float:
    spots = list(along)
    return float(round((min(spots) + max(spots)) / 2))


def paste(drawing: Drawing, clip: Clip, x: float, y: float, node: str | None = None) -> Drawing:
    """Put a clip on the paper, its middle at x, y. Attachments copied without their node hang on `node`
    where that is given."""
    names = {}
    for id, part in clip.parts.items():
        drawing, names[id] = carried(drawing, part)
    drawing, profiles = carry_profiles(drawing, clip.profiles)
    fresh, bound = _fresh_ids(drawing, clip), {}
    if node is not None and _hangs_on_one_joint(clip):
        bound = {end: node for one in clip.elements.values() for end in ends(one)}
    placed: dict[str, Element] = {}
    for id, one in clip.elements.items():
        if id not in bound:
            made = _placed(one, {**fresh, **bound}, names, x - clip.x, y - clip.y)
            if isinstance(made, Follower):
                made = replace(made, profile=profiles.get(made.profile, made.profile))
            placed[fresh[id]] = made
    return taken_over(put(drawing, placed), clip.own, fresh)


def _hangs_on_one_joint(clip: Clip) -> bool:
    nodes = [e for e in clip.elements.values() if isinstance(e, Node)]
    rest = [e for e in clip.elements.values() if not isinstance(e, Node)]
    return len(nodes) == 1 and isinstance(nodes[0], Joint) and all(isinstance(e, Attachment) for e in rest)


def _fresh_ids(drawing: Drawing, clip: Clip) -> dict[str, str]:
    """A free id for every element, in one pass over the numbers."""
    fresh: dict[str, str] = {}
    last: dict[str, int] = {}
    for id, one in clip.elements.items():
        letter = LETTERS[kind_of(one)]
        number = last.get(letter, 0) + 1
        while f"{letter}{number}" in drawing.elements:
            number += 1
        last[letter], fresh[id] = number, f"{letter}{number}"
    return fresh


def _placed(one: AnyElement, fresh: dict[str, str], names: dict[str, str], dx: float, dy: float) -> Element:
    part = names.get(one.part, "")
    if isinstance(one, Node):
        return replace(one, x=one.x + dx, y=one.y + dy, part=part)
    if isinstance(one, Branch):
        via = tuple((x + dx, y + dy) for x, y in one.via)
        return replace(one, start=fresh[one.start], end=fresh[one.end], via=via, part=part)
    return replace(one, node=fresh[one.node], part=part)
