"""Motors and sets that feed faults: closed form, one nodal matrix, and never in the least currents."""

import math

import pytest
from fault_phases import PhaseFaults
from msgspec.structs import asdict
from study_layouts import changed, drawing, line

from app.model import edits
from app.model.file import decode, encode
from app.model.kinds import Busbar, Generator, Load, Motor, Supply, Transformer
from app.printed import printed
from app.study import run

LEVEL = {"fault_level_max_mva": 150.0, "fault_level_min_mva": 90.0, "xr": 5.0}


def mill(**more):
    base = drawing(
        B1=Busbar(), S1=Supply(node="B1", nominal_v=11e3, **LEVEL),
        T1=Transformer(start="B1", end="B2", rating_kva=500.0), B2=Busbar(), C1=line("B2", "B3"), B3=Busbar(),
        C2=line("B3", "B2", length_m=90.0), L1=Load(node="B3"),
        M1=Motor(node="B3", rated_kw=90.0, feeds_faults=True), M2=Motor(node="B2", rated_kw=30.0),
        M3=Motor(node="B1", rated_kw=250.0, rated_v=10e3, feeds_faults=True),
        G1=Generator(node="B2", output_kw=80.0, output_kvar=60.0, fault_current=8.0),
    )  # fmt: skip
    return changed(base, **more)


def test_one_motor_beside_the_supply_by_the_closed_form():
    """IEC 60909-0, 6.10 (from memory): |ZM| = U²/(S·ILR/I), R/X 0.42, side by side with the supply."""
    motor = Motor(node="B1", rated_kw=75.0, efficiency=0.94, power_factor=0.86, starting_current=7.0)
    made = drawing(
        B1=Busbar(), S1=Supply(node="B1", fault_level_max_mva=8.0, fault_level_min_mva=6.0, xr=3.0), M1=motor
    )  # fmt: skip
    alone = run(made).faults.at("B1")
    state = run(edits.change(made, "M1", feeds_faults=True)).faults.at("B1")
    supply = 1.10 * 400**2 / 8e6 * complex(1, 3) / math.sqrt(10)
    turning = 400**2 / (75e3 / 0.94 / 0.86 * 7.0) * complex(0.42, 1) / math.hypot(0.42, 1)
    both = 1 / (1 / supply + 1 / turning)
    assert state.ik3_max_ka == pytest.approx(1.10 * 400 / math.sqrt(3) / abs(both) / 1e3, rel=1e-12)
    assert state.ik3_max_ka > 1.05 * alone.ik3_max_ka
    least = {n: v for n, v in asdict(state).items() if n.endswith("min_ka") or n == "zs_ohm"}
    assert least == pytest.approx({n: getattr(alone, n) for n in least}, rel=1e-15, nan_ok=True)


def test_every_node_against_three_phases_in_one_nodal_matrix():
    made = mill()
    table, nodal, slow = run(made).faults, PhaseFaults(made, True), PhaseFaults(made, True, 0.4)
    least = PhaseFaults(made, False)
    for id in ("B1", "B2", "B3"):
        state, found = table.at(id), nodal.currents(id)
        assert state.ik3_max_ka == pytest.approx(found[0], rel=1e-6)
        assert state.ik2_max_ka == pytest.approx(found[1], rel=1e-6)
        assert state.ik1_max_ka == pytest.approx(found[2], rel=1e-6, abs=1e-6)
        kappa = 1.02 + 0.98 * math.exp(-3 * 0.4 * slow.currents(id)[-1])
        assert state.ip_ka == pytest.approx(kappa * math.sqrt(2) * found[0], rel=1e-6)
        assert state.ik3_min_ka == pytest.approx(least.currents(id)[0], rel=1e-6)


def test_only_what_is_marked_turns_and_reaches_counts_and_the_basis_says_so():
    made = mill()
    told = dict(run(made).fault_basis)["Motors and sets in faults"]
    assert told.startswith("M1, M3 and G1 feed the highest currents")
    assert told.endswith("Others are not counted.")
    for id, change in (("M1", {"starter": "drive"}), ("M1", {"state": "off"}), ("G1", {"output_kw": 0.0})):
        extra = {"output_kvar": 0.0} if id == "G1" else {}
        still = run(edits.change(made, id, **change, **extra))
        without = run(changed(made, **{id: None}))
        assert still.faults.at("B2").ik3_max_ka == without.faults.at("B2").ik3_max_ka
        assert f"{id} is marked but not counted" in dict(still.fault_basis)["Motors and sets in faults"]
    none = run(changed(made, M1=None, M3=None, G1=None))
    assert "none is counted, which is too little" in dict(none.fault_basis)["Motors and sets in faults"]
    assert "none is counted" in printed(changed(made, M1=None, M3=None, G1=None), none)


def test_a_mark_is_seen_at_once_and_stays_out_of_the_file_where_it_is_not_set():
    made = mill()
    first = run(made).faults.at("B3").ik3_max_ka
    assert run(edits.change(made, "M1", feeds_faults=False)).faults.at("B3").ik3_max_ka < first
    assert run(edits.change(made, "M1", starting_current=8.0)).faults.at("B3").ik3_max_ka > first
    plain = edits.change(made, "M1", feeds_faults=False)
    assert b"feeds_faults" in encode(made)
    assert encode(plain).count(b"feeds_faults") == encode(made).count(b"feeds_faults") - 1
    assert decode(encode(made)) == made
