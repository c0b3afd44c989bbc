"""The shelf's parts of single-phase and four-wire layouts are sound, and enough to draw such a layout."""

import pytest
from msgspec.structs import replace

from app.model import edits
from app.model.checks import fault_of_fields, fault_of_the_rest
from app.model.drawing import Drawing
from app.model.kinds import Busbar, Joint, kind_of
from app.model.phase_parts import parts_of, phase_parts
from app.study import run
from solver.status import Status


@pytest.mark.parametrize("american", [True, False])
def test_every_part_is_sound_and_its_figures_wait_to_be_confirmed(american):
    for part in phase_parts(american):
        assert fault_of_fields(part.element) is None, part.name
        assert fault_of_the_rest(part.element) is None, part.name
        assert part.element.assumed, part.name
    names = [(kind_of(p.element), p.name) for p in phase_parts(american)]
    assert len(set(names)) == len(names)


def named(kind: str, words: str, american: bool = True):
    """The element of a part."""
    return next(p.element for p in parts_of(kind, american) if words in p.name)


def drawn_between(drawing: Drawing, branch, start: str, end: str) -> Drawing:
    """A branch drawn from one node to another."""
    return edits.put(drawing, {f"{start}-{end}": replace(branch, start=start, end=end)})


def test_a_service_behind_a_centre_tap_is_drawn_from_parts_alone():
    drawing = Drawing(frequency_hz=60.0, elements={"HV": Joint(), "HOME": Joint(x=10.0)})
    drawing = edits.drop(drawing, named("supply", "12.47 kV"), 0, 0, "HV")
    drawing = drawn_between(drawing, named("transformer", "25 kVA"), "HV", "HOME")
    drawing = edits.drop(drawing, named("load", "On AB"), 10, 0, "HOME")
    drawing = edits.drop(drawing, named("load", "On A:"), 10, 0, "HOME")
    outcome = run(drawing)
    assert outcome.status is Status.SOLVED
    state = outcome.wires.nodes.at("HOME")
    assert (state.system, state.base_v) == ("split-phase", 120.0)
    assert state.a_v < state.b_v  # the half with more on it stands lower


def test_a_camp_with_laterals_is_drawn_from_parts_alone():
    drawing = Drawing(frequency_hz=60.0, elements={k: Busbar(x=10.0 * n) for n, k in enumerate("ABCD")})
    drawing = edits.drop(drawing, named("supply", "12.47 kV"), 0, 0, "A")
    for part, ends in (
        (named("transformer", "75 kVA"), "AB"),
        (named("cable", "4/0"), "BC"),
        (named("cable", "2/0"), "CD"),
    ):
        drawing = drawn_between(drawing, part, *ends)
    drawing = edits.drop(drawing, named("load", "On A:"), 30, 0, "D")
    outcome = run(drawing)
    assert outcome.status is Status.SOLVED
    assert outcome.wires.nodes.at("D").phases == "A"
    assert outcome.wires.nodes.at("C").phases == "ABC"


def test_a_bank_in_open_delta_serves_three_phases():
    drawing = Drawing(frequency_hz=60.0, elements={k: Busbar(x=10.0 * n) for n, k in enumerate("AB")})
    drawing = edits.drop(drawing, named("supply", "12.47 kV"), 0, 0, "A")
    drawing = drawn_between(drawing, named("transformer", "open delta"), "A", "B")
    drawing = edits.drop(drawing, named("load", "On AB"), 10, 0, "B")
    outcome = run(drawing)
    assert outcome.status is Status.SOLVED
    assert outcome.wires.nodes.at("B").phases == "ABC"


def test_drawn_from_its_low_side_a_centre_tapped_unit_is_turned_whole():
    drawing = Drawing(frequency_hz=60.0, elements={"LV": Busbar()})
    drawing = edits.drop(drawing, named("supply", "split-phase"), 0, 0, "LV")
    drawing = edits.extend(drawing, "LV", named("transformer", "25 kVA"), 10, 0)
    (unit,) = (e for e in drawing.elements.values() if kind_of(e) == "transformer")
    assert (unit.end, unit.v1_v, unit.v2_v) == ("LV", 7200.0, 240.0)
