"""A year through the whole path of the study, against single solves. Printed, never asserted.

`FAREND_BENCHMARK=1 pytest -s tests/benchmarks/test_year.py` measures 8 760 hours on 100 nodes.
"""

import os
from time import process_time

import numpy as np
import pytest
from msgspec.structs import replace

from app.model import edits
from app.model.drawing import Case, Drawing
from app.model.kinds import Busbar, Cable, Joint, Load, Supply, Transformer
from app.model.profiles import Profile
from app.study import run
from app.study.layout import lay_out
from app.study.rows import rows_of
from app.study.year import run_year, through
from app.study.year_points import points_of
from app.study.zones import zones_of
from solver import grow, solve
from solver.share import pick

FULL = os.environ.get("FAREND_BENCHMARK") == "1"


def village(nodes):
    """11 kV, a transformer, and a branching 400 V net with a load at every joint."""
    rng = np.random.default_rng(4)
    elements = {
        "B1": Busbar(), "S1": Supply(node="B1", nominal_v=11000.0), "N0": Busbar(),
        "T1": Transformer(start="B1", end="N0", rating_kva=400.0),
    }  # fmt: skip
    for i in range(1, nodes - 1):
        up = f"N{max(0, i - int(rng.integers(1, 6)))}"
        elements[f"N{i}"] = Joint()
        elements[f"C{i}"] = Cable(start=up, end=f"N{i}", length_m=float(rng.uniform(10, 40)), rating_a=265.0)
        elements[f"L{i}"] = Load(node=f"N{i}", demand_kva=float(rng.uniform(0.5, 3)))
    hours = 8760 if FULL else 96
    values = tuple(rng.uniform(10, 100, hours).tolist())
    base = edits.put_profile(Drawing(elements=elements), "log", Profile(percent=values))
    return edits.set_year(base, load_profile="log")


def test_a_year_of_the_study_against_single_solves():
    base, sample = village(100 if FULL else 30), 200 if FULL else 3
    base = replace(base, cases=(Case(),))
    run_year(base)
    began = process_time()
    year = run_year(base)
    together = process_time() - began
    layout = lay_out(base)
    rows, points = rows_of(base, layout, zones_of(base, layout)), points_of(base)
    chosen = np.linspace(0, points.count - 1, sample).astype(int)
    networks = [pick(through(base, layout, rows, points, chosen), np.array([i])) for i in range(sample)]
    forest = grow(networks[0])
    began = process_time()
    for network in networks:
        assert solve(network, forest=forest).solved
    kernel = (process_time() - began) / sample * points.count
    began = process_time()
    for point in chosen:
        case = Case(load_percent=float(points.values["log"][point]))
        one = run(replace(base, cases=(case,)))
        assert one.balance.loss_kw[0] == pytest.approx(
            sum(getattr(year.course, f"{name}_kw")[point] for name in ("line", "copper", "iron")), rel=1e-9
        )
    whole = (process_time() - began) / sample * points.count
    print(
        f"\n{points.count} hours, {len(base.nodes())} nodes: the year {together:.2f} s; single solves of the "
        f"kernel {kernel:.1f} s, ratio {kernel / together:.1f}; single runs of the study {whole:.1f} s, "
        f"ratio {whole / together:.1f}"
    )
