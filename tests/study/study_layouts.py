"""Small layouts to test on."""

import msgspec
import numpy as np

from app.model.drawing import Case, Drawing, Limits
from app.model.kinds import Busbar, Cable, Capacitor, Generator, Joint, Load, Supply, Switch, Transformer


def drawing(cases=None, limits=None, frequency_hz=50.0, **elements):
    return Drawing(
        elements=elements,
        cases=tuple(cases or (Case(),)),
        limits=limits or Limits(),
        frequency_hz=frequency_hz,
    )


def changed(base, **elements):
    """The same drawing with elements put in, or taken out where None."""
    merged = {i: e for i, e in {**base.elements, **elements}.items() if e is not None}
    return msgspec.structs.replace(base, elements=merged)


def line(start, end, **fields):
    return Cable(start=start, end=end, **{"length_m": 200.0, "temperature_degc": 20.0, **fields})


def two_nodes(**fields):
    return drawing(
        B1=Busbar(), S1=Supply(node="B1"), B2=Busbar(), C1=line("B1", "B2"), L1=Load(node="B2"), **fields
    )


def town(seed=7, nodes=24, cases=None):
    """A branching layout with transformers, taps, mixed loads, generation, a capacitor and switches."""
    rng = np.random.default_rng(seed)
    elements = {"N0": Busbar(), "S1": Supply(node="N0", nominal_v=11000.0, held_percent=102.0)}
    level = {"N0": 11000.0}
    for i in range(1, nodes):
        up, here = f"N{rng.integers(0, i)}", f"N{i}"
        elements[here] = Joint()
        kind = rng.integers(0, 6)
        if kind == 0 and level[up] == 11000.0:
            level[here] = 400.0
            ends = (up, here) if rng.integers(0, 2) else (here, up)
            v1, v2 = (11000.0, 400.0) if ends[0] == up else (400.0, 11000.0)
            elements[f"T{i}"] = Transformer(
                start=ends[0], end=ends[1], v1_v=v1, v2_v=v2, rating_kva=float(rng.choice([50, 160, 315])),
                vector_group=str(rng.choice(["Dyn11", "Dyn1", "YNyn0", "Yzn5"])),
                tapped=str(rng.choice(["winding 1", "winding 2"])), tap=int(rng.integers(-2, 3)),
                side_by_side=int(rng.integers(1, 3)),
            )  # fmt: skip
        elif kind == 1:
            level[here] = level[up]
            elements[f"W{i}"] = Switch(start=here, end=up)
        else:
            level[here] = level[up]
            ends = (up, here) if rng.integers(0, 2) else (here, up)
            elements[f"C{i}"] = Cable(
                start=ends[0], end=ends[1],
                length_m=float(rng.uniform(20, 150)), side_by_side=int(rng.integers(1, 3)),
                capacitance_uf_per_km=0.3 if level[here] > 1000 else None, rating_a=300.0,
                conductor=str(rng.choice(["Al", "Cu"])),
            )  # fmt: skip
        mix = rng.dirichlet([1, 1, 1]) * 100
        elements[f"L{i}"] = Load(
            node=here, demand_kva=float(rng.uniform(0.5, 4)), power_factor=float(rng.uniform(0.7, 1)),
            leading=bool(rng.integers(0, 4) == 0), constant_current_percent=float(mix[0]),
            constant_impedance_percent=float(mix[1]),
        )  # fmt: skip
    elements["G1"] = Generator(node=f"N{nodes - 1}", output_kw=3.0, output_kvar=-1.0)
    elements["K1"] = Capacitor(node=f"N{nodes - 2}", rating_kvar=2.0)
    return drawing(cases, **elements)


def meshed_town(seed=7, closings=3, **options):
    """A town with cables between nodes alike in level and angle, a transformer doubled, a second supply."""
    from app.study import run

    base = town(seed, **options)
    nodes, rng = run(base).nodes, np.random.default_rng(500 + seed)
    more = {}
    while len(more) < closings:
        pair = rng.choice(nodes.ids, 2, replace=False).tolist()
        a, b = (nodes.at(i) for i in pair)
        if a.nominal_v == b.nominal_v and abs(a.angle_deg - b.angle_deg) < 8:
            charged = 0.3 if a.nominal_v > 1000 else None
            more[f"R{len(more)}"] = line(
                *pair, length_m=float(rng.uniform(50, 400)), capacitance_uf_per_km=charged
            )
    units = [e for e in base.elements.values() if isinstance(e, Transformer)]
    if units:
        more["T99"] = msgspec.structs.replace(units[0], tap=units[0].tap + (-1 if units[0].tap > 0 else 1))
    high = [i for i in nodes.ids if nodes.at(i).nominal_v == 11000.0 and nodes.at(i).route_m > 0]
    if seed % 2 and high:
        more["S2"] = Supply(node=high[-1], nominal_v=11000.0, held_percent=101.5, angle_deg=0.05)
    return changed(base, **more)
