"""Phases and neutral on the sheet, in text and in JSON: a camp with laterals, units of few phases."""

import csv
import json
import math
from pathlib import Path

import openpyxl
import pytest
from wired_layouts import EVENING, MORNING, camp, units

from app.model.drawing import Drawing
from app.model.kinds import Busbar, Joint, Load, Regulator, Supply
from app.printed import printed
from app.sheet import write
from app.study import run
from app.study.outcome import Outcome
from app.study.record import record

Row = dict[str, str]


def files(drawing: Drawing, folder: Path) -> dict[str, dict[str, Row]]:
    """Every text file of a sheet: its rows by their first cell."""
    written = write(drawing, run(drawing), folder / "s.csv")
    found = {}
    for path in written[:-1]:
        with path.open(encoding="utf-8-sig", newline="") as lines:
            found[path.stem.removeprefix("s-")] = {next(iter(r.values())): r for r in csv.DictReader(lines)}
    return found


@pytest.fixture(scope="module")
def told(tmp_path_factory: pytest.TempPathFactory) -> dict[str, dict[str, Row]]:
    return files(camp(), tmp_path_factory.mktemp("camp"))


@pytest.fixture(scope="module")
def solved() -> Outcome:
    return run(camp())


def test_every_phase_of_a_node_has_its_volts(told: dict, solved: Outcome) -> None:
    lodge = told["busbars"]["B3"]
    wires = solved.wires.nodes.at("B3")
    assert [float(lodge[f"U {p} [V]"]) for p in "ABC"] == [wires.a_v, wires.b_v, wires.c_v]
    assert [float(lodge[f"Angle {p} [°]"]) for p in "ABC"] == [wires.a_deg, wires.b_deg, wires.c_deg]
    assert (lodge["Conductors"], lodge["Volts"]) == ("ABCN", "to neutral")
    assert float(lodge["U lowest [% of base]"]) == pytest.approx(wires.a_v / wires.base_v * 100, rel=1e-12)
    assert float(lodge["U lowest, 120 V base [V]"]) == pytest.approx(120 * wires.a_v / wires.base_v)
    assert float(lodge["N to earth [V]"]) == wires.neutral_v > 1
    assert float(lodge["Unbalance V2/V1 [%]"]) == wires.unbalance_percent
    assert float(lodge["Unbalance margin [%]"]) == pytest.approx(2.0 - wires.unbalance_percent)
    pedestal = told["busbars"]["J2"]
    assert (pedestal["Conductors"], pedestal["U B [V]"], pedestal["Verdict"]) == ("AN", "", "FAIL")


def test_every_conductor_of_a_line_has_its_amperes_and_its_share_of_the_loss(
    told: dict, solved: Outcome
) -> None:
    row, wires, state = told["cables-results"]["C1"], solved.wires.branches.at("C1"), solved.branches.at("C1")
    amps = [wires.a_a, wires.b_a, wires.c_a, wires.n_a]
    assert [float(row[f"I {p} [A]"]) for p in "ABCN"] == amps
    assert [float(row[f"Loading {p} [%]"]) for p in "ABCN"] == pytest.approx([a / 205 * 100 for a in amps])
    ohms = 0.100 * 0.450
    assert state.loss_kw * 1e3 == pytest.approx(sum(a**2 for a in amps) * ohms, rel=1e-9)
    assert float(row["Loss [W]"]) == state.loss_kw * 1e3
    assert told["cables"]["C1"]["Neutral"] == "carried"


@pytest.mark.parametrize("drawing", [camp(), camp(EVENING, MORNING)], ids=["one case", "two cases"])
def test_lines_a_reviewer_would_redo_are_formulas_of_their_conductors(
    drawing: Drawing, tmp_path: Path
) -> None:
    path, cases = tmp_path / "s.xlsx", len(drawing.cases)
    write(drawing, run(drawing), path)
    book = openpyxl.load_workbook(path)
    formulas: dict[str, list[str]] = {"C1": [], "C2": []}
    for sheet in book:
        if sheet.title.startswith("Cable"):
            for row in sheet.iter_rows():
                found = [c.value for c in row if str(c.value).startswith("=")]
                formulas.get(row[0].value, []).extend(found)
    backbone, lateral = ([f for f in formulas[i] if "^2" in f] for i in ("C1", "C2"))
    assert [f.count("^2") for f in (*backbone, *lateral)] == [4] * cases + [2] * cases
    assert not any(f.startswith("=3*") for sheet in formulas.values() for f in sheet)


def test_the_transformer_is_judged_by_its_worst_phase(told: dict, solved: Outcome) -> None:
    row, data = told["transformers-results"]["T1"], told["transformers"]["T1"]
    worst = solved.wires.branches.at("C1").a_a
    assert float(row["Loading [%]"]) == pytest.approx(math.sqrt(3) * 208 * worst / 75e3 * 100, rel=1e-9)
    assert (data["Build"], data["Star point 1"], data["Star point 2"]) == ("as its group", "none", "solid")


def test_the_schedule_says_which_load_goes_on_which_phase(told: dict) -> None:
    assert {row["What"]: row["Join to"] for row in told["laterals"].values()} == {
        "C2": "A", "C4": "A", "C5": "B", "C6": "C",
    }  # fmt: skip
    every = told["allocation"]["All"]
    assert [float(every[f"P on {p} [kW]"]) for p in "ABC"] == pytest.approx([14.2, 9.0, 5.0])
    assert float(every["Unbalance of the connected load [%]"]) == pytest.approx((14.2 / 9.4 - 1) * 100)
    cables = {row["What"]: row for row in told["cable-list"].values()}
    assert [cables[f"{t} Al, cable"]["Conductors [of one run]"] for t in ("4/0", "2/0")] == ["4", "2"]


