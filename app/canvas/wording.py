"""What the board writes beside each element: names, data in a line, figures, and changes during a drag."""

import math
import textwrap
from collections.abc import Callable
from typing import Any

from app.canvas import phase_words
from app.canvas.lettering import Line, Run, Style
from app.model import assumed, figures, taps
from app.model.by_case import percent_of
from app.model.drawing import Case, Drawing, Limits
from app.model.kinds import (
    AnyElement,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    Regulator,
    Supply,
    Switch,
    Transformer,
)
from app.model.kinds import (
    Line as LineElement,
)
from app.study.outcome import AttachmentState, BranchState, NodeState

Lines = tuple[Line, ...]
ANY = Limits()
NAME_WIDTH = 26  # letters
LINE_WIDTH = 36


def caption(drawing: Drawing, id: str, case: Case) -> Lines:
    """The name, and what it is in a line or two; a capacitor that is off in the case says so."""
    element = drawing.elements[id]
    bare = isinstance(element, Joint) and not element.name
    style = Style.QUIET if bare else Style.NAME
    name = tuple((Run(text, style),) for text in wrapped(element.name, NAME_WIDTH) or [id])
    said = [text for line in describe(element) for text in wrapped(line, LINE_WIDTH)]
    if isinstance(element, Capacitor) and not percent_of(case, id, element):
        said[-1] += ", off"
    return name + tuple((Run(text, Style.QUIET),) for text in said)


def wrapped(text: str, width: int) -> list[str]:
    """Long words in two lines at most; the card shows them whole."""
    if len(text) <= width and text.isprintable() and text == text.strip():
        return [text] if text else []
    return textwrap.wrap(text, width, max_lines=2, placeholder=" …")


def describe(element: AnyElement) -> tuple[str, ...]:
    """The data of an element in the fewest words."""
    match element:
        case Transformer():
            return _transformer(element)
        case LineElement():
            return (_line(element),)
        case Regulator():
            up, down = (n * element.step_percent for n in (element.steps_up, element.steps_down))
            reach = f"±{figures.percent(up, 0)}" if up == down else f"{figures.percent(up + down, 0)} in all"
            return (f"holds {_held(element)}, {reach}",)
        case Switch():
            return ("closed" if element.closed else "open",)
        case Supply():
            few = "" if element.wires == "three-phase" else f", {element.wires}"
            first = f"{figures.level(element.nominal_v)}{few}"
            if element.held_percent == 100:
                return (first,)
            return first, f"held at {figures.typed(element.held_percent)} %"
        case Load():
            return (_load(element), *_shares(element))
        case Motor():
            return _motor(element)
        case Generator():
            kvar = (
                f" {figures.plain(element.output_kvar, 1, 'kvar', sign=True)}" if element.output_kvar else ""
            )
            if element.hold_percent is not None:
                kvar = f", holds {figures.typed(element.hold_percent)} %"
            return (f"{figures.typed(element.output_kw)} kW{kvar}",)
        case Capacitor():
            return (f"{figures.typed(element.rating_kvar)} kvar",)
    return ()


def _transformer(t: Transformer) -> tuple[str, ...]:
    units = f"{t.side_by_side} × " if t.side_by_side > 1 else ""
    kind = t.vector_group if t.build == "as its group" else t.build
    first = f"{units}{figures.typed(t.rating_kva)} kVA {figures.ratio(t.v1_v, t.v2_v)} {kind}".rstrip()
    if not t.taps_up + t.taps_down:
        return (first,)
    if t.regulates != "no":
        return first, f"holds {_held(t)} at {t.regulates}"
    return first, f"tap {taps.percent_words(t, t.tap)}"


def _held(changer: Transformer | Regulator) -> str:
    """The setting of what steps by itself."""
    return f"{figures.typed(assumed.value(changer, 'hold_percent'))} %"


def _line(line: LineElement) -> str:
    runs = f"{line.side_by_side} × " if line.side_by_side > 1 else ""
    area = f"{figures.typed(line.area_mm2)} mm² {line.conductor}" if line.area_mm2 else ""
    what = line.type or area
    neutral = phase_words.NEUTRALS.get(line.neutral, "")
    return f"{runs}{what} {figures.length(line.length_m)}".strip() + (f", {neutral}" if neutral else "")


def _load(load: Load) -> str:
    demand, unit = (load.demand_kw, "kW") if load.demand_kva is None else (load.demand_kva, "kVA")
    leading = " leading" if load.leading else ""
    factor = load.power_factor
    shown = f"{factor:.2f}" if math.isclose(factor, round(factor, 2)) else f"{factor:g}"
    return f"{figures.typed(demand or 0.0)} {unit} pf {shown}{leading}"


def _shares(load: Load) -> tuple[str, ...]:
    """`A 50 · B 30 · C 20 %` where its phases are not alike."""
    a, b = load.share_a_percent, load.share_b_percent
    if a is None or b is None or load.phases != "all":
        return ()
    names = ("AB", "BC", "CA") if load.connection == "delta" else ("A", "B", "C")
    parts = zip(names, (a, b, 100 - a - b), strict=True)
    return (" · ".join(f"{name} {figures.stated(share)}" for name, share in parts) + " %",)


def _motor(motor: Motor) -> tuple[str, ...]:
    """`200 kW, direct start`, and what it does where it does not simply run."""
    first = f"{figures.typed(motor.rated_kw)} kW, {motor.starter}"
    first += " start" if motor.starter == "direct" else ""
    return (first,) if motor.state == "running" else (first, motor.state)


def runs_on(through_kw: Any, forward: Any) -> Any:
    """True where power runs from start to end, of one branch or of an array of them."""
    return (through_kw >= 0) == forward


