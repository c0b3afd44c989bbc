"""Which phases and neutral an element has, as people read them: by the drawing, then by what is solved."""

import math
from typing import Any

from app.canvas.lettering import Line as Words
from app.canvas.lettering import Run, Style
from app.canvas.phase_mark import Phases
from app.model import figures
from app.model.kinds import Attachment, Branch, Line, Transformer
from app.model.rephasing import has_phases
from app.study.outcome import Wired

HOTS = {"A": "L1", "B": "L2"}
SPLIT = "split-phase"
SLOTS = "ABC"
TOLD_V = 5.0  # neutral to earth that is worth a line where no limit is set; common practice, no source


def named(letter: str, system: str) -> str:
    """What people call a conductor: hot wires of a split phase are L1 and L2."""
    return HOTS.get(letter, letter) if system == SPLIT else letter


def stated(element: Branch | Attachment) -> Phases | None:
    """What the element itself says of its phases; None where they are as many as reach it."""
    phases = getattr(element, "phases", "all") if has_phases(element) else "all"
    if phases == "all":
        return None
    carried = isinstance(element, Line) and element.neutral == "carried"
    return Phases(phases + ("N" if carried else ""), len(phases), carried, True)


NEUTRALS = {"carried": "own neutral", "earthed along": "neutral earthed along", "none": "no neutral"}


def reaching(element: Branch | Attachment, has: str, system: str) -> Phases | None:
    """The conductors it turns out to have; None for three phases with nothing unusual said."""
    said = stated(element)
    phases = [letter for letter in SLOTS if letter in has]
    if not phases or (len(phases) == 3 and said is None):
        return said
    letters = [named(letter, system) for letter in phases] + (["N"] if "N" in has else [])
    text = (" " if system == SPLIT else "").join(letters)
    return Phases(text, len(phases), "N" in has, said is not None)


def told(wires: Wired | None, case: int) -> tuple[list[Any], ...]:
    """All that the marks of phases say of conductors; of a transformer it also hangs on which side is fed."""
    if wires is None:
        return ()
    tables = ((wires.nodes, "system"), (wires.branches, "phases"), (wires.attachments, "phases"))
    columns = ((table.ids, table.column(name)) for table, name in tables)
    return tuple([*ids, *(c if c.ndim == 1 else c[:, case]).tolist()] for ids, c in columns)


def conductors(row: Any, element: object) -> str:
    """The conductors of a row of wires; of a transformer those of the winding whose amperes it tells."""
    if not isinstance(element, Transformer):
        return str(row.phases)
    return "".join(letter for letter in "ABCN" if not math.isnan(amps_of(row, letter)))


def amps_of(row: Any, letter: str) -> float:
    """The amperes in one conductor."""
    return float(getattr(row, f"{letter.lower()}_a"))


def volts_of(row: Any, letter: str) -> float:
    """The volts of one phase."""
    return float(getattr(row, f"{letter.lower()}_v"))


def is_out_and_back(row: Any, has: str) -> bool:
    """One current, out alone or out and back, as figures read it: the amperes of the branch say it all."""
    told = {figures.amps(amps_of(row, letter)) for letter in has}
    return len(has) <= 2 and len(told) == 1


def amps_words(row: Any, has: str, system: str) -> str:
    """`A 41.2 · B 3.0 · N 33.0 A`."""
    told = [(named(c, system), amps_of(row, c)) for c in has if not math.isnan(amps_of(row, c))]
    return " · ".join(f"{name} {figures.amps(a).removesuffix(' A')}" for name, a in told) + (
        " A" if told else ""
    )


def notch_words(row: Any, system: str) -> str:
    """`A +3 · B +7 · C 0`, where each phase steps by itself; else nothing."""
    notches = {c: getattr(row, f"{c.lower()}_notch", math.nan) for c in SLOTS}
    known = {c: notch for c, notch in notches.items() if not math.isnan(notch)}
    return " · ".join(f"{named(c, system)} {figures.plain(n, 0, sign=True)}" for c, n in known.items())


def worst_of(row: Any, has: str, system: str) -> str:
    """The conductor of a line that carries most; nothing where there is but one, or they are alike."""
    known = {c: amps_of(row, c) for c in has if not math.isnan(amps_of(row, c))}
    if len(known) < 2 or figures.amps(max(known.values())) == figures.amps(min(known.values())):
        return ""
    return named(max(known, key=known.__getitem__), system)


def lowest_of(row: Any) -> str:
    """The letter of the phase with the lowest volts; nothing where none is live."""
    known = {c: volts_of(row, c) for c in SLOTS if not math.isnan(volts_of(row, c))}
    return min(known, key=known.__getitem__) if known else ""


def highest_of(row: Any) -> str:
    """The letter of the phase with the highest volts; nothing where none is live."""
    known = {c: volts_of(row, c) for c in SLOTS if not math.isnan(volts_of(row, c))}
    return max(known, key=known.__getitem__) if known else ""


def are_alike(row: Any) -> bool:
    """True where all phases of three read the same: no letter says more."""
    told = {figures.volts(volts_of(row, letter)) for letter in SLOTS}
    return len(told) == 1


def phase_name(letter: str, row: Any) -> str:
    """`A`, `L1`; `A–B` where volts are against the next phase."""
    if row.against == "next phase":
        return f"{letter}–{SLOTS[(SLOTS.index(letter) + 1) % 3]}"
    return named(letter, row.system)


def neutral_words(row: Any, limit_v: float | None) -> Words | None:
    """`N 2.1 V to earth` from half of its limit on, or where none is set and it is high."""
    told_v = TOLD_V if limit_v is None else limit_v / 2
    if math.isnan(row.neutral_v) or row.neutral_v < told_v:
        return None
    return (Run(f"N {figures.volts(row.neutral_v)} to earth", Style.QUIET),)
