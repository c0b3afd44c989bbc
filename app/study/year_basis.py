"""What a year stands on, in words: its points, its profiles and who follows them, what stays as it is."""

from app.model.drawing import Drawing
from app.model.figures import plain, stated
from app.model.following import followed, in_use
from app.model.kinds import Generator, Load, Motor, Supply
from app.model.profiles import Profile
from app.study.words import list_of
from app.study.year_points import Points


def basis_of(drawing: Drawing, points: Points, stepping: bool) -> tuple[str, ...]:
    """Sentences that say which settings the year uses.

    drawing : the drawing
    points : of its year
    stepping : whether something steps by itself

    Returns : (sentence,) words
    """
    said = [_points(points)]
    if not in_use(drawing):
        said.append("Nothing follows a profile: all hours are alike, as the drawing states them.")
    said += [_profile(drawing, name, one, points) for name, one in in_use(drawing).items()]
    even = _ids(drawing, "")
    if even and in_use(drawing):
        said.append(f"Constant at 100 % of what the drawing states: {list_of(drawing, even)}.")
    if stepping:
        said.append(
            "Tap changers, regulators and generators that hold volts come to rest in every point anew, "
            "from their position as drawn. A generator whose profile is at 0 % is off and holds no volts; "
            "one that is drawn with no output is a condenser, and does."
        )
    return tuple(said)


def _points(points: Points) -> str:
    lasts = {round(float(h), 6) for h in points.hours}
    each = f" of {stated(lasts.pop(), 'h')}" if len(lasts) == 1 else ", not all as long"
    count = f"{plain(points.count, 0)} point{'' if points.count == 1 else 's'}{each}"
    return (
        f"{count} from 1 January 00:00, {plain(points.year_h, 0)} h in all. No loading case is used: loads, "
        "motors and generators run at what the drawing states times their profile, supplies hold what it "
        "states times theirs."
    )


def _profile(drawing: Drawing, name: str, profile: Profile, points: Points) -> str:
    count = len(profile.percent)
    values = f"{plain(count, 0)} value{'' if count == 1 else 's'} of {stated(profile.hours, 'h')}"
    again = "" if profile.span_h >= points.year_h - 1e-6 else ", over and over"
    factor = f"load factor {plain(profile.load_factor, 2)}, " if profile.highest else ""
    source = f"; {profile.source}" if profile.source else "; no source is stated"
    who = list_of(drawing, _ids(drawing, name))
    return (
        f"Profile {name}: {values}{again}, {factor}peak {stated(profile.highest, '%')}{source}. "
        f"Followed by {who}."
    )


def _ids(drawing: Drawing, name: str) -> tuple[str, ...]:
    kinds = (Load, Motor, Generator, Supply)
    return tuple(
        i for i, e in drawing.elements.items() if isinstance(e, kinds) and followed(drawing, e) == name
    )
