"""Invented drawings that the sheet must get right: a transformer pair, a near miss, two wires, dead parts."""

import math

from app.model import edits
from app.model.drawing import Case, Drawing, Limits, Project
from app.model.kinds import (
    Busbar,
    Cable,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    OverheadLine,
    Regulator,
    Supply,
    Switch,
    Transformer,
)

HOSTILE = '=HYPERLINK("http://example.invalid","Barn feeder")'
NIGHT = Case(name="Quiet night, high intake", supply_percent=109.0, load_percent=10.0, generation_percent=0.0)
PEAK = Case(name="Full load, low intake")
HEAVY = Case(name="Heavy", load_percent=1000.0, motor_percent=1000.0)  # more than the layouts can carry
SHORT = 216.2 * math.sqrt(3) / 400 * 100  # 216.2 V phase, of 400 V between lines


def pair(*cases: Case) -> Drawing:
    """Step up, 11 kV cable, step down, a feeder with everything on it, and a part that is not fed."""
    elements = {
        "B1": Busbar(name="GH"),
        "S1": Supply(name="Intake", node="B1", nominal_v=400.0, held_percent=97.0),
        "T1": Transformer(
            name="Step up", start="B1", end="J1", rating_kva=160.0, v1_v=400.0, v2_v=11000.0,
            load_loss_w=1750.0, no_load_loss_w=189.0, no_load_current_percent=0.7, tapped="winding 2", tap=1,
        ),
        "J1": Joint(),
        "C1": Cable(
            start="J1", end="J2", type="3×35 Al 11 kV", length_m=1150.0, resistance_ohm_per_km=0.868,
            reactance_ohm_per_km=0.126, capacitance_uf_per_km=0.19, temperature_degc=60.0, rating_a=120.0,
            area_mm2=35.0,
        ),
        "J2": Joint(),
        "T2": Transformer(
            name="Step down", start="B2", end="J2", rating_kva=100.0, v1_v=400.0, v2_v=11000.0,
            vector_group="YNd1", tapped="winding 2", load_loss_w=1250.0, no_load_loss_w=130.0, tap=-1,
        ),
        "B2": Busbar(name="HS"),
        "L1": Load(name="House", node="B2", demand_kva=80.0, note="Ask the estate office."),
        "L2": Load(
            name="Lodge", node="B1", demand_kva=None, demand_kw=11.0, power_factor=0.9, leading=True,
            constant_current_percent=30.0, constant_impedance_percent=20.0, reference_v=415.0,
        ),
        "C2": Cable(
            name=HOSTILE, start="B3", end="B2", type="4×95 Al", length_m=320.0, resistance_ohm_per_km=0.32,
            rating_a=195.0, area_mm2=95.0, side_by_side=2,
        ),
        "B3": Busbar(name="Barn"),
        "O1": OverheadLine(start="B3", end="J3", conductor="Cu", length_m=80.0, resistance_ohm_per_km=0.727),
        "J3": Joint(),
        "G1": Generator(name="PV roof", node="B3", output_kw=5.0, output_kvar=-1.0),
        "K1": Capacitor(node="B3", rating_kvar=5.0),
        "K2": Capacitor(node="B3", rating_kvar=9.0, rated_v=440.0, connected=False),
        "W1": Switch(start="B3", end="B4", closed=False),
        "W2": Switch(name="Barn switch", start="B3", end="B5", rating_a=25.0),
        "B5": Busbar(name="Dryer"),
        "L4": Load(name="Dryer", node="B5", demand_kva=12.0, constant_impedance_percent=100.0),
        "M1": Motor(name="Saw", node="B3", rated_kw=5.5),
        "M2": Motor(name="Fan", node="B5", rated_kw=3.0, rated_v=415.0, starter="soft starter"),
        "M3": Motor(name="Mill", node="B5", rated_kw=2.0, state="off"),
        "B4": Busbar(name="Spare"),
        "L3": Load(name="Spare load", node="B4", demand_kva=None, demand_kw=5.0),
    }  # fmt: skip
    project = Project(
        title="Fernhollow & Sons", number="FE-01", revision="B", author="A. Planner", note="One.\nTwo."
    )
    limits = Limits(
        name="Estate set 2025", drop_percent=8.0, start_step_percent=10.0, start_motor_percent=85.0
    )
    return Drawing(project=project, limits=limits, cases=cases or (PEAK,), elements=elements)


