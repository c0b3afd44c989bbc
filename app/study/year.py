"""A year of a drawing: its profiles as one long batch, kept as energies and extremes."""

from collections.abc import Callable
from dataclasses import replace
from time import perf_counter
from typing import Any

import numpy as np
from msgspec.structs import replace as changed
from numpy.typing import NDArray

from app.model.drawing import Case, Drawing
from app.model.following import followed, in_use
from app.model.kinds import Motor
from app.study.changers import Moving, moving_of, stood_still
from app.study.collapse import collapse_of
from app.study.layout import Layout, lay_out
from app.study.outcome import Finding, Verdict
from app.study.rings import trouble_finding
from app.study.rows import Rows, rows_of
from app.study.structure import structure_findings
from app.study.words import list_of
from app.study.year_findings import hunting_findings
from app.study.year_outcome import YearOutcome
from app.study.year_points import Points, points_of, when
from app.study.year_results import blank_year, year_outcome
from app.study.year_tally import Tally
from app.study.zones import Zones, zones_of
from solver import Network, Trouble, grow, solve
from solver.series import solve_series

Progress = Callable[[int, int], bool]
VALUES = 1 << 16  # complex values of node volts in a block: a stop is heard soon on large layouts too
BLOCKS = 24  # at least so many blocks, so that progress is told and a stop is heard
MOST = 1 << 23  # complex values of what loads draw that are held at once


def run_year(drawing: Drawing, progress: Progress | None = None) -> YearOutcome:
    """Solve a drawing through a year and judge what comes out.

    W = Σ P · h

    No loading case is used: loads, motors and generators run at what the drawing states times their profile,
    supplies hold what the drawing states times theirs, and what follows no profile stays as it is. Whatever
    steps by itself comes to rest in each point anew, as in a loading case.

    drawing : the drawing; its values are taken as checked by the model
    progress : called after each block with points done and points in all; stops where it says False

    Returns : YearOutcome with a row for every element; no figures where the layout bars a solution
    Source : see solver
    """
    clock = [perf_counter()]
    drawing = changed(drawing, cases=(Case(name="The year"),))
    layout = lay_out(drawing)
    zones = zones_of(drawing, layout)
    found = structure_findings(drawing, layout, zones) + _starting(drawing)
    try:
        points = points_of(drawing)
    except ValueError as error:
        found.append(Finding("profiles", Verdict.BLOCKS, (), str(error)))
        return blank_year(drawing, layout, zones, found)
    if not layout.supplies or any(f.verdict is Verdict.BLOCKS for f in found):
        return blank_year(drawing, layout, zones, found)
    rows = rows_of(drawing, layout, zones)
    layout.forest = layout.forest or grow(rows.network)
    if isinstance(layout.forest, Trouble):
        found.insert(0, trouble_finding(layout, rows, layout.forest))
        return blank_year(drawing, layout, zones, found)
    moving = moving_of(layout, zones, rows)
    tally = Tally(layout, zones, rows, drawing.limits, points, moving)
    size = max(1, rows.network.node_count * rows.network.conductors)
    block = max(16, min(VALUES // size, -(-points.count // BLOCKS)))
    stretch = max(block, MOST // max(1, rows.network.load_node.size))
    done, going = 0, True
    while going and done < points.count:
        chosen = np.arange(done, min(done + stretch, points.count))

        def told(part: int, _whole: int, first: int = done) -> bool:
            return progress is None or progress(first + part, points.count)

        def watch(part: Any, solution: Any, rested: Any, first: int = done) -> None:
            tally.add(first + part, solution, rested)

        series = solve_series(
            through(drawing, layout, rows, points, chosen),
            points.hours[chosen],
            told,
            block,
            regulators=moving.regulators,
            generators=stood_still(moving.holdings, _running(drawing, layout, moving, points, chosen)),
            watch=watch,
        )
        going = series.done == chosen.size
        done += series.done
    seconds = {"solve": perf_counter() - clock[0]}
    if tally.unsolved:
        found += hunting_findings(drawing, layout, tally.sum["hunting"])
        found += [] if moving else _collapse(drawing, layout, zones, rows, points, list(tally.unsolved))
    outcome = year_outcome(drawing, layout, zones, tally, done, found)
    return replace(outcome, seconds=seconds | {"total": perf_counter() - clock[0]})


def through(
    drawing: Drawing, layout: Layout, rows: Rows, points: Points, chosen: NDArray[np.intp]
) -> Network:
    """The network at some points of the year: what is stated times what the profiles say.

    drawing : the drawing, whose elements follow profiles
    layout : its graph
    rows : of the drawing with no loading case, one column
    points : of the year
    chosen : (chosen,) int, points of them

    Returns : Network of as many operating points
    Source : common practice, no source
    """
    network = rows.network

    def factor(attachments: NDArray[np.intp]) -> NDArray[np.float64]:
        names = [followed(drawing, layout.attachments[i]) for i in attachments]
        even = np.full(chosen.size, 100.0)
        each = [points.values[name][chosen] if name else even for name in names]
        return np.array(each, dtype=np.float64).reshape(len(names), 1, chosen.size) / 100

    return replace(
        network,
        load_power=network.load_power * factor(rows.loads),
        source_voltage=network.source_voltage * factor(rows.sources),
    )


def _running(
    drawing: Drawing, layout: Layout, moving: Moving, points: Points, chosen: NDArray[np.intp]
) -> NDArray[np.bool_]:
    """(generator, chosen) whether it runs: not at 0 % of its profile."""
    names = [followed(drawing, layout.attachments[row]) for row in moving.generators]
    found = [points.values[name][chosen] != 0 if name else np.ones(chosen.size, bool) for name in names]
    return np.array(found, dtype=bool).reshape(len(found), chosen.size)


def _collapse(
    drawing: Drawing, layout: Layout, zones: Zones, rows: Rows, points: Points, unsolved: list[int]
) -> list[Finding]:
    """What bars the heaviest of the points that have no answer."""
    wanted = through(drawing, layout, rows, points, np.array(unsolved)).load_power.real.sum(axis=(0, 1))
    point = unsolved[int(np.argmax(np.broadcast_to(wanted, len(unsolved))))]
    one = replace(rows, network=through(drawing, layout, rows, points, np.array([point])))
    solution = solve(one.network, forest=layout.forest)
    if solution.solved:
        return []
    said = collapse_of(drawing, layout, zones, one, solution).finding
    words = f"Heaviest of the hours without an answer is {when(float(points.begin[point]), points.year_h)}. "
    return [Finding(said.check, Verdict.FAILS, said.ids, words + said.sentence)]


def follows_profiles(drawing: Drawing) -> bool:
    """True where something follows a profile, so that the drawing has a year to speak of.

    drawing : the drawing

    Returns : bool
    """
    return bool(in_use(drawing))


def _starting(drawing: Drawing) -> list[Finding]:
    """Motors drawn as starting cannot do so all year."""
    ids = tuple(i for i, e in drawing.elements.items() if isinstance(e, Motor) and e.state == "starting")
    if not ids:
        return []
    verb = "is" if len(ids) == 1 else "are"
    words = f"{list_of(drawing, ids)} {verb} drawn as starting, allowed in a year is running or off."
    return [Finding("motor state", Verdict.BLOCKS, ids, words)]
