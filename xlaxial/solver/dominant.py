"""Factorisation without subtractions, for members whose stiffnesses lie too far apart for the usual factors.

Every node keeps its stiffness to the ground as a number of its own. Eliminating a node joins its neighbours by
w_ij w_ik / d_i and gives each the ground stiffness w_ij g_i / d_i, with d_i = g_i + sum_j w_ij: sums of positive terms
only, so that every factor is right to the last digits whatever the stiffness ratio. Grassmann, Taksar and Heyman,
"Regenerative analysis and steady state distributions for Markov chains", Operations Research 33 (1985), use it on
Markov chains; for symmetric networks it is the reduction of springs in series and star to mesh.
"""

from __future__ import annotations

from heapq import heapify, heappop, heappush

import numpy as np

from xlaxial.arrays import Flags, Floats
from xlaxial.model.network import Network

MOST_NODES = 200_000  # larger members are not tried: the elimination goes node by node


class Dominant:
    """Factors of one member, free of subtractions.

    Parameters
    ----------
    network : Network
        One member, every piece of it held.
    bar : Floats
        (n_bars,) N/m.
    support : Floats
        (n_supports,) N/m, inf where rigid.
    """

    def __init__(self, network: Network, bar: Floats, support: Floats) -> None:
        n = network.n_nodes
        self._ground = [0.0] * n
        rigid: Flags = np.zeros(n, dtype=bool)
        rigid[network.supports.node[support == np.inf]] = True
        self._free = np.flatnonzero(~rigid)
        for node, k in zip(network.supports.node.tolist(), support.tolist(), strict=True):
            if not rigid[node]:
                self._ground[node] += k
        beside: list[dict[int, float]] = [{} for _ in range(n)]
        for i, j, k in zip(network.bars.start.tolist(), network.bars.end.tolist(), bar.tolist(), strict=True):
            if rigid[i] or rigid[j]:
                if not rigid[i]:
                    self._ground[i] += k
                elif not rigid[j]:
                    self._ground[j] += k
            elif i != j:
                beside[i][j] = beside[i].get(j, 0.0) + k
                beside[j][i] = beside[j].get(i, 0.0) + k
        self._steps: list[tuple[int, float, dict[int, float]]] = []  # node, pivot, share of its force for each other
        self._eliminate(beside)

    def _eliminate(self, beside: list[dict[int, float]]) -> None:
        """Eliminate the node with the fewest neighbours first."""
        ground = self._ground
        waiting = [(len(beside[i]), i) for i in self._free.tolist()]
        heapify(waiting)
        gone = [False] * len(beside)
        while waiting:
            count, i = heappop(waiting)
            if gone[i] or count != len(beside[i]):
                continue
            gone[i] = True
            own = beside[i]
            pivot = ground[i] + sum(own.values())
            shares = {j: w / pivot for j, w in own.items()} if pivot > 0.0 else {}
            self._steps.append((i, pivot, shares))
            others = list(own.items())
            for j, share in shares.items():
                row = beside[j]
                del row[i]
                ground[j] += share * ground[i]
                for k, w in others:
                    if k != j:
                        row[k] = row.get(k, 0.0) + share * w
                heappush(waiting, (len(row), j))

    def solve_rows(self, rows: Floats) -> None:
        """Solve in place with a case per row, (n_cases, n_nodes) N to m; held nodes get zero."""
        for row in rows:
            force = row.tolist()
            row[:] = 0.0
            for i, _, shares in self._steps:
                own = force[i]
                if own != 0.0:
                    for j, share in shares.items():
                        force[j] += share * own
            moved = [0.0] * len(force)
            for i, pivot, shares in reversed(self._steps):
                u = force[i] / pivot if pivot > 0.0 else 0.0
                for j, share in shares.items():
                    u += share * moved[j]
                moved[i] = u
            row[:] = moved
