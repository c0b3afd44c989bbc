"""What the highest fault current does to a cable: how long it bears it, by its section."""

from app.model.kinds import Cable
from app.sheet.lines import KEY as LINES
from app.sheet.subject import FROM_TO, IDENTITY, Subject
from app.sheet.table import Cell, Cells, Column, Origin, Ref, SheetTable, table
from app.study.fault_basis import CAUTION
from app.study.fault_findings import greatest, to_earth

KEY = "withstand"
PVC_DEGC = 75.0  # a hot conductor up to here is of PVC, above it of XLPE
WIDE_MM2 = 300.0  # from here on PVC is allowed less
K = {  # A·√s/mm², from the highest operating temperature; IEC 60364-4-43, table 43A, from memory
    ("Cu", "XLPE"): (143.0, 143.0),
    ("Al", "XLPE"): (94.0, 94.0),
    ("Cu", "PVC"): (115.0, 103.0),
    ("Al", "PVC"): (76.0, 68.0),
}
COLUMNS = (
    *IDENTITY, *FROM_TO,
    Column("area", "Section, one run", "mm²", digits=0, width=9),
    Column("k", "k", "A·√s/mm²", digits=0, width=10),
    Column("second", "Bears for 1 s", "kA", digits=2, width=9),
    Column("ik", "Ik max at its ends", "kA", digits=2, width=10),
    Column("time", "Bears that for", "s", digits=2, width=9),
)  # fmt: skip
NOTE = (
    "t = (k·S/Ik)² of one run, phase conductors, all heat kept: careful above 5 s. k of IEC 60364-4-43 "
    "(from memory), XLPE unless the hot conductor is stated at 75 °C or less. What clears the fault must be "
    f"quicker. {CAUTION}"
)


def withstand_tables(subject: Subject) -> list[SheetTable]:
    """Every cable of known section between nodes whose fault currents are."""
    rows = {
        id: cells
        for id, e in subject.drawing.elements.items()
        if isinstance(e, Cable) and (cells := _cable(subject, id, e))
    }
    return [table(KEY, "Withstand", "Cables in the highest fault", COLUMNS, rows, note=NOTE)] if rows else []


def _cable(subject: Subject, id: str, cable: Cable) -> Cells:
    faults = subject.outcome.faults
    if faults is None or not cable.area_mm2:
        return {}
    ends = [faults.at(node) for node in (cable.start, cable.end)]
    most = max((max(greatest(end)[1], to_earth(end)) for end in ends if end.live), default=0.0)
    if not most > 0:
        return {}
    k = k_of(cable)
    second = k * cable.area_mm2 / 1e3
    return (
        subject.identity(id)
        | subject.ends(id, cable)
        | {
            "area": Cell(cable.area_mm2, "{of}", {"of": Ref("area", LINES, id)}),
            "k": Cell(k, origin=Origin.ASSUMED if cable.fault_degc is None else Origin.SOLVED),
            "second": Cell(second, "{k}*{area}/1000"),
            "ik": Cell(most),
            "time": Cell((second / most) ** 2, "({second}/{ik})^2"),
        }
    )


def k_of(cable: Cable) -> float:
    """The k of a cable by its metal and by what its hot conductor tells of its insulation."""
    kind = "PVC" if cable.fault_degc is not None and cable.fault_degc <= PVC_DEGC else "XLPE"
    return K[cable.conductor, kind][(cable.area_mm2 or 0.0) > WIDE_MM2]