def test_units_of_few_phases_are_told_as_what_they_are(tmp_path: Path) -> None:
    told = files(units(), tmp_path)
    assert told["busbars"]["B3"]["Conductors"] == "L1 L2 N"
    assert {"U A, L1 [V]", "U B, L2 [V]"} <= set(told["busbars"]["B3"])
    assert told["loads"]["L2"]["On"] == "L1 L2"
    orders = {row["What"]: row for row in told["orders"].values()}
    assert "single-phase, winding 2 centre-tapped, 240/120 V" in orders["Pole (T1)"]["Order text"]
    assert orders["Bank (T2)"]["Units"] == "2"
    assert "two single-phase units of 50 kVA for open delta" in orders["Bank (T2)"]["Order text"]
    assert ", single-phase, 12470/230 V" in orders["Hut unit (T3)"]["Order text"]
    kiln = told["allocation"]["Kiln (L4)"]
    shares = [float(kiln[f"P on {name} [kW]"]) / 19.0 for name in ("A, L1", "B, L2", "C")]
    assert shares == pytest.approx([(0.5 + 0.2) / 2, (0.5 + 0.3) / 2, (0.3 + 0.2) / 2])


def test_the_basis_says_how_phases_are_judged(tmp_path: Path) -> None:
    files(camp(), tmp_path)
    basis = (tmp_path / "s.csv").read_text(encoding="utf-8-sig")
    assert "Volts of the lowest and of the highest phase" in basis
    assert "Limits,Unbalance,2.0,%" in basis
    assert "Limits,Neutral to earth,not judged" in basis


def test_a_regulator_of_three_tells_where_each_stands(tmp_path: Path) -> None:
    drawing = camp(
        V1=Regulator(start="B3", end="B4", measures="each"), B4=Busbar(), L7=Load(node="B4", phases="A"),
    )  # fmt: skip
    outcome, row = run(drawing), files(drawing, tmp_path)["regulators"]["V1"]
    wires = outcome.wires.branches.at("V1")
    notches = [wires.a_notch, wires.b_notch, wires.c_notch]
    assert [float(row[f"Stands at {p} [notch]"]) for p in "ABC"] == notches
    assert len(set(notches)) > 1
    assert " ".join(f"{n:+.0f}".replace("-", "\N{MINUS SIGN}") for n in notches) in printed(drawing, outcome)


def test_one_that_would_step_each_phase_stands_alone_where_phases_are_alike(tmp_path: Path) -> None:
    nodes = {"B1": Busbar(), "B2": Busbar()}
    changer = Regulator(start="B1", end="B2", hold_percent=103.0, measures="each")
    hung = {"S1": Supply(node="B1"), "V1": changer, "L1": Load(node="B2")}
    drawing = Drawing(elements={**nodes, **hung})
    row = files(drawing, tmp_path)["regulators"]["V1"]
    assert float(row["Stands at [notch]"]) == run(drawing).branches.at("V1").notch > 0


def test_text_tells_every_conductor(solved: Outcome) -> None:
    lines = printed(camp(), solved).splitlines()
    node = next(line.split() for line in lines if line.startswith("  J2") and "to neutral" in line)
    assert node[:5] == ["J2", "N2", "AN", "to", "neutral"]
    assert node[6] == f"{solved.wires.nodes.at('J2').a_v:.1f}"
    backbone = next(line.split() for line in lines if line.startswith("  C1") and "ABCN" in line)
    wires = solved.wires.branches.at("C1")
    amps = (wires.a_a, wires.b_a, wires.c_a, wires.n_a)
    assert backbone == ["C1", "ABCN", *(f"{a:.1f}" for a in amps), "A"]
    assert any("% lowest" in line for line in lines)


def test_balanced_layouts_are_told_as_ever() -> None:
    elements = {i: e for i, e in camp().elements.items() if i in ("B1", "S1", "T1", "B2", "C1", "B3", "L6")}
    drawing = Drawing(elements=elements, frequency_hz=60.0)
    outcome = run(drawing)
    assert outcome.wires is None
    assert "conductor by conductor" not in printed(drawing, outcome)
    assert not [key for key in record(drawing, outcome, "1") if key.endswith("_wires")]


def test_json_tells_every_conductor(solved: Outcome) -> None:
    told = json.loads(json.dumps(record(camp(), solved, "1"), allow_nan=False))
    assert told["node_wires"]["J2"]["a_v"] == [solved.wires.nodes.at("J2").a_v]
    assert told["node_wires"]["J2"]["b_v"] == [None]
    assert told["node_wires"]["J2"]["a_deg"] == [solved.nodes.at("J2").angle_deg]
    assert told["node_wires"]["J2"]["b_deg"] == [None]
    assert told["node_wires"]["J2"]["against"] == "neutral"
    assert told["branch_wires"]["C1"]["n_a"] == [solved.wires.branches.at("C1").n_a]
    assert told["attachment_wires"]["L4"]["phases"] == "BN"


def test_a_part_that_nothing_feeds_has_no_conductors(tmp_path: Path) -> None:
    drawing = camp(B9=Joint(name="Spare"))
    told = files(drawing, tmp_path)["busbars"]["B9"]
    assert (told["Conductors"], told["U A [V]"], told["Verdict"]) == ("", "", "dead")
    assert "B9" not in printed(drawing, run(drawing)).split("conductor by conductor")[1]
