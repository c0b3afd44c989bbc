"""Parts without an earth reference: the reversed delta-star, and agreement with the solver's own search."""

from pathlib import Path

import msgspec
import numpy as np
import pytest
from study_layouts import changed, drawing, line

from app.model import edits, taps
from app.model.fault_data import star_earth_ohm
from app.model.file import load
from app.model.kinds import Busbar, Load, Supply, Switch, Transformer
from app.study import run
from app.study.earthing import earthing_findings, unreferenced
from app.study.graph import arrays_of
from app.study.layout import lay_out
from app.study.outcome import Verdict
from app.study.rows import rows_of
from app.study.zones import zones_of
from solver.forest import grow
from solver.network import Network
from solver.reached import unreferenced as unreferenced_wires
from solver.windings import Winding, stacked, three_phase
from solver.wires import Wires

SAMPLES = Path(__file__).resolve().parents[2] / "samples"
CHECK = "no earth reference"


def lost(made):
    return [f for f in run(made).findings if f.check == CHECK]


def test_a_reversed_delta_star_leaves_the_11_kv_side_without_earth():
    """SCENARIOS 7.1: T1 with its star towards the gatehouse and its delta on the 11 kV cable."""
    made = load(SAMPLES / "fernhollow_pair.farend")
    assert made.elements["T1"].vector_group == "Dyn11"
    assert not lost(made)
    (found,) = lost(edits.change(made, "T1", vector_group="YNd1"))
    assert found.verdict is Verdict.ADVICE
    assert found.ids == ("B2", "B3", "T1")
    assert "11 kV" in found.sentence
    assert "winding 2 of T1 step-up (T1), which feeds it, is a delta" in found.sentence
    assert "An earth fault there cannot clear" in found.sentence
    assert "its delta towards the supply and an earthed star here" in found.sentence
    told = run(edits.change(made, "T1", vector_group="YNd1"))
    assert told.verdicts(0)["B3"] is Verdict.ADVICE
    assert all(f.verdict is not Verdict.FAILS for f in told.findings)


def step_up(group="Dyn11", far="Dyn11", **more):
    base = drawing(
        B1=Busbar(), S1=Supply(node="B1"), T1=unit("B1", "B2", group, 400.0, 11e3), B2=Busbar(),
        C1=line("B2", "B3"), B3=Busbar(), T2=unit("B3", "B4", far, 11e3, 400.0), B4=Busbar(),
        L1=Load(node="B4"),
    )  # fmt: skip
    return changed(base, **more)


def unit(start, end, group, v1, v2, **fields):
    return Transformer(start=start, end=end, vector_group=group, v1_v=v1, v2_v=v2, **fields)


@pytest.mark.parametrize(
    ("made", "cure"),
    [
        (step_up("Dy11"), "earth the star point of T1"),
        (step_up("Dd0"), "an earthed star here and a delta towards the supply"),
        (step_up("Yz11"), "earth the star point of T1"),
        (step_up("Dy11", T1=unit("B1", "B2", "Dy11", 400.0, 11e3, earth_2_ohm=20.0)), None),
        (
            step_up("YNd1", "YNd1"),
            "its delta towards the supply",
        ),  # the star of the far unit holds 11 kV, nothing what it feeds
        (step_up("YNd1", "YNyn0"), "its delta towards the supply"),  # stars that pass it on hold nothing
        (step_up("YNd1", B5=Busbar(), T3=unit("B2", "B5", "ZNyn11", 11e3, 400.0)), None),
        (step_up("YNyn0", "Dyn11"), None),
        (step_up("YNd1", W1=Switch(start="B1", end="B2", closed=False)), "its delta towards"),
    ],
)
def test_what_holds_a_side_and_what_cures_it(made, cure):
    found = lost(made)
    assert len(found) == (0 if cure is None else 1)
    assert all(cure in f.sentence for f in found)
    assert all(run(made).faults is None for _ in found)


def test_two_wires_and_dead_parts_say_nothing():
    two = drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=230.0, wires="two-wire"), B2=Busbar(),
        T1=unit("B1", "B2", "Ii0", 230.0, 115.0), L1=Load(node="B2"),
    )  # fmt: skip
    assert not lost(two)
    assert not lost(step_up("YNd1", S1=None, B9=Busbar(), S9=Supply(node="B9")))


LETTERS = ("D", "d"), ("Y", "y"), ("YN", "yn"), ("Z", "z"), ("ZN", "zn")


def random_layout(rng):
    """Units of any connection in a row of levels, some doubled, some that only hang on."""
    elements = {"B0": Busbar(), "S1": Supply(node="B0", nominal_v=11e3)}
    hours = {"B0": 0}
    for i in range(1, 8):
        up = f"B{rng.integers(0, i)}"
        elements[f"B{i}"] = Busbar(nominal_v=11e3)
        if rng.integers(0, 3):
            one, two = (LETTERS[j][k] for k, j in enumerate(rng.integers(0, 5, 2)))
            clock = 0 if one[0] == two[0].upper() or {one[0], two[0].upper()} == {"D", "Z"} else 11
            elements[f"T{i}"] = unit(up, f"B{i}", f"{one}{two}{clock}", 11e3, 11e3)
            if rng.integers(0, 2):
                elements[f"T{i}"] = msgspec.structs.replace(
                    elements[f"T{i}"],
                    start=f"B{i}",
                    end=up,
                    vector_group=taps.turned_group(f"{one}{two}{clock}"),
                )
            hours[f"B{i}"] = hours[up] + clock
        else:
            elements[f"C{i}"], hours[f"B{i}"] = line(up, f"B{i}"), hours[up]
    a, b = (f"B{i}" for i in rng.choice(8, 2, replace=False))
    if (hours[a] - hours[b]) % 12 == 0:
        elements["C99"] = line(a, b)
    return drawing(**elements)


