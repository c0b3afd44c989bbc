"""The places of the samples, changed as a story tells, and held against the nodal solutions of the tests."""

from pathlib import Path

import pytest
from msgspec.structs import replace
from study_nodal import Nodal
from test_study_wired import compare

from app.model.file import load
from app.study import run
from app.study.outcome import Verdict
from solver.status import Status

SAMPLES = Path(__file__).resolve().parents[2] / "samples"


def place(name, **changes):
    """A sample with fields of its elements changed."""
    return changed(load(SAMPLES / f"{name}.farend"), **changes)


def changed(drawing, **changes):
    """A drawing with fields of its elements changed."""
    made = {id: replace(drawing.elements[id], **fields) for id, fields in changes.items()}
    return replace(drawing, elements={**drawing.elements, **made})


def without(drawing, *ids):
    """A drawing less some elements."""
    return replace(drawing, elements={i: e for i, e in drawing.elements.items() if i not in ids})


def proven(drawing):
    """The outcome, every volt and every loss of every case held against an independent nodal solution."""
    outcome = run(drawing)
    assert outcome.status is Status.SOLVED, outcome.sentence
    if outcome.wires is not None:
        for case in drawing.cases:
            compare(replace(drawing, cases=(case,)))
        return outcome
    for case in range(len(drawing.cases)):
        nodal = Nodal(drawing, case, {i: outcome.branches.at(i, case).notch for i in outcome.branches.ids})
        for id, volts in nodal.solve().items():
            assert outcome.nodes.at(id, case).voltage_v == pytest.approx(abs(volts), rel=1e-8)
        supplied = nodal.supplied().real / 1e3
        assert outcome.balance.supply_kw[case] == pytest.approx(supplied, rel=1e-7, abs=1e-6)
    return outcome


def failing(outcome):
    """Check, element and case of everything that fails."""
    return {(f.check, f.ids[0], f.case) for f in outcome.findings if f.verdict is Verdict.FAILS}


def told(outcome, check):
    """The findings of one check."""
    return [f for f in outcome.findings if f.check == check]
