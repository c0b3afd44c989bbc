"""The diagram with its results as a picture: SVG, PNG or PDF, with the board's own items."""

import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from msgspec.structs import replace
from PySide6.QtCore import QBuffer, QIODevice, QMarginsF, QPointF, QRectF, QSizeF, Qt
from PySide6.QtGui import (
    QColor,
    QImage,
    QPageLayout,
    QPageSize,
    QPaintDevice,
    QPainter,
    QPdfWriter,
    QPen,
)
from PySide6.QtSvg import QSvgGenerator
from PySide6.QtWidgets import QApplication

from app.canvas import lettering
from app.canvas.element_item import Look
from app.canvas.lettering import Line, Run, Style
from app.canvas.palette import LIGHT, Palette
from app.canvas.paper import Paper
from app.model import figures
from app.model.drawing import Drawing
from app.study.cautions import CAUTIONS
from app.study.outcome import Outcome, Verdict
from app.study.words import tally_words

MARGIN = 36.0
NARROWEST = 760.0  # the foot needs this much
SHARP = 2.0  # PNG pixels a scene pixel
DPI = 96
LARGEST_PNG = 12_000  # px a side
SUFFIXES = (".svg", ".png", ".pdf")


def picture(
    drawing: Drawing,
    outcome: Outcome | None,
    path: Path | str,
    palette: Palette = LIGHT,
    symbols: str = "IEC",
    case: int = 0,
) -> None:
    """Draw one case to a file; its ending says how. Raises OSError where it cannot be written."""
    path = Path(path)
    if path.suffix.lower() not in SUFFIXES:
        raise ValueError(f"{path.name}: a picture ends in one of {', '.join(SUFFIXES)}.")
    running = QApplication.instance() or _application()
    page = Page(drawing, outcome, palette, symbols, case)
    out = QBuffer()
    out.open(QIODevice.OpenModeFlag.WriteOnly)
    {".svg": _svg, ".png": _png, ".pdf": _pdf}[path.suffix.lower()](page, out)
    path.write_bytes(out.data().data())
    del page, running


def _application() -> QApplication:
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")  # a picture needs no screen
    return QApplication(["farend"])


class Page:
    """The drawing and its foot, laid out once, painted on any device."""

    def __init__(
        self, drawing: Drawing, outcome: Outcome | None, palette: Palette, symbols: str, case: int
    ) -> None:
        self.palette = palette
        self._paper = Paper(Look(palette, symbols, printing=True))
        self._paper.lay_out(drawing)
        if outcome is not None and outcome.solved(case):
            self._paper.show_outcome(drawing, outcome, case, None)
            self._paper.arrange()
        self.title = drawing.project.title or "Drawing"
        self._head = _head(drawing, outcome, case)
        self._cautions = tuple((Run(caution, Style.QUIET),) for caution in CAUTIONS)
        self._content = self._paper.content()
        feet = [lettering.size(part) for part in (self._head, self._cautions)]
        wide = max(self._content.width(), NARROWEST, feet[0].width() + feet[1].width() + 2 * MARGIN)
        self._foot = max(foot.height() for foot in feet)
        self.size = QSizeF(wide + 2 * MARGIN, self._content.height() + self._foot + 4 * MARGIN)

    def wear(self, palette: Palette) -> None:
        """Change the colours."""
        self.palette = self._paper.look.palette = palette

    def paint(self, painter: QPainter) -> None:
        """At one device unit a scene pixel; scale the painter beforehand."""
        painter.setRenderHints(QPainter.RenderHint.Antialiasing | QPainter.RenderHint.TextAntialiasing)
        painter.fillRect(QRectF(QPointF(), self.size), self.palette.paper)
        target = QRectF(0, 1.5 * MARGIN, self._content.width(), self._content.height())
        target.moveLeft((self.size.width() - target.width()) / 2)
        self._paper.render(painter, target, self._content)
        rule = self.size.height() - self._foot - 1.5 * MARGIN
        painter.setPen(QPen(self.palette.faint, 1.0))
        painter.drawLine(QPointF(MARGIN, rule), QPointF(self.size.width() - MARGIN, rule))
        top = rule + MARGIN / 2
        lettering.paint(painter, self._head, QPointF(MARGIN, top), 0, self.palette)
        wide = lettering.size(self._cautions).width()
        left = self.size.width() - MARGIN - wide
        lettering.paint(painter, self._cautions, QPointF(left, top), wide, self.palette)


