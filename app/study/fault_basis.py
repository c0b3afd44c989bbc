"""How fault currents are worked out, in sentences that stand beside them; worded once."""

CAUTION = "Fault currents here do not replace a protection study."
BASIS = (
    (
        "Fault currents",
        "Equivalent voltage source at the fault (IEC 60909-0:2016, from memory); loads, motors, generators, "
        "capacitors and line charging are not counted, which for motors and generators is too little.",
    ),
    (
        "Highest and least",
        "Highest currents: cmax, conductors at 20 °C, transformers times KT. Least currents: cmin, hot "
        "conductors, least fault level of the supply. Transformers at their rated ratio, whatever the tap.",
    ),
    (
        "Peak of a fault",
        "κ = 1.02 + 0.98·e^(−3R/X), R/X at the equivalent frequency (20 Hz of 50), which holds on rings.",
    ),
    (
        "Faults to earth",
        "Negative sequence as positive. The zero sequence passes as the windings let it; a core without a "
        "way for it blocks it. A supply above 1 kV counts as unearthed where its Z0/Z1 is blank.",
    ),
    ("Fault study", CAUTION),
)
