"""Drawings and made-up figures for the board's own tests; the figures follow no physics."""

import numpy as np

from app.model.drawing import Case, Drawing, Limits
from app.model.kinds import (
    Busbar,
    Cable,
    Capacitor,
    Generator,
    Joint,
    Load,
    OverheadLine,
    Supply,
    Switch,
    Transformer,
)
from app.study.outcome import (
    AttachmentState,
    Balance,
    BranchState,
    Finding,
    NodeState,
    Outcome,
    Table,
    Verdict,
)
from solver.status import Status

FERNHOLLOW = Drawing(
    limits=Limits(low_percent=94.0, high_percent=110.0),
    cases=(Case(name="Full load, low intake"), Case(name="Quiet night, high intake")),
    elements={
        "S1": Supply(node="GH", name="Intake", dx=-5, dy=0, held_percent=97),
        "GH": Busbar(x=0, y=0, length=6, name="GH"),
        "L1": Load(node="GH", name="Lodge", dx=4, dy=2, demand_kva=12.0),
        "J1": Joint(x=12, y=0),
        "J2": Joint(x=28, y=0, name="HV2"),
        "HS": Busbar(x=40, y=0, length=6, name="HS"),
        "T1": Transformer(start="GH", end="J1", rating_kva=160, v1_v=400, v2_v=11000, vector_group="YNd11"),
        "C1": Cable(start="J1", end="J2", type="3×35 Al 11 kV", length_m=1150.0, rating_a=145.0),
        "T2": Transformer(start="J2", end="HS", rating_kva=100, tap=-1),
        "L2": Load(node="HS", name="House", dx=4, dy=-1, demand_kva=80.0),
    },
)

EVERY_KIND = Drawing(
    elements={
        "S1": Supply(node="B1", dx=-4, dy=0),
        "B1": Busbar(x=0, y=0, length=8),
        "C1": Cable(start="B1", end="J1", type="4×240 Al", length_m=900.0),
        "J1": Joint(x=14, y=-3),
        "O1": OverheadLine(start="J1", end="J2", type="ACSR 50/8", length_m=2400.0),
        "J2": Joint(x=26, y=4),
        "T1": Transformer(start="J2", end="B2"),
        "B2": Busbar(x=26, y=14, length=10, upright=False, name="Works"),
        "W1": Switch(start="B1", end="J3", closed=False),
        "J3": Joint(x=14, y=3),
        "L1": Load(node="B2", dx=-3, dy=4, name="Plant"),
        "G1": Generator(node="B2", dx=3, dy=4, name="Roof"),
        "K1": Capacitor(node="J1", dx=0, dy=-4),
        "L2": Load(node="J3", dx=3, dy=0),
    },
)


def by_hand(load_dy: float = 2.0) -> Drawing:
    """What a person gets who places and drops everything as it comes; close together."""
    made = {
        "B1": Busbar(x=0, y=0),
        "S1": Supply(node="B1", dx=0, dy=-3),  # on the bar's very end, as one may drag it
        "L1": Load(node="B1", dx=0, dy=load_dy + 3),
        "L2": Load(node="B1", dx=3, dy=load_dy + 3),
        "J1": Joint(x=8, y=0),
        "C1": Cable(start="B1", end="J1"),
        "J2": Joint(x=14, y=0),
        "T1": Transformer(start="J1", end="J2", tap=1),
        "J3": Joint(x=14, y=7),
        "C2": Cable(start="J2", end="J3"),
        "B2": Busbar(x=24, y=0),
        "T2": Transformer(start="J2", end="B2"),
        "L3": Load(node="B2", dx=0, dy=load_dy + 3),
        "L4": Load(node="B2", dx=3, dy=load_dy + 3),
        "G1": Generator(node="J3", dx=3, dy=3),
        "J4": Joint(x=17, y=7),
        "C3": Cable(start="J3", end="J4"),
    }
    return Drawing(elements=made)


def figures(
    drawing: Drawing,
    *,
    seed: int = 1,
    failing: tuple[str, ...] = (),
    near: tuple[str, ...] = (),
    dead: str = "",
) -> Outcome:
    """An outcome of the right form with made-up figures, the same for the same seed."""
    made = np.random.default_rng(seed)
    cases = tuple(c.name for c in drawing.cases)
    nodes, branches = tuple(drawing.nodes()), tuple(drawing.branches())
    attachments = tuple(drawing.attachments())
    shape = (len(nodes), len(cases))
    percent = made.uniform(95, 105, shape)
    node = {
        "live": np.array([[i not in dead for _ in cases] for i in nodes]).reshape(shape),
        "nominal_v": np.full(len(nodes), 400.0),
        "voltage_v": percent * 4.0,
        "percent": percent,
        "high_percent": percent,
        "angle_deg": np.zeros(shape),
        "drop_percent": 100 - percent,
        "route_m": np.zeros(len(nodes)),
    }
    names = BranchState.__struct_fields__
    shape = (len(branches), len(cases))
    branch = {n: made.uniform(0.1, 1.0, shape) for n in names}
    branch["live"] = np.array([[i not in dead for _ in cases] for i in branches]).reshape(shape)
    branch["forward"] = np.ones(shape, bool)
    branch["start_kw"] = made.uniform(50, 90, shape)
    branch["end_kw"] = branch["start_kw"] - branch["loss_kw"]
    branch["through_kw"] = branch["start_kw"]
    branch["loaded_percent"] = made.uniform(5, 95, shape)
    shape = (len(attachments), len(cases))
    attachment = {n: made.uniform(1, 9, shape) for n in AttachmentState.__struct_fields__}
    attachment["live"] = np.ones(shape, bool)
    nought = np.zeros(len(cases))
    found = [Finding("loading", Verdict.FAILS, (i,), f"{i} fails.") for i in failing]
    found += [Finding("loading", Verdict.NEAR, (i,), f"{i} is near.") for i in near]
    return Outcome(
        Status.SOLVED,
        Status.SOLVED.value,
        cases,
        _table(NodeState, nodes, node),
        _table(BranchState, branches, branch),
        _table(AttachmentState, attachments, attachment),
        Balance(*[nought] * 10),
        tuple(found),
        (),
        {},
        {},
        None,
        None,
        {},
    )


def _table(state, ids, columns):
    return Table(state, ids, columns, {id: k for k, id in enumerate(ids)})
