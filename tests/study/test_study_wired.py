"""Drawings with phases and neutral against an independent four-wire solution of the same drawings."""

import numpy as np
import pytest
from msgspec.structs import replace
from study_wired import N, Wired

from app.model.drawing import Drawing, Limits
from app.model.kinds import (
    Busbar,
    Cable,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    OverheadLine,
    Supply,
    Switch,
    Transformer,
)
from app.study import run
from app.study.outcome import Verdict
from solver import Status

NEAR = 1e-8
GROUPS = ["Dyn11", "Dyn5", "YNyn0", "Yzn11", "Dzn6"]


def lv(start, end, length=200.0, phases="all", **more):
    return Cable(
        start=start, end=end, length_m=length, phases=phases, resistance_ohm_per_km=0.32,
        reactance_ohm_per_km=0.075, **more,
    )  # fmt: skip


def unit(start, end, **more):
    named = {"rating_kva": 100.0, "v1_v": 11000.0, "v2_v": 400.0, "load_loss_w": 1250.0, "tap": -1}
    return Transformer(start=start, end=end, **{**named, "no_load_loss_w": 130.0, **more})


def drawn(*, frequency=50.0, **elements):
    nodes = {e.start for e in elements.values() if hasattr(e, "start")}
    nodes |= {e.end for e in elements.values() if hasattr(e, "end")}
    nodes |= {e.node for e in elements.values() if hasattr(e, "node")}
    made = {id: Joint() for id in sorted(nodes) if id not in elements}
    return Drawing(frequency_hz=frequency, limits=Limits(low_percent=50.0), elements={**made, **elements})


def street(**more):
    """A 400 V street behind a transformer, with laterals on single phases."""
    named = {
        "S": Supply(node="H", nominal_v=11000.0, held_percent=101.0, angle_deg=12.0),
        "T": unit("H", "B"),
        "C1": lv("B", "M", side_by_side=2),
        "C2": lv("M", "X", phases="B"),
        "C3": lv("X", "Y", neutral_resistance_ohm_per_km=0.64, neutral_reactance_ohm_per_km=0.08),
        "C4": lv("M", "Z", phases="CA", temperature_degc=40.0),
        "L1": Load(node="M", demand_kva=24.0, share_a_percent=50.0, share_b_percent=20.0),
        "L2": Load(node="X", demand_kva=6.0, power_factor=0.9),
        "L3": Load(node="Y", demand_kw=3.0, demand_kva=None, constant_current_percent=40.0),
        "L4": Load(node="Z", demand_kva=5.0, phases="CA", constant_impedance_percent=100.0),
        "L5": Load(node="Z", demand_kva=4.0),
        "M1": Motor(node="M", rated_kw=7.5),
    }
    return drawn(**{**named, **more})


def camp():
    """Poles with a neutral earthed along, single-phase and centre-tapped units, an open delta; 60 Hz."""
    pole = {
        "resistance_ohm_per_km": 0.5, "reactance_ohm_per_km": 0.4, "zero_resistance_ohm_per_km": 0.9,
        "zero_reactance_ohm_per_km": 1.6, "neutral": "earthed along", "capacitance_uf_per_km": 0.01,
    }  # fmt: skip
    small = {"rating_kva": 25.0, "load_loss_w": 300.0, "uk_percent": 2.5, "vector_group": "Ii0", "tap": 0}
    quiet = {"no_load_loss_w": 0.0, "no_load_current_percent": 0.0}
    return drawn(
        frequency=60.0,
        S=Supply(node="H", nominal_v=12470.0),
        O1=OverheadLine(start="H", end="P", length_m=3000.0, **pole),
        O2=OverheadLine(start="P", end="Q", length_m=1500.0, phases="C", **pole),
        O3=OverheadLine(start="P", end="R", length_m=800.0, phases="AB", **pole),
        T1=unit("Q", "Q1", v1_v=7200.0, v2_v=240.0, build="centre-tapped", **{**small, **quiet}),
        T2=unit("R", "R1", v1_v=7200.0, v2_v=120.0, phases="B", **{**small, **quiet}),
        T3=unit("R", "R2", v1_v=12470.0, v2_v=240.0, phases="AB", **{**small, **quiet}),
        T4=unit("P", "P1", v1_v=12470.0, v2_v=480.0, build="open delta", **{**small, **quiet}),
        T5=unit("P", "P2", v1_v=12470.0, v2_v=208.0, vector_group="Dyn1", earth_2_ohm=0.5),
        D1=lv("Q1", "Q2", 60.0),
        D2=lv("R1", "R3", 40.0),
        D3=lv("P1", "P3", 90.0, neutral="none"),
        D4=lv("P2", "P4", 50.0),
        L1=Load(node="Q2", demand_kva=6.0, phases="A"),
        L2=Load(node="Q2", demand_kva=3.0, phases="B", constant_impedance_percent=50.0),
        L3=Load(node="Q2", demand_kva=8.0, phases="AB"),
        L4=Load(node="Q1", demand_kva=2.0),
        L5=Load(node="R3", demand_kva=4.0),
        L6=Load(node="R2", demand_kva=9.0),
        L7=Load(node="P3", demand_kva=12.0),
        L8=Load(node="P3", demand_kva=3.0, phases="BC"),
        L9=Load(node="P4", demand_kva=9.0, share_a_percent=70.0, share_b_percent=10.0),
        K1=Capacitor(node="P4", rating_kvar=3.0, connection="delta"),
        K2=Capacitor(node="P4", rating_kvar=1.0, phases="A"),
        G1=Generator(node="P4", output_kw=4.0, phases="B"),
    )


