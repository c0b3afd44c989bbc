"""How people call conductors: A, B, C and N; behind a centre tap L1, L2 and N."""

HOT = {"A": "L1", "B": "L2"}
AGAINST = {"neutral": "to neutral", "earth": "to earth", "next phase": "to the next phase"}


def conductor(letter: str, system: str) -> str:
    """One conductor by the name that people know.

    letter : A, B, C or N
    system : three-phase, two-wire or split-phase

    Returns : str
    """
    return HOT.get(letter, letter) if system == "split-phase" else letter


def conductors(letters: str, system: str) -> str:
    """Conductors in a row, such as `ABCN` or `L1 L2 N`.

    letters : such as ABN
    system : three-phase, two-wire or split-phase

    Returns : str
    """
    named = [conductor(letter, system) for letter in letters]
    return (" " if any(len(name) > 1 for name in named) else "").join(named)


def worst_of(amps: dict[str, float]) -> str:
    """The letter of the conductor that carries most; blank where none carries anything. A neutral that only
    takes back what its phase brings is not the worst.

    amps : letter to amperes, nan where there is no such conductor

    Returns : str
    """
    known = {letter: ampere for letter, ampere in amps.items() if ampere > 0}
    if "N" in known:
        known["N"] *= 1 - 1e-9
    return max(known, key=known.__getitem__, default="")
