"""Supports told apart: rigid ones, whose nodes move as prescribed, and springs."""

from __future__ import annotations

import numpy as np

from xlaxial.arrays import Floats, Ints
from xlaxial.model.network import Network


class Holds:
    """Rigid supports and springs of a network, for given stiffnesses.

    Parameters
    ----------
    network : Network
        Nodes and supports.
    stiffness : Floats
        (n_supports,) N/m, inf where rigid.
    """

    def __init__(self, network: Network, stiffness: Floats) -> None:
        node = network.supports.node
        self.size = node.size
        rigid = stiffness == np.inf
        self.rigid: Ints = rigid.nonzero()[0]  # (n_rigid,) supports
        self.rigid_node: Ints = node.take(self.rigid)
        self.spring: Ints | None = None  # (n_springs,) supports; None where all are springs
        self.spring_node, self.stiffness = node, stiffness
        if self.rigid.size:
            self.spring = (~rigid).nonzero()[0]
            self.spring_node, self.stiffness = node.take(self.spring), stiffness.take(self.spring)
        n, at = self.spring_node.size, self.spring_node
        self._repeated = n > 1 and not bool((at[1:] > at[:-1]).all())
        self._everywhere = n == network.n_nodes and not self._repeated  # a spring at every node, in order

    @property
    def n_springs(self) -> int:
        """Number of springs."""
        return int(self.spring_node.size)

    def of_springs(self, values: Floats) -> Floats:
        """Pick the springs' values, (n_cases, n_supports) to (n_cases, n_springs)."""
        return values if self.spring is None else values.take(self.spring, axis=1)

    def at_springs(self, nodal: Floats) -> Floats:
        """Return a copy of nodal values at springs, (n_cases, n_springs)."""
        return nodal.copy() if self._everywhere else nodal.take(self.spring_node, axis=1)

    def add_springs(self, nodal: Floats, values: Floats) -> None:
        """Add values of springs to nodal ones, (n_cases, n_nodes), in place."""
        if self._everywhere:
            nodal += values
            return
        for row, own in zip(nodal, values, strict=True):
            if self._repeated:
                np.add.at(row, self.spring_node, own)
            else:
                row[self.spring_node] += own
