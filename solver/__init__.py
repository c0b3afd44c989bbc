"""The physics of a distribution layout."""

from solver.forest import Forest, grow
from solver.network import Network
from solver.share import Share, largest_share
from solver.solution import Solution
from solver.solving import solve
from solver.status import Status
from solver.trouble import Joined, Loop, Trouble

__all__ = [
    "Forest",
    "Joined",
    "Loop",
    "Network",
    "Share",
    "Solution",
    "Status",
    "Trouble",
    "grow",
    "largest_share",
    "solve",
]