def flows(through_kw: Any) -> Any:
    """False where the power would read as nought, of one branch or of an array of them."""
    return abs(through_kw) >= 0.005


def branch_figures(
    angle: float,
    state: BranchState,
    before: BranchState | None,
    lossless: bool = False,
    step: float | None = None,
    wires: tuple[Any, str, str] | None = None,
    one_rating: bool = True,
) -> Lines:
    """Flow with its direction on the paper, then loading, of the worst conductor where they differ, and the
    amperes in each; under it the loss; changes since the drag began. `one_rating`: for every conductor, so
    that the one with most amperes is the worst; not between two windings."""
    if not state.live:
        return ()
    forward = runs_on(state.through_kw, state.forward)
    rated = not math.isnan(state.loaded_percent)
    load = figures.percent(state.loaded_percent) if rated else figures.amps(state.current_a)
    way = arrow(angle, forward) if flows(state.through_kw) else ""
    worst = phase_words.worst_of(*wires) if wires is not None and rated and one_rating else ""
    told = (figures.power(abs(state.through_kw)), way, worst, load)
    first: Line = (Run(" ".join(filter(None, told))),)
    said = wires is None or not rated and phase_words.is_out_and_back(*wires[:2])
    split = phase_words.amps_words(*wires) if wires is not None and not said else ""
    amperes: Lines = ((Run(split, Style.PLAIN),),) if split else ()
    second: Line = (Run(f"{figures.loss(state.loss_kw)} lost", Style.QUIET),)
    if before is not None and before.live:
        second += changed(state.loss_kw, before.loss_kw, figures.loss)
    lines = (first, *amperes) if lossless else (first, *amperes, second)
    if step is None:
        return lines
    each = "" if wires is None else phase_words.notch_words(wires[0], wires[2])
    if each:
        return *lines, (Run(f"stands at {each}", Style.QUIET),)
    stands = f"stands at {figures.plain(state.notch, 0, sign=True)}"
    return *lines, (Run(f"{stands}, {figures.stated(state.notch * step, '%', sign=True)}", Style.QUIET),)


def step_of(element: AnyElement) -> float | None:
    """Percent of a notch of what steps by itself; None where nothing does."""
    if isinstance(element, Regulator):
        return element.step_percent
    if isinstance(element, Transformer) and element.regulates != "no":
        return element.notch_percent
    return None


def arrow(angle: float, forward: bool) -> str:
    """The way the power runs on the paper, to the nearest quarter turn."""
    turn = angle if forward else angle + 180
    return "→↓←↑"[round(turn / 90) % 4]


def node_figures(
    state: NodeState,
    before: NodeState | None,
    wires: tuple[Any, Any] | None = None,
    limits: Limits = ANY,
) -> Lines:
    """Volts, and percent of nominal under them; of one phase where they differ."""
    if not state.live:
        return ((Run("dead", Style.QUIET),),)
    if wires is not None and phase_words.lowest_of(wires[0]):
        return phase_figures(state, *wires, limits)
    first: Line = (Run(figures.volts(state.voltage_v)),)
    second: Line = (Run(figures.percent(state.percent), Style.QUIET),)
    if before is not None and before.live:
        second += changed(state.voltage_v, before.voltage_v, figures.volts)
    return first, second


def phase_figures(state: NodeState, now: Any, before: Any, limits: Limits) -> Lines:
    """The lowest phase with its letter, or the highest where that alone is beyond its limit; its part of its
    own base, and the neutral where it is high."""
    letter, percent = phase_words.lowest_of(now), state.percent
    if is_over(state.percent, state.high_percent, limits):
        letter, percent = phase_words.highest_of(now), state.high_percent
    volts = phase_words.volts_of(now, letter)
    name = "" if phase_words.are_alike(now) else f"{phase_words.phase_name(letter, now)} "
    first: Line = (Run(f"{name}{figures.volts(volts)}"),)
    second: Line = (Run(f"{figures.percent(percent)} of {base_words(now.base_v)}", Style.QUIET),)
    if before is not None:
        second += changed(volts, phase_words.volts_of(before, letter), figures.volts)
    neutral = phase_words.neutral_words(now, limits.neutral_v)
    return (first, neutral, second) if neutral is not None else (first, second)


def is_over(lowest: float, highest: float, limits: Limits) -> bool:
    """Whether the highest phase is what matters: it alone is beyond its limit."""
    return highest > limits.high_percent and lowest >= limits.low_percent


def base_words(volts: float) -> str:
    """What volts are counted from: 120 V, 7.2 kV."""
    return figures.level(float(f"{volts:.4g}" if volts >= 1000 else f"{volts:.3g}"))


def attachment_figures(
    id: str, element: AnyElement, case: Case, state: AttachmentState, before: AttachmentState | None
) -> Lines:
    """What a supply gives; what a load or generator takes or gives where the case scales it."""
    percent = percent_of(case, id, element)
    scaled = isinstance(element, Load | Generator) and percent != 100
    told = isinstance(element, Supply | Motor) or scaled or id in case.own
    if not told or not state.live:
        return ()
    if not percent and not isinstance(element, Generator):
        said = isinstance(element, Capacitor) or getattr(element, "state", "") == "off"
        return () if said else ((Run("off"),),)  # once is enough
    if isinstance(element, Capacitor):
        return ((Run(figures.power(state.kvar, "kvar")),),)
    line: Line = (Run(figures.power(state.kw)),)
    if before is not None and before.live:
        line += changed(state.kw, before.kw, figures.power)
    return (line,)


def changed(now: float, then: float, write: Callable[[float], str]) -> Line:
    """▲ 5.8 V; nothing where it would read as nought."""
    moved = figures.change(now, then, write)
    return (Run(moved, Style.CHANGE),) if moved else ()
