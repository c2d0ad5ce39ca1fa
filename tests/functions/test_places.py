"""Supports and loads at x, members of unlike kinds in one table, preload in networks."""

from __future__ import annotations

from typing import Any

import pytest

from xlaxial import CellError
from xlaxial.functions import AX_MEMBERS, AX_REACTIONS, AX_SEGMENTS

CHAIN = [
    ["Length (m)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)"],
    [2.0, 500, 200, 12, 20],
    [1.5, 800, 200, 12, 20],
]
SPLIT = [CHAIN[0], [0.8, 500, 200, 12, 20], [1.2, 500, 200, 12, 20], [1.5, 800, 200, 12, 20]]
WANTED = [["Force start (kN)", "Force end (kN)", "Displacement start (mm)", "Displacement end (mm)"]]


def near(rows: list[list[float]]) -> list[list[Any]]:
    return [[pytest.approx(value, rel=1e-11, abs=1e-10) for value in row] for row in rows]


@pytest.mark.parametrize(("stiffness", "settlement"), [(None, None), (None, 0.7), (55, None), (55, -0.4)])
def test_a_support_at_x_equals_one_at_a_node_made_there(stiffness: float | None, settlement: float | None) -> None:
    ends = [["Node", "x (m)", "Stiffness (kN/mm)", "Settlement (mm)"], [0, None, None, None], [2, None, 80, None]]
    at_x = [*ends, [None, 0.8, stiffness, settlement]]
    at_node = [ends[0], ends[1], [3, None, 80, None], [1, None, stiffness, settlement]]
    loads_x = [["Node", "x (m)", "Force (kN)"], [1, None, 10], [None, 0.8, 7], [None, 0.8, -2]]
    loads_node = [["Node", "Force (kN)"], [2, 10], [1, 5]]
    whole, parts = AX_SEGMENTS(CHAIN, at_x, loads_x, WANTED), AX_SEGMENTS(SPLIT, at_node, loads_node, WANTED)
    assert whole == near([[parts[0][0], parts[1][1], parts[0][2], parts[1][3]], parts[2]])
    assert AX_REACTIONS(CHAIN, at_x, loads_x, "kN") == near(AX_REACTIONS(SPLIT, at_node, loads_node, "kN"))


def test_x_at_a_node_is_that_node() -> None:
    ends = [["Node", "x (m)"], [0, None], [None, 3.5]]
    loads = [["x (m)", "Force (kN)"], [2.0 + 1e-12, 12]]
    expected = AX_SEGMENTS(CHAIN, [["Node"], [0], [2]], [["Node", "Force (kN)"], [1, 12]], WANTED)
    assert AX_SEGMENTS(CHAIN, ends, loads, WANTED) == near(expected)
    [[redundants]] = AX_MEMBERS(CHAIN, ends, loads, "Redundants")
    assert redundants == 1


def test_a_spring_and_a_rigid_support_may_share_a_node_and_two_springs_add() -> None:
    one = AX_SEGMENTS(CHAIN, [["Node", "k (kN/mm)"], [0, None], [2, 70]], None, WANTED)
    two = [["Node", "k (kN/mm)"], [0, None], [2, 30], [2, 40]]
    assert AX_SEGMENTS(CHAIN, two, None, WANTED) == near(one)
    both = [["Node", "k (kN/mm)"], [0, None], [0, 30], [2, 70]]
    assert AX_SEGMENTS(CHAIN, both, None, WANTED) == near(one)
    assert AX_REACTIONS(CHAIN, both, None, "kN")[1] == [pytest.approx(0.0, abs=1e-12)]


def test_two_rigid_supports_at_one_x_are_refused() -> None:
    ends = [["x (m)"], [0.8], [0.8]]
    assert AX_SEGMENTS(CHAIN, ends, None, "kN") == [[CellError("#VALUE!")]] * 2


