"""`farend [FILE]` opens the window; `farend results|year|sheet|picture FILE` works without a screen."""

import argparse
import gc
import os
import sys
from pathlib import Path

from app.commands import BAD_INPUT, COMMANDS, EXIT_CODES, Parser, command, complain, say, version
from app.screen import why_no_screen

HEADLESS = """without a window:
  farend results FILE [--json]                   print the results
  farend year FILE [--json] [-o OUT.csv]         a year of its profiles: energies, extremes, hours
  farend sheet FILE -o OUT.xlsx|.csv             write the results sheet
  farend picture FILE -o OUT.svg|.png|.pdf       draw the diagram with its results

A file that is called like a command opens as ./results.

"""


class Version(argparse.Action):
    """Looks the version up only where it is asked for."""

    def __call__(self, parser: argparse.ArgumentParser, *_: object) -> None:
        say(f"farend {version()}\n")
        parser.exit()


def main(arguments: list[str] | None = None) -> int:
    """The entry point: gives the exit code."""
    given = sys.argv[1:] if arguments is None else arguments
    try:
        code = _dispatch(given)
        sys.stdout.flush()
        return code
    except BrokenPipeError:  # the reader has seen enough
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except KeyboardInterrupt:
        return 130


def _dispatch(given: list[str]) -> int:
    if given and given[0] in COMMANDS:
        return command(given[0], given[1:])
    parser = Parser(
        prog="farend",
        description="A drawing board for small electricity distribution layouts. "
        "Results are a design aid; local codes and a licensed practitioner decide.",
        epilog=HEADLESS + EXIT_CODES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("file", metavar="FILE", nargs="?", help="a drawing (.farend) to open in the window")
    parser.add_argument("--version", action=Version, nargs=0, help="show program's version number and exit")
    return _open(parser.parse_args(given).file)


def _open(path: str | None) -> int:
    why = why_no_screen()
    if why is not None:
        complain(
            f"farend: no window can be opened here ({why}); without one use farend results FILE, "
            "farend sheet FILE -o OUT.xlsx or farend picture FILE -o OUT.svg."
        )
        return BAD_INPUT
    gc.disable()  # what a start loads stays: `open_window` counts it as kept and sweeps again from there
    from app.window import open_window  # Qt is loaded only for the window

    return int(open_window(None if path is None else Path(path)))


if __name__ == "__main__":
    sys.exit(main())
