"""What stands behind figures of single phases and the neutral, told wherever these are."""

BASIS = (
    (
        "Phases and neutral",
        "Solved each for itself. A carried neutral has its own impedance, and none in common with the "
        "phases, as their reactance is stated for three phases, or out and back; one earthed along is within "
        "R0 and X0. Neutrals are earthed at supplies, star points and electrodes as drawn, and nowhere else.",
    ),
    (
        "Judging of phases",
        "Volts of the lowest and of the highest phase, against what loads hang on there: the neutral, earth "
        "or the next phase. Loading of the worst conductor, the neutral included.",
    ),
    (
        "Unbalance",
        "V2/V1 of the volts (IEC 61000-2-2, from memory); largest deviation of a line voltage from the mean "
        "of the three, over that mean (NEMA MG 1, from memory).",
    ),
)
