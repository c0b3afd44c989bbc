"""Edits: pure functions from drawing to drawing. They may refuse, with a reason for people."""

from app.model.changes import (
    change,
    put,
    reattach,
    reconnect,
    remove,
    remove_case,
    rename,
    set_case,
    set_frequency,
    set_limits,
    set_project,
    set_tap,
    swap_ends,
    turn_bar,
)
from app.model.checks import EditRefused
from app.model.diffing import Change, added, diff
from app.model.drawing_on import drop, extend, join, move, reroute, split_branch

__all__ = [
    "Change",
    "EditRefused",
    "added",
    "change",
    "diff",
    "drop",
    "extend",
    "join",
    "move",
    "put",
    "reattach",
    "reconnect",
    "remove",
    "remove_case",
    "rename",
    "reroute",
    "set_case",
    "set_frequency",
    "set_limits",
    "set_project",
    "set_tap",
    "split_branch",
    "swap_ends",
    "turn_bar",
]
