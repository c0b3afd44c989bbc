"""How findings name elements and string them together."""

import math
from collections import Counter
from collections.abc import Iterable, Sequence

from app.model.drawing import Drawing, label
from app.study.outcome import Finding, Verdict

MANY = 6
DEAD = "dead part"  # the check that tells what no supply reaches


def tally_words(findings: Iterable[Finding], made: int = 0) -> str:
    """How the checks came out, such as `2 checks fail` or `11 checks hold, 1 near the limit`.

    findings : of an outcome
    made : number of checks, where it is known

    Returns : words; that nothing is judged where no finding judges
    """
    found = list(findings)
    count = Counter(finding.verdict for finding in found)
    failing = count[Verdict.FAILS] + count[Verdict.BLOCKS]
    soft = {verdict.value: count[verdict] for verdict in (Verdict.ADVICE, Verdict.NEAR) if count[verdict]}
    if failing:
        return "1 check fails" if failing == 1 else f"{failing} checks fail"
    if not soft and not count[Verdict.HOLDS]:
        return "Nothing is judged"
    held = f"{made} checks hold" if made > 1 else "1 check holds" if made else "Every check holds"
    dead = sum(finding.check == DEAD for finding in found)
    unfed = [f"{dead} {'part is' if dead == 1 else 'parts are'} dead"] if dead else []
    told = [
        f"{many} {words.replace('advice', 'pieces of advice') if many > 1 else words}"
        for words, many in soft.items()
    ]
    return ", ".join([held, *told, *unfed])


def tell(drawing: Drawing, id: str) -> str:
    """An element by name and id, such as `House (B3)`; by id alone where it has no other name.

    drawing : the drawing
    id : of an element in it

    Returns : words
    """
    name = label(drawing, id)
    return id if name == id else f"{name} ({id})"


def list_of(drawing: Drawing, ids: Sequence[str], last: str = "and") -> str:
    """Elements in a row: `A`, `A and B`, `A, B and C`; beyond six only how many more there are.

    drawing : the drawing
    ids : (element,) at least one
    last : the word before the last

    Returns : words
    """
    told = [tell(drawing, id) for id in ids[:MANY]]
    if len(ids) > MANY:
        told.append(f"{len(ids) - MANY} more")
        last = "and"
    return told[0] if len(told) == 1 else ", ".join(told[:-1]) + f" {last} " + told[-1]


def among(names: Sequence[str]) -> str:
    """Cases by name: `case Night`, `cases Peak, Noon and Night`.

    names : at least one

    Returns : words
    """
    return f"case {names[0]}" if len(names) == 1 else f"cases {', '.join(names[:-1])} and {names[-1]}"


def slip(stated: float, other: float) -> str:
    """The likely slip behind two voltages that should agree: kV for V, or phase for line volts.

    stated : float [V]
    other : float [V]

    Returns : a sentence with a space before it, or nothing
    """
    ratio = max(stated, other) / min(stated, other)
    low, high = f"{min(stated, other):g} V", f"{max(stated, other):g} V"
    if _near(ratio, 1000):
        return f" {low} is {high} divided by 1000: were kilovolts typed as volts?"
    if _near(ratio, math.sqrt(3)):
        return f" {low} is {high} divided by √3: is one phase to neutral, the other between phases?"
    if _near(ratio, 1000 / math.sqrt(3)) or _near(ratio, 1000 * math.sqrt(3)):
        return " The ratio is 1000 and √3 together: were kilovolts typed as volts, and phase for line?"
    return ""


def _near(ratio: float, what: float) -> bool:
    return abs(ratio / what - 1) < 0.02
