"""Layouts whose phases are not alike, to move things in."""

from study_layouts import drawing, line

from app.model.kinds import Busbar, Capacitor, Joint, Load, Motor, OverheadLine, Supply, Transformer


def street(cases=None, limits=None, unit=None, **more):
    """11 kV, a transformer with its star earthed, a four-wire street and two laterals of one phase."""
    fields = {"rating_kva": 100.0, "notch_percent": 1.25, "taps_up": 8, "taps_down": 8, **(unit or {})}
    elements = {
        "B1": Busbar(),
        "S1": Supply(node="B1", nominal_v=11000.0, fault_level_min_mva=30.0),
        "T1": Transformer(start="B1", end="B2", **fields),
        "B2": Busbar(nominal_v=400.0),
        "C1": line("B2", "B3"),
        "B3": Busbar(),
        "C2": line("B3", "J1", phases="A"),
        "J1": Joint(),
        "C3": line("B3", "J2", phases="C"),
        "J2": Joint(),
        "L1": Load(node="B3", demand_kva=20.0),
        "L2": Load(node="J1", demand_kva=9.0),
        "L3": Load(node="J2", demand_kva=3.0, constant_impedance_percent=60.0),
        "L4": Load(node="B3", demand_kva=4.0, phases="BC"),
        "M1": Motor(node="B3", rated_kw=5.5),
    }
    return drawing(cases, limits, **{**elements, **more})


def pole(start, end, **fields):
    return OverheadLine(
        start=start,
        end=end,
        resistance_ohm_per_km=0.4,
        reactance_ohm_per_km=0.38,
        **{"neutral": "earthed along", "length_m": 3000.0, "temperature_degc": 20.0, **fields},
    )


def feeder(cases=None, split=None, **more):
    """12.47 kV on poles, its neutral earthed along; a lateral, a centre-tapped unit, an open delta, 208 V."""
    tapped = {"rating_kva": 25.0, "v1_v": 7200.0, "v2_v": 240.0, "vector_group": "Ii0", "uk_percent": 2.0}
    elements = {
        "B1": Busbar(),
        "S1": Supply(node="B1", nominal_v=12470.0, fault_level_min_mva=40.0, z0_ratio=1.5),
        "O1": pole("B1", "P1"),
        "P1": Joint(),
        "O2": pole("P1", "P2", phases="B"),
        "P2": Joint(),
        "T1": Transformer(start="P2", end="H1", build="centre-tapped", **{**tapped, **(split or {})}),
        "H1": Busbar(),
        "C1": line("H1", "H2", length_m=40.0),
        "H2": Joint(),
        "L1": Load(node="H2", demand_kva=4.0, phases="A"),
        "L2": Load(node="H2", demand_kva=7.0, phases="AB"),
        "L3": Load(node="H2", demand_kva=1.0, phases="B"),
        "T2": Transformer(
            start="P1",
            end="D1",
            build="open delta",
            rating_kva=50.0,
            v1_v=12470.0,
            v2_v=240.0,
            vector_group="Dd0",
            phases="BC",
            earth_2_ohm=0.0,
        ),
        "D1": Busbar(),
        "M1": Motor(node="D1", rated_kw=7.5),
        "T3": Transformer(
            start="P1",
            end="Y1",
            rating_kva=75.0,
            v1_v=12470.0,
            v2_v=208.0,
            vector_group="Dyn1",
            earth_2_ohm=0.5,
        ),
        "Y1": Busbar(),
        "L4": Load(node="Y1", demand_kva=9.0, phases="C"),
        "L5": Load(node="Y1", demand_kva=20.0),
        "T4": Transformer(start="P1", end="Z1", **{**tapped, "phases": "CA", "v1_v": 12470.0}),
        "Z1": Busbar(),
        "L6": Load(node="Z1", demand_kva=6.0),
        "K1": Capacitor(node="P1", rating_kvar=60.0),
    }
    return drawing(cases, **{**elements, **more})
