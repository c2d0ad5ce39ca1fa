from __future__ import annotations

import numpy as np
import pytest

from xlaxial.model.network import Actions, Bars, Network, Supports


def make_network(ends, supports, length=1.0, modulus=1.0, area=1.0, area_end=None, round_taper=False, member=None):
    """Bars (start, end) with values or one value for all; supports (node, stiffness); member of each node."""
    n_bars = len(ends)
    start, end = np.array(ends, dtype=np.int64).reshape(n_bars, 2).T.copy()

    def spread(values, dtype=float):
        return np.array(np.broadcast_to(np.array(values, dtype=dtype), (n_bars,)))

    n_nodes = int(max(start.max(), end.max(), *(s[0] for s in supports), 0)) + 1 if member is None else len(member)
    node_member = np.zeros(n_nodes, dtype=np.int64) if member is None else np.array(member, dtype=np.int64)
    area = spread(area)
    bars = Bars(
        node_member[start],
        start,
        end,
        spread(length),
        spread(modulus),
        area,
        area if area_end is None else spread(area_end),
        spread(round_taper, bool),
    )
    node = np.array([s[0] for s in supports], dtype=np.int64)
    return Network(
        int(node_member.max()) + 1,
        node_member,
        bars,
        Supports(node, np.array([s[1] for s in supports], dtype=float)),
    )


def make_actions(network, force=None, q=None, imposed=None, settlement=None):
    """Each (n,) or (n, n_cases); nothing where left out."""
    n_bars = network.bars.start.size
    sizes = (network.n_nodes, n_bars, n_bars, network.supports.node.size)
    given = [None if v is None else np.array(v, dtype=float) for v in (force, q, imposed, settlement)]
    given = [v if v is None or v.ndim == 2 else v[:, None] for v in given]
    n_cases = max([v.shape[1] for v in given if v is not None], default=1)
    return Actions(*(np.zeros((n, n_cases)) if v is None else v for v, n in zip(given, sizes, strict=True)))


@pytest.fixture(scope="session")
def network():
    return make_network


@pytest.fixture(scope="session")
def actions():
    return make_actions