def lost():
    """A neutral that ends before the loads, which are impedances, so that an answer exists."""
    alone = {"constant_impedance_percent": 100.0}
    return drawn(
        S=Supply(node="B"),
        C1=lv("B", "M", neutral="none"),
        C2=lv("M", "X"),
        L1=Load(node="X", demand_kva=9.0, phases="A", **alone),
        L2=Load(node="X", demand_kva=3.0, phases="B", **alone),
        L3=Load(node="M", demand_kva=2.0, phases="C", **alone),
    )


def one_wire():
    """An isolating unit between two phases, fifteen kilometres of one wire, the earth as the way back."""
    single = {"vector_group": "Ii0", "tap": 0, "no_load_loss_w": 0.0, "no_load_current_percent": 0.0}
    return drawn(
        S=Supply(node="H", nominal_v=22000.0),
        T1=unit("H", "I", v1_v=22000.0, v2_v=12700.0, phases="BC", **single),
        O1=OverheadLine(
            start="I", end="E", length_m=15000.0, resistance_ohm_per_km=0.868, reactance_ohm_per_km=0.4,
            zero_resistance_ohm_per_km=1.0, zero_reactance_ohm_per_km=1.4, capacitance_uf_per_km=0.006,
            neutral="earthed along",
        ),
        T2=unit("E", "F", v1_v=12700.0, v2_v=240.0, rating_kva=25.0, **{**single, "load_loss_w": 300.0}),
        C1=lv("F", "G", 50.0),
        L1=Load(node="G", demand_kva=15.0),
        L2=Load(node="E", demand_kva=5.0),
    )  # fmt: skip


def kiln(build, group):
    """Impedances between the phases of a side that nothing earths: no current tells its volts to earth."""
    quiet = {"no_load_loss_w": 0.0, "no_load_current_percent": 0.0, "tap": 0}
    uneven = {"connection": "delta", "share_a_percent": 50.0, "share_b_percent": 30.0}
    return drawn(
        S=Supply(node="H", nominal_v=12470.0),
        T=unit("H", "P", v1_v=12470.0, v2_v=240.0, build=build, vector_group=group, **quiet),
        L=Load(node="P", demand_kva=20.0, constant_impedance_percent=100.0, **uneven),
        K=Capacitor(node="P", rating_kvar=4.0, phases="BC"),
        M=Motor(node="P", rated_kw=15.0),
    )


