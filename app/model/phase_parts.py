"""Parts of single-phase and four-wire layouts, behind the plain part of their kind; their figures are usual
ones, `common practice, no source` where nothing else is said, and count as assumed until confirmed."""

from functools import cache
from typing import Any

from msgspec.structs import replace

from app.model.assumed import figures_of
from app.model.drawing import Part
from app.model.kinds import AnyElement, Cable, Load, Supply, Transformer, kind_of

Fields = dict[str, Any]
ENDS: Fields = {"start": "", "end": ""}
# 20 °C figures. AWG: ohm per kft at 75 °C (4/0 0.100, 2/0 0.16) brought back to 20 °C. Metric: IEC 60228.
AWG_4_0: Fields = {
    "type": "4/0 AWG Al",
    "area_mm2": 107.2,
    "resistance_ohm_per_km": 0.269,
    "reactance_ohm_per_km": 0.135,
}
AWG_2_0: Fields = {
    "type": "2/0 AWG Al",
    "area_mm2": 67.4,
    "resistance_ohm_per_km": 0.43,
    "reactance_ohm_per_km": 0.141,
}
AL_95: Fields = {
    "type": "4×95 Al",
    "area_mm2": 95.0,
    "resistance_ohm_per_km": 0.32,
    "reactance_ohm_per_km": 0.075,
}
AL_35: Fields = {
    "type": "2×35 Al",
    "area_mm2": 35.0,
    "resistance_ohm_per_km": 0.868,
    "reactance_ohm_per_km": 0.08,
}
POLE: Fields = {
    "v1_v": 7200.0,
    "v2_v": 240.0,
    "vector_group": "Ii0",
    "build": "centre-tapped",
    "uk_percent": 2.0,
}
PAD: Fields = {"v1_v": 12470.0, "v2_v": 208.0, "vector_group": "Dyn1"}


@cache
def phase_parts(american: bool) -> tuple[Part, ...]:
    """What a kind offers besides its plain part, by the habit of the drawing's frequency."""
    made = _american() if american else _metric()
    return tuple(
        Part(name=name, element=replace(element, assumed=_unsure(element))) for name, element in made
    )


def parts_of(kind: str, american: bool) -> tuple[Part, ...]:
    """Those of one kind."""
    return tuple(part for part in phase_parts(american) if kind_of(part.element) == kind)


def _unsure(element: AnyElement) -> tuple[str, ...]:
    return tuple(name for name in figures_of(type(element)) if getattr(element, name) is not None)


def _with_neutral(cable: Cable) -> Cable:
    """A neutral as large as a phase, in so many words."""
    return replace(
        cable,
        neutral_resistance_ohm_per_km=cable.resistance_ohm_per_km,
        neutral_reactance_ohm_per_km=cable.reactance_ohm_per_km,
    )


def _american() -> tuple[tuple[str, AnyElement], ...]:
    feet = 0.3048
    return (
        ("120/240 V, split-phase", Supply(node="", nominal_v=240.0, wires="split-phase", dy=-3.0)),
        ("12.47 kV, three-phase", Supply(node="", nominal_v=12470.0, dy=-3.0)),
        ("7.2 kV, one phase and neutral", Supply(node="", nominal_v=7200.0, wires="two-wire", dy=-3.0)),
        ("4/0 Al, four-wire, neutral as large", _with_neutral(Cable(**ENDS, **AWG_4_0, length_m=450 * feet))),
        (
            "2/0 Al, lateral on A: phase and neutral",
            _with_neutral(Cable(**ENDS, **AWG_2_0, phases="A", length_m=200 * feet)),
        ),
        ("25 kVA 7200 to 120/240 V, centre-tapped", Transformer(**ENDS, **POLE, rating_kva=25.0)),
        ("50 kVA 7200 to 120/240 V, centre-tapped", Transformer(**ENDS, **POLE, rating_kva=50.0)),
        ("75 kVA 12470 to 208Y/120 V", Transformer(**ENDS, **PAD, rating_kva=75.0, uk_percent=3.0)),
        ("150 kVA 12470 to 208Y/120 V", Transformer(**ENDS, **PAD, rating_kva=150.0, uk_percent=3.5)),
        (
            "2 × 25 kVA 12470 to 240 V, open delta",
            Transformer(
                **ENDS, v1_v=12470.0, v2_v=240.0, vector_group="Dd0", build="open delta", rating_kva=50.0,
                uk_percent=2.0,
            ),
        ),
        ("On A: phase to neutral", Load(node="", phases="A", demand_kva=2.0)),
        ("On AB: between phases, or 240 V", Load(node="", phases="AB", demand_kva=5.0)),
    )  # fmt: skip


def _metric() -> tuple[tuple[str, AnyElement], ...]:
    return (
        ("230 V, two-wire", Supply(node="", nominal_v=230.0, wires="two-wire", dy=-3.0)),
        ("11 kV, three-phase", Supply(node="", nominal_v=11000.0, dy=-3.0)),
        ("4×95 Al, four-wire, neutral as large", _with_neutral(Cable(**ENDS, **AL_95))),
        (
            "2×35 Al, service on A: phase and neutral",
            _with_neutral(Cable(**ENDS, **AL_35, phases="A", length_m=30.0)),
        ),
        (
            "25 kVA 11/0.24 kV, single-phase, between A and B",
            Transformer(**ENDS, v1_v=11000.0, v2_v=240.0, vector_group="Ii0", phases="AB", rating_kva=25.0),
        ),
        ("On A: phase to neutral", Load(node="", phases="A", demand_kva=3.0)),
        ("On AB: between phases", Load(node="", phases="AB", demand_kva=5.0)),
    )
