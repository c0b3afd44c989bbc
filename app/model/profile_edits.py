"""Edits of the profiles of a drawing, and of what follows them."""

from collections.abc import Mapping
from typing import Any

from msgspec.structs import replace

from app.model.changes import change, refuse_if
from app.model.checks import EditRefused, called, shown
from app.model.drawing import Drawing
from app.model.following import (
    fault_of_name,
    fault_of_profile,
    fault_of_profiles,
    fault_of_volts,
    fault_of_year,
    followers,
)
from app.model.kinds import Supply
from app.model.profiles import Profile


def put_profile(drawing: Drawing, name: str, profile: Profile) -> Drawing:
    """Add a profile, or put it in place of the one of that name; whatever follows it goes on doing so."""
    refuse_if(fault_of_profile(name, profile))
    _refuse_for_supplies(drawing, name, profile)
    profiles = {**drawing.profiles, name: profile}
    refuse_if(fault_of_profiles(profiles) if len(profiles) > len(drawing.profiles) else None)
    return replace(drawing, profiles=profiles)


def _refuse_for_supplies(drawing: Drawing, name: str, profile: Profile) -> None:
    for id in followers(drawing, name):
        one = drawing.elements[id]
        words = fault_of_volts(profile) if isinstance(one, Supply) else None
        refuse_if(f"{called(id, one)} follows profile {shown(name)}, which {words}" if words else None)


def rename_profile(drawing: Drawing, name: str, to: str) -> Drawing:
    """Give a profile another name; whatever follows it follows it under that name. Its place stays."""
    _profile(drawing, name)
    to = to.strip()
    refuse_if(fault_of_name(to))
    if to == name:
        return drawing
    if to in drawing.profiles:
        raise EditRefused(f"Profile {shown(to)} exists already, allowed is a name of its own.")
    profiles = {to if n == name else n: p for n, p in drawing.profiles.items()}
    return _turned(replace(drawing, profiles=profiles), name, to)


def remove_profile(drawing: Drawing, name: str) -> Drawing:
    """Take a profile away. One that is in use is refused, as what follows it would change unseen."""
    _profile(drawing, name)
    users = [called(id, drawing.elements[id]) for id in followers(drawing, name)]
    if name in (drawing.year.load_profile, drawing.year.generation_profile):
        users.append("the drawing itself")
    if users:
        more = f" and {len(users) - 3} more" if len(users) > 3 else ""
        raise EditRefused(
            f"Profile {shown(name)} is followed by {', '.join(users[:3])}{more}; "
            "allowed is to remove one that nothing follows."
        )
    return replace(drawing, profiles={n: p for n, p in drawing.profiles.items() if n != name})


def follow(drawing: Drawing, ids: tuple[str, ...], name: str) -> Drawing:
    """Let elements follow a profile; blank: the drawing's own choice."""
    for id in ids:
        drawing = change(drawing, id, profile=name)
    return drawing


def set_year(drawing: Drawing, **fields: Any) -> Drawing:
    """Set what the drawing says of its year: default profiles, the price of losses."""
    for name in fields:
        if name not in drawing.year.__struct_fields__ or name == "kept":
            raise EditRefused(f"Year: there is no field {shown(name)}.")
    price = fields.get("price_per_kwh")
    if isinstance(price, int) and not isinstance(price, bool):
        fields["price_per_kwh"] = float(price)
    made = replace(drawing.year, **fields)
    refuse_if(fault_of_year(drawing.profiles, made))
    return replace(drawing, year=made)


def carry_profiles(drawing: Drawing, brought: Mapping[str, Profile]) -> tuple[Drawing, dict[str, str]]:
    """The drawing with these profiles in it, and the name that each has there. One of the same name with
    other values stays as it is; the one that comes gets a number."""
    names: dict[str, str] = {}
    for name, profile in brought.items():
        fresh, number = name, 2
        while fresh in drawing.profiles and drawing.profiles[fresh] != profile:
            fresh, number = f"{name} {number}", number + 1
        names[name] = fresh
        if fresh not in drawing.profiles:
            drawing = put_profile(drawing, fresh, profile)
    return drawing, names


def _turned(drawing: Drawing, name: str, to: str) -> Drawing:
    """All that followed one name follows another."""
    elements = {
        i: replace(e, profile=to) if getattr(e, "profile", "") == name else e
        for i, e in drawing.elements.items()
    }
    year = drawing.year
    fields = ("load_profile", "generation_profile")
    moved = {field: to for field in fields if getattr(year, field) == name}
    return replace(drawing, elements=elements, year=replace(year, **moved) if moved else year)


def _profile(drawing: Drawing, name: str) -> Profile:
    found = drawing.profiles.get(name)
    if found is None:
        raise EditRefused(f"There is no profile {shown(name)} in this drawing.")
    return found
