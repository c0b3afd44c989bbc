"""The user's own SVG: good ones become symbols with terminals, hostile ones are refused in a sentence."""

import pytest
from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QImage, QPainter

from app.canvas.element_item import paint_worn
from app.canvas.geometry import GRID
from app.canvas.palette import DARK, LIGHT
from app.canvas.svg_check import LARGEST_BYTES
from app.canvas.user_symbol import SymbolRefused, Worn, default_terminals, read_svg, symbol_icon, wear
from app.model.kinds import Busbar, Load, Transformer

HEAD = (
    '<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink" viewBox="0 0 60 40">'
)
SOLAR = (
    HEAD
    + """<title>Panel</title><defs><g id="cell"><rect width="10" height="10" fill="#246"/></g></defs>
  <rect x="5" y="5" width="50" height="30" fill="#fff" stroke="#246" style="stroke-width:2"/>
  <use xlink:href="#cell" x="12" y="12"/><use href="#cell" x="30" y="12"/>
  <g transform="translate(0 20)"><circle id="terminal1" cx="0" cy="0" r="1" fill="none"/>
  <g transform="scale(2)"><rect id="terminal2" x="29.5" y="-.5" width="1" height="1"/></g></g></svg>"""
)


def wrapped(inside: str, head: str = HEAD) -> bytes:
    return f"{head}{inside}</svg>".encode()


def nested_uses(depth: int, each: int) -> str:
    parts = ['<g id="p0"><path d="M0 0L1 1"/></g>']
    for k in range(1, depth):
        parts.append(f'<g id="p{k}">' + f'<use href="#p{k - 1}"/>' * each + "</g>")
    return f'<defs>{"".join(parts)}</defs><use href="#p{depth - 1}"/>'


