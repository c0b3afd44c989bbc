"""What a solve can end in; each value is the sentence shown to people."""

from enum import Enum


class Status(Enum):
    """How one operating point ended."""

    SOLVED = "Solved."
    NO_OPERATING_POINT = "No operating point: the layout cannot carry this load."
    NOT_SETTLED = "Did not settle: the sweep was still moving when it was stopped."
    INVALID = "Not solved: the layout as drawn is not valid."
