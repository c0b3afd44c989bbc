"""A year as plain data for other programs, and point by point as lines of text."""

import csv
import io
from dataclasses import fields
from typing import Any

from app.model.drawing import Drawing
from app.study.cautions import CAUTIONS
from app.study.record import finding_record, plain_value, table_record
from app.study.year_outcome import YearOutcome
from app.study.year_points import date

COURSE = (
    ("supply_kw", "supplies_kw"),
    ("generation_kw", "generators_kw"),
    ("load_kw", "loads_kw"),
    ("line_kw", "lines_kw"),
    ("copper_kw", "copper_kw"),
    ("iron_kw", "iron_kw"),
)


def year_record(drawing: Drawing, year: YearOutcome, version: str) -> dict[str, Any]:
    """Everything a year says except how long it took and what each point was, for that see `course_text`.

    drawing : the drawing, for names and kinds
    year : what solving it gave
    version : of the program

    Returns : dict for json; hours that tell when are counted from 1 January 00:00, None for no figure
    """
    return {
        "farend": version,
        "project": drawing.project.title,
        "revision": drawing.project.revision,
        "frequency_hz": drawing.frequency_hz,
        "status": year.status.name.lower(),
        "sentence": year.sentence,
        "basis": list(year.basis),
        "year_h": plain_value(year.points.year_h),
        "points": year.points.count,
        "solved_h": plain_value(year.solved_h),
        "price_per_kwh": plain_value(year.price),
        "money": year.money,
        "balance": {f.name: plain_value(getattr(year.balance, f.name)) for f in fields(year.balance)},
        "nodes": table_record(drawing, year.nodes),
        "branches": table_record(drawing, year.branches),
        "attachments": table_record(drawing, year.attachments),
        "gaps": [
            {
                "from_h": plain_value(float(year.points.begin[gap.first])),
                "hours": plain_value(gap.hours),
                "status": gap.status.name.lower(),
            }
            for gap in year.gaps
        ],
        "findings": [finding_record(f) for f in year.findings],
        "cautions": list(CAUTIONS),
    }


def course_text(year: YearOutcome) -> str:
    """The year point by point as comma-separated text: when, how long, powers, the worst node and branch.

    year : a year with figures

    Returns : lines, the first of them heads with units
    """
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    heads = ["begin_h", "begin", "hours", *(head for _, head in COURSE), "lowest_percent", "lowest_node"]
    writer.writerow([*heads, "highest_percent", "highest_node", "loaded_percent", "loaded_branch"])
    course, points = year.course, year.points
    columns = [getattr(course, name) for name, _ in COURSE]
    worst = (
        (course.lowest_percent, course.lowest_row, year.nodes.ids),
        (course.highest_percent, course.highest_row, year.nodes.ids),
        (course.loaded_percent, course.loaded_row, year.branches.ids),
    )
    for point in range(year.done):
        begin = float(points.begin[point])
        row: list[Any] = [f"{begin:.10g}", date(begin, points.year_h)]
        row += [f"{points.hours[point]:.10g}", *(_figure(column[point]) for column in columns)]
        for value, at, ids in worst:
            row += [_figure(value[point]), ids[at[point]] if at[point] >= 0 else ""]
        writer.writerow(row)
    return out.getvalue()


def _figure(value: float) -> str:
    return "" if value != value else repr(float(value))
