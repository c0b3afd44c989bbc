"""Overhead lines on the shelf that state what hangs on their poles; where it hangs is invented unless it says
its source, and all of it counts as assumed until somebody confirms it."""

from functools import cache
from typing import Any

from msgspec.structs import replace

from app.model.drawing import Part
from app.model.kinds import OverheadLine
from app.model.spacing import in_metres

ASSUMED = (
    "length_m", "resistance_ohm_per_km", "hung_at_m", "gmr_mm", "diameter_mm",
    "neutral_resistance_ohm_per_km", "neutral_gmr_mm", "neutral_diameter_mm",
)  # fmt: skip
# 6/1 strands: R20 and diameter of ACSR 50/8, EN 50182 (from memory); GMR half the radius, as line tables
# take it for one layer on steel, where it really goes with the current.
ACSR_50 = {
    "type": "ACSR 50/8", "area_mm2": 48.3, "resistance_ohm_per_km": 0.5946, "gmr_mm": 2.4, "diameter_mm": 9.6,
}  # fmt: skip
# Seven strands of 3.10 mm, BS 215-1:1970: R20 and diameter; GMR 0.7256 of the radius, from geometry.
AAC_50 = {
    "type": "AAC 7/3.10", "area_mm2": 52.83, "resistance_ohm_per_km": 0.5419, "gmr_mm": 3.374,
    "diameter_mm": 9.3,
}  # fmt: skip
# 1/0 AWG 6/1: R20 and diameter ASTM B232; GMR 0.00446 ft, Kersting, Distribution System Modeling and
# Analysis, Appendix A (from memory).
ACSR_1_0 = {
    "type": "1/0 AWG ACSR", "area_mm2": 53.5, "resistance_ohm_per_km": 0.536, "gmr_mm": 1.359,
    "diameter_mm": 10.11,
}  # fmt: skip
# 336.4 kcmil 26/7 over 4/0 6/1 as in Kersting, example 4.1: GMR and diameters from its Appendix A (from
# memory); R20 of 4/0 ASTM B232, of 336.4 kcmil its 0.306 ohm/mile at 50 °C brought back to 20 °C.
ACSR_336 = {
    "type": "336.4 kcmil ACSR", "area_mm2": 170.5, "resistance_ohm_per_km": 0.1696, "gmr_mm": 7.437,
    "diameter_mm": 18.31, "neutral_resistance_ohm_per_km": 0.268, "neutral_gmr_mm": 2.481,
    "neutral_diameter_mm": 14.31,
}  # fmt: skip
KERSTING = "-3.5 ft 29 ft; -1 ft 29 ft; 3.5 ft 29 ft; 0.5 ft 25 ft"
METRIC: tuple[tuple[str, dict[str, Any]], ...] = (
    ("11 kV on a cross-arm, ACSR 50/8", {**ACSR_50, "hung_at_m": "-1.1 9; 0 9; 1.1 9", "length_m": 500.0}),
    (
        "400 V open wire, four below each other, AAC",
        {**AAC_50, "hung_at_m": "0 8; 0 7.7; 0 7.4; 0 7.1", "neutral": "carried", "length_m": 200.0},
    ),
    ("19.1 kV single wire, back through earth", {**ACSR_50, "hung_at_m": "0 9", "length_m": 2000.0}),
)
AMERICAN: tuple[tuple[str, dict[str, Any]], ...] = (
    (
        "12.47 kV four-wire, 336.4 kcmil, neutral earthed along",
        {**ACSR_336, "hung_at_m": KERSTING, "neutral": "earthed along", "length_m": 304.8},
    ),
    (
        "7.2 kV one phase and neutral, 1/0 AWG",
        {**ACSR_1_0, "hung_at_m": "0 30 ft; 0 26 ft", "neutral": "earthed along", "length_m": 304.8},
    ),
)


@cache
def spaced_parts(american: bool) -> tuple[Part, ...]:
    """The overhead lines with a spacing, by the habit of the drawing's frequency."""
    made = []
    for name, fields in AMERICAN if american else METRIC:
        line = OverheadLine(start="", end="", **{**fields, "hung_at_m": in_metres(fields["hung_at_m"])})
        unsure = tuple(field for field in ASSUMED if getattr(line, field) not in (None, ""))
        made.append(Part(name=name, element=replace(line, assumed=unsure)))
    return tuple(made)
