"""The four-node feeder with every transformer connection, step-down and step-up, balanced and unbalanced."""

import csv

import numpy as np
import pytest
from networks import REFERENCE, facts
from wired import ABC, EARTH, POWER, A, B, Bank, C, Layout, Unit, balanced

from solver import Status, solve
from solver.windings import Winding

FEEDERS = REFERENCE / "feeders"
ABOUT = facts("ieee4")["data"]
EARTHED, STAR, DELTA = Winding("Y", earth=0.0), Winding("Y"), Winding("D")
CONNECTIONS = {  # high-voltage side leads the low-voltage side by 30 degrees
    "GrY-GrY": (EARTHED, EARTHED, {"down": 0, "up": 0}),
    "GrY-D": (EARTHED, DELTA, {"down": 1, "up": 11}),
    "Y-D": (STAR, DELTA, {"down": 1, "up": 11}),
    "D-GrY": (DELTA, EARTHED, {"down": 1, "up": 11}),
    "D-D": (DELTA, DELTA, {"down": 0, "up": 0}),
    "oGrY-oD": None,
}


def rows(name):
    with open(FEEDERS / f"{name}.csv", newline="") as file:
        return list(csv.DictReader(file))


def ohms(config, feet):
    z = np.zeros((3, 3), dtype=complex)
    for row in rows("ieee4_configs"):
        if row["config"].startswith(config):
            i, j = ("abc".index(c) for c in row["phases"])
            z[i, j] = z[j, i] = (
                complex(float(row["R_ohm_per_mile"]), float(row["X_ohm_per_mile"])) * feet / 5280
            )
    return z


def feeder(step, loading, connection):
    plate = ABOUT["transformer_bank"]
    v1, v2 = plate["kV_primary"] * 1e3, plate[f"kV_secondary_step_{step}"] * 1e3
    is_open = connection == "oGrY-oD"
    percent = complex(plate["R_pct"], plate["X_pct"]) / 100
    if is_open:
        z = percent * v2**2 / 2000e3
        far = [(A, B), (B, C)] if step == "down" else [(A, C), (B, A)]
        coils = [((i, EARTH), pair, v1 / 3**0.5, v2, z) for i, pair in enumerate(far)]
        unit, one, two = Bank(1, 2, coils), EARTHED, DELTA
    else:
        one, two, clock = CONNECTIONS[connection]
        unit = Unit(1, 2, one, two, clock[step], v1, v2, percent * v2**2 / 6000e3)
    configs = ["4-wire" if side.letter == "Y" else "3-wire" for side in (one, two)]
    lines = [
        (0, 1, ABC, ohms(configs[0], ABOUT["line12_ft"])),
        (2, 3, ABC, ohms(configs[1], ABOUT["line34_ft"])),
    ]
    loads = []
    for phase, (kw, pf) in enumerate(ABOUT["loads_open" if is_open else "loads_closed"][loading]):
        s = kw * 1e3 * complex(1, (1 / pf**2 - 1) ** 0.5)
        far = EARTH if two.letter == "Y" else (phase + 1) % 3
        loads.append((3, phase, far, s, v2 / (3**0.5 if two.letter == "Y" else 1), POWER))
    return Layout(4, [(0, balanced(v1 / 3**0.5))], lines, [unit], loads)


def figures(solution):
    """Volts of each phase and between lines, and currents, as the listing names them."""
    v = solution.voltage[:, :3, 0]
    found = {f"V{n + 1}": (v[n], v[n] - np.roll(v[n], -1)) for n in range(4)}
    currents = {"I12": solution.line_in[0, :3, 0], "I34": solution.line_in[1, :3, 0]}
    return found, currents


CASES = sorted({(r["step"], r["loading"], r["connection"]) for r in rows("ieee4_solution")})


@pytest.mark.parametrize(("step", "loading", "connection"), CASES)
def test_every_row_of_the_computed_listing(step, loading, connection):
    """All rows were computed from the published data by an independent phase-domain solver, which settled
    to about 7e-6."""
    solution = solve(feeder(step, loading, connection).network())
    assert solution.status == (Status.SOLVED,)
    volts, currents = figures(solution)
    count = 0
    for row in rows("ieee4_solution"):
        if (row["step"], row["loading"], row["connection"]) != (step, loading, connection):
            continue
        phase = int(row["phase"]) - 1
        if row["kind"] == "A":
            value = currents[row["quantity"]][phase]
        else:
            value = volts[row["quantity"]][row["kind"] == "V_LL"][phase]
        assert abs(value) == pytest.approx(float(row["magnitude"]), rel=1e-5, abs=6e-4)
        if row["angle_deg"]:  # blank where nothing flows
            off = np.degrees(np.angle(value)) - float(row["angle_deg"])
            assert (off + 180) % 360 - 180 == pytest.approx(0, abs=6e-4)
        count += 1
    assert count == 15


REMEMBERED = rows("ieee4_published_remembered")


@pytest.mark.parametrize(
    ("loading", "connection"), sorted({(r["loading"], r["connection"]) for r in REMEMBERED})
)
def test_published_rows_that_are_remembered(loading, connection):
    """The published listing is itself settled to about 1e-4; its rows were typed from memory."""
    key = ("down", loading, connection)
    wanted = [r for r in REMEMBERED if (r["step"], r["loading"], r["connection"]) == key]
    volts, currents = figures(solve(feeder("down", loading, connection).network()))
    one, two, _ = CONNECTIONS[connection]
    for row in wanted:
        quantity, phase = row["quantity"], int(row["phase"]) - 1
        side = one if quantity in ("V1", "V2") else two
        value = (
            currents[quantity][phase] if quantity[0] == "I" else volts[quantity][side.letter == "D"][phase]
        )
        assert abs(value) == pytest.approx(float(row["magnitude"]), rel=4e-4)
        off = np.degrees(np.angle(value)) - float(row["angle_deg"])
        assert (off + 180) % 360 - 180 == pytest.approx(0, abs=0.11)