def three_cables() -> Drawing:
    """Three cables in parallel: the House misses 216.2 V between phase and neutral by hundredths."""
    run = {
        "rating_a": 265.0,
        "side_by_side": 3,
        "temperature_degc": 60.0,
        "area_mm2": 240.0,
        "type": "4×240 Al",
    }
    elements = {
        "B1": Busbar(name="GH"),
        "S1": Supply(node="B1", nominal_v=400.0, held_percent=97.0),
        "C1": Cable(start="B1", end="B2", length_m=250.0, **run),
        "B2": Busbar(name="LD"),
        "C2": Cable(start="B2", end="B3", length_m=900.0, **run),
        "B3": Busbar(name="HS"),
        "L1": Load(name="Lodge", node="B2", demand_kva=12.0),
        "L2": Load(name="House", node="B3", demand_kva=80.0),
    }
    return Drawing(limits=Limits(low_percent=SHORT), elements=elements)


def two_wire() -> Drawing:
    """A shed on two wires at 60 Hz, with charging current."""
    elements = {
        "B1": Busbar(name="Panel"),
        "S1": Supply(node="B1", nominal_v=240.0, wires="two-wire"),
        "C1": Cable(
            start="B1", end="B2", type="2×16 Cu", conductor="Cu", length_m=60.0, resistance_ohm_per_km=1.15,
            capacitance_uf_per_km=2.0, rating_a=60.0,
        ),
        "B2": Busbar(name="Shed"),
        "L1": Load(node="B2", demand_kva=4.0, constant_current_percent=50.0),
        "T1": Transformer(
            start="B2", end="B3", v1_v=240.0, v2_v=120.0, rating_kva=2.0, vector_group="Ii0", uk_percent=4.0,
            load_loss_w=50.0, no_load_loss_w=8.0, no_load_current_percent=2.0, tap=-1,
        ),
        "B3": Busbar(name="Bench"),
        "L2": Load(node="B3", demand_kva=1.0),
    }  # fmt: skip
    return Drawing(project=Project(title="Shed"), frequency_hz=60.0, elements=elements)


def meshed(*cases: Case) -> Drawing:
    """Two transformers at unequal taps into a closed ring, and a second supply over a charging cable."""
    plate = {"rating_kva": 315.0, "load_loss_w": 2800.0, "no_load_loss_w": 324.0}
    elements = {
        "B1": Busbar(name="HV"),
        "S1": Supply(node="B1", nominal_v=11000.0, held_percent=99.0),
        "T1": Transformer(name="West", start="B1", end="B2", v1_v=11000.0, v2_v=400.0, **plate),
        "T2": Transformer(
            name="East", start="B3", end="B1", v1_v=400.0, v2_v=11000.0, vector_group="YNd1",
            tapped="winding 2", tap=-2, **plate,
        ),
        "B2": Busbar(name="West board"),
        "B3": Busbar(name="East board"),
        "C1": Cable(start="B2", end="B3", length_m=60.0, resistance_ohm_per_km=0.125, rating_a=330.0),
        "C2": Cable(start="B2", end="B4", length_m=110.0, resistance_ohm_per_km=0.32, rating_a=195.0),
        "C3": Cable(start="B3", end="B4", length_m=80.0, resistance_ohm_per_km=0.32, rating_a=195.0),
        "B4": Busbar(name="Far board"),
        "L1": Load(name="Far", node="B4", demand_kva=90.0),
        "L2": Load(name="East", node="B3", demand_kva=60.0, constant_current_percent=100.0),
        "C4": Cable(start="B5", end="B1", length_m=2500.0, resistance_ohm_per_km=0.32,
        capacitance_uf_per_km=0.31),
        "B5": Busbar(name="Other intake"),
        "S2": Supply(node="B5", nominal_v=11000.0, held_percent=98.9),
    }  # fmt: skip
    return Drawing(elements=elements, cases=cases or (Case(),))


def stepping(*cases: Case) -> Drawing:
    """A transformer whose tap changer steps by itself, a regulator down the lane, a generator that holds."""
    elements = {
        "B1": Busbar(name="HV"),
        "S1": Supply(node="B1", nominal_v=11000.0, held_percent=96.0),
        "T1": Transformer(
            name="Main", start="B1", end="B2", rating_kva=250.0, notch_percent=1.25, taps_up=8, taps_down=8,
            regulates="winding 2", bandwidth_percent=2.0, drop_r_ohm=0.01,
        ),
        "B2": Busbar(name="Board"),
        "C1": Cable(start="B2", end="B3", length_m=350.0),
        "B3": Busbar(name="Lane"),
        "V1": Regulator(name="Lane regulator", start="B3", end="B4", rating_a=200.0),
        "B4": Busbar(name="Far"),
        "L1": Load(node="B4", demand_kva=70.0),
        "G1": Generator(node="B2", output_kw=20.0, hold_percent=101.0),
    }  # fmt: skip
    return Drawing(elements=elements, cases=cases or (Case(),))


