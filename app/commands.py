"""The headless commands: results, sheet, picture. The same path and the same numbers as the window.

Exit codes: 0 solved, every limit holds; 1 solved, but a limit fails; 2 bad input, or a layout that
cannot be solved as drawn; 3 no operating point in one case or more.
"""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path
from typing import TYPE_CHECKING, NoReturn

from app.version import version

if TYPE_CHECKING:  # each command loads what it needs, so that help, a wrong word and the window come at once
    from app.model.drawing import Drawing
    from app.study.outcome import Outcome
    from app.study.year_outcome import YearOutcome

SOLVED, FAILS, BAD_INPUT, NO_OPERATING_POINT = 0, 1, 2, 3
EXIT_CODES = """exit codes:
  0  solved, every limit holds
  1  solved, but a limit fails
  2  bad input, or a layout that cannot be solved as drawn
  3  no operating point in one case or more; what is written has the figures of the others
"""
SHEETS = (".xlsx", ".csv")
PICTURES = (".svg", ".png", ".pdf")


class BadInput(Exception):
    """One sentence for the person who typed the command."""


class Parser(argparse.ArgumentParser):
    """Says what is wrong in one line."""

    def error(self, message: str) -> NoReturn:
        self.exit(BAD_INPUT, f"{self.prog}: {message}. See {self.prog} --help.\n")


def parser_of(command: str) -> Parser:
    """The options of one headless command."""
    made = Parser(
        prog=f"farend {command}",
        description=COMMANDS[command][0],
        epilog=EXIT_CODES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    made.add_argument("file", metavar="FILE", help="a drawing (.farend)")
    if command == "results":
        made.add_argument(
            "--json", action="store_true", help="as JSON: ids, units in the keys, null for none"
        )
    elif command == "year":
        made.add_argument("--json", action="store_true", help="as JSON, without the single points")
        made.add_argument(
            "-o", "--out", metavar="OUT.csv", help="write the year point by point besides, for any program"
        )
    else:
        endings = " or ".join(SHEETS if command == "sheet" else PICTURES)
        made.add_argument("-o", "--out", metavar="OUT", required=True, help=f"the file to write, {endings}")
    if command == "picture":
        made.add_argument("--dark", action="store_true", help="light ink on dark paper")
        made.add_argument("--symbols", choices=("IEC", "ANSI"), default="IEC", help="the symbol set")
        made.add_argument("--case", metavar="NAME", help="the loading case to show, by name; else the first")
    return made


def command(name: str, arguments: list[str]) -> int:
    """Run one headless command and give its exit code."""
    chosen = parser_of(name).parse_args(arguments)
    from app.model.file import FileError

    try:
        return int(COMMANDS[name][1](chosen))
    except (FileError, BadInput) as fault:
        complain(f"farend {name}: {' '.join(str(fault).split())}")
        return BAD_INPUT


def _drawing(chosen: argparse.Namespace) -> Drawing:
    from app.model.file import load

    return load(Path(chosen.file))


def _run(drawing: Drawing) -> Outcome:
    from app.study import run

    return run(drawing)


def _results(chosen: argparse.Namespace) -> int:
    drawing = _drawing(chosen)
    outcome = _run(drawing)
    if chosen.json:
        import json

        from app.study.record import record

        told = record(drawing, outcome, version())
        say(json.dumps(told, indent=1, ensure_ascii=True, allow_nan=False) + "\n")
    else:
        from app.printed import printed

        say(printed(drawing, outcome))
    return exit_code(outcome)


def _sheet(chosen: argparse.Namespace) -> int:
    out = _checked_out(chosen, SHEETS)
    drawing = _drawing(chosen)
    outcome = _run(drawing)
    from app.sheet import SheetError, write  # the workbook writer is loaded only for a sheet

    try:
        write(drawing, outcome, out)
    except SheetError as fault:
        raise BadInput(str(fault)) from fault
    return exit_code(outcome)


def _picture(chosen: argparse.Namespace) -> int:
    out = _checked_out(chosen, PICTURES)
    drawing = _drawing(chosen)
    case = _case_of(drawing, chosen.case)
    outcome = _run(drawing)
    os.environ["QT_QPA_PLATFORM"] = "offscreen"  # a picture needs no screen
    from PySide6.QtWidgets import QApplication  # Qt is loaded only by what draws

    from app.canvas.palette import DARK, LIGHT
    from app.canvas.picture import picture

    running = QApplication.instance() or QApplication(["farend"])
    try:
        picture(drawing, outcome, out, DARK if chosen.dark else LIGHT, chosen.symbols, case)
    except OSError as fault:
        raise BadInput(f"{out} cannot be written: {fault.strerror or fault}.") from fault
    del running
    return exit_code(outcome)


def _year(chosen: argparse.Namespace) -> int:
    out = None if chosen.out is None else _checked_out(chosen, (".csv",))
    drawing = _drawing(chosen)
    from app.model.file import write_bytes
    from app.study.year import run_year
    from app.study.year_record import course_text, year_record

    year = run_year(drawing)
    if out is not None and year.solved_h:
        write_bytes(out, course_text(year).encode())
    if chosen.json:
        import json

        told = year_record(drawing, year, version())
        say(json.dumps(told, indent=1, ensure_ascii=True, allow_nan=False) + "\n")
    else:
        from app.printed_year import printed_year

        say(printed_year(drawing, year))
    return exit_code(year)


def _checked_out(chosen: argparse.Namespace, endings: tuple[str, ...]) -> Path:
    out = Path(chosen.out)
    if out.suffix.lower() not in endings:
        raise BadInput(f"{out} has no ending that tells what to write; allowed are {', '.join(endings)}.")
    if not out.parent.is_dir():
        raise BadInput(f"{out} cannot be written: there is no folder {out.parent}.")
    return out


def _case_of(drawing: Drawing, name: str | None) -> int:
    names = [case.name for case in drawing.cases]
    if name is None:
        return 0
    if name not in names:
        raise BadInput(f"there is no case {name!r}; the cases are {', '.join(names)}.")
    return names.index(name)


def exit_code(outcome: Outcome | YearOutcome) -> int:
    """What the outcome comes to, as an exit code; a year solves where every hour of it does."""
    from app.study.outcome import Verdict
    from solver.status import Status

    if outcome.status is Status.INVALID:
        return BAD_INPUT
    if outcome.status is not Status.SOLVED:
        return NO_OPERATING_POINT
    return FAILS if any(f.verdict is Verdict.FAILS for f in outcome.findings) else SOLVED


PLAIN = str.maketrans(
    {"−": "-", "–": "-", "\u202f": " ", "²": "2", "Ω": "ohm", "µ": "u", "√": "sqrt ", "×": "x"}
)


def say(text: str) -> None:
    """Print, whatever the terminal can show."""
    sys.stdout.write(_showable(text, sys.stdout.encoding))


def complain(text: str) -> None:
    """One line on stderr."""
    sys.stderr.write(_showable(text + "\n", sys.stderr.encoding))


def _showable(text: str, encoding: str | None) -> str:
    encoding = encoding or "ascii"
    try:
        text.encode(encoding)
    except UnicodeEncodeError:
        return text.translate(PLAIN).encode(encoding, "replace").decode(encoding)
    return text


COMMANDS = {
    "results": ("Print node, branch and whole-layout results of a drawing.", _results),
    "sheet": ("Write the results sheet of a drawing.", _sheet),
    "year": ("Solve a drawing through a year of its profiles: energies, losses, extremes, hours.", _year),
    "picture": ("Draw the diagram of a drawing with its results.", _picture),
}
