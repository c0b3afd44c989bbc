"""An invented camp with single-phase laterals, and made-up figures for its conductors."""

from dataclasses import replace

import numpy as np
from board_drawings import figures

from app.model.drawing import Case, Drawing, Limits
from app.model.kinds import Busbar, Cable, Generator, Joint, Load, Supply, Transformer
from app.study.outcome import (
    AttachmentWires,
    BranchWires,
    NodeWires,
    Outcome,
    Table,
    Wired,
)

LATERAL = {"resistance_ohm_per_km": 0.44, "reactance_ohm_per_km": 0.141, "rating_a": 130.0}


def camp(cases: tuple[Case, ...] = (Case(name="As drawn"),), **changed) -> Drawing:
    """A backbone of four wires, laterals on one phase each. `changed` elements replace those of their id."""
    elements = {
        "S1": Supply(node="HV", name="Utility", nominal_v=12470.0, dx=-5, dy=0),
        "HV": Joint(x=0, y=0, name="HV"),
        "T1": Transformer(
            start="HV", end="PAD", rating_kva=75, v1_v=12470, v2_v=208, vector_group="Dyn1", uk_percent=3.0,
            earth_2_ohm=5.0,
        ),
        "PAD": Busbar(x=12, y=0, length=6, name="Pad"),
        "C1": Cable(start="PAD", end="LODGE", type="4/0 AWG Al", length_m=137, rating_a=180.0),
        "LODGE": Busbar(x=28, y=0, length=18, name="Lodge"),
        "L1": Load(node="LODGE", name="Lodge", demand_kva=None, demand_kw=9.0, dx=-4, dy=6),
        "N": Cable(start="LODGE", end="N1", length_m=64, phases="A", **LATERAL),
        "N1": Joint(x=40, y=-8, name="N1"),
        "N2C": Cable(start="N1", end="N2", length_m=64, **LATERAL),
        "N2": Joint(x=52, y=-8, name="N2", earth_ohm=25.0),
        "L2": Load(node="N1", name="Cabins 1–3", demand_kva=None, demand_kw=3.6, power_factor=0.98),
        "L3": Load(node="N2", name="Cabins 4–6", demand_kva=None, demand_kw=3.6, power_factor=0.98),
        "J": Cable(start="LODGE", end="J1", length_m=110, phases="A", **LATERAL),
        "J1": Joint(x=42, y=0, name="Boathouse"),
        "L4": Load(node="J1", name="Boats", demand_kva=None, demand_kw=4.0, power_factor=0.9, dx=4, dy=0),
        "W": Cable(start="LODGE", end="W1", length_m=79, phases="C", **LATERAL),
        "W1": Joint(x=42, y=8, name="Shop"),
        "L5": Load(node="W1", name="Shop", demand_kva=None, demand_kw=2.0, phases="C", dx=4, dy=0),
        "G1": Generator(node="W1", name="Roof", output_kw=1.0, phases="C", dx=0, dy=4),
    }  # fmt: skip
    return Drawing(
        frequency_hz=60.0,
        limits=Limits(name="ANSI C84.1", low_percent=91.7, high_percent=105.0),
        cases=cases,
        elements={**elements, **changed},
    )


REACHES = {"HV": "ABC", "PAD": "ABCN", "LODGE": "ABCN", "N1": "AN", "N2": "AN", "J1": "AN", "W1": "CN"}


def wired(drawing: Drawing, *, seed: int = 1, reaches: dict[str, str] = REACHES, **given) -> Outcome:
    """Made-up figures with conductors: each node has those that reach it."""
    outcome = figures(drawing, seed=seed, **given)
    made = np.random.default_rng(seed)
    has = [reaches[b.end] if b.end in reaches else "ABCN" for b in drawing.branches().values()]
    hung = [reaches[a.node] for a in drawing.attachments().values()]
    hung = [h if "L1" != i else "ABCN" for i, h in zip(drawing.attachments(), hung, strict=True)]
    many = len(drawing.cases)
    nodes = _nodes(outcome, reaches, made)
    branches = _amps(made, BranchWires, outcome.branches.ids, has, many)
    attachments = _amps(made, AttachmentWires, outcome.attachments.ids, hung, many)
    return replace(outcome, wires=Wired(nodes, branches, attachments))


def _nodes(outcome: Outcome, reaches: dict[str, str], made) -> Table:
    ids, many = outcome.nodes.ids, len(outcome.cases)
    shape = (len(ids), many)
    base = np.array([7200.0 if i == "HV" else 120.0 for i in ids])
    columns = {
        "system": np.array(["three-phase"] * len(ids)),
        "phases": np.array([reaches[i].removesuffix("N") for i in ids]),
        "against": np.array(["earth" if i == "HV" else "neutral" for i in ids]),
        "base_v": base,
        "neutral_v": np.array([np.full(many, 5.1 if i != "HV" else np.nan) for i in ids]),
        "unbalance_percent": made.uniform(0, 3, shape),
        "spread_percent": made.uniform(0, 3, shape),
    }
    columns |= _slots("v", "ABC", [reaches[i] for i in ids], base[:, None] * made.uniform(0.92, 1.02, shape))
    return _table(NodeWires, ids, columns)


def _amps(made, state, ids, has, many) -> Table:
    columns = {"phases": np.array(has)}
    columns |= _slots("a", "ABCN", has, made.uniform(2, 80, (len(ids), many)))
    return _table(state, ids, columns)


def _slots(ending: str, letters: str, has: list[str], about) -> dict:
    """A column a conductor: something near the given figures where there is one, else nan."""
    return {
        f"{letter.lower()}_{ending}": np.array(
            [row * (1 - 0.02 * k) if letter in h else row * np.nan for h, row in zip(has, about, strict=True)]
        )
        for k, letter in enumerate(letters)
    }


def _table(state, ids, columns) -> Table:
    return Table(state, tuple(ids), columns, {id: k for k, id in enumerate(ids)})
