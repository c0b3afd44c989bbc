"""Invented drawings whose phases are not alike: a camp with single-phase laterals, units of few phases."""

from app.model.drawing import Case, Drawing, Limits
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

FOOT = 0.3048
BACKBONE = {"resistance_ohm_per_km": 0.100 / FOOT, "reactance_ohm_per_km": 0.041 / FOOT, "rating_a": 205.0}
LATERAL = {"resistance_ohm_per_km": 0.16 / FOOT, "reactance_ohm_per_km": 0.043 / FOOT, "rating_a": 150.0}
COLD = {"temperature_degc": 20.0}
EVENING = Case(name="Summer evening")
MORNING = Case(name="Early morning", load_percent=30.0)


def lateral(start: str, end: str, feet: float, phases: str = "all", **data) -> Cable:
    """A span of 2/0 Al with a full neutral."""
    return Cable(
        start=start, end=end, type="2/0 Al", area_mm2=67.4, length_m=feet * FOOT, phases=phases,
        **LATERAL, **COLD, **data,
    )  # fmt: skip


def camp(*cases: Case, **changed) -> Drawing:
    """A lake camp at 208Y/120: two laterals on A, one on B, one on C, as first drawn."""
    elements = {
        "B1": Busbar(name="Line pole"),
        "S1": Supply(
            name="Utility", node="B1", nominal_v=12470.0, fault_level_max_mva=40.0, fault_level_min_mva=40.0,
            xr=3.2,
        ),
        "T1": Transformer(
            name="Pad", start="B1", end="B2", rating_kva=75.0, v1_v=12470.0, v2_v=208.0, uk_percent=3.0,
            load_loss_w=800.0, no_load_loss_w=180.0, no_load_current_percent=0.5, vector_group="Dyn1",
        ),
        "B2": Busbar(name="PAD"),
        "C1": Cable(start="B2", end="B3", type="4/0 Al", length_m=450 * FOOT, **BACKBONE, **COLD),
        "B3": Busbar(name="LODGE"),
        "C2": lateral("B3", "J1", 210.0, "A"),
        "J1": Joint(name="N1"),
        "C3": lateral("J1", "J2", 210.0),
        "J2": Joint(name="N2"),
        "C4": lateral("B3", "J3", 360.0, "A"),
        "J3": Joint(name="J"),
        "C5": lateral("B3", "J4", 300.0, "B"),
        "J4": Joint(name="S"),
        "C6": lateral("B3", "J5", 260.0, "C"),
        "J5": Joint(name="W"),
        "L1": Load(name="Cabins N1", node="J1", demand_kw=3.6, demand_kva=None, power_factor=0.98),
        "L2": Load(name="Cabins N2", node="J2", demand_kw=3.6, demand_kva=None, power_factor=0.98),
        "L3": Load(name="Boathouse", node="J3", demand_kw=4.0, demand_kva=None, power_factor=0.90),
        "L4": Load(
            name="Showers", node="J4", demand_kw=6.0, demand_kva=None, power_factor=1.0,
            constant_impedance_percent=100.0,
        ),
        "L5": Load(name="Shop", node="J5", demand_kw=2.0, demand_kva=None, power_factor=0.85),
        "L6": Load(name="Lodge", node="B3", demand_kw=9.0, demand_kva=None),
    }  # fmt: skip
    limits = Limits(low_percent=91.6, high_percent=110.0, name="110 V at a pedestal", unbalance_percent=2.0)
    return Drawing(elements=elements | changed, cases=cases or (EVENING,), limits=limits, frequency_hz=60.0)


def units(*cases: Case) -> Drawing:
    """Single-phase, centre-tapped and open-delta units, a line by its spacing, all that can hang between."""
    plate = {"uk_percent": 3.0, "load_loss_w": 400.0, "no_load_loss_w": 100.0, "no_load_current_percent": 0.8}
    elements = {
        "B1": Busbar(name="Line"),
        "S1": Supply(node="B1", nominal_v=12470.0, fault_level_max_mva=60.0, xr=4.0, z0_ratio=1.5),
        "O1": OverheadLine(
            start="B1", end="J1", phases="A", neutral="earthed along", length_m=2200.0, rating_a=140.0,
            resistance_ohm_per_km=0.9, hung_at_m="0 9.5; 0.6 8.0", diameter_mm=9.0, gmr_mm=3.3,
        ),
        "J1": Joint(),
        "T1": Transformer(
            name="Pole", start="J1", end="B2", rating_kva=25.0, v1_v=7200.0, v2_v=240.0, vector_group="Ii0",
            build="centre-tapped", **plate,
        ),
        "B2": Busbar(name="House"),
        "C1": Cable(start="B2", end="B3", length_m=40.0, rating_a=150.0, temperature_degc=50.0),
        "B3": Busbar(name="Barn"),
        "L1": Load(name="Lamps", node="B3", demand_kva=3.0, phases="A"),
        "L2": Load(name="Oven", node="B3", demand_kva=6.0, phases="AB", power_factor=1.0),
        "L3": Load(name="Rest", node="B2", demand_kva=4.0),
        "T2": Transformer(
            name="Bank", start="B1", end="B4", rating_kva=100.0, v1_v=12470.0, v2_v=240.0, vector_group="Ii0",
            build="open delta", **plate,
        ),
        "B4": Busbar(name="Mill"),
        "M1": Motor(name="Saw", node="B4", rated_kw=15.0),
        "L4": Load(
            name="Kiln", node="B4", demand_kva=20.0, connection="delta", share_a_percent=50.0,
            share_b_percent=30.0,
        ),
        "K1": Capacitor(node="B4", rating_kvar=5.0, connection="delta"),
        "L5": Load(name="Pump", node="B4", demand_kva=4.0, phases="BC"),
        "T3": Transformer(
            name="Hut unit", start="B1", end="B7", rating_kva=15.0, v1_v=12470.0, v2_v=230.0,
            vector_group="Ii0", phases="BC", **plate,
        ),
        "B7": Busbar(name="Hut"),
        "L6": Load(
            name="Heater", node="B7", demand_kw=5.0, demand_kva=None, constant_impedance_percent=100.0
        ),
        "W1": Switch(start="B7", end="B8", rating_a=200.0),
        "B8": Busbar(name="Roof"),
        "G1": Generator(name="Panels", node="B8", output_kw=2.0),
    }  # fmt: skip
    return Drawing(elements=elements, cases=cases or (EVENING,), frequency_hz=60.0)