def faulty() -> Drawing:
    """Boards with fault ratings, devices that trip and do not, a ring, two wires, a part that is not fed."""
    cable = {"rating_a": 265.0, "reactance_ohm_per_km": 0.072}
    elements = {
        "B1": Busbar(name="HV"),
        "S1": Supply(
            node="B1", nominal_v=11000.0, fault_level_max_mva=150.0, fault_level_min_mva=90.0, xr=3.0
        ),
        "T1": Transformer(start="B1", end="B2", rating_kva=500.0, load_loss_w=3900.0),
        "B2": Busbar(name="Board", withstand_ka=18.0),
        "C1": Cable(start="B2", end="B3", length_m=900.0, trip_a=1250.0, **cable),
        "B3": Busbar(name="House", withstand_ka=6.0),
        "C2": Cable(start="B2", end="B4", length_m=50.0, trip_a=800.0, **cable),
        "B4": Busbar(name="Yard", withstand_ka=9.0),
        "C3": Cable(start="B2", end="B5", length_m=40.0, trip_a=800.0, **cable),
        "C4": Cable(start="B5", end="B2", length_m=70.0, **cable),
        "B5": Busbar(name="Ring"),
        "W1": Switch(start="B5", end="B6", closed=False),
        "B6": Busbar(name="Spare", withstand_ka=10.0),
        "C6": Cable(start="B6", end="B9", trip_a=100.0, **cable),
        "B9": Joint(),
        "B7": Busbar(name="Hut", withstand_ka=6.0),
        "S2": Supply(node="B7", nominal_v=230.0, wires="two-wire", fault_level_max_mva=1.0, xr=0.0),
        "C5": Cable(start="B7", end="B8", length_m=60.0, trip_a=160.0, resistance_ohm_per_km=1.15,
        reactance_ohm_per_km=0.0),
        "B8": Busbar(name="Hut, far"),
        "L1": Load(node="B3", demand_kva=20.0),
    }  # fmt: skip
    return Drawing(elements=elements)


def blocked() -> Drawing:
    """Two cables of no length side by side: a loop without impedance, so that nothing is solved."""
    elements = {
        "B1": Busbar(),
        "S1": Supply(node="B1"),
        "C1": Cable(start="B1", end="B2", length_m=0.0),
        "C2": Cable(start="B1", end="B2", length_m=0.0),
        "B2": Busbar(),
        "T1": Transformer(start="B2", end="B3", v1_v=400.0, v2_v=230.0),
        "B3": Busbar(),
        "L1": Load(node="B3"),
        "G1": Generator(node="B3"),
        "W1": Switch(start="B3", end="B4"),
        "B4": Joint(),
    }
    return Drawing(elements=elements)


def overloaded() -> Drawing:
    """A load that no voltage can carry."""
    elements = {
        "B1": Busbar(),
        "S1": Supply(node="B1"),
        "C1": Cable(start="B1", end="B2", length_m=1150.0),
        "B2": Busbar(),
        "L1": Load(node="B2", demand_kva=900.0),
    }
    return Drawing(elements=elements)


def each_for_itself() -> Drawing:
    """A case that states every kind of attachment for itself: shares, a power factor, a bank off and on."""
    drawing = pair(PEAK, NIGHT)
    banks = {
        "K8": Capacitor(name="Bank", node="B4", rating_kvar=8.0),
        "K9": Capacitor(name="Spare bank", node="B4", rating_kvar=4.0, connected=False),
    }
    drawing = edits.put(drawing, {"L9": Load(name="Feast", node="B4", demand_kva=0.0)})
    drawing = edits.put(drawing, banks)
    for number, (id, one) in enumerate(drawing.attachments().items()):
        if id not in banks:
            drawing = edits.set_own(
                drawing, 1, id, percent=100.0 if isinstance(one, Supply) else 7.0 * number
            )
        if isinstance(one, Load) and not number % 2:
            drawing = edits.set_own(drawing, 1, id, power_factor=0.98)
    loads = [id for id, one in drawing.attachments().items() if isinstance(one, Load)]
    drawing = edits.set_own(edits.set_own(drawing, 1, loads[0], demand_kva=3.0), 1, loads[-2], demand_kw=2.0)
    drawing = edits.set_own(edits.set_own(drawing, 1, "L9", demand_kva=2.5), 1, "K8", percent=0.0)
    return edits.set_own(drawing, 1, "K9", percent=50.0)
