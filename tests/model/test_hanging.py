"""What is dropped on a node hangs clear of it and of its neighbours."""

import pytest

from app.model import edits
from app.model.drawing import Drawing
from app.model.kinds import Busbar, Cable, Generator, Joint, Load, Supply, Transformer
from app.model.parts import builtin_parts

UPRIGHT = Drawing(elements={"B1": Busbar(x=10.0, y=5.0, length=6.0)})
LYING = Drawing(elements={"B1": Busbar(x=10.0, y=5.0, length=8.0, upright=False)})


def hung(drawing, template, x, y, node="B1"):
    """The drawing with one more, and where that hangs."""
    after = edits.drop(drawing, template, x, y, node)
    (id,) = edits.added(drawing, after)
    return after, (after.elements[id].dx, after.elements[id].dy)


@pytest.mark.parametrize("y", [2.0, 3.0, 5.0, 8.0])
def test_a_supply_goes_to_the_left_of_an_upright_bar_wherever_it_is_dropped_on_it(y):
    part = next(p for p in builtin_parts() if isinstance(p.element, Supply))
    assert hung(UPRIGHT, part.element, 10.0, y)[1] == (-4.0, 0.0)


def test_loads_go_below_the_foot_of_a_bar_side_by_side():
    drawing, spots = UPRIGHT, []
    for template in (Load(node=""), Load(node=""), Generator(node=""), Load(node="")):
        drawing, at = hung(drawing, template, 10.0, 7.0)
        spots.append(at)
    assert spots == [(0.0, 6.0), (3.0, 6.0), (-3.0, 6.0), (6.0, 6.0)]


def test_on_a_lying_bar_loads_hang_where_they_are_dropped_and_supplies_stand_above():
    drawing, at = hung(LYING, Load(node=""), 12.0, 5.0)
    assert at == (2.0, 3.0)
    drawing, at = hung(drawing, Load(node=""), 12.0, 5.0)
    assert at == (-1.0, 3.0)
    assert hung(drawing, Supply(node=""), 10.0, 5.0)[1] == (0.0, -3.0)


def test_nothing_hangs_on_a_line_that_leaves_the_bar():
    left = edits.extend(UPRIGHT, "B1", Cable(start="", end=""), 0.0, 5.0)
    assert hung(left, Supply(node=""), 10.0, 5.0)[1] == (-4.0, 3.0)
    down = edits.extend(UPRIGHT, "B1", Transformer(start="", end=""), 10.0, 18.0)
    assert hung(down, Load(node=""), 10.0, 5.0)[1] == (3.0, 6.0)


def test_neighbours_keep_their_room():
    crowded = edits.put(UPRIGHT, {"J1": Joint(x=10.0, y=12.0)})
    assert hung(crowded, Load(node=""), 10.0, 5.0)[1] == (3.0, 6.0)
    drawing = UPRIGHT
    for _ in range(30):
        drawing, _ = hung(drawing, Load(node=""), 10.0, 5.0)
    places = {(e.dx, e.dy) for e in drawing.attachments().values()}
    assert len(places) == 30
