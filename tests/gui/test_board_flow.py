"""What the board says of flows: none where nothing flows, and the same figures as the head."""

from types import SimpleNamespace

import pytest

from app.canvas import wording
from app.canvas.element_item import Look
from app.canvas.lettering import words
from app.canvas.paper import Paper
from app.canvas.standing import Standing
from app.model.drawing import Case, Drawing, Own
from app.model.figures import change, power
from app.model.kinds import Busbar, Cable, Capacitor, Joint, Load, Supply, Switch
from app.study import run


def test_an_open_switch_between_live_ends_does_not_look_dead(qapp):
    ends = {"B1": Busbar(), "S1": Supply(node="B1", dx=-4, dy=0), "B2": Busbar(x=20)}
    ring = {"C1": Cable(start="B1", end="B2", via=((4.0, 9.0), (16.0, 9.0)))}
    for closed_round, standing in ((True, Standing.GOOD), (False, Standing.DEAD)):
        elements = {
            **ends,
            **(ring if closed_round else {}),
            "W1": Switch(start="B1", end="B2", closed=False),
        }
        drawing = Drawing(elements=elements)
        paper = Paper(Look())
        paper.lay_out(drawing)
        paper.show_outcome(drawing, run(drawing), 0, None)
        item = paper.items_by_id["W1"]
        assert item.standing is standing
        assert item.flow.forward is None
        assert paper.tags["W1"].text == ""
        assert "open" in paper.captions["W1"].text


def test_no_arrow_where_nothing_flows(qapp):
    drawing = Drawing(
        elements={
            "B1": Busbar(),
            "S1": Supply(node="B1", dx=-4, dy=0),
            "J1": Joint(x=10),
            "C1": Cable(start="B1", end="J1"),
            "C2": Cable(start="B1", end="J2", via=((4.0, 2.0),)),
            "J2": Joint(x=10, y=4),
            "L1": Load(node="J2"),
        }
    )
    paper = Paper(Look())
    paper.lay_out(drawing)
    paper.show_outcome(drawing, run(drawing), 0, None)
    assert paper.items_by_id["C1"].flow.forward is None
    assert paper.items_by_id["C2"].flow.forward is True
    assert not set("→←↑↓") & set(paper.tags["C1"].text)
    assert set("→←↑↓") & set(paper.tags["C2"].text)


@pytest.mark.parametrize("then", [89.61, 89.1, 90.4, 4.0])
def test_a_supply_tells_its_change_as_the_head_does(then):
    now, before = (SimpleNamespace(live=True, kw=kw) for kw in (89.57, then))
    (line,) = wording.attachment_figures("S1", Supply(node="B1"), Case(), now, before)
    said = change(89.57, then, power)
    assert said
    assert words((line,)) == f"{power(89.57)} {said}"


def test_a_capacitor_is_off_in_the_cases_in_which_it_is(qapp):
    own = {"Q1": Own(percent=100.0)}, {"Q2": Own(percent=0.0)}
    drawing = Drawing(
        elements={
            "B1": Busbar(), "S1": Supply(node="B1", dx=-4, dy=0), "L1": Load(node="B1"),
            "Q1": Capacitor(node="B1", connected=False), "Q2": Capacitor(node="B1"),
        },
        cases=(Case(name="Peak", own=own[0]), Case(name="Night", own=own[1])),
    )  # fmt: skip
    paper, outcome = Paper(Look()), run(drawing)
    paper.lay_out(drawing)
    for case, off in ((0, (False, False)), (1, (True, True)), (0, (False, False))):
        paper.show_outcome(drawing, outcome, case, None)
        told = tuple(paper.captions[id].text for id in ("Q1", "Q2"))
        assert tuple(text.count("off") for text in told) == off
        assert all(", off" in text for text, is_off in zip(told, off, strict=True) if is_off)
