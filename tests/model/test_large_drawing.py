"""A hundred thousand elements: opened, changed and told apart without ado."""

from app.model import edits
from app.model.drawing import Drawing
from app.model.file import decode, encode
from app.model.kinds import Cable, Joint, Load, Supply
from app.model.levels import nominal_levels


def test_a_hundred_thousand_elements():
    elements = {"J0": Joint(), "S1": Supply(node="J0", nominal_v=11000.0)}
    for n in range(1, 40_000):
        elements[f"J{n}"] = Joint(x=n % 100 / 3, y=float(n // 100))
        elements[f"C{n}"] = Cable(start=f"J{n // 2}", end=f"J{n}", length_m=n / 7)
        if n % 2:
            elements[f"L{n}"] = Load(node=f"J{n}", demand_kva=n / 9)
    elements["L0"] = Load(node="J0")
    drawing = Drawing(elements=elements)
    assert len(drawing.elements) == 100_001
    data = encode(drawing)
    assert decode(data) == drawing
    after = edits.change(drawing, "C7", length_m=5)
    assert edits.diff(drawing, after).ids == {"C7"}
    assert len(nominal_levels(drawing)) == 40_000