LAYOUTS = {
    "two wires, the neutral thinner": lambda: drawn(
        S=Supply(node="H", nominal_v=230.0, wires="two-wire"),
        C1=lv("H", "K", neutral_resistance_ohm_per_km=0.64), C2=lv("K", "M", 50.0),
        L1=Load(node="K", demand_kva=6.0), L2=Load(node="M", demand_kva=2.0, constant_current_percent=100.0),
    ),
    "impedances behind an open delta": lambda: kiln("open delta", "Ii0"),
    "impedances behind a delta": lambda: kiln("as its group", "Dd0"),
    "one wire and the earth": one_wire,
    "street": street,
    "camp": camp,
    "a neutral lost": lost,
    "earthed again": lambda: street(M=Busbar(earth_ohm=5.0), Y=Joint(earth_ohm=20.0)),
    "star point through an impedance": lambda: street(T=unit("H", "B", earth_2_ohm=3.0)),
    "a neutral led out and not earthed": lambda: street(T=unit("H", "B", earth_2_ohm=1e6)),
    "the same, earthed at the far end": lambda: street(
        T=unit("H", "B", earth_2_ohm=1e6), Y=Joint(earth_ohm=5.0)
    ),
    "Yyn0, through its core": lambda: street(T=unit("H", "B", vector_group="Yyn0")),
    "YNyn0": lambda: street(T=unit("H", "B", vector_group="YNyn0")),
    "YNd1": lambda: street(
        T=unit("H", "B", vector_group="YNd1"),
        L2=Load(node="X", demand_kva=4.0, phases="AB", constant_impedance_percent=100.0),
        C1=lv("B", "M", neutral="none"), C2=lv("M", "X"), C3=lv("X", "Y", neutral="none"),
        C4=lv("M", "Z", neutral="none"), L1=Load(node="M", demand_kva=20.0, phases="AB"),
        L3=Load(node="Y", demand_kva=5.0, phases="BC"), L5=Load(node="Z", demand_kva=3.0),
    ),
    "Dzn0": lambda: street(T=unit("H", "B", vector_group="Dzn0", no_load_loss_w=90.0, z0_ratio=1.0)),
    "Yzn5": lambda: street(T=unit("H", "B", vector_group="Yzn5", z0_ratio=1.0)),
    "Dyn5, tapped below": lambda: street(T=unit("H", "B", vector_group="Dyn5", tapped="winding 2", tap=2)),
    "through a switch": lambda: street(C2=lv("W", "X", phases="B"), W1=Switch(start="M", end="W")),
    "split-phase supply": lambda: drawn(
        S=Supply(node="B", nominal_v=240.0, wires="split-phase"),
        C1=lv("B", "X", 80.0), C2=lv("X", "Y", 30.0, phases="B"),
        L1=Load(node="X", demand_kva=6.0), L2=Load(node="X", demand_kva=4.0, phases="A"),
        L3=Load(node="Y", demand_kva=2.0), L4=Load(node="X", demand_kva=3.0, phases="AB"),
    ),
}  # fmt: skip


def compare(drawing):
    outcome = run(drawing)
    assert outcome.status is Status.SOLVED, outcome.sentence
    known = Wired(drawing)
    volts, found = known.volts()
    nodes, branches = outcome.wires.nodes, outcome.wires.branches
    for id, row in known.row.items():
        told, v = nodes.at(id), volts[row]
        phases = known.at[id][0]
        assert told.phases == "".join(sorted(phases))
        for i, letter in enumerate("ABC"):
            size, angle = (getattr(told, f"{letter.lower()}_{what}") for what in ("v", "deg"))
            got = size * np.exp(1j * np.radians(angle))
            here = letter in phases
            if told.against == "next phase":
                here, want = here and "BCA"[i] in phases, v[i] - v[(i + 1) % 3]
            else:
                want = v[i] - (v[N] if told.against == "neutral" else 0)
            assert got == pytest.approx(want, rel=NEAR) if here else np.isnan(got), (id, letter)
        if told.against == "neutral" and np.isnan(told.neutral_v):
            assert any(id in f.ids for f in outcome.findings if f.check == "no earth reference"), id
        elif told.against == "neutral":
            assert told.neutral_v == pytest.approx(abs(v[N]), abs=NEAR * told.base_v)
    for id, row in known.line_row.items():
        told = branches.at(id)
        for c in known.layout.lines[row][2]:
            want = abs(found[("line", row, c)])
            charged = len(known.layout.lines[row]) > 4 and np.any(known.layout.lines[row][4])
            if not charged:
                assert getattr(told, f"{'abcn'[c]}_a") == pytest.approx(want, rel=1e-6, abs=1e-6), (id, c)
    whole = sum(
        complex(v) * np.conj(found[("source", s, i)])
        for s, (_, held) in enumerate(known.layout.sources)
        for i, v in enumerate(held)
    )
    assert outcome.balance.supply_kw[0] == pytest.approx(whole.real / 1e3, rel=1e-7)
    assert outcome.balance.supply_kvar[0] == pytest.approx(whole.imag / 1e3, rel=1e-7, abs=1e-6)
    assert outcome.balance.closure[0] < 1e-9
    return outcome


@pytest.mark.parametrize("name", LAYOUTS)
def test_every_volt_and_ampere_agrees_with_the_nodal_solution(name):
    compare(LAYOUTS[name]())


