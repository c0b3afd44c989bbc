"""Drawings at random whose phases are not alike: laterals, neutrals, builds, shares, electrodes, systems."""

import random

from msgspec.structs import replace

from app.model.drawing import Case, Drawing, Limits
from app.model.kinds import (
    Attachment,
    Busbar,
    Cable,
    Capacitor,
    Generator,
    Joint,
    Load,
    Motor,
    Node,
    OverheadLine,
    Regulator,
    Supply,
    Switch,
    Transformer,
)

PHASES = ("all", "all", "A", "B", "C", "AB", "BC", "CA")
NEUTRALS = ("usual", "usual", "carried", "earthed along", "none")
BUILDS = ("as its group", "as its group", "centre-tapped", "open delta", "open star to open delta")
MEASURES = ("first", "A", "B", "C", "mean")


def uneven(base: Drawing, seed: int) -> Drawing:
    """Any drawing with phases, neutrals, builds and electrodes thrown over it, whether or not they fit."""
    dice = random.Random(seed)
    elements = {id: _uneven(element, dice) for id, element in base.elements.items()}
    limits = Limits(
        unbalance_percent=dice.choice([None, 2.0]), neutral_v=dice.choice([None, None, 10.0]),
        start_step_percent=dice.choice([None, 10.0]),
    )  # fmt: skip
    return replace(base, elements=elements, limits=limits)


def _uneven(element, dice):
    if isinstance(element, Node):
        return replace(element, earth_ohm=dice.choice([None, None, None, 0.0, 10.0]))
    if isinstance(element, Cable | OverheadLine):
        return replace(element, phases=dice.choice(PHASES), neutral=dice.choice(NEUTRALS))
    if isinstance(element, Transformer):
        group = dice.choice([element.vector_group, "Ii0", "YNyn0", "Yd1", "Dzn0"])
        phases, build, volts = dice.choice(PHASES), dice.choice(BUILDS), dice.choice([1.0, 3**0.5, 2.0])
        element = replace(element, vector_group=group, build=build, phases=phases, v1_v=element.v1_v / volts)
        return replace(element, measures=dice.choice(MEASURES), earth_2_ohm=dice.choice([None, 0.0, 5.0]))
    if isinstance(element, Regulator):
        return replace(element, measures=dice.choice([*MEASURES, "each"]))
    if isinstance(element, Supply):
        return replace(element, wires=dice.choice(["three-phase"] * 3 + ["two-wire", "split-phase"]))
    if isinstance(element, Load) and dice.random() < 0.3:
        return replace(
            element, share_a_percent=dice.choice([0.0, 40.0]), share_b_percent=dice.choice([0.0, 60.0])
        )
    if isinstance(element, Load | Capacitor):
        return replace(element, phases=dice.choice(PHASES), connection=dice.choice(["star", "delta"]))
    return replace(element, phases=dice.choice(PHASES)) if isinstance(element, Attachment) else element


def sound(seed: int, cases=None) -> Drawing:
    """A drawing that fits: every phase asked for is there, and every load has its way back."""
    dice = random.Random(seed)
    made = _Sound(dice)
    for number in range(1, dice.randint(4, 11)):
        made.branch(number)
    for number in range(dice.randint(2, 9)):
        made.hang(number)
    return Drawing(
        elements=made.elements, cases=tuple(cases or (Case(), Case(name="Low", load_percent=30.0)))
    )


