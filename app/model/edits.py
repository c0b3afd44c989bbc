"""Edits: pure functions from drawing to drawing. They may refuse, with a reason for people."""

from app.model.by_case import set_own
from app.model.case_words import set_own_text
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
from app.model.clipboard import Clip, copy, paste
from app.model.diffing import Change, added, diff
from app.model.drawing_on import drop, extend, join, move, remake, reroute, split_branch
from app.model.hanging import free_place
from app.model.keeping import carried, forget_part, keep_part, rename_part, set_symbol
from app.model.parts import made_from
from app.model.profile_edits import follow, put_profile, remove_profile, rename_profile, set_year
from app.model.typing_in import change_text

__all__ = [
    "Change",
    "Clip",
    "EditRefused",
    "added",
    "carried",
    "change",
    "change_text",
    "copy",
    "diff",
    "drop",
    "extend",
    "follow",
    "forget_part",
    "free_place",
    "join",
    "keep_part",
    "made_from",
    "move",
    "paste",
    "put",
    "put_profile",
    "reattach",
    "reconnect",
    "remake",
    "remove",
    "remove_case",
    "remove_profile",
    "rename",
    "rename_part",
    "rename_profile",
    "reroute",
    "set_case",
    "set_frequency",
    "set_limits",
    "set_own",
    "set_own_text",
    "set_project",
    "set_symbol",
    "set_tap",
    "set_year",
    "split_branch",
    "swap_ends",
    "turn_bar",
]
