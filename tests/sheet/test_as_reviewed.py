"""What a reviewer of a whole sheet asks for, on the samples."""

import csv
from pathlib import Path

from app.model.drawing import Drawing
from app.model.file import load
from app.sheet import write
from app.study import run

SAMPLES = Path(__file__).parents[2] / "samples"
Rows = dict[str, dict[str, str]]


def place(name: str) -> Drawing:
    return load(SAMPLES / f"{name}.farend")


def files(drawing: Drawing, folder: Path) -> dict[str, Rows]:
    """Every text file of a sheet: its rows by their first cell."""
    found = {}
    for path in write(drawing, run(drawing), folder / "s.csv")[:-1]:
        with path.open(encoding="utf-8-sig", newline="") as lines:
            found[path.stem.removeprefix("s-")] = {next(iter(r.values())): r for r in csv.DictReader(lines)}
    return found


def test_a_tap_is_told_from_the_side_that_the_supply_holds_though_power_runs_back(tmp_path: Path) -> None:
    ring = place("kettlewick_ring")
    outcome = run(ring)
    assert [outcome.fed_winding("T2", case) for case in (0, 1)] == [1, 2]
    assert [outcome.supply_winding("T2", case) for case in (0, 1)] == [1, 1]
    said = files(ring, tmp_path)["settings"]["T2"]["Tap to set"]
    assert said == "tap +2.5 %: 11275/400, lowers winding 2"