def test_a_labelled_chain_takes_x_and_equals_the_series() -> None:
    labelled = [["From", "To", *CHAIN[0]], ["wall", "mid", *CHAIN[1]], ["mid", "anchor", *CHAIN[2]]]
    ends, loads = [["Node", "k (kN/mm)"], ["wall", 50], ["anchor", None]], [["x (m)", "Force (kN)"], [2.6, 33]]
    series = AX_SEGMENTS(CHAIN, [["Node", "k (kN/mm)"], [0, 50], [2, None]], loads, WANTED)
    assert AX_SEGMENTS(labelled, ends, loads, WANTED) == near(series)


def test_chains_and_networks_in_one_table_do_not_disturb_each_other() -> None:
    heading = ["Mark", "From", "To", "L (m)", "A (mm2)", "E (GPa)", "Misfit (mm)"]
    chain = [["C", "a", "b", 1, 300, 200, 0.2], ["C", "b", "c", 2, 500, 70, None]]
    ring = [
        ["R", 1, 2, 1, 300, 200, 0.1],
        ["R", 2, 3, 1.4, 250, 100, None],
        ["R", 1, 3, 2, 400, 70, None],
        ["R", 1, 3, 2, 90, 200, -0.3],
    ]
    ends = [["Mark", "Node", "k (kN/mm)"], ["C", "a", None], ["C", "c", 20], ["R", 1, None], ["R", 3, 45]]
    loads = [["Mark", "Node", "Force (kN)"], ["R", 2, 11], ["C", "b", -8]]
    together = AX_SEGMENTS([heading, *chain, *ring], ends, loads, WANTED)
    mixed = AX_SEGMENTS([heading, ring[0], chain[0], ring[1], ring[2], chain[1], ring[3]], ends, loads, WANTED)
    assert [mixed[i] for i in (1, 4, 0, 2, 3, 5)] == near(together)
    assert together[:2] == near(AX_SEGMENTS([heading, *chain], [ends[0], *ends[1:3]], [loads[0], loads[2]], WANTED))
    assert together[2:] == near(AX_SEGMENTS([heading, *ring], [ends[0], *ends[3:]], loads[:2], WANTED))


def test_preloads_of_parallel_runs_all_hold_at_lock_off() -> None:
    """By the meaning of preload: with nothing else acting every preloaded run has its force, and the rest balances it."""
    heading = ["From", "To", "L (m)", "A (mm2)", "E (GPa)", "Preload (kN)"]
    rows = [
        ["l", "r", 2, 500, 200, 40],
        ["l", "m", 1, 300, 200, 25],
        ["m", "r", 1, 400, 200, None],
        ["l", "r", 2, 3000, 30, None],
    ]
    forces = [row[0] for row in AX_SEGMENTS([heading, *rows], [["Node"], ["l"]], None, "kN")]
    assert forces == [pytest.approx(v) for v in (40, 25, 25, -65)]
    assert AX_REACTIONS([heading, *rows], [["Node"], ["l"]], None, "kN") == [[pytest.approx(0, abs=1e-10)]]


def test_lock_off_slip_is_taken_off_the_preload() -> None:
    """Fully restrained: N = P - slip E A / L, for a tie and for a strut alike (less magnitude)."""
    heading = ["L (mm)", "A (mm2)", "E (GPa)", "Preload (kN)", "Lock-off slip (mm)"]
    for sign in (1, -1):
        rows = AX_SEGMENTS([heading, [4000, 900, 195, sign * 150, 0.8]], [["Node"], [0], [1]], None, "kN")
        assert rows == [[pytest.approx(sign * (150 - 0.8 * 195 * 900 / 4000))]]


def test_preload_by_the_loads_table_adds_to_the_segments_own() -> None:
    heading = ["L (mm)", "A (mm2)", "E (GPa)", "Preload (kN)"]
    loads = [["Segment", "Preload (kN)"], [1, 12]]
    assert AX_SEGMENTS([heading, [900, 300, 200, 30]], [["Node"], [0], [1]], loads, "kN") == [[pytest.approx(42)]]
