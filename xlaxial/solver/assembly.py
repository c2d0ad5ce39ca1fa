"""Stiffness of a network, factorised: tridiagonal where members are chains, sparse elsewhere.

The pattern is found once; `factor` takes any stiffnesses, so that tangents of other laws can use it too.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from scipy.linalg.lapack import dpttrf, dpttrs

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.model.network import Network


class Incidence:
    """Differences of nodal values along bars, and sums of bar forces at nodes; slices where the bars are one chain."""

    def __init__(self, start: Ints, end: Ints, n_nodes: int) -> None:
        self.start, self.end, self.n_nodes = start, end, n_nodes
        n = start.size
        self.single = n_nodes == n + 1 and n > 0 and int(start[0]) == 0 and bool((np.diff(start) == 1).all()) and bool(
            (end - start == 1).all()
        )

    def ends(self, values: Floats) -> tuple[Floats, Floats]:
        """Return nodal values at the bars' starts and ends, (n_bars, ...)."""
        if self.single:
            return values[:-1], values[1:]
        return values[self.start], values[self.end]

    def pull(self, at_start: Floats, at_end: Floats) -> Floats:
        """Return the force of the bars on the nodes, (n_nodes, n_cases), from their forces at both ends."""
        if self.single:
            out = np.empty((self.n_nodes, at_start.shape[1]))
            out[:-1] = at_start
            out[-1] = 0.0
            out[1:] -= at_end
            return out
        return self.gather(self.start, at_start) - self.gather(self.end, at_end)

    def gather(self, at: Ints, values: Floats) -> Floats:
        """Return sums of values by node, (n_nodes, n_cases)."""
        return sums(at, values, self.n_nodes)


def sums(at: Ints, values: Floats, size: int) -> Floats:
    """Return sums of the rows of `values` by their place `at`, (size, n_cases)."""
    out = np.empty((size, values.shape[1]))
    for case in range(values.shape[1]):
        out[:, case] = np.bincount(at, weights=values[:, case], minlength=size)
    return out


class Stiffness:
    """The assembled stiffness of a network, factorised for given bar and support stiffnesses."""

    def __init__(self, network: Network) -> None:
        self._network = network
        self.incidence = Incidence(network.bars.start, network.bars.end, network.n_nodes)
        self.rigid = np.isinf(network.supports.stiffness)
        self.fixed: Flags = np.zeros(network.n_nodes, dtype=bool)
        self.fixed[network.supports.node[self.rigid]] = True
        near = np.abs(network.bars.end - network.bars.start) == 1
        self._chain = bool(near.all())
        self._factors: Any = None

    def factor(self, bar: Floats, support: Floats) -> None:
        """Factorise for bar stiffnesses (n_bars,) N/m and support stiffnesses (n_supports,) N/m (rigid: passed over)."""
        network, n = self._network, self._network.n_nodes
        start, end = network.bars.start, network.bars.end
        elastic = ~self.rigid
        diagonal = np.zeros(n)  # bincount of nothing would be an array of integers
        diagonal += np.bincount(network.supports.node[elastic], weights=support[elastic], minlength=n)
        if self.incidence.single:
            diagonal[:-1] += bar
            diagonal[1:] += bar
        else:
            diagonal += np.bincount(start, weights=bar, minlength=n)
            diagonal += np.bincount(end, weights=bar, minlength=n)
        diagonal[self.fixed] = 1.0
        if self._chain:
            if self.incidence.single:
                beside = -bar
            else:
                beside = -np.bincount(np.minimum(start, end), weights=bar, minlength=n)[: n - 1]
            if n > 1:
                at = np.flatnonzero(self.fixed)
                beside[at[at < n - 1]] = 0.0
                beside[at[at > 0] - 1] = 0.0
                d, e, info = dpttrf(diagonal, beside, overwrite_d=1, overwrite_e=1)
                if info == 0:
                    self._factors = (d, e)
                    return
            else:
                self._factors = (diagonal, beside)
                return
            diagonal = self._diagonal_again(bar, support)
        self._factors = self._sparse(bar, diagonal)

    def _diagonal_again(self, bar: Floats, support: Floats) -> Floats:
        """Return the diagonal once more, where a factorisation that failed has overwritten it."""
        network, n = self._network, self._network.n_nodes
        elastic = ~self.rigid
        out = np.zeros(n)
        out += np.bincount(network.supports.node[elastic], weights=support[elastic], minlength=n)
        out += np.bincount(network.bars.start, weights=bar, minlength=n)
        out += np.bincount(network.bars.end, weights=bar, minlength=n)
        out[self.fixed] = 1.0
        return out

    def _sparse(self, bar: Floats, diagonal: Floats) -> Any:
        from scipy.sparse import coo_array
        from scipy.sparse.linalg import splu

        n = self._network.n_nodes
        start, end = self._network.bars.start, self._network.bars.end
        free = ~(self.fixed[start] | self.fixed[end])
        i = np.concatenate([np.arange(n), start[free], end[free]])
        j = np.concatenate([np.arange(n), end[free], start[free]])
        v = np.concatenate([diagonal, -bar[free], -bar[free]])
        matrix = coo_array((v, (i, j)), shape=(n, n)).tocsc()
        return splu(matrix, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options={"SymmetricMode": True})

    def solve(self, force: Floats) -> Floats:
        """Return displacements (n_nodes, n_cases) m under nodal forces; those of rigid nodes are the force's entries."""
        if isinstance(self._factors, tuple):
            if self._network.n_nodes == 1:
                return force / self._factors[0][:, None]
            return dpttrs(*self._factors, force)[0]
        out: Floats = self._factors.solve(np.ascontiguousarray(force))
        return out
