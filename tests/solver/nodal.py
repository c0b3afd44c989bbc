"""An independent nodal solution: admittance matrix and Newton's method with SciPy's sparse solver.

Shares nothing with the solver but the rows of Network. Lines and transformers need some impedance.
"""

import networkx
import numpy as np
import scipy.sparse as sparse
from scipy.sparse.linalg import spsolve


def nodal(network, point=0, tolerance=1e-13, sweeps=60, start=None):
    """(node,) complex [V] of one operating point; dead nodes are nan. None where Newton does not settle."""

    def at(array):
        return array[..., min(point, array.shape[-1] - 1)]

    net = network
    depth = _fed(net)
    count = net.node_count
    entries = []

    def stamp(a, b, aa, ab, ba, bb):
        entries.extend([(a, a, aa), (a, b, ab), (b, a, ba), (b, b, bb)])

    for a, b, z, y in zip(net.line_from, net.line_to, at(net.line_z)[:, 0, 0], at(net.line_y)[:, 0, 0]):  # noqa: B905
        stamp(a, b, 1 / z + y / 2, -1 / z, -1 / z, 1 / z + y / 2)
    units = (net.transformer_ratio, net.transformer_z, net.transformer_y)
    for a, b, n, z, y in zip(net.transformer_from, net.transformer_to, *(at(u) for u in units)):  # noqa: B905
        stamp(a, b, 1 / z / abs(n) ** 2, -1 / z / np.conj(n), -1 / z / n, 1 / z)
        entries.extend([(a, a, y[0]), (b, b, y[1])])
    entries.extend((n, n, y) for n, y in zip(net.shunt_node, at(net.shunt_y)[:, 0, 0], strict=True))
    power, reference = at(net.load_power)[:, 0], at(net.load_reference)[:, 0]
    drawn = np.zeros((3, count), dtype=complex)
    for n, s, v, mix in zip(net.load_node, power, reference, net.load_mix, strict=True):
        drawn[:, n] += np.conj(s) * mix / v ** np.arange(3)
    entries.extend((n, n, drawn[2, n]) for n in range(count))
    a, b, y = zip(*entries, strict=True)
    admittance = sparse.csr_array((y, (a, b)), shape=(count, count))
    held = net.source_node
    free = np.array([n for n in depth if n not in set(held.tolist())], dtype=int)
    voltage = np.full(count, np.nan + 0j)
    voltage[held] = at(net.source_voltage)[:, 0]
    voltage[free] = _guess(net, at, depth, voltage, free) if start is None else start[free]
    inner, from_held = admittance[free][:, free], admittance[free][:, held] @ voltage[held]
    solved = _newton(inner, from_held, drawn[:, free], voltage[free], tolerance, sweeps)
    if solved is None:
        return None
    voltage[free] = solved
    return voltage


def _newton(admittance, injected, drawn, v, tolerance, sweeps):
    power, current, _ = drawn
    for _ in range(sweeps):
        size = np.abs(v)
        miss = admittance @ v + injected + power / np.conj(v) + current * v / size
        straight = admittance + sparse.diags_array(current / (2 * size))
        turned = sparse.diags_array(-power / np.conj(v) ** 2 - current * v**2 / (2 * size**3))
        plus, minus = straight + turned, straight - turned
        real = sparse.block_array([[plus.real, -minus.imag], [plus.imag, minus.real]], format="csc")
        step = spsolve(real, np.concatenate((miss.real, miss.imag)))
        step = step[: v.size] + 1j * step[v.size :]
        v = v - step
        if not np.isfinite(v).all():
            return None
        if np.max(np.abs(step) / np.abs(v)) < tolerance:
            return v
    return None


def _fed(net):
    """Number of branches between each live node and its supply."""
    graph = networkx.MultiGraph()
    graph.add_nodes_from(range(net.node_count))
    graph.add_edges_from(zip(net.line_from.tolist(), net.line_to.tolist(), strict=True))
    graph.add_edges_from(zip(net.transformer_from.tolist(), net.transformer_to.tolist(), strict=True))
    depth = {}
    for source in net.source_node.tolist():
        depth |= networkx.single_source_shortest_path_length(graph, source)
    return depth


def _guess(net, at, depth, voltage, free):
    """No-load voltages, walked outward from the supplies."""
    ratio = at(net.transformer_ratio)
    steps = [(a, b, 1.0) for a, b in zip(net.line_from.tolist(), net.line_to.tolist(), strict=True)]
    pairs = zip(net.transformer_from.tolist(), net.transformer_to.tolist(), ratio, strict=True)
    steps += [(a, b, r) for a, b, r in pairs]
    near = {}
    for a, b, r in steps:
        near.setdefault(a, []).append((b, 1 / r))
        near.setdefault(b, []).append((a, r))
    level = voltage.copy()
    for node in sorted(depth, key=depth.get):
        for other, factor in near.get(node, ()):
            if depth[other] == depth[node] + 1:
                level[other] = level[node] * factor
    return level[free]
