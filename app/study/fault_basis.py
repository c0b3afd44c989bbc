"""How fault currents are worked out, in sentences that stand beside them; worded once."""

from app.model.drawing import Drawing
from app.study.fault_feeders import feeding_words

CAUTION = "Fault currents here do not replace a protection study."
BASIS = (
    (
        "Fault currents",
        "Equivalent voltage source at the fault (IEC 60909-0:2016, from memory); loads, capacitors and line "
        "charging are not counted.",
    ),
    (
        "Highest and least",
        "Highest currents: cmax, conductors at 20 °C, transformers times KT. Least currents: cmin, hot "
        "conductors, least fault level of the supply. Transformers at their rated ratio, whatever the tap.",
    ),
    (
        "Voltage factors",
        "Up to 1 kV cmax is 1.05, or 1.10 where the highest voltage allowed is above 108 % of nominal; cmin "
        "0.95, or 0.90 where the lowest is below 92 %. Above 1 kV 1.10 and 1.00 (IEC 60909-0:2016, from "
        "memory).",
    ),
    (
        "Peak of a fault",
        "κ = 1.02 + 0.98·e^(−3R/X), R/X at 0.4 of the system's frequency, which holds on rings.",
    ),
    (
        "Faults to earth",
        "Negative sequence as positive. The zero sequence passes as the windings let it; a core without a "
        "way for it blocks it. A supply above 1 kV counts as unearthed where its Z0/Z1 is blank.",
    ),
    (
        "Faults on few phases",
        "Where not all three phases are there, out of the impedances between the conductors: to the neutral "
        "as it is carried, to earth through the return conductor, (Z0 − Z1)/3 of a line, or through earth; "
        "no motor or set is counted there.",
    ),
    ("Fault study", CAUTION),
)


def fault_basis(drawing: Drawing, counted: tuple[str, ...]) -> tuple[tuple[str, str], ...]:
    """Every item and its sentence, what feeds faults among them.

    drawing : the drawing
    counted : ids of the motors and sets that are counted

    Returns : tuple of item and words
    """
    return (BASIS[0], ("Motors and sets in faults", feeding_words(drawing, counted)), *BASIS[1:])
