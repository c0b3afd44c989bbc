"""Moving elements to other phases, and which fields have a meaning as an element stands."""

from collections.abc import Iterable

from app.model import taps
from app.model.changes import change, element
from app.model.checks import EditRefused, called
from app.model.drawing import Drawing
from app.model.fields import fields_of
from app.model.kinds import Capacitor, Element, Generator, Line, Load, Motor, Transformer
from app.model.levels import is_single
from app.model.phasing import CHOICES

SHARES = ("share_a_percent", "share_b_percent")
STARS = {"earth_1_ohm": 0, "earth_2_ohm": 1}
NEUTRAL_DATA = ("neutral_resistance_ohm_per_km", "neutral_reactance_ohm_per_km")
CHANGER = ("hold_percent", "bandwidth_percent", "drop_r_ohm", "drop_x_ohm", "measures")
LIMITED = ("limited_current", "limited_power_factor")
REACH = ("q_min_kvar", "q_max_kvar")
GROUPED = frozenset(
    ("phases", "neutral", "connection", "build", "wires", "earth_ohm", "measures", *SHARES, *NEUTRAL_DATA)
)  # what only layouts need whose phases are not alike


def has_phases(one: Element) -> bool:
    """Whether the phases of an element can be chosen: not those of a three-phase transformer."""
    return "phases" in one.__struct_fields__ and matters(one, "phases")


def matters(one: Element, field: str) -> bool:
    """Whether a field does anything, as the element stands."""
    if isinstance(one, Load) and field in SHARES:
        return one.phases == "all"
    if isinstance(one, Load | Capacitor) and field == "connection":
        return one.phases == "all"
    if isinstance(one, Line) and field in NEUTRAL_DATA:
        return one.neutral in ("usual", "carried")
    if isinstance(one, Transformer):
        if field == "phases":
            return is_single(one) or one.build != "as its group"
        if field in STARS:
            return _has_star(one, STARS[field])
        if field in CHANGER:
            return one.regulates != "no"
    if isinstance(one, Motor) and field in LIMITED:
        return one.starter != "direct"
    if isinstance(one, Generator) and field in REACH:
        return one.hold_percent is not None
    return True


def _has_star(unit: Transformer, winding: int) -> bool:
    """Whether a winding has a point that can be earthed."""
    group = taps.group(unit.vector_group)
    if unit.build == "centre-tapped" or group is None:
        return True
    return group[:2][winding][0].upper() in "YZI"


def set_phases(drawing: Drawing, ids: Iterable[str], phases: str) -> Drawing:
    """Put elements on other phases, those among them that have a choice. A load's shares go, as they are
    those of three phases."""
    if phases not in CHOICES:
        raise EditRefused(f"Phases is {phases[:20]}, allowed is one of {', '.join(CHOICES)}.")
    ids = tuple(ids)
    chosen = [i for i in ids if has_phases(element(drawing, i))]
    if ids and not chosen:
        raise EditRefused(f"{called(ids[0], element(drawing, ids[0]))}: there are no phases to choose.")
    for id in chosen:
        one = drawing.elements[id]
        gone = dict.fromkeys(SHARES) if isinstance(one, Load) and phases != "all" else {}
        drawing = change(drawing, id, phases=phases, **gone)
    return drawing


def turned(phases: str, step: int) -> str:
    """The next choice, or the one before: all, A, B, C, AB, BC, CA and round again."""
    return CHOICES[(CHOICES.index(phases) + step) % len(CHOICES)]


def states_phases(one: Element) -> bool:
    """Whether an element says anything of phases or neutral that is not the usual."""
    fields = fields_of(type(one))
    return any(name in GROUPED and getattr(one, name) != about.default for name, about in fields.items())