class _Sound:
    """Grows a tree; `at` has for each node its volts, the phases that reach it and whether neutral does."""

    def __init__(self, dice):
        self.dice = dice
        self.at = {"N0": (12470.0, "ABC", False)}
        supply = Supply(node="N0", nominal_v=12470.0, fault_level_min_mva=60.0, z0_ratio=1.4)
        self.elements = {"N0": Busbar(), "S1": supply}

    def branch(self, number):
        dice, here = self.dice, f"N{number}"
        up = dice.choice(list(self.at))
        volts, phases, _ = self.at[up]
        kind = dice.choice(["line", "line", "line", "unit", "switch", "regulator"])
        if kind == "unit" and volts > 1000:
            self.unit(number, up, here)
        elif kind in ("switch", "regulator") and (kind == "switch" or volts > 1000):
            measure = dice.choice([phases[0], "each"])
            two = (
                Switch(start=up, end=here)
                if kind == "switch"
                else Regulator(start=up, end=here, measures=measure)
            )
            self.elements[f"W{number}"] = two
            self.at[here] = self.at[up]
        else:
            self.line(number, up, here)
        self.elements[here] = Joint(earth_ohm=dice.choice([None, 8.0]) if self.at[here][2] else None)

    def line(self, number, up, here):
        dice, (volts, phases, neutral) = self.dice, self.at[up]
        led = dice.choice(list(phases)) if dice.random() < 0.35 and volts != 240.0 else phases
        chosen = "all" if led == phases else led
        shape = OverheadLine if volts > 1000 else Cable
        along = "earthed along" if volts > 1000 else "usual" if neutral else "none"
        self.elements[f"C{number}"] = shape(
            start=up, end=here, phases=chosen, neutral=along,
            length_m=dice.uniform(500, 4000) if volts > 1000 else dice.uniform(10, 120), rating_a=200.0,
            capacitance_uf_per_km=0.01 if volts > 1000 else None,
        )  # fmt: skip
        self.at[here] = (volts, led, neutral)

    def unit(self, number, up, here):
        dice, (_, phases, _) = self.dice, self.at[up]
        plate = {"start": up, "end": here, "rating_kva": 75.0, "tap": dice.randint(-2, 2)}
        if len(phases) == 1 or dice.random() < 0.4:
            chosen = dice.choice(phases) if len(phases) == 1 or dice.random() < 0.6 else "AB"
            volts = 7200.0 if len(chosen) == 1 else 12470.0
            self.elements[f"T{number}"] = Transformer(
                **plate, v1_v=volts, v2_v=230.0, vector_group="Ii0", phases=chosen
            )
            self.at[here] = (230.0, chosen[0], True)
        elif dice.random() < 0.3:
            self.elements[f"T{number}"] = Transformer(
                **plate, v1_v=12470.0, v2_v=240.0, vector_group="Dd0", build="open delta",
                phases=dice.choice(["AB", "BC", "CA"]), earth_2_ohm=0.0,
            )  # fmt: skip
            self.at[here] = (240.0, "ABC", False)
        else:
            group = dice.choice(["Dyn1", "YNyn0", "Dyn11"])
            self.elements[f"T{number}"] = Transformer(**plate, v1_v=12470.0, v2_v=416.0, vector_group=group)
            self.at[here] = (416.0, "ABC", True)

    def hang(self, number):
        dice, node = self.dice, self.dice.choice(list(self.at))
        volts, phases, neutral = self.at[node]
        whole = len(phases) == 3
        chosen = dice.choice(["all", *phases]) if neutral or volts > 1000 else "all"
        chosen = dice.choice([chosen, "AB", "BC", "CA"]) if whole else "all"
        if chosen in ("A", "B", "C") and node == "N0":
            chosen = "all"
        size = dice.uniform(0.5, 5.0) * (4 if volts > 1000 else 1)
        fields = {"node": node, "phases": chosen}
        self.elements[f"L{number}"] = dice.choice(
            [
                Load(
                    **fields, demand_kva=size, constant_impedance_percent=30.0, constant_current_percent=20.0
                ),
                Load(**fields, demand_kva=size, connection="delta" if whole else "star"),
                Motor(**fields, rated_kw=size / 3, starting_current=4.0),
                Generator(**fields, output_kw=size / 2),
                Capacitor(**fields, rating_kvar=size / 4),
            ]
        )


def turned(base: Drawing) -> Drawing:
    """The same with A, B, C called B, C, A."""
    letters = {"A": "B", "B": "C", "C": "A", "AB": "BC", "BC": "CA", "CA": "AB"}
    moved = {}
    for id, element in base.elements.items():
        for name in ("phases", "measures"):
            chosen = getattr(element, name, None)
            element = replace(element, **{name: letters[chosen]}) if chosen in letters else element
        moved[id] = element
    return replace(base, elements=moved)
