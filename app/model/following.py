"""Which profile an element follows, and what may stand against it."""

from collections.abc import Iterator, Mapping

from app.model.checks import called, fault_of_fields, fault_of_writing, quantity, shown
from app.model.drawing import Drawing
from app.model.figures import typed
from app.model.kinds import Element, Generator, Load, Motor, Supply
from app.model.profiles import (
    CONSTANT,
    LEAP_H,
    MOST_PERCENT,
    MOST_PROFILES,
    MOST_VALUES,
    NAME_LONGEST,
    Profile,
    Year,
)

Follower = Load | Motor | Generator | Supply
MOST_VOLTS = 200.0  # % of what a supply is held at


def followed(drawing: Drawing, element: Element) -> str:
    """The profile that an element follows, its own or the drawing's choice; blank: constant at 100 %."""
    own = getattr(element, "profile", "")
    if own:
        return "" if own == CONSTANT else str(own)
    return usual_profile(drawing, element)


def usual_profile(drawing: Drawing, element: Element) -> str:
    """The drawing's choice for an element that names no profile; blank: constant at 100 %."""
    if isinstance(element, Load | Motor):
        return drawing.year.load_profile
    return drawing.year.generation_profile if isinstance(element, Generator) else ""


def followers(drawing: Drawing, name: str) -> tuple[str, ...]:
    """The ids of the elements that name a profile themselves."""
    return tuple(i for i, e in drawing.elements.items() if getattr(e, "profile", "") == name)


def in_use(drawing: Drawing) -> dict[str, Profile]:
    """The profiles that something follows, in their order."""
    names = {followed(drawing, element) for element in drawing.elements.values()}
    return {name: profile for name, profile in drawing.profiles.items() if name in names}


def fault_of_followed(profiles: Mapping[str, Profile], id: str, element: Element) -> str | None:
    """The sentence against the profile an element names, or None."""
    name = getattr(element, "profile", "")
    if not name or name == CONSTANT:
        return None
    profile = profiles.get(name)
    if profile is None:
        return f"{called(id, element)}: Profile is {shown(name)}, allowed is {_known(profiles)}."
    words = fault_of_volts(profile) if isinstance(element, Supply) else None
    return f"{called(id, element)}: Profile {shown(name)} {words}" if words else None


def fault_of_volts(profile: Profile) -> str | None:
    """Why a profile cannot be that of a supply, after its name; or None."""
    for place, value in enumerate(profile.percent, 1):
        if not 0 < value <= MOST_VOLTS:
            return (
                f"has {typed(value)} % as value {place}, "
                f"allowed for the volts of a supply is more than 0 and at most {MOST_VOLTS:g} %."
            )
    return None


def _known(profiles: Mapping[str, Profile]) -> str:
    known = [CONSTANT, *profiles]
    more = f" or {len(known) - 8} more" if len(known) > 8 else ""
    return f"blank, {', '.join(known[:8])}{more}"


def fault_of_name(name: str) -> str | None:
    """The sentence against the name of a profile, or None."""
    if not name.strip() or name != name.strip():
        return f"Profile is {shown(name)}, allowed is a name without spaces around it."
    if name == CONSTANT:
        return f"Profile is {shown(name)}, which stands for 100 % throughout, allowed is another name."
    if len(name) > NAME_LONGEST:
        return f"Profile has a name of {len(name)} characters, allowed are at most {NAME_LONGEST}."
    return fault_of_writing("Profile", name)


def fault_of_profile(name: str, profile: Profile) -> str | None:
    """The sentence against a profile by itself, or None."""
    words = fault_of_name(name)
    if words:
        return words
    words = fault_of_fields(profile) or next(_faults_of_values(profile), None)
    return f"Profile {shown(name)}: {words}" if words else None


def _faults_of_values(profile: Profile) -> Iterator[str]:
    count = len(profile.percent)
    if not 1 <= count <= MOST_VALUES:
        yield f"has {count} values, allowed are 1 to {MOST_VALUES}."
    for place, value in enumerate(profile.percent, 1):
        good = isinstance(value, int | float) and not isinstance(value, bool)
        if not (good and 0 <= value <= MOST_PERCENT):
            yield f"value {place} is {quantity(value, '%')}, allowed is from 0 to {MOST_PERCENT:g} %."
    if profile.span_h > LEAP_H * (1 + 1e-9):
        yield (
            f"{count} values of {typed(profile.hours)} h are {profile.span_h:g} h, "
            f"allowed is at most a year, {LEAP_H:g} h."
        )


def fault_of_profiles(profiles: Mapping[str, Profile]) -> str | None:
    """The sentence against all profiles of a drawing, or None."""
    if len(profiles) > MOST_PROFILES:
        return f"There are {len(profiles)} profiles, allowed are at most {MOST_PROFILES}."
    return next((w for name, one in profiles.items() if (w := fault_of_profile(name, one))), None)


def fault_of_year(profiles: Mapping[str, Profile], year: Year) -> str | None:
    """The sentence against what the drawing says of its year, or None."""
    words = fault_of_fields(year)
    for label, name in (
        ("Loads follow", year.load_profile),
        ("Generators follow", year.generation_profile),
    ):
        if not words and name and name not in profiles:
            known = ", ".join(list(profiles)[:8]) or "blank, since the drawing has no profiles"
            words = f"{label} is {shown(name)}, allowed is {known}."
    return f"Year: {words}" if words else None