def _head(drawing: Drawing, outcome: Outcome | None, case: int) -> tuple[Line, ...]:
    project = drawing.project
    marks = [
        project.place,
        f"drawing {project.number}" if project.number else "",
        f"rev {project.revision}" if project.revision else "",
        project.date,
        project.author,
        project.status,
    ]
    lines: list[Line] = [(Run(project.title or "Untitled drawing", Style.NAME),)]
    lines.append((Run(" · ".join(m for m in marks if m), Style.QUIET),))
    if outcome is None or not outcome.solved(case):
        sentence = outcome.sentence if outcome is not None else "Not solved."
        of_case = (
            ((Run(f"Case: {outcome.cases[case]}", Style.QUIET),),) if outcome and outcome.solved_cases else ()
        )
        return *lines, (Run(sentence, Style.FIGURE),), *of_case
    balance = outcome.balance
    supply, lost = figures.power(balance.supply_kw[case]), figures.loss(balance.loss_kw[case])
    lines.append((Run(f"Supply {supply} · lost {lost}", Style.FIGURE),))
    limits = drawing.limits
    low, high = (
        figures.percent(p, 0 if p == round(p) else 1) for p in (limits.low_percent, limits.high_percent)
    )
    named = f": {limits.name}" if limits.name else ""
    words = f"Case: {outcome.cases[case]} · voltage limits {low} to {high}{named}"
    lines += [(Run(words, Style.QUIET),), (_verdict(outcome),)]
    lines += (
        [(Run(outcome.sentence, Style.FAILED),)] if len(outcome.solved_cases) < len(outcome.cases) else []
    )
    return tuple(lines)


def _verdict(outcome: Outcome) -> Run:
    """How the checks came out, in all cases that are solved."""
    judged = [f for f in outcome.findings if f.verdict is not Verdict.BLOCKS]
    words = tally_words(judged)
    worst = min((f.verdict for f in judged), key=lambda v: v.rank, default=Verdict.NOTE)
    sign, style = _TALLY.get(worst, ("", Style.QUIET))
    every = " (all cases)" if len(outcome.solved_cases) > 1 else ""
    return Run(sign + words + every, style)


_TALLY = {
    Verdict.BLOCKS: ("◆ ", Style.FAILED),
    Verdict.FAILS: ("◆ ", Style.FAILED),
    Verdict.ADVICE: ("▲ ", Style.NEAR),
    Verdict.NEAR: ("▲ ", Style.NEAR),
    Verdict.HOLDS: ("", Style.GOOD),
}


@contextmanager
def _painting(device: QPaintDevice) -> Iterator[QPainter]:
    painter = QPainter(device)
    try:
        yield painter
    finally:
        painter.end()


def _svg(page: Page, out: QBuffer) -> None:
    generator = QSvgGenerator()
    generator.setOutputDevice(out)
    generator.setTitle(page.title)
    generator.setDescription("Drawn with Farend. " + CAUTIONS[0])
    generator.setResolution(DPI)
    generator.setSize(page.size.toSize())
    generator.setViewBox(QRectF(QPointF(), page.size))
    with _painting(generator) as painter:
        page.paint(painter)


def _png(page: Page, out: QBuffer) -> None:
    scale = min(SHARP, LARGEST_PNG / max(page.size.width(), page.size.height()))
    image = QImage((page.size * scale).toSize(), QImage.Format.Format_RGB32)
    image.fill(page.palette.paper)
    with _painting(image) as painter:
        painter.scale(scale, scale)
        page.paint(painter)
    image.save(out, "PNG")  # type: ignore[call-overload]


def _pdf(page: Page, out: QBuffer) -> None:
    """Vectors on one sheet of the drawing's own size; white paper where the palette is light."""
    if not page.palette.dark:
        page.wear(replace(page.palette, paper=QColor(Qt.GlobalColor.white)))
    writer = QPdfWriter(out)
    writer.setTitle(page.title)
    writer.setCreator("Farend")
    writer.setResolution(600)
    sheet = QPageSize(page.size * (72 / DPI), QPageSize.Unit.Point, "", QPageSize.SizeMatchPolicy.ExactMatch)
    writer.setPageLayout(QPageLayout(sheet, QPageLayout.Orientation.Portrait, QMarginsF(0, 0, 0, 0)))
    with _painting(writer) as painter:
        scale = writer.width() / page.size.width()
        painter.scale(scale, scale)
        page.paint(painter)
