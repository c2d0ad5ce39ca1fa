"""A network of bars from segments in order: places at x split segments, and results lead back to the rows."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from xlaxial.arrays import Flags, Floats, Ints
from xlaxial.functions.bars.nodes import AT_NODE, Nodes
from xlaxial.functions.bars.sections import Sections
from xlaxial.model.network import Bars


@dataclass(frozen=True)
class Pieces:
    """Bars of the members that can be solved, segment by segment; a segment that nothing splits is one piece."""

    bars: Bars
    node_member: Ints  # (n_nodes,) member, counted among those kept
    kept: Ints  # (n_kept,) members that are solved
    segment: Ints  # (n_bars,) position in Nodes.rows of each bar's segment
    first: Ints  # (n_segments_kept,) first bar of each kept segment
    kept_segments: Ints  # (n_segments_kept,) positions in Nodes.rows
    share: Floats  # (n_bars,) part of its segment's length
    node_of: Ints  # (Nodes.n_nodes,) node of the network for each user node, -1 where its member is not solved
    cut_segment: Ints  # (n_cuts,) position in Nodes.rows, sorted
    cut_x: Floats  # (n_cuts,) m from the segment's start
    cut_node: Ints  # (n_cuts,) node of the network
    cut_length: Floats  # (n_cuts,) m, length of the segment that is cut

    def node_at(self, segment: Ints, x: Floats) -> Ints:
        """Return the node that was made at places inside segments, which must be cuts (within the tolerance)."""
        keys = self.cut_segment + 0.5 * self.cut_x / self.cut_length
        sought = segment + 0.5 * x / self.cut_length[np.searchsorted(self.cut_segment, segment)]
        return self.cut_node[np.searchsorted(keys, sought, side="right") - 1]


def cut_pieces(nodes: Nodes, sections: Sections, good: Flags, cut_segment: Ints, cut_x: Floats) -> Pieces:
    """Cut segments at the places inside them and number the nodes anew, along each member.

    Parameters
    ----------
    nodes : Nodes
        Segments in order.
    sections : Sections
        By row of the segments table.
    good : Flags
        (n_members,) members that are solved.
    cut_segment, cut_x : Ints, Floats
        (n,) places inside segments: position in `nodes.rows` and m from the segment's start; may repeat.
    """
    kept = np.flatnonzero(good)
    renumbered = np.cumsum(good) - 1
    keep = good[nodes.member]
    segments = np.flatnonzero(keep)
    rows = nodes.rows[segments]
    length = sections.length[rows]
    inside = good[nodes.member[cut_segment]] if cut_segment.size else np.zeros(0, dtype=bool)
    cut_segment, cut_x = _distinct(cut_segment[inside], cut_x[inside], sections.length[nodes.rows])
    n_cuts = np.zeros(nodes.rows.size, dtype=np.int64)
    np.add.at(n_cuts, cut_segment, 1)
    pieces = n_cuts[segments] + 1
    first = np.cumsum(pieces) - pieces
    segment = np.repeat(segments, pieces) if cut_segment.size else segments
    n_bars = segment.size
    x_start, x_end = np.zeros(n_bars), sections.length[nodes.rows[segment]]
    position = np.full(nodes.rows.size, -1, dtype=np.int64)
    position[segments] = first
    before = position[cut_segment] + _rank(cut_segment)  # the bar that ends at each cut
    x_end[before] = cut_x
    x_start[before + 1] = cut_x
    member = renumbered[nodes.member[segment]]
    if nodes.labels is None:
        start = np.arange(n_bars) + member
        end = start + 1
        n_nodes = n_bars + kept.size
        node_of = np.full(nodes.n_nodes, -1, dtype=np.int64)
        node_of[nodes.start[segments]] = start[first]
        node_of[nodes.end[segments]] = end[first + pieces - 1]
        cut_node = end[before]
        node_member = np.repeat(np.arange(kept.size), np.bincount(member, minlength=kept.size) + 1)
    else:
        kept_nodes = good[nodes.node_member]
        node_of = np.where(kept_nodes, np.cumsum(kept_nodes) - 1, -1)
        n_old = int(kept_nodes.sum())
        start, end = node_of[nodes.start[segment]], node_of[nodes.end[segment]]
        cut_node = n_old + np.arange(cut_segment.size)
        end[before], start[before + 1] = cut_node, cut_node
        n_nodes = n_old + cut_segment.size
        node_member = np.concatenate([renumbered[nodes.node_member[kept_nodes]], member[before]])
    row = nodes.rows[segment]
    whole = length if not cut_segment.size else sections.length[row]
    area_start, area_end = sections.area_start[row], sections.area_end[row]
    taper = sections.round_taper[row]
    if cut_segment.size:
        area_start, area_end = (_area_at(x / whole, area_start, area_end, taper) for x in (x_start, x_end))
    bars = Bars(member, start, end, x_end - x_start, sections.modulus[row], area_start, area_end, taper)
    assert node_member.size == n_nodes
    return Pieces(
        bars,
        node_member,
        kept,
        segment,
        first,
        segments,
        (x_end - x_start) / whole,
        node_of,
        cut_segment,
        cut_x,
        cut_node,
        sections.length[nodes.rows[cut_segment]],
    )


def _distinct(segment: Ints, x: Floats, length: Floats) -> tuple[Ints, Floats]:
    """Sort places and drop those that fall together."""
    if not segment.size:
        return segment, x
    order = np.lexsort((x, segment))
    segment, x = segment[order], x[order]
    apart = np.ones(segment.size, dtype=bool)
    apart[1:] = (np.diff(segment) != 0) | (np.diff(x) > AT_NODE * length[segment[1:]])
    return segment[apart], x[apart]


def _rank(sorted_keys: Ints) -> Ints:
    """Place of each entry among its equals in a sorted array."""
    return np.arange(sorted_keys.size) - np.searchsorted(sorted_keys, sorted_keys, side="left")


def _area_at(part: Floats, start: Floats, end: Floats, round_taper: Flags) -> Floats:
    """Area at a part (0 to 1) of a segment's length, exact at both ends."""
    linear = start * (1.0 - part) + end * part
    round_ = (np.sqrt(start) * (1.0 - part) + np.sqrt(end) * part) ** 2
    uniform = start == end
    return np.where(
        uniform, start, np.where(part == 0.0, start, np.where(part == 1.0, end, np.where(round_taper, round_, linear)))
    )
