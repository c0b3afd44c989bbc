"""All tables of the sheet, in the order a reviewer reads them."""

from app.model.drawing import Drawing
from app.sheet.attachments import load_tables, source_tables
from app.sheet.balance import balance_tables
from app.sheet.build import build_tables, switch_tables
from app.sheet.faults import fault_tables
from app.sheet.findings import finding_tables
from app.sheet.head import basis_tables, head_tables, note_tables
from app.sheet.intake import intake_tables
from app.sheet.lines import line_tables
from app.sheet.motors import motor_tables
from app.sheet.nodes import node_tables
from app.sheet.phase_lines import phase_line_tables
from app.sheet.phase_nodes import phase_node_tables
from app.sheet.phase_units import phase_unit_tables
from app.sheet.regulators import regulator_tables
from app.sheet.site import site_tables
from app.sheet.spacing import spacing_tables
from app.sheet.subject import Subject
from app.sheet.table import SheetTable
from app.sheet.transformers import transformer_tables
from app.sheet.withstand import withstand_tables
from app.sheet.year import year_tables
from app.study.outcome import Outcome

PARTS = (
    head_tables, basis_tables, node_tables, line_tables, spacing_tables, transformer_tables,
    regulator_tables, load_tables, motor_tables,
    source_tables, intake_tables, switch_tables, fault_tables, withstand_tables, balance_tables, year_tables,
    finding_tables, build_tables, site_tables, note_tables,
)  # fmt: skip
BY_PHASE = {  # in their place where phases are solved one by one
    node_tables: phase_node_tables, line_tables: phase_line_tables, transformer_tables: phase_unit_tables,
}  # fmt: skip


def tables(drawing: Drawing, outcome: Outcome) -> tuple[SheetTable, ...]:
    """The sheet as tables, the same for a workbook, text files or a page."""
    subject = Subject(drawing, outcome)
    parts = PARTS if outcome.wires is None else [BY_PHASE.get(part, part) for part in PARTS]
    return tuple(t for part in parts for t in part(subject))
