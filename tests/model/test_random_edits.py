"""Whatever a person does, the drawing stays whole: it saves, opens equal, and every step undoes by value."""

from hypothesis import given, settings
from hypothesis import strategies as st

from app.model import edits
from app.model.by_case import fault_of_own
from app.model.checks import fault, misfit
from app.model.drawing import Drawing
from app.model.edits import EditRefused
from app.model.fields import fields_of
from app.model.file import decode, encode
from app.model.kinds import Branch
from app.model.parts import builtin_parts

PARTS = builtin_parts()
spots = st.integers(-40, 40) | st.floats(-50, 50)
shares = st.floats(0, 1)
odd = st.floats() | st.integers(-100, 100) | st.booleans() | st.text(max_size=5) | st.none()


def drawn_on() -> Drawing:
    """One of every kind, each with a node or two of its own, joined up by cables."""
    drawing = Drawing()
    for number, part in enumerate(PARTS):
        drawing = edits.drop(drawing, part.element, 0, 5 * number)
    nodes = list(drawing.nodes())
    for one, other in zip(nodes, nodes[1:], strict=False):
        if not {(one, other), (other, one)} & {(b.start, b.end) for b in drawing.branches().values()}:
            drawing = edits.extend(drawing, one, PARTS[3].element, 0, 0, to_node=other)
    return edits.keep_part(drawing, "T1", "Mine")


@st.composite
def an_edit(draw, drawing: Drawing):
    """One edit with arguments that mostly make sense."""
    ids = st.sampled_from(sorted(drawing.elements) or ["none"]) | st.just("none")
    one, other, x, y = draw(ids), draw(ids), draw(spots), draw(spots)
    some = draw(st.lists(ids, max_size=4))
    template = draw(st.sampled_from(PARTS)).element
    branch = draw(st.sampled_from([p.element for p in PARTS if isinstance(p.element, Branch)]))
    fields = (
        {**fields_of(type(drawing.elements[one])), "x": None} if one in drawing.elements else {"name": None}
    )
    field = draw(st.sampled_from(sorted(fields)))
    said = draw(st.sampled_from(["percent", "demand_kva", "demand_kw", "power_factor"]))
    said_factor = draw(shares)
    return draw(
        st.sampled_from(
            [
                lambda d: edits.drop(d, template, x, y),
                lambda d: edits.drop(d, template, x, y, node=one),
                lambda d: edits.extend(d, one, branch, x, y),
                lambda d: edits.extend(d, one, branch, x, y, to_node=other),
                lambda d: edits.move(d, some, x, y),
                lambda d: edits.remove(d, some[:1]),
                lambda d: edits.join(d, one, other),
                lambda d: edits.split_branch(d, one, x, y),
                lambda d: edits.swap_ends(d, one),
                lambda d: edits.reconnect(d, one, "end", other),
                lambda d: edits.reattach(d, one, other),
                lambda d: edits.reroute(d, one, [(x, y)]),
                lambda d: edits.set_tap(d, one, int(x) % 5 - 2),
                lambda d: edits.paste(d, edits.copy(d, some), x, y),
                lambda d: edits.keep_part(d, one, other),
                lambda d: edits.forget_part(d, "P1"),
                lambda d: edits.rename(d, one, other),
                lambda d: edits.turn_bar(d, one),
                lambda d: edits.change(d, one, **{field: draw(odd)}),
                lambda d: edits.change_text(d, one, field, str(y)),
                lambda d: edits.set_own(d, 0, one, **{said: draw(odd)}),
                lambda d: edits.set_own(d, 0, one, percent=40.0),
                lambda d: edits.set_own_text(d, 0, one, f"{y} kVA at {said_factor}"),
                lambda d: edits.set_case(d, 1, d.cases[0], name=other),
            ]
        )
    )


@settings(max_examples=40, deadline=None)
@given(st.data())
def test_any_sequence_of_edits_keeps_the_drawing_whole(data):
    drawing, history = data.draw(st.sampled_from([Drawing(), drawn_on()])), []
    for _ in range(data.draw(st.integers(1, 14))):
        edit = data.draw(an_edit(drawing))
        before = encode(drawing)
        try:
            after = edit(drawing)
        except EditRefused as refused:
            after = drawing
            history.append(str(refused))
        assert encode(drawing) == before, "an edit changed the drawing it was given"
        differing = edits.diff(drawing, after)
        assert (differing.ids == set() and not differing.rest) == (after == drawing)
        drawing = after
    assert all(sentence.endswith(".") and "\n" not in sentence for sentence in history)
    for id, element in drawing.elements.items():
        assert fault(id, element) is None
        assert misfit(drawing.elements, id, element) is None
    assert all(fault_of_own(drawing.elements, case.own) is None for case in drawing.cases)
    assert decode(encode(drawing)) == drawing
    assert encode(decode(encode(drawing))) == encode(drawing)
