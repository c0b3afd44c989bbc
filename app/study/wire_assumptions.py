"""What was put in place of data that only phases and neutral need, wherever figures hang on it."""

from collections.abc import Iterator, Sequence
from itertools import chain

from app.model import taps
from app.model.conductors import has_neutral
from app.model.drawing import Drawing
from app.model.fault_data import Put, fault_value
from app.model.fields import fields_of
from app.model.kinds import Branch, Element, Line, Motor, OverheadLine, Supply, Transformer
from app.model.levels import THREE_PHASE
from app.model.wire_data import neutral_of, neutral_value, zero_value
from app.study.conductors import Conductors
from app.study.graph import Layout
from app.study.line_wires import NEUTRAL_FIELDS, ZERO_FIELDS
from app.study.outcome import Assumption
from app.study.unit_ports import passes_zero
from app.study.wires import ABC, NEUTRAL
from app.study.zones import Zones

Made = tuple[Assumption, ...]
SOURCE_Z0 = "as Z1; common practice, no source"
_last: tuple[Conductors, float, list[Branch], list[Made]] | None = None


def wire_assumptions(drawing: Drawing, layout: Layout, zones: Zones, conductors: Conductors) -> Made:
    """Neutrals, returns through earth, cores of star-star units, supplies of motor starts, where nobody says.

    drawing : the drawing, for its frequency
    layout : its graph
    zones : nominal_v (zone,) float [V], system (zone,)
    conductors : of every branch

    Returns : tuple of Assumption, branches in the order of the drawing and then supplies
    """
    global _last
    last, frequency = _last, drawing.frequency_hz
    branches = layout.branches
    were: Sequence[Branch | None] = ()
    done: Sequence[Made] = ()
    if last is not None and last[0] is conductors and last[1] == frequency:  # and so at the same levels
        were, done = last[2], last[3]
    if len(were) != len(branches):
        were, done = [None] * len(branches), [()] * len(branches)
    made = [
        known if was is now else tuple(_of_branch(layout, zones, conductors, row, frequency))
        for row, (was, now, known) in enumerate(zip(were, branches, done, strict=True))
    ]
    _last = (conductors, frequency, branches, made)
    return (*chain.from_iterable(made), *_of_supplies(layout))


def _of_branch(
    layout: Layout, zones: Zones, conductors: Conductors, row: int, frequency_hz: float
) -> Iterator[Assumption]:
    branch, id, zone = layout.branches[row], layout.branch_ids[row], layout.zone[layout.start[row]]
    nominal = float(zones.nominal_v[zone])
    if isinstance(branch, Line) and conductors.branch[row] & ABC:
        kind = neutral_of(branch, nominal, zones.system[zone] != THREE_PHASE)
        carried = bool(conductors.branch[row] & NEUTRAL)
        yield from _of_line(id, branch, kind, carried, nominal, frequency_hz)
    elif isinstance(branch, Transformer) and row in conductors.units and _has_zero(branch):
        passes = passes_zero(branch, conductors.units[row])
        yield from _put(id, branch, "z0_ratio", zero_value(branch, passes))


def _of_line(
    id: str, run: Line, kind: str, carried: bool, nominal_v: float, frequency_hz: float
) -> Iterator[Assumption]:
    if isinstance(run, OverheadLine) and run.hung_at_m:
        if has_neutral(run):
            yield from _put(id, run, NEUTRAL_FIELDS[0], neutral_value(run, NEUTRAL_FIELDS[0]))
    elif kind == "earthed along":
        for name in ZERO_FIELDS:
            yield from _put(id, run, name, fault_value(run, name, nominal_v, frequency_hz))
    elif carried:
        for name in NEUTRAL_FIELDS:
            yield from _put(id, run, name, neutral_value(run, name))


def _has_zero(unit: Transformer) -> bool:
    """A three-phase unit with a star or zigzag, so that its zero sequence counts."""
    group = taps.group(unit.vector_group)
    return (
        group is not None and unit.build == "as its group" and group[0][0] + group[1][0] not in ("Dd", "Ii")
    )


def _of_supplies(layout: Layout) -> Iterator[Assumption]:
    """The zero sequence behind which a supply stands while motors start."""
    hung = layout.attachments
    if not any(
        isinstance(m, Motor) and m.state != "off" and layout.live[layout.at[n]] for n, m in enumerate(hung)
    ):
        return
    for row in layout.supplies:
        supply = hung[row]
        if isinstance(supply, Supply) and supply.fault_level_min_mva is not None and supply.z0_ratio is None:
            if supply.wires == THREE_PHASE:
                yield from _put(layout.attachment_ids[row], supply, "z0_ratio", Put(1.0, SOURCE_Z0))


def _put(id: str, element: Element, name: str, value: float | Put) -> Iterator[Assumption]:
    if isinstance(value, Put):
        yield Assumption(id, name, value.value, fields_of(type(element))[name].unit, value.basis)
