"""Fault currents on the card: the figures of text and sheet, for what a node has; a mark that is clicked."""

from pathlib import Path

import pytest
from panels_stage import stage
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest

from app.model.file import load
from app.model.kinds import Motor
from app.panels.asked import Asked
from app.panels.element_page import ElementPage
from app.panels.results import rows
from app.printed import printed

SAMPLES = Path(__file__).resolve().parents[2] / "samples"


def shown(made, id: str) -> dict[str, str]:
    asked = Asked(made.drawing, made.solving.outcome, None, 0)
    return {row.label: row.cells[0] for row in rows(asked, id)}


def told(made, name: str) -> dict[str, str]:
    """The line of a node in the table of fault currents of the text, by its heads."""
    text = printed(made.drawing, made.solving.outcome)
    table = text.split("Fault currents\n")[1].split("\n\n")[0].splitlines()
    heads = [h for h in table[0].split("  ") if h.strip()]
    line = next(row for row in table[1:] if f"  {name}  " in row)
    cells = [c.strip() for c in line.split("  ") if c.strip()]
    return dict(zip([h.strip() for h in heads], cells, strict=True))


@pytest.mark.parametrize(
    ("sample", "name", "label", "column"),
    [
        ("kettlewick_open", "Board A", "Fault, most", "Ik3 max kA"),
        ("loonmarrow_camp", "Boathouse", "Fault to neutral", "phase-N max kA"),
    ],
)
def test_the_card_says_what_the_text_says(qtbot, sample, name, label, column):
    made = stage(qtbot, load(SAMPLES / f"{sample}.farend"))
    id = next(i for i, e in made.drawing.nodes().items() if e.name == name)
    card, text = shown(made, id), told(made, name)
    assert card[label] == f"{text[column]} kA"
    assert card["Its peak"] == f"{text['peak kA']} kA"
    assert card["Earth fault, least"] == f"{text['Ik1 min kA']} kA"
    assert card["Earth loop"] == f"{text['Zs ohm']} Ω"
    made.solving.stop()


def test_a_motor_marked_on_its_card_raises_the_fault_current(qtbot):
    made = stage(qtbot, load(SAMPLES / "hobscar_quarry.farend"))
    motor = next(i for i, e in made.drawing.elements.items() if isinstance(e, Motor))
    node = made.drawing.elements[motor].node
    before = made.solving.outcome.faults.at(node).ik3_max_ka
    made.attention.select([motor])
    page = made.card._page
    assert isinstance(page, ElementPage)
    box = page.rows["feeds_faults"].editor
    QTest.mouseClick(box, Qt.MouseButton.LeftButton, pos=QPoint(8, box.height() // 2))
    made.solving.settle()
    assert made.drawing.elements[motor].feeds_faults
    after = made.solving.outcome.faults.at(node)
    assert after.ik3_max_ka > before + 1.0
    assert shown(made, node)["Fault, most"] == f"{after.ik3_max_ka:.2f} kA"
    made.session.history.undo()
    made.solving.settle()
    assert made.solving.outcome.faults.at(node).ik3_max_ka == before
    made.solving.stop()
