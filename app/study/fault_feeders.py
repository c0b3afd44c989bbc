"""Motors and rotating sets that feed a fault, where they are marked to."""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from app.model import assumed
from app.model.drawing import Drawing
from app.model.fault_data import LOW_V
from app.model.kinds import Attachment, Generator, Motor
from app.study.graph import Layout
from app.study.words import list_of
from solver import fault

Real = NDArray[np.float64]
MOTOR_LOW, MOTOR_HIGH, SET_LOW, SET_HIGH = 0.42, 0.15, 0.15, 0.07  # R / X up to 1 kV and above


class Feeder(NamedTuple):
    """One motor or set.

    id : of the attachment
    node : node row
    z : [ohm] of one phase, or of the loop between two wires
    """

    id: str
    node: int
    z: complex


def is_marked(element: object) -> bool:
    """Whether a motor or a set is to feed faults.

    element : any

    Returns : bool
    """
    if isinstance(element, Generator):
        return element.fault_current is not None
    return isinstance(element, Motor) and element.feeds_faults


def feeders(layout: Layout, nominal_v: Real, c_max: Real, sequenced: NDArray[np.bool_]) -> list[Feeder]:
    """Every motor and set that feeds the highest fault currents.

    Motors |Z| = U² / (S · Istart/I), R/X 0.42 up to 1 kV, 0.15 above; not while they are off, nor behind a
    drive. Sets |Z| = KG · U² / (S · I"/I), KG = cmax / (1 + x"d · sin φ), R/X 0.15 up to 1 kV, 0.07 above.

    layout : the graph
    nominal_v : (node,) float [V]
    c_max : (node,) float
    sequenced : (node,) bool, alike in all its conductors; elsewhere none is counted

    Returns : list of Feeder
    Source : IEC 60909-0:2016, 6.6.1 and 6.10 (from memory)
    """
    found = []
    for row, hung in enumerate(layout.attachments):
        node = layout.at[row]
        if not is_marked(hung) or not layout.live[node] or not sequenced[node] or not _turns(hung):
            continue
        volts = float(nominal_v[node])
        z = _motor(hung, volts) if isinstance(hung, Motor) else _set(hung, volts, float(c_max[node]))
        found.append(Feeder(layout.attachment_ids[row], node, z))
    return found


def _turns(hung: Attachment) -> bool:
    if isinstance(hung, Motor):
        return hung.state != "off" and hung.starter != "drive" and hung.phases == "all"
    return isinstance(hung, Generator) and _rated(hung) > 0 and hung.phases == "all"


def _motor(motor: Motor, volts: float) -> complex:
    rated = motor.rated_kw * 1e3 / motor.efficiency / motor.power_factor
    ratio = MOTOR_LOW if volts <= LOW_V else MOTOR_HIGH
    return complex(
        fault.motor_impedance(assumed.value(motor, "rated_v", volts), rated, motor.starting_current, ratio)
    )


def _rated(generator: Generator) -> float:
    return abs(complex(generator.output_kw, generator.output_kvar)) * 1e3


def _set(generator: Attachment, volts: float, c_max: float) -> complex:
    assert isinstance(generator, Generator)
    assert generator.fault_current is not None
    rated, share = _rated(generator), 1 / generator.fault_current
    sine = abs(generator.output_kvar) * 1e3 / rated
    ratio = SET_LOW if volts <= LOW_V else SET_HIGH
    size = c_max / (1 + share * sine) * share * volts**2 / rated
    return complex(size * (ratio + 1j) / np.sqrt(1 + ratio**2))


def feeding_words(drawing: Drawing, counted: tuple[str, ...]) -> str:
    """What of motors and sets is counted, as a sentence of the basis.

    drawing : the drawing
    counted : ids of those that are

    Returns : words
    """
    marked = [id for id, e in drawing.elements.items() if is_marked(e)]
    if not marked:
        return "No motor or generator is marked as feeding faults and none is counted, which is too little."
    words = []
    if counted:
        verb = "feeds" if len(counted) == 1 else "feed"
        told = (
            f"{list_of(drawing, counted)} {verb} the highest currents, by locked rotor or by what is stated "
        )
        words.append(told + "of a set; the least never.")
    left = [id for id in marked if id not in counted]
    if left:
        verb = "is" if len(left) == 1 else "are"
        words.append(
            f"{list_of(drawing, left)} {verb} marked but not counted: off, behind a drive, or on few phases."
        )
    return " ".join([*words, "Others are not counted."])
