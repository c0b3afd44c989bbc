"""What a solve yields, row by row of the network."""

from dataclasses import dataclass
from functools import cached_property

from solver.forest import Forest
from solver.network import Complex, Index, Network, Real
from solver.rounds import Trouble
from solver.status import Status


@dataclass(frozen=True)
class Solution:
    """The answer at every operating point; nan at dead rows and where there is no answer.

    network : Network
    forest : Forest, or the Trouble that kept it from being solved
    status : (batch,) each a Status
    voltage : (node, k, batch) complex [V]
    line_in : (line, k, batch) complex [A] enters at `line_from`
    line_out : (line, k, batch) complex [A] leaves at `line_to`
    transformer_in : (transformer, k, batch) complex [A] enters winding 1
    transformer_out : (transformer, k, batch) complex [A] leaves winding 2
    load_power : (load, k, batch) complex [VA] drawn
    load_current : (load, k, batch) complex [A] drawn
    shunt_power : (shunt, k, batch) complex [VA] drawn
    source_current : (source, k, batch) complex [A] supplied
    source_power : (source, k, batch) complex [VA] supplied
    iterations : (batch,) int, sweeps taken
    closure : (batch,) float, |supplied - drawn - lost| over the larger of supplied and drawn, with the
        losses summed branch by branch from their currents and voltages
    line_series_loss : (line, batch) complex [VA] of all conductors, I² Z
    line_charging : (line, batch) complex [VA] drawn by the admittance at both ends, V² conj(Y)
    transformer_series_loss : (transformer, batch) complex [VA], I² Z; its real part is the copper loss
    transformer_magnetising_loss : (transformer, batch) complex [VA], V² conj(Y); real part the iron loss
    earth_current : (earth, batch) complex [A] into each electrode
    """

    network: Network
    forest: Forest | Trouble
    status: tuple[Status, ...]
    voltage: Complex
    line_in: Complex
    line_out: Complex
    transformer_in: Complex
    transformer_out: Complex
    load_power: Complex
    load_current: Complex
    shunt_power: Complex
    source_current: Complex
    source_power: Complex
    iterations: Index
    closure: Real
    line_series_loss: Complex
    line_charging: Complex
    transformer_series_loss: Complex
    transformer_magnetising_loss: Complex
    earth_current: Complex

    @cached_property
    def solved(self) -> bool:
        """True where every operating point has an answer."""
        return all(s is Status.SOLVED for s in self.status)

    @cached_property
    def line_loss(self) -> Complex:
        """(line, batch) complex [VA] series loss and charging of all conductors."""
        return self.line_series_loss + self.line_charging

    @cached_property
    def transformer_loss(self) -> Complex:
        """(transformer, batch) complex [VA] series and magnetising loss."""
        return self.transformer_series_loss + self.transformer_magnetising_loss