@pytest.mark.parametrize("seed", range(8))
def test_random_streets_agree_with_the_nodal_solution(seed):
    made = np.random.default_rng(seed)
    phases, letters = ["A", "B", "C", "AB", "BC", "CA", "all"], ["A", "B", "C"]
    elements = {
        "S": Supply(node="H", nominal_v=11000.0, held_percent=made.uniform(97, 104)),
        "T": unit("H", "N0", vector_group=str(made.choice(GROUPS)), z0_ratio=1.0),
    }
    carries = {"N0": "ABC"}
    for n in range(1, 7):
        above = f"N{made.integers(n)}"
        here = carries[above]
        chosen = str(made.choice([p for p in phases if p == "all" or set(p) <= set(here)]))
        elements[f"C{n}"] = lv(above, f"N{n}", made.uniform(20, 150), chosen)
        carries[f"N{n}"] = here if chosen == "all" else chosen
        hung = str(made.choice([p for p in [*letters, "all"] if p == "all" or p in carries[f"N{n}"]]))
        shares = {
            "constant_current_percent": made.uniform(0, 50),
            "constant_impedance_percent": made.uniform(0, 50),
        }
        elements[f"L{n}"] = Load(node=f"N{n}", demand_kva=made.uniform(1, 6), phases=hung, **shares)
        if made.random() < 0.3:
            elements[f"K{n}"] = Capacitor(node=f"N{n}", rating_kvar=made.uniform(0.5, 3), phases=hung)
        if made.random() < 0.3:
            elements[f"N{n}"] = Joint(earth_ohm=made.uniform(2, 50))
    elements["L0"] = Load(node="N0", demand_kva=1.0, phases="A")  # so that phases are never alike
    compare(drawn(**elements))


def test_alike_phases_stay_on_one_conductor_and_say_the_same_as_four():
    alike = street(
        C2=lv("M", "X"), C4=lv("M", "Z"), L1=Load(node="M", demand_kva=24.0),
        L2=Load(node="X", demand_kva=6.0), L3=Load(node="Y", demand_kva=3.0),
        L4=Load(node="Z", demand_kva=5.0, connection="delta"),
    )  # fmt: skip
    one = run(alike)
    assert one.wires is None
    nothing = {"L9": Load(node="M", demand_kva=0.0, phases="A")}
    four = run(replace(alike, elements={**alike.elements, **nothing}))
    assert four.wires is not None
    for table in ("nodes", "branches"):
        first, second = getattr(one, table), getattr(four, table)
        for name, column in first.columns.items():
            assert second.column(name) == pytest.approx(column, rel=1e-7, abs=1e-7, nan_ok=True), name


def moved(drawing, turn):
    """Every phase letter moved on."""

    def turned(element):
        letters = getattr(element, "phases", "all")
        if letters == "all":
            return element
        new = "".join("ABC"["ABC".index(p) - 3 + turn] for p in letters)
        return replace(element, phases=new)

    return replace(drawing, elements={id: turned(e) for id, e in drawing.elements.items()})


def test_moving_every_letter_on_moves_the_figures_on():
    base = street(L1=Load(node="M", demand_kva=24.0))
    first, second = run(base), run(moved(base, 1))
    assert second.nodes.column("percent") == pytest.approx(first.nodes.column("percent"), rel=1e-9)
    for a, b in zip("abc", "bca", strict=True):
        assert second.wires.nodes.column(f"{b}_v") == pytest.approx(
            first.wires.nodes.column(f"{a}_v"), rel=1e-9, nan_ok=True
        )


def checks(drawing):
    return {f.check: f for f in run(drawing).findings}


def test_what_does_not_reach_is_barred_by_name():
    found = checks(street(C3=lv("X", "Y", phases="A")))["no such phase"]
    assert found.verdict is Verdict.BLOCKS
    assert found.sentence == (
        "C3 is drawn on phase A, but only B reaches X. Allowed are phases that reach it, or all."
    )
    found = checks(street(L2=Load(node="X", phases="C")))["no such phase"]
    assert found.ids == ("L2", "X")
    found = checks(street(C2=lv("M", "X", phases="B", neutral="none"), C3=lv("X", "Y", neutral="none")))
    assert found["no neutral"].verdict is Verdict.BLOCKS
    assert found["no neutral"].sentence.startswith(
        "L3 hangs between a phase and the neutral, but no neutral is led to Y. Allowed is a line whose"
    )


def test_a_lost_neutral_fails_and_names_what_hangs_on_it():
    drawing = lost()
    found = checks(drawing)["no neutral"]
    assert found.verdict is Verdict.FAILS
    assert {"L1", "L2", "L3"} <= set(found.ids)
    wires = run(drawing).wires.nodes
    assert wires.at("X").a_v < 0.6 * 230.94 < 1.2 * 230.94 < wires.at("X").b_v
    assert wires.at("X").neutral_v > 50


def test_unbalance_and_neutral_volts_are_judged_where_limits_are_set():
    base = street()
    assert not {"unbalance", "neutral volts"} & checks(base).keys()
    limits = Limits(low_percent=50.0, unbalance_percent=0.1, unbalance_name="own", neutral_v=0.5)
    found = checks(replace(base, limits=limits))
    assert found["unbalance"].verdict is Verdict.FAILS
    assert found["unbalance"].sentence.endswith("the most allowed is 0.1 % (own).")
    assert found["neutral volts"].unit == "V"
    assert " V to earth; the most allowed is 0.5 V" in found["neutral volts"].sentence