SHAPE = '<path d="M0 0L9 9" stroke="#000"/>'
HOSTILE = {
    "script": (wrapped("<script>alert(1)</script>"), "holds <script>"),
    "handler": (wrapped('<path d="M0 0" onload="go()"/>'), "event handler onload"),
    "handler on the root": (
        wrapped(SHAPE, HEAD.replace("viewBox", 'OnClick="x" viewBox')),
        "event handler OnClick",
    ),
    "outside image": (wrapped('<image href="http://example.org/a.png"/>'), "holds <image>"),
    "embedded image": (wrapped('<image href="data:image/png;base64,AA"/>'), "holds <image>"),
    "outside use": (wrapped('<use href="file:///etc/passwd#a"/>'), "refers outside itself (file:"),
    "outside xlink": (wrapped('<use xlink:href="other.svg#a"/>'), "refers outside itself (other.svg"),
    "outside link": (wrapped('<g><title>t</title><a href="javascript:x"/></g>'), "holds <a>"),
    "outside fill": (wrapped('<path d="M0 0" fill="url(http://x/y#z)"/>'), "style refers outside"),
    "quoted outside fill": (wrapped("<path d='M0 0' fill='url( \"http://x\" )'/>"), "style refers outside"),
    "escaped outside fill": (
        wrapped(r'<path d="M0 0" style="fill:u\72l(http://x)"/>'),
        "style refers outside",
    ),
    "style import": (wrapped("<style>@import 'http://x';</style>"), "style refers outside"),
    "style url": (wrapped("<style>path{fill:url(http://x)}</style>"), "style refers outside"),
    "foreign": (wrapped("<foreignObject><b/></foreignObject>"), "holds <foreignObject>"),
    "animation": (wrapped('<animate attributeName="x"/>'), "holds <animate>"),
    "filter": (wrapped('<filter id="f"/>'), "holds <filter>"),
    "doctype": (b'<!DOCTYPE svg SYSTEM "http://x/y.dtd">' + wrapped(SHAPE), "DOCTYPE"),
    "entities": (b'<!DOCTYPE svg [<!ENTITY a "aaaa">]>' + wrapped("<text>&a;</text>"), "DOCTYPE"),
    "style sheet": (b'<?xml-stylesheet href="http://x"?>' + wrapped(SHAPE), "processing instruction"),
    "base": (wrapped('<g xml:base="http://x"/>'), "base address"),
    "too many bytes": (wrapped("<!--" + "x" * LARGEST_BYTES + "-->"), "256 kB"),
    "too many elements": (wrapped("<g/>" * 5001), "5000 elements"),
    "too deep": (wrapped("<g>" * 80 + "</g>" * 80), "60 deep"),
    "uses that explode": (wrapped(nested_uses(12, 10)), "more than 20000 elements"),
    "uses that never end": (
        wrapped('<g id="a"><use href="#b"/></g><g id="b"><use href="#a"/></g>'),
        "uses itself",
    ),
    "uses too deep": (wrapped(nested_uses(90, 1)), "60 deep"),
    "missing part": (wrapped('<use href="#nowhere"/>'), "refers to #nowhere"),
    "missing paint": (wrapped('<path d="M0 0" fill="url(#nowhere)"/>'), "refers to #nowhere"),
    "broken": (HEAD.encode() + b"<g>", "not well-formed"),
    "cut": (SOLAR.encode()[:200], "not well-formed"),
    "empty": (b"", "not well-formed"),
    "packed": (b"\x1f\x8b\x08\x00" + bytes(range(200)), "not UTF-8"),
    "picture of another sort": (b"\x89PNG\r\n\x1a\n" + bytes(64), "not UTF-8"),
    "web page": (b"<html><body/></html>", "starts with <html>"),
    "other svg": (b'<svg xmlns="http://example.org/svg" viewBox="0 0 1 1"/>', "no SVG picture"),
    "no size": (wrapped(SHAPE, HEAD.replace('viewBox="0 0 60 40"', "")), "states no size"),
    "three numbers": (wrapped(SHAPE, HEAD.replace("0 0 60 40", "0 0 60")), "four numbers"),
    "no width": (wrapped(SHAPE, HEAD.replace("0 0 60 40", "0 0 0 40")), "above 0"),
    "not a number": (wrapped(SHAPE, HEAD.replace("0 0 60 40", "0 0 nan 40")), "above 0"),
    "endless": (wrapped(SHAPE, HEAD.replace("0 0 60 40", "0 0 inf 40")), "above 0"),
    "too large": (wrapped(SHAPE, HEAD.replace("0 0 60 40", "0 0 1e9 1e9")), "larger than 100000"),
    "too long": (wrapped(SHAPE, HEAD.replace("0 0 60 40", "0 0 900 9")), "20 times as long"),
    "fine dashes": (wrapped('<path d="M0 0L9 9" stroke-dasharray="0.00001"/>'), "too fine"),
    "terminal outside": (wrapped('<circle id="terminal" cx="900" cy="5" r="2"/>'), "outside its viewBox"),
}


@pytest.mark.parametrize("name", HOSTILE)
def test_a_hostile_picture_is_refused_in_one_sentence(qapp, name):
    data, words = HOSTILE[name]
    with pytest.raises(SymbolRefused) as refusal:
        read_svg(data)
    sentence = str(refusal.value)
    assert words in sentence
    assert sentence.endswith(".")
    assert "\n" not in sentence


def test_a_good_picture_becomes_a_symbol_with_its_terminals(qapp):
    symbol = read_svg(SOLAR.encode())
    assert (symbol.width, symbol.height) == (60.0, 40.0)
    assert symbol.terminals == ((0.0, 20.0), (60.0, 20.0))
    assert symbol.svg == SOLAR


def test_a_viewbox_that_starts_elsewhere_is_taken_off(qapp):
    symbol = read_svg(
        wrapped('<circle id="terminal" cx="-20" cy="15" r="2"/>', HEAD.replace("0 0 60 40", "-20 -5 60 40"))
    )
    assert symbol.terminals == ((0.0, 20.0),)


