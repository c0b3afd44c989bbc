"""Our own symbols paint in both sets and both palettes, each unlike the others."""

import pytest
from PySide6.QtCore import QPointF
from PySide6.QtGui import QColor, QImage, QPainter

from app.canvas.palette import DARK, LIGHT
from app.canvas.symbols import glyph_of, icon, paint_symbol, symbol_pixmap
from app.model.kinds import KINDS, Cable, Capacitor, Joint, Switch, Transformer

SETS = ("IEC", "ANSI")


def pixels(image: QImage) -> bytes:
    return bytes(image.convertToFormat(QImage.Format.Format_ARGB32).constBits())


def drawn(kind, element, symbols, palette=LIGHT, angle=0.0) -> bytes:
    image = QImage(64, 64, QImage.Format.Format_ARGB32)
    image.fill(QColor(palette.paper))
    painter = QPainter(image)
    paint_symbol(painter, kind, element, symbols, palette.ink, palette.paper, QPointF(32, 32), angle)
    painter.end()
    return pixels(image)


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=["light", "dark"])
@pytest.mark.parametrize("symbols", SETS)
def test_every_kind_has_its_own_picture(qapp, symbols, palette):
    seen = {kind: pixels(symbol_pixmap(kind, symbols, palette, 32).toImage()) for kind in KINDS}
    assert all(any(picture) for picture in seen.values())
    assert len(set(seen.values())) == len(KINDS)


@pytest.mark.parametrize("kind", ["transformer", "generator", "load", "capacitor", "switch", "cable"])
def test_the_two_sets_differ(qapp, kind):
    assert drawn(kind, None, "IEC") != drawn(kind, None, "ANSI")


@pytest.mark.parametrize("symbols", SETS)
def test_an_open_switch_does_not_look_closed(qapp, symbols):
    open_, closed = Switch(start="a", end="b", closed=False), Switch(start="a", end="b")
    assert drawn("switch", open_, symbols) != drawn("switch", closed, symbols)
    off = Capacitor(node="a", connected=False)
    assert drawn("capacitor", off, symbols) != drawn("capacitor", Capacitor(node="a"), symbols)


def test_a_transformer_shows_how_its_windings_are_connected(qapp):
    pictures = {
        drawn("transformer", Transformer(start="a", end="b", vector_group=group), "IEC")
        for group in ("Dyn11", "Yyn0", "YNd1", "Dzn0", "Ii0")
    }
    assert len(pictures) == 5
    odd = Transformer(start="a", end="b", vector_group="?!")
    assert drawn("transformer", odd, "IEC") == drawn("transformer", None, "IEC")


def test_a_symbol_fills_in_the_paper_but_leaves_it_around(qapp):
    image = QImage(64, 64, QImage.Format.Format_ARGB32)
    image.fill(QColor("#ff0000"))
    painter = QPainter(image)
    paint_symbol(painter, "supply", None, "IEC", LIGHT.ink, LIGHT.paper, QPointF(32, 32))
    painter.end()
    assert image.pixelColor(1, 1) == QColor("#ff0000")
    assert image.pixelColor(32, 22) == LIGHT.paper


def test_lines_and_nodes_wear_no_symbol_on_the_board(qapp):
    assert glyph_of(Cable(start="a", end="b"), "IEC") is None
    assert glyph_of(Joint(), "IEC") is None
    assert glyph_of(Transformer(start="a", end="b"), "ANSI").half > 10


def test_icons_stay_sharp_on_dense_screens(qapp):
    made = icon("transformer", "IEC", LIGHT, 24)
    assert {p.width() for p in (made.pixmap(made.availableSizes()[0]),)} == {24}
    assert made.pixmap(made.availableSizes()[0], 2.0).width() == 48
