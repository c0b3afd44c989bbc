"""What stands in for data that only phases and neutral need, and on what basis; listed only with these."""

from app.model import taps
from app.model.conductors import has_neutral, is_hung, wires_of
from app.model.fault_data import LOW_V, NO_SOURCE, Put, fault_value
from app.model.kinds import Line, Transformer


def neutral_of(line: Line, nominal_v: float, single_phase: bool) -> str:
    """Its neutral: `carried`, `earthed along` or `none`, where the drawing says `usual` by its level; above
    1 kV it is earthed along where the spacing has one, and a wire that hangs alone returns through earth."""
    if line.neutral != "usual":
        return line.neutral
    low = single_phase or nominal_v <= LOW_V
    if not is_hung(line):
        return "carried" if low else "none"
    if wires_of(line) > 1 and not (single_phase or has_neutral(line)):
        return "none"
    return "carried" if low and wires_of(line) > 1 else "earthed along"


def neutral_value(line: Line, field: str) -> float | Put:
    """The given resistance or reactance of the neutral, or what is put in its place."""
    given = getattr(line, field)
    if given is not None:
        return float(given)
    if field == "neutral_reactance_ohm_per_km":
        return Put(line.reactance_ohm_per_km, "as a phase conductor")
    if line.return_resistance_ohm_per_km is not None:
        return Put(line.return_resistance_ohm_per_km, "as its return conductor")
    return Put(line.resistance_ohm_per_km, "a neutral as large as a phase")


def is_low(nominal_v: float) -> bool:
    """True up to 1 kV, where a neutral is usually carried."""
    return nominal_v <= LOW_V


CORE_Z0 = 10.0  # Z0 / Z1 of three limbs without a winding that lets the zero sequence by


def is_star_star(t: Transformer) -> bool:
    """Both windings in star, so that a zero sequence may have nothing but the core to go through."""
    group = taps.group(t.vector_group)
    return group is not None and t.build == "as its group" and group[0][0] + group[1][0].upper() == "YY"


def zero_value(t: Transformer, passes: bool) -> float | Put:
    """Z0 over Z1 of the windings; where they let no zero sequence pass, of the core."""
    if t.z0_ratio is None and not passes:
        return Put(
            CORE_Z0, f"a core of three limbs between stars that let no zero sequence pass; {NO_SOURCE}"
        )
    return fault_value(t, "z0_ratio", t.v2_v)
