"""What the bottom line says, from an outcome. Words only."""

import math

from msgspec import Struct

from app.model.drawing import Drawing, label
from app.model.fields import fields_of
from app.panels.element_page import round_off
from app.panels.element_words import noun
from app.study.findings import checks_made
from app.study.outcome import Assumption, Finding, Outcome, Verdict
from app.study.words import DEAD, tally_words
from solver.status import Status


class Line(Struct, frozen=True):
    """A mark, the headline in its colour, a sentence, and the elements it is about."""

    verdict: Verdict
    headline: str
    sentence: str
    ids: tuple[str, ...] = ()


def line(drawing: Drawing, outcome: Outcome | None) -> Line:
    """The one line for an outcome."""
    if not drawing.elements:
        return Line(Verdict.NOTE, "Nothing drawn yet.", "Take a part from the shelf and put it on the paper.")
    if outcome is None:
        return Line(Verdict.NOTE, "Not solved yet.", "")
    if outcome.status is not Status.SOLVED:
        return _unsolved(drawing, outcome)
    found = ordered(outcome)
    near = [f for f in found if f.verdict in (Verdict.ADVICE, Verdict.NEAR)]
    head = f"{tally_words(found, checks_made(drawing, outcome.nodes, outcome.branches))}."
    if found and found[0].verdict in (Verdict.FAILS, Verdict.BLOCKS):
        return Line(found[0].verdict, head, found[0].sentence, found[0].ids)
    tightest = min((f for f in found if f.margin is not None), key=lambda f: f.margin or 0.0, default=None)
    told = near[0] if near else tightest
    dead = next((f for f in found if f.check == DEAD), None)
    if dead is not None and not near:  # what is dead was not judged
        return Line(Verdict.NOTE, head, dead.sentence, dead.ids)
    if told is None:
        return Line(Verdict.NOTE, head, "")
    lead = "" if told.verdict is Verdict.ADVICE else "Tightest: "
    return Line(told.verdict if near else Verdict.HOLDS, head, lead + told.sentence, told.ids)


def _unsolved(drawing: Drawing, outcome: Outcome) -> Line:
    blocks = [f for f in ordered(outcome) if f.verdict is Verdict.BLOCKS]
    if blocks and outcome.solved_cases:
        return _partly(outcome, blocks)
    if blocks:
        more = f" And {len(blocks) - 1} more." if len(blocks) > 1 else ""
        return Line(Verdict.BLOCKS, "Not solved.", blocks[0].sentence + more, blocks[0].ids)
    words = outcome.sentence
    if outcome.to_blame and label(drawing, outcome.to_blame) not in words:
        words += f" {label(drawing, outcome.to_blame)} sets it."
    return Line(Verdict.BLOCKS, "Not solved.", words, (outcome.to_blame,) if outcome.to_blame else ())


def _partly(outcome: Outcome, blocks: list[Finding]) -> Line:
    """How many cases are not solved, how the others came out, and why the worst is not."""
    count = len(outcome.cases)
    rest = tally_words(f for f in outcome.findings if f.verdict is not Verdict.BLOCKS)
    head = (
        f"{count - len(outcome.solved_cases)} of {count} cases not solved; else {rest[0].lower()}{rest[1:]}."
    )
    more = f" And {len(blocks) - 1} more." if len(blocks) > 1 else ""
    return Line(Verdict.BLOCKS, head, blocks[0].sentence + more, blocks[0].ids)


def ordered(outcome: Outcome) -> list[Finding]:
    """All findings, failing ones first, the tightest first among equals; what fails without a figure, such
    as a lost neutral, before the volts that come of it."""

    def tightness(finding: Finding) -> float:
        if finding.margin is not None:
            return finding.margin
        return -math.inf if finding.verdict is Verdict.FAILS else math.inf

    return sorted(outcome.findings, key=lambda f: (f.verdict.rank, tightness(f)))


def assumption_words(drawing: Drawing, assumption: Assumption) -> str:
    """`T2: No-load current i0 is taken as 0.8 %: common practice, no source`."""
    element = drawing.elements.get(assumption.id)
    about = fields_of(type(element)).get(assumption.field) if element is not None else None
    name = noun(about) if about else assumption.field
    value = f"{round_off(assumption.value)} {assumption.unit}".strip()
    return f"{label(drawing, assumption.id)}: {name} is taken as {value} ({assumption.basis})"


def count_words(count: int) -> str:
    """`3 assumed values to confirm`."""
    return f"{count} assumed {'value' if count == 1 else 'values'} to confirm"
