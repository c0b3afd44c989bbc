"""The zero sequence of a balanced network: where earth currents can go, by transformer connections."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from solver.arrays import Complex
from solver.network import Network
from solver.windings import Winding


def zero_sequence(
    network: Network,
    line_z0: Complex,
    windings: Sequence[tuple[Winding, Winding]],
    transformer_z0: Complex,
    source_z0: Complex,
) -> Network | None:
    """The zero-sequence network: what lets earth currents through, and where they come out of the earth.

    A held star lets them through to another held star; beside a delta it is a way to earth, and so is a held
    zigzag; three times the impedance of each star's earthing comes on top. All else bars them.

    network : Network of the positive sequence, k = 1
    line_z0 : (line, B or 1) complex [ohm] with its return
    windings : (transformer,) pairs of Winding
    transformer_z0 : (transformer, B or 1) complex [ohm] seen at winding 2
    source_z0 : (source, B or 1) complex [ohm]; infinite where a supply is not earthed
    Returns : Network whose supplies stand where the currents come from; None where nothing is earthed
    Source : IEC 60909-0:2016, 6.3 and TR 60909-4 (from memory)
    """
    return _Zero(network, windings, transformer_z0).network(line_z0, source_z0)


class _Zero:
    """Zero-sequence ways, transformer by transformer."""

    def __init__(
        self, network: Network, windings: Sequence[tuple[Winding, Winding]], transformer_z0: Complex
    ) -> None:
        self.positive = network
        self.passing: list[int] = []
        self.passing_z: list[Complex] = []
        self.ways: dict[int, list[Complex]] = {}
        turns = np.abs(network.transformer_ratio) ** 2
        for row, (one, two) in enumerate(windings):
            nodes = int(network.transformer_from[row]), int(network.transformer_to[row])
            at_2, ratio = transformer_z0[row], turns[row]
            stars = one.letter == two.letter == "Y"
            if stars and one.held and two.held:
                self.passing.append(row)
                self.passing_z.append(at_2 + 3 * (_earth(one) / ratio + _earth(two)))
                continue
            for side, other, node, seen in (
                (one, two, nodes[0], ratio),
                (two, one, nodes[1], 1.0 + 0 * ratio),
            ):
                if side.held and (side.letter == "Z" or other.letter == "D"):
                    self.ways.setdefault(node, []).append(at_2 * seen + 3 * _earth(side))

    def network(self, line_z0: Complex, source_z0: Complex) -> Network | None:
        for row, node in enumerate(self.positive.source_node.tolist()):
            if np.isfinite(source_z0[row]).all():
                self.ways.setdefault(node, []).append(source_z0[row])
        if not self.ways:
            return None
        merged = [np.asarray(1 / sum(1 / z for z in ways)) for ways in self.ways.values()]
        width = max(z.shape[-1] for z in merged)
        behind = np.array([np.broadcast_to(z, width) for z in merged], dtype=np.complex128)
        count, rows = len(merged), np.array(self.passing, dtype=np.intp)
        positive = self.positive
        return replace(
            positive,
            source_node=np.array(list(self.ways), dtype=np.intp),
            source_voltage=np.ones((count, 1, 1), dtype=np.complex128),
            source_z=behind[:, None, None, :],
            line_z=line_z0[:, None, None, :],
            transformer_from=positive.transformer_from[rows],
            transformer_to=positive.transformer_to[rows],
            transformer_ratio=np.abs(positive.transformer_ratio[rows]) + 0j,
            transformer_z=np.array(self.passing_z) if rows.size else np.zeros((0, 1), dtype=np.complex128),
            transformer_y=positive.transformer_y[rows],
        )


def _earth(side: Winding) -> complex:
    return side.earth or 0.0
