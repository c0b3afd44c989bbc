"""The physics of a distribution layout."""

from solver.forest import Forest, Joined, Loop, Trouble, grow
from solver.network import Network
from solver.solution import Solution
from solver.solve import batch, solve
from solver.status import Status

__all__ = ["Forest", "Joined", "Loop", "Network", "Solution", "Status", "Trouble", "batch", "grow", "solve"]
