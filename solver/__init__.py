"""The physics of a distribution layout, radial or meshed, solved for many operating points at once.

The solver knows rows and SI units, and nothing of drawings, ids or files. A `Network` holds one row an
element; the last axis of every physical array is the batch, so that loading cases, tap positions, hours
and candidate remedies are solved side by side in one call:

>>> import numpy as np
>>> from solver import Network, Status, line, load, solve, transformer
>>> rated = transformer.short_circuit(4, 1250, 100e3, 400)
>>> iron = transformer.magnetising(130, 0.8, 100e3, 11e3)
>>> taps = transformer.tap_factor([-1, 0, 1], 2.5)
>>> ratio, z, y = transformer.equivalent(11e3, 400, rated, iron, transformer.clock("Dyn11"), taps)
>>> cable = line.series(0.32, 0.075, 320, 50, line.ALPHA["Al"])
>>> network = Network(
...     node_count=3,
...     conductors=1,
...     source_node=np.array([0]),
...     source_voltage=np.full((1, 1, 1), 11e3 / 3**0.5 + 0j),
...     line_from=np.array([1]),
...     line_to=np.array([2]),
...     line_z=np.full((1, 1, 1, 1), cable),
...     line_y=np.zeros((1, 1, 1, 1), complex),
...     transformer_from=np.array([0]),
...     transformer_to=np.array([1]),
...     transformer_ratio=ratio[None],
...     transformer_z=np.full((1, 1), z),
...     transformer_y=y[None],
...     load_node=np.array([2]),
...     load_power=np.full((1, 1, 1), load.power(60e3, 0.95) / 3),
...     load_reference=np.full((1, 1, 1), 400 / 3**0.5),
...     load_mix=load.mix([0.0], [0.0]),
...     shunt_node=np.array([], int),
...     shunt_y=np.zeros((0, 1, 1, 1), complex),
... )
>>> solution = solve(network)
>>> [status is Status.SOLVED for status in solution.status]
[True, True, True]
>>> print(np.round(abs(solution.voltage[2, 0]) * 3**0.5, 1), "V at the load, one notch down to one up")
[386.2 375.2 364.8] V at the load, one notch down to one up
>>> bool(solution.closure.max() < 1e-12)
True

Reading order: `network` (the rows), `tour`, `rounds` and `forest` (trees, their order, what closes rounds
over them), `placed` (rows in that order), `sweep` (the kernel), `joints` and `ties` (currents that close
rounds), `loose` (volts that nothing holds), `settle`, `anderson`, `newton` and `krylov` (until nothing
moves), `answer` and `solution` (every branch), `share` (how much more load there could be), `trouble` (what
has no solution).
Elements: `line`, `carson`, `transformer`, `load`, `motor`. Several conductors: `wires` (what they add to the
rows), `windings` and `banks` (transformers between phases and neutral), `hung` (loads between conductors),
`reached` (what no supply feeds, and sides without earth). Faults: `fault` (formulas), `sequence` (impedance
at every node), `earth_paths` (zero sequence), `fault_levels`, `fault_wires`. What moves by itself: `control`,
`tapping`, `holding`, `path`. A year: `series`. What a person should be told stands in `Status`.
A programmer's mistake raises ValueError; everything that a drawing can be wrong about is a result.
"""

from solver.forest import Forest, grow
from solver.network import Network
from solver.rounds import Joined, Loop, Trouble
from solver.share import Share, largest_share
from solver.solution import Solution
from solver.solving import solve
from solver.status import Status
from solver.trouble import find_trouble, rounds

__all__ = [
    "Forest",
    "Joined",
    "Loop",
    "Network",
    "Share",
    "Solution",
    "Status",
    "Trouble",
    "find_trouble",
    "grow",
    "largest_share",
    "rounds",
    "solve",
]
