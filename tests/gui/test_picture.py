"""Pictures: the board's own items on paper of their own, with text that stays text."""

import re
import subprocess
import sys
from dataclasses import replace
from xml.etree import ElementTree

import msgspec
import pytest
from board_drawings import EVERY_KIND, FERNHOLLOW, figures
from PySide6.QtGui import QImage

from app.canvas.palette import DARK, LIGHT
from app.canvas.picture import picture
from app.canvas.user_symbol import read_svg
from app.model.drawing import Part, Project
from app.model.kinds import Transformer
from solver.status import Status

TITLED = msgspec.structs.replace(
    FERNHOLLOW, project=Project(title="Fernhollow <Estate> & Mill", revision="B", author="A. Drafter")
)

RED = b'<svg viewBox="0 0 6 4" xmlns="http://www.w3.org/2000/svg"><path d="M0 0H6V4H0Z" fill="#c01"/></svg>'


def texts(path) -> list[str]:
    return [(e.text or "") for e in ElementTree.parse(path).iter("{http://www.w3.org/2000/svg}text")]


def test_svg_holds_the_figures_as_text(qapp, tmp_path):
    outcome = figures(TITLED)
    picture(TITLED, outcome, tmp_path / "a.svg")
    found = texts(tmp_path / "a.svg")
    state, node = outcome.branches.at("C1", 0), outcome.nodes.at("HS", 0)
    assert f"{state.start_kw:.1f} kW → {state.loaded_percent:.1f} %" in found
    assert f"{state.loss_kw:.2f} kW lost" in found
    assert f"{node.voltage_v:.1f} V" in found
    assert "tap −2.5 %" in found
    assert "Fernhollow <Estate> & Mill" in found
    assert any("rev B" in t for t in found)
    assert any("licensed practitioner" in t for t in found)
    assert "Case: Full load, low intake · voltage limits 94 % to 110 %" in found
    assert "Nothing is judged (all cases)" in found


def test_the_foot_says_how_the_checks_came_out(qapp, tmp_path):
    for given, words in (
        ({"failing": ("C1", "T1"), "near": ("T2",)}, "◆ 2 checks fail"),
        ({"failing": ("C1",)}, "◆ 1 check fails"),
        ({"near": ("C1",)}, "▲ Every check holds, 1 near the limit"),
    ):
        picture(TITLED, figures(TITLED, **given), tmp_path / "f.svg")
        assert f"{words} (all cases)" in texts(tmp_path / "f.svg")


def test_svg_of_another_case_and_of_no_answer(qapp, tmp_path):
    outcome = figures(TITLED)
    picture(TITLED, outcome, tmp_path / "b.svg", case=1)
    assert f"{outcome.nodes.at('HS', 1).voltage_v:.1f} V" in texts(tmp_path / "b.svg")
    lost = replace(outcome, status=Status.NO_OPERATING_POINT, sentence=Status.NO_OPERATING_POINT.value)
    picture(TITLED, lost, tmp_path / "c.svg")
    found = texts(tmp_path / "c.svg")
    assert Status.NO_OPERATING_POINT.value in found
    assert not [t for t in found if "lost" in t]
    picture(TITLED, None, tmp_path / "d.svg")
    assert "Not solved." in texts(tmp_path / "d.svg")


def test_everything_lies_inside_the_page(qapp, tmp_path):
    picture(EVERY_KIND, figures(EVERY_KIND), tmp_path / "e.svg")
    root = ElementTree.parse(tmp_path / "e.svg").getroot()
    _, _, width, height = (float(n) for n in root.attrib["viewBox"].split())
    for group in root.iter("{http://www.w3.org/2000/svg}g"):
        shift = [float(n) for n in re.findall(r"[-\d.]+", group.get("transform", "matrix(1,0,0,1,0,0)"))]
        for text in group.findall("{http://www.w3.org/2000/svg}text"):
            assert 0 < shift[4] + float(text.get("x")) < width
            assert 0 < shift[5] + float(text.get("y")) < height


@pytest.mark.parametrize("ending", ["svg", "png"])
def test_the_same_drawing_makes_the_same_bytes(qapp, tmp_path, ending):
    for name in "ab":
        picture(TITLED, figures(TITLED), tmp_path / f"{name}.{ending}", DARK, "ANSI")
    assert (tmp_path / f"a.{ending}").read_bytes() == (tmp_path / f"b.{ending}").read_bytes()


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=["light", "dark"])
def test_png_shows_ink_on_paper(qapp, tmp_path, palette):
    picture(TITLED, figures(TITLED), tmp_path / "a.png", palette)
    image = QImage(str(tmp_path / "a.png"))
    colours = {image.pixel(x, y) for x in range(0, image.width(), 3) for y in range(0, image.height(), 3)}
    assert image.width() > 1500
    assert image.pixelColor(1, 1) == palette.paper
    assert palette.ink.rgb() in colours
    assert len(colours) > 20


def test_the_set_of_symbols_and_the_users_own_reach_the_picture(qapp, tmp_path):
    part = Part(name="Mine", element=Transformer(start="", end=""), symbol=read_svg(RED))
    own = msgspec.structs.replace(
        TITLED,
        elements={**TITLED.elements, "T2": Transformer(start="J2", end="HS", part="mine")},
        parts={"mine": part},
    )
    for name, drawing, symbols in (("i", TITLED, "IEC"), ("a", TITLED, "ANSI"), ("o", own, "IEC")):
        picture(drawing, figures(drawing), tmp_path / f"{name}.svg", LIGHT, symbols)
    made = {(tmp_path / f"{name}.svg").read_text() for name in "iao"}
    assert len(made) == 3
    assert "#cc0011" in (tmp_path / "o.svg").read_text()


def test_pdf_is_one_sheet_of_vectors(qapp, tmp_path):
    picture(TITLED, figures(TITLED), tmp_path / "a.pdf")
    data = (tmp_path / "a.pdf").read_bytes()
    assert data.startswith(b"%PDF-")
    assert len(re.findall(rb"/Type\s*/Page\b", data)) == 1
    assert b"/Font" in data
    assert b"/Subtype /Image" not in data
    assert len(data) > 8000


def test_what_cannot_be_written_is_told(qapp, tmp_path):
    with pytest.raises(ValueError, match=r"a\.bmp: a picture ends in one of \.svg, \.png, \.pdf"):
        picture(TITLED, None, tmp_path / "a.bmp")
    for ending in ("svg", "png", "pdf"):
        with pytest.raises(OSError, match="a\\."):
            picture(TITLED, None, tmp_path / "gone" / f"a.{ending}")


def test_it_needs_no_running_application(tmp_path):
    code = (
        "from app.canvas.picture import picture; from app.model.drawing import Drawing;"
        f"picture(Drawing(), None, {str(tmp_path / 'a.svg')!r})"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=60)
    assert (done.returncode, done.stderr) == (0, "")
    assert "licensed practitioner" in (tmp_path / "a.svg").read_text()
