"""How the impedance of a line follows from its spacing, in numbers that can be worked out again by hand."""

import math

from msgspec import Struct

from app.model import assumed
from app.model.conductors import hung, mean_distance_m
from app.model.drawing import Drawing
from app.model.figures import MINUS, plain
from app.model.kinds import OverheadLine
from app.model.levels import TWO_WIRE, nominal_levels
from app.study.overhead import ALONG, CARRIED, kind_of_neutral, loop_of, sequence_of
from solver import carson, line

SOURCE = "Carson 1926, modified; Kersting, Distribution System Modeling and Analysis, section 4.1"
BASIS = "from spacing, Carson 1926, modified"
BACK = {CARRIED: "back by the neutral", ALONG: "back by neutral and earth", "none": "back through earth"}


class Working(Struct, frozen=True):
    """Z = r + jk · Σ ln(over / under) + share, all per kilometre of one run."""

    r: float  # of one phase conductor, hot [ohm/km]
    k: float  # ωμ0/2π [ohm/km]
    over_m: float  # mean distance, or the depth of the return in the earth
    under_mm: tuple[float, ...]  # GMR of the wire out and, where it counts, of the wire back
    share: complex  # what the way back, or a neutral earthed along, adds to it [ohm/km]
    z: complex  # positive sequence, or the loop of a two-wire system [ohm/km]
    zero: complex | None  # zero sequence [ohm/km]; None of a loop
    back: str  # how what does not add up to nothing comes back


def working_of(run: OverheadLine, frequency: float, nominal_v: float, two_wire: bool) -> Working:
    """The impedance of one run taken apart.

    Z1 = R + j ωμ0/2π · ln(GMD / GMR); out and back: R + R' + j ωμ0/2π · [ln(D / GMR) + ln(D / GMR')]; through
    the earth: R + ωμ0/8 + j ωμ0/2π · ln(De / GMR).

    run : states its spacing
    frequency : float [Hz]
    nominal_v : float [V]; nan counts as low
    two_wire : in a two-wire system

    Returns : Working
    Source : see solver.carson
    """
    it, kind = hung(run), kind_of_neutral(run, 0.0 if two_wire else nominal_v)
    theta = assumed.value(run, "temperature_degc")
    r = float(line.resistance(run.resistance_ohm_per_km, line.ALPHA[run.conductor], theta))
    k = 2e3 * math.pi * frequency * carson.MU / (2 * math.pi)
    single = two_wire or it.phases == 1
    through_earth = single and (len(it.letters) == 1 or kind == ALONG)
    z, zero = sequence_of(run, frequency, nominal_v)
    if two_wire:
        z = loop_of(run, frequency)
    if through_earth:
        over, under = carson.earth_depth(frequency, it.soil_ohm_m), it.gmr_m[:1]
    elif single:
        over = abs(complex(it.x_m[0] - it.x_m[-1], it.y_m[0] - it.y_m[-1]))
        under = (it.gmr_m[0], it.gmr_m[-1])
    else:
        over, under = mean_distance_m(run), it.gmr_m[:1]
    share = z - complex(r, k * sum(math.log(over / gmr) for gmr in under))
    back = BACK[kind] if not single or kind != "none" or through_earth else "out and back"
    under_mm = tuple(gmr * 1e3 for gmr in under)
    return Working(r, k, over, under_mm, share, z, None if single else zero, back)


def working_in(drawing: Drawing, run: OverheadLine) -> Working:
    """The impedance of a line taken apart where it stands, at the level and in the system of its start.

    drawing : the drawing
    run : one of its lines; states its spacing

    Returns : Working
    """
    level = nominal_levels(drawing).get(run.start)
    if level is None:
        return working_of(run, drawing.frequency_hz, math.nan, False)
    return working_of(run, drawing.frequency_hz, level.volts, level.wires == TWO_WIRE)


def ohms(z: complex) -> str:
    """An impedance per kilometre as it is written beside its working.

    z : complex [ohm/km]

    Returns : str, such as `0.667 + j0.381 Ω/km`
    """
    return f"{_complex(z)} Ω/km"


def sentences(made: Working) -> tuple[str, ...]:
    """The formulas with their numbers, and their source.

    made : of one line

    Returns : tuple of str, one a line
    """
    logs = " + ".join(f"ln({_length(made.over_m)} / {plain(gmr, 2, 'mm')})" for gmr in made.under_mm)
    logs = f"[{logs}]" if len(made.under_mm) > 1 else logs
    name, zero = ("Z", None) if made.zero is None else ("Z1", f"Z0 = {ohms(made.zero)}, {made.back}")
    share = "" if abs(made.share) < 1e-4 else f" + {_bracketed(made.share)}"
    total = f"{ohms(made.z)}, {made.back}" if zero is None else ohms(made.z)
    first = f"{name} = {plain(made.r, 3)} + j{plain(made.k, 5)}·{logs}{share} = {total}"
    return (first, SOURCE) if zero is None else (first, zero, SOURCE)


def _length(metres: float) -> str:
    return plain(metres, 0 if metres >= 100 else 3, "m")


def _bracketed(share: complex) -> str:
    words = _complex(share, 4)
    return f"({words})" if "j" in words else words


def _complex(z: complex, digits: int = 3) -> str:
    if abs(z.imag) < 0.5 * 10**-digits:
        return plain(z.real, digits)
    sign = MINUS if z.imag < 0 else "+"
    return f"{plain(z.real, digits)} {sign} j{plain(abs(z.imag), digits)}"