def wired(made, layout):
    """The same graph as a network with wires, of which only the windings count."""
    units = [e for e in layout.branches if isinstance(e, Transformer)]
    lines = [row for row, e in enumerate(layout.branches) if not isinstance(e, Transformer)]
    graph = arrays_of(layout)
    windings = [
        three_phase(*(_winding(u, side) for side in (0, 1)), taps.group(u.vector_group)[2], 1.0, 1.0, [0.01j])
        for u in units
    ]
    n, t, none = len(lines), len(units), np.zeros(0, dtype=np.intp)
    return Network(
        node_count=len(layout.nodes),
        conductors=4,
        source_node=np.array([layout.at[layout.supplies[0]]]),
        source_voltage=np.append(np.exp(-2j * np.pi / 3 * np.arange(3)), 0)[None, :, None],
        line_from=graph.start[lines],
        line_to=graph.end[lines],
        line_z=np.full((n, 4, 4, 1), 0.01j),
        line_y=np.zeros((n, 4, 4, 1), dtype=complex),
        transformer_from=graph.start[layout.units],
        transformer_to=graph.end[layout.units],
        transformer_ratio=np.ones((t, 1), dtype=complex),
        transformer_z=np.full((t, 1), 0.01j),
        transformer_y=np.zeros((t, 2, 1), dtype=complex),
        load_node=none,
        load_power=np.zeros((0, 4, 1), dtype=complex),
        load_reference=np.ones((0, 4, 1)),
        load_mix=np.zeros((0, 3)),
        shunt_node=none,
        shunt_y=np.zeros((0, 4, 4, 1), dtype=complex),
        wires=Wires(
            line_has=np.tile([True, True, True, False], (n, 1)),
            source_has=np.ones((1, 4), dtype=bool),
            load_to=np.zeros((0, 4), dtype=np.intp),
            earth_node=none,
            earth_conductor=none,
            earth_z=np.zeros((0, 1), dtype=complex),
            units=stacked(windings),
        ),
    )


def _winding(u, side):
    ohms = star_earth_ohm(u, side + 1)
    letter = taps.group(u.vector_group)[side][0].upper()
    return Winding(letter, False, None if letter == "D" else ohms)


@pytest.mark.parametrize("seed", range(60))
def test_agrees_with_the_search_over_four_wires(seed):
    made = random_layout(np.random.default_rng(seed))
    layout = lay_out(made)
    network = wired(made, layout)
    forest = grow(network)
    far = np.where(forest.transformer_way > 0, network.transformer_to, network.transformer_from)
    theirs = {layout.zone[node] for node in far[unreferenced_wires(network, forest)]}
    assert set(unreferenced(layout)) == theirs


def test_the_random_layouts_have_both_kinds():
    layouts = [lay_out(random_layout(np.random.default_rng(seed))) for seed in range(60)]
    zones = sum(len(layout.zone_heads) - 1 for layout in layouts)
    assert 0.2 < sum(len(unreferenced(layout)) for layout in layouts) / zones < 0.8


def camp(**more):
    """Laterals and single-phase units below a delta-star that stands either way, and an open bank."""
    base = step_up(
        "YNd1",
        C2=line("B2", "B5", phases="A"), B5=Busbar(),
        T5=unit("B5", "B6", "Ii0", 6350.0, 240.0, build="centre-tapped"), B6=Busbar(), L6=Load(node="B6"),
        T7=unit("B4", "B7", "Ii0", 400.0, 230.0, build="open delta"), B7=Busbar(), L7=Load(node="B7"),
    )  # fmt: skip
    return changed(base, **more)


@pytest.mark.parametrize(
    ("made", "zones"),
    [
        (camp(), {"B2", "B7"}),
        (camp(T1=unit("B1", "B2", "Dyn11", 400.0, 11e3)), {"B7"}),
        (camp(T7=unit("B4", "B7", "Ii0", 400.0, 230.0, build="open delta", earth_2_ohm=0.0)), {"B2"}),
        (camp(T2=unit("B3", "B4", "Dd0", 11e3, 400.0)), {"B2", "B4", "B7"}),
    ],
)
def test_agrees_where_the_drawing_is_solved_wire_by_wire(made, zones):
    layout = lay_out(made)
    levels = zones_of(made, layout)
    rows = rows_of(made, layout, levels)
    assert rows.conductors is not None
    forest = grow(rows.network)
    far = np.where(forest.transformer_way > 0, rows.network.transformer_to, rows.network.transformer_from)
    theirs = {layout.zone[node] for node in far[unreferenced_wires(rows.network, forest)]}
    three = {zone for zone in theirs if levels.system[zone] == "three-phase"}
    assert {layout.node_ids[layout.zone_heads[zone]] for zone in three} == zones
    found = earthing_findings(made, layout, levels)
    assert {f.ids[0] for f in found} == zones
    assert all("open delta" in f.sentence for f in found if f.ids[0] == "B7")
