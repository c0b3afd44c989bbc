"""What is remembered from run to run changes no figure, whichever field moves, in any order or thread."""

from concurrent.futures import ThreadPoolExecutor

import pytest
from study_layouts import drawing, line, town
from unlike_layouts import feeder, pole, street

from app.model.changes import change
from app.model.checks import EditRefused
from app.model.fields import fields_of
from app.model.kinds import (
    Busbar,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    Regulator,
    Supply,
    Switch,
    Transformer,
)
from app.study import run

WORDS = ("name", "note", "type", "profile")  # bear on no figure
TRIED = {
    "build": ("as its group", "centre-tapped", "open delta"),
    "hung_at_m": ("", "0 9", "0 9; 1 9"),
    "vector_group": ("Ii0", "YNyn0", "Dzn0"),
}
TOLD = (
    "status",
    "sentence",
    "findings",
    "assumptions",
    "upstream",
    "zones",
    "fed_from",
    "starts",
    "fault_basis",
)


def yard():
    """Phases that are not alike, and low spans that take their neutral from what hangs."""
    tapped = {
        "rating_kva": 25.0,
        "v1_v": 230.0,
        "v2_v": 240.0,
        "vector_group": "Ii0",
        "build": "centre-tapped",
    }
    low = {"length_m": 90.0, "neutral": "usual"}
    return drawing(
        O9=pole("Y2", "Y5", phases="AB", hung_at_m="0 9; 1 9", **low), Y5=Joint(),
        O8=pole("Y2", "Y4", phases="A", **low), Y4=Joint(), L9=Load(node="Y5", demand_kva=2.0, phases="AB"),
        L8=Load(node="Y4", demand_kva=2.0, phases="A"), L7=Load(node="B2", demand_kva=9.0),
        B1=Busbar(), S1=Supply(node="B1", nominal_v=11000.0), B2=Busbar(),
        T1=Transformer(start="B1", end="B2"), V1=Regulator(start="B2", end="Y2"), Y2=Busbar(), Y3=Joint(),
        W1=Switch(start="Y2", end="Y3"), C1=line("B2", "H0", phases="C"), H0=Joint(),
        T2=Transformer(start="H0", end="H1", **tapped), H1=Busbar(),
        L6=Load(node="H1", demand_kva=3.0, phases="B"), G1=Generator(node="Y3", output_kw=3.0, phases="B"),
        K1=Capacitor(node="Y3", rating_kvar=2.0), C2=line("H0", "H2"), H2=Joint(), L5=Load(node="H2"),
    )  # fmt: skip


def works():
    """A layout whose phases are alike until one is moved, with fault levels and a motor that feeds faults."""
    return drawing(
        S1=Supply(node="B1", nominal_v=11000.0, fault_level_max_mva=90.0, fault_level_min_mva=50.0),
        B1=Busbar(), T1=Transformer(start="B1", end="B2"), B2=Busbar(withstand_ka=10.0), B3=Busbar(),
        C1=line("B2", "B3", trip_a=400.0), M1=Motor(node="B3", feeds_faults=True),
        G1=Generator(node="B3", fault_current=3.0),
    )  # fmt: skip


def other_values(about, value):
    """Some values of a field that are not the one it has."""
    if about.name in TRIED or about.choices:
        return [v for v in TRIED.get(about.name, about.choices) if v != value]
    if isinstance(value, bool | str):
        return [not value if isinstance(value, bool) else "X"]
    near = (400,) if about.unit == "V" else (0.5, 7, 400)
    near = near if value is None else (value * 1.1, value + 1, value - 1)
    return [about.type(v) for v in near if about.type(v) != value and about.holds(about.type(v))][:1]


def moved(base):
    """The drawing with each field of each kind set to something else, one at a time, where it is allowed."""
    tried = set()
    for id, element in base.elements.items():
        for name, about in fields_of(type(element)).items():
            for value in other_values(about, getattr(element, name)):
                if name in WORDS or (type(element), name, value) in tried:
                    continue
                try:
                    yield id, name, value, change(base, id, **{name: value})
                except EditRefused:
                    continue
                tried.add((type(element), name, value))


def told(outcome):
    """All of an outcome, to the last bit."""
    wires = outcome.wires
    more = () if wires is None else (wires.nodes, wires.branches, wires.attachments)
    tables = (outcome.nodes, outcome.branches, outcome.attachments, outcome.faults, *more)
    bits = [
        [
            (name, str(c.dtype), c.tobytes() if c.dtype.kind != "U" else c.tolist())
            for name, c in t.columns.items()
        ]
        for t in tables
        if t is not None
    ]
    return bits, [repr(getattr(outcome, name)) for name in TOLD]


POLE = pole("B1", "B2", phases="AB", hung_at_m="0 9; 1 9", neutral="usual")
OTHERS = (
    drawing(B1=Busbar(), S1=Supply(node="B1"), B2=Joint(), O1=POLE, L1=Load(node="B2")),
    drawing(B1=Busbar(), S1=Supply(node="B1", fault_level_max_mva=10.0, fault_level_min_mva=5.0)),
)


def forget():
    """Runs of something else with few of everything, after which nothing of another drawing is known."""
    for other in OTHERS:
        run(other)


@pytest.mark.parametrize(("base", "count"), [(yard(), 130), (works(), 70)], ids=["yard", "works"])
def test_whatever_field_moves_a_run_is_that_of_a_fresh_start(base, count):
    steps = list(moved(base))
    assert len(steps) > count
    run(base)
    warm = [told(run(step)) for *_, step in steps]
    for (id, name, value, step), known in zip(steps, warm, strict=True):
        forget()
        assert told(run(step)) == known, (id, name, value)


def test_drawings_that_alternate_in_threads_are_each_as_if_alone():
    """Two windows, or a window and its worker."""
    drawings = [yard(), works(), street(), feeder(), town(3)]
    alone = []
    for one in drawings:
        forget()
        alone.append(told(run(one)))
    with ThreadPoolExecutor(4) as threads:
        found = list(threads.map(lambda n: told(run(drawings[n % 5])), range(40)))
    assert all(one == alone[n % 5] for n, one in enumerate(found))