def test_width_and_height_stand_in_for_a_viewbox(qapp):
    symbol = read_svg(wrapped(SHAPE, HEAD.replace('viewBox="0 0 60 40"', 'width="20mm" height="96px"')))
    assert (round(symbol.width, 3), symbol.height) == (75.591, 96.0)


def test_files_are_read_and_missing_ones_told(qapp, tmp_path):
    (tmp_path / "panel.svg").write_text(SOLAR)
    assert read_svg(tmp_path / "panel.svg").terminals
    with pytest.raises(SymbolRefused, match=r"gone\.svg cannot be read"):
        read_svg(tmp_path / "gone.svg")


def test_terminals_that_are_not_marked_lie_at_the_middles(qapp):
    symbol = read_svg(wrapped(SHAPE))
    assert default_terminals(symbol, branch=True) == ((0.0, 20.0), (60.0, 20.0))
    assert default_terminals(symbol, branch=False) == ((30.0, 0.0),)


def test_a_branch_wears_it_with_both_terminals_on_the_line_and_on_the_grid(qapp):
    symbol = read_svg(SOLAR.encode())
    worn = wear(symbol, Transformer(start="a", end="b"))
    ends = [worn.place.map(QPointF(*t)) for t in symbol.terminals]
    assert [round(p.y(), 6) for p in ends] == [0.0, 0.0]
    assert [round(p.x(), 6) for p in ends] == [-worn.half, worn.half]
    assert worn.half % GRID == 0


def test_a_symbol_drawn_upright_is_turned_along_its_branch(qapp):
    picture = wrapped(
        '<circle id="terminal1" cx="30" cy="0" r="2"/><circle id="terminal2" cx="30" cy="40" r="2"/>'
    )
    symbol = read_svg(picture)
    worn = wear(symbol, Transformer(start="a", end="b"))
    ends = [worn.place.map(QPointF(*t)) for t in symbol.terminals]
    assert [round(p.x(), 6) for p in ends] == [-worn.half, worn.half]
    assert max(abs(p.y()) for p in ends) < 1e-9


@pytest.mark.parametrize("terminal", [(0, 20), (60, 20), (30, 0), (30, 40)])
def test_an_attachment_is_fed_from_above_wherever_its_terminal_is(qapp, terminal):
    x, y = terminal
    symbol = read_svg(wrapped(f'<circle id="terminal" cx="{x}" cy="{y}" r="1"/>'))
    worn = wear(symbol, Load(node="a"))
    at = worn.place.map(QPointF(*terminal))
    assert abs(at.x()) < 1e-9
    assert at.y() == pytest.approx(-worn.half)
    assert worn.half > 0


def test_it_paints(qapp):
    symbol = read_svg(SOLAR.encode())
    image = QImage(100, 100, QImage.Format.Format_ARGB32)
    image.fill(0)
    painter = QPainter(image)
    worn = wear(symbol, Busbar())
    worn.paint(painter, QPointF(50, 50), 0.0)
    painter.end()
    assert image.pixelColor(50, 50).alpha() > 0
    assert QRectF(20, 20, 60, 60).contains(worn.box.translated(50, 50))
    assert not symbol_icon(symbol, 24).isNull()


def black_lines() -> Worn:
    line = wrapped('<path d="M0 20H60" stroke="#000" stroke-width="6"/>')
    return wear(read_svg(line), Load(node=""))


@pytest.mark.parametrize("palette", [LIGHT, DARK])
def test_black_lines_stand_out_on_any_paper(qapp, palette):
    picture = QImage(100, 100, QImage.Format.Format_RGB32)
    picture.fill(palette.paper)
    painter = QPainter(picture)
    paint_worn(painter, black_lines(), QPointF(50, 50), 0.0, palette.ink, palette.paper)
    painter.end()
    shades = [picture.pixelColor(50, y).lightness() for y in range(40, 61)]
    assert max(shades) - min(shades) > 150
    assert picture.pixelColor(5, 5) == palette.paper
