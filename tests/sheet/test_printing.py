"""How a workbook prints: few pages, nothing cut, heads on every page of a long table."""

from collections.abc import Callable
from typing import Any

import msgspec
import openpyxl
from sheet_layouts import NIGHT, PEAK, pair, two_wire

Reader = Callable[..., Any]


def test_it_prints_as_a_handed_over_sheet(workbook: Reader) -> None:
    sheet = workbook(pair())["Busbars"]
    assert sheet.page_setup.orientation == "landscape"
    assert sheet.page_setup.paperSize == "9" or sheet.page_setup.paperSize == 9
    assert sheet.page_setup.fitToWidth in (None, 1)
    assert sheet.page_setup.fitToHeight in (None, 1)
    assert sheet.sheet_properties.pageSetUpPr.fitToPage
    assert sheet.print_title_rows == "$3:$3"
    assert sheet.freeze_panes == "C4"
    assert "Fernhollow && Sons, rev B" in sheet.oddFooter.left.text
    assert "&P" in sheet.oddFooter.right.text
    assert int(workbook(two_wire())["Busbars"].page_setup.paperSize) == 1


def test_what_fits_a_page_together_shares_a_worksheet(workbook: Reader) -> None:
    book = workbook(pair(PEAK, NIGHT))
    titles = [c.value for c in book["Cables"]["A"] if str(c.value).startswith("Cables and overhead")]
    assert [t.split(": ")[1] for t in titles] == ["worst of all cases", "every case", "as stated"]
    assert book["Cables"].page_setup.fitToHeight in (None, 1)
    every = [f"Case {n}" for n in range(40)]
    big = workbook(pair(*(msgspec.structs.replace(NIGHT, name=name) for name in every)))
    assert {"Cables", "Cables, cases", "Cable data", "Busbars, cases", "Losses"} <= set(big.sheetnames)
    assert big["Cables, cases"].page_setup.fitToHeight == 0
    assert big["Cables, cases"].freeze_panes == "E4"
    assert big["Cables, cases"].print_title_rows == "$3:$3"


def test_nothing_is_printed_beside_the_tables_and_notes_stay_within(workbook: Reader) -> None:
    for sheet in workbook(pair()):
        last = max(c.column for row in sheet.iter_rows() for c in row if c.value is not None)
        area = sheet.print_area.split("!")[-1].replace("$", "")
        assert openpyxl.utils.range_boundaries(area)[2] >= last
        notes = [r[0] for r in sheet.iter_rows() if r[0].font.i and len(str(r[0].value)) > 60]
        assert all(note.alignment.wrap_text for note in notes)
