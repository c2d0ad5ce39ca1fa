"""Members as arrays: every member of a table stands in one network, side by side and unconnected.

All quantities are SI floats. Signs: x runs from a bar's start to its end; tension, displacement, applied force and
distributed load towards +x are positive.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

_PART = 16384  # bars that are looked at together: long chains are read once, others are told early

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Flags = NDArray[np.bool_]


@dataclass(frozen=True)
class Bars:
    """Straight bars between nodes; a user's segment is one bar, or several where a load or support splits it."""

    member: Ints  # (n_bars,) member that the bar belongs to, 0..n_members-1
    start: Ints  # (n_bars,) node at x = 0 of the bar
    end: Ints  # (n_bars,) node at x = length
    length: Floats  # (n_bars,) m
    modulus: Floats  # (n_bars,) Pa
    area_start: Floats  # (n_bars,) m2
    area_end: Floats  # (n_bars,) m2, equal to area_start where uniform
    round_taper: Flags  # (n_bars,) True: the diameter (root of the area) varies linearly; False: the area does


@dataclass(frozen=True)
class Supports:
    """Springs or rigid holds between a node and the ground; several may stand at one node (at most one rigid)."""

    node: Ints  # (n_supports,)
    stiffness: Floats  # (n_supports,) N/m, inf where rigid


@dataclass(frozen=True)
class Network:
    """Bars, nodes and supports of all members of a table."""

    n_members: int
    node_member: Ints  # (n_nodes,) member of each node
    bars: Bars
    supports: Supports

    @property
    def n_nodes(self) -> int:
        """Number of nodes of all members together."""
        return int(self.node_member.size)

    @cached_property
    def in_chains(self) -> bool:
        """Whether members stand one after the other, each a chain whose bars and nodes are numbered along it."""
        start, end = self.bars.start, self.bars.end
        if not start.size or start.size != self.n_nodes - self.n_members:
            return False
        if start.size == 1:  # calls for a single row are many
            return self.n_members == 1 and int(start[0]) == 0 and int(end[0]) == 1
        for a in range(0, start.size, _PART):
            own = start[a : a + _PART + 1]
            if not ((end[a : a + _PART] - own[:_PART] == 1).all() and (own[1:] > own[:-1]).all()):
                return False
        if self.n_members == 1:
            return True
        first = self.first_nodes
        return first.size == self.n_members and bool((self.node_member[first] == np.arange(first.size)).all())

    @cached_property
    def first_nodes(self) -> Ints:
        """First node of each member, (n_members,), where members stand one after the other."""
        if self.n_members == 1:
            return np.zeros(1, dtype=np.int64)
        return np.append(0, np.flatnonzero(self.node_member[1:] != self.node_member[:-1]) + 1)


@dataclass(frozen=True)
class Actions:
    """What acts on a network, one column per load case."""

    force: Floats  # (n_nodes, n_cases) N, applied at nodes, towards +x
    distributed: Floats  # (n_bars, n_cases) N/m along the bar, towards +x
    imposed: Floats  # (n_bars, n_cases) m, free lengthening: temperature, misfit, imposed strain
    settlement: Floats  # (n_supports, n_cases) m, towards +x


@dataclass(frozen=True)
class LinearState:
    """State of a network whose bars and supports are all linear, one column per load case."""

    displacement: Floats  # (n_nodes, n_cases) m, towards +x
    force_start: Floats  # (n_bars, n_cases) N at the bar's start, tension positive
    force_end: Floats  # (n_bars, n_cases) N at the bar's end, force_start - distributed * length
    reaction: Floats  # (n_supports, n_cases) N exerted on the member, towards +x
    residual: Floats  # (n_members, n_cases) |sum of reactions and loads| over the largest |force| of the member
    imbalance: (
        Floats  # (n_members, n_cases) bound of the error of any force from what is out of balance at nodes, as above
    )
    elongation: Floats  # (n_bars, n_cases) m, displacement of the bar's end less that of its start
