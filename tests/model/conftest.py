"""A small invented drawing that every kind appears in."""

import pytest

from app.model.drawing import Drawing
from app.model.edits import put
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


@pytest.fixture
def yard() -> Drawing:
    """11 kV supply S1 – switch W1 – overhead line O1 – transformer T2 – cable C1 – loads at the far end."""
    return put(
        Drawing(),
        {
            "B1": Busbar(name="Gate", x=0.0, y=0.0),
            "J2": Joint(x=10.0, y=0.0),
            "J3": Joint(x=20.0, y=0.0),
            "B2": Busbar(name="Barn", x=30.0, y=0.0),
            "J4": Joint(x=40.0, y=6.0),
            "S1": Supply(node="B1", nominal_v=11000.0),
            "W1": Switch(start="B1", end="J2"),
            "O1": OverheadLine(start="J2", end="J3", length_m=1150.0, via=((12.0, 3.0), (18.0, 3.0))),
            "T2": Transformer(start="J3", end="B2", rating_kva=100.0),
            "C1": Cable(name="Lane", start="B2", end="J4", length_m=120.0, via=((40.0, 0.0),)),
            "L1": Load(name="House", node="J4", demand_kva=80.0),
            "M1": Motor(name="Pump", node="B2", starter="drive"),
            "G1": Generator(node="B2"),
            "K1": Capacitor(node="B2"),
        },
    )
