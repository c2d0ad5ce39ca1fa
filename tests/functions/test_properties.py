"""Laws that always hold, through the worksheet functions, on random schedules."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from xlaxial.functions import AX_REACTIONS, AX_SEGMENTS

HEADINGS = [
    "Length (mm)",
    "Diameter (mm)",
    "End diameter (mm)",
    "E (GPa)",
    "Alpha (1e-6/K)",
    "dT (K)",
    "Misfit (mm)",
    "q (kN/m)",
]
WANTED = [["Force start (kN)", "Force end (kN)", "Displacement start (mm)", "Displacement end (mm)"]]
CLOSE = 1e-8
LEAST = (1.0, 1.0, 1e-3, 1e-3)  # kN, kN, mm, mm: answers below are compared with these, not with themselves


def number(least: float, most: float) -> st.SearchStrategy[float]:
    return st.floats(least, most, allow_nan=False).map(lambda x: round(x, 4))


segment = st.tuples(
    number(50, 3000),
    number(8, 90),
    number(8, 90),
    number(10, 400),
    number(0, 30),
    number(-40, 40),
    number(-2, 2),
    number(-30, 30),
).map(list)
chains = st.lists(segment, min_size=1, max_size=6)


@st.composite
def members(draw: st.DrawFn) -> tuple[list[list[Any]], list[list[Any]], list[list[Any]]]:
    segments = draw(chains)
    n = len(segments)
    nodes = draw(st.lists(st.integers(0, n), min_size=1, max_size=3, unique=True))
    supports = [[node, draw(st.none() | number(1, 500)), draw(number(-3, 3))] for node in nodes]
    loads = [[draw(st.integers(0, n)), draw(number(-90, 90))] for _ in range(draw(st.integers(0, 3)))]
    return segments, supports, loads


def tables(member: Any) -> tuple[Any, Any, Any]:
    segments, supports, loads = member
    return (
        [HEADINGS, *segments],
        [["Node", "Stiffness (kN/mm)", "Settlement (mm)"], *supports],
        [["Node", "Force (kN)"], *loads],
    )


def scale(rows: list[list[float]], column: int = 0) -> float:
    return max(1e-3, *(abs(row[column]) for row in rows), *(abs(row[min(column + 1, len(row) - 1)]) for row in rows))


def near(rows: list[list[float]], other: list[list[float]], factor: float = 1.0) -> bool:
    for column in range(len(rows[0])):
        size = max(LEAST[column], *(abs(row[column]) for row in rows))
        if any(abs(a[column] * factor - b[column]) > CLOSE * size for a, b in zip(rows, other, strict=True)):
            return False
    return True


@settings(max_examples=80, deadline=None)
@given(members())
def test_equilibrium_of_the_whole(member: Any) -> None:
    segments, _, loads = member
    reactions = AX_REACTIONS(*tables(member), "kN")
    applied = sum(load[1] for load in loads) + sum(row[7] * row[0] / 1e3 for row in segments)
    size = max(1.0, *(abs(r[0]) for r in reactions), abs(applied))
    assert abs(sum(r[0] for r in reactions) + applied) < CLOSE * size


@settings(max_examples=60, deadline=None)
@given(members(), number(-3, 3))
def test_actions_and_answers_scale_together(member: Any, factor: float) -> None:
    segments, supports, loads = member
    scaled = (
        [[*row[:5], row[5] * factor, row[6] * factor, row[7] * factor] for row in segments],
        [[n, k, s * factor] for n, k, s in supports],
        [[n, f * factor] for n, f in loads],
    )
    assert near(AX_SEGMENTS(*tables(member), WANTED), AX_SEGMENTS(*tables(scaled), WANTED), factor)


@settings(max_examples=60, deadline=None)
@given(members())
def test_superposition(member: Any) -> None:
    segments, supports, loads = member
    still = [[*row[:5], 0, 0, 0] for row in segments]
    parts = [
        (segments, [[n, k, 0] for n, k, _ in supports], []),
        (still, supports, []),
        (still, [[n, k, 0] for n, k, _ in supports], loads),
    ]
    whole = AX_SEGMENTS(*tables(member), WANTED)
    answers = [AX_SEGMENTS(*tables(part), WANTED) for part in parts]
    summed = [[sum(values) for values in zip(*rows, strict=True)] for rows in zip(*answers, strict=True)]
    for column in range(4):
        size = max(LEAST[column], *(abs(row[column]) for answer in answers for row in answer))
        assert all(abs(a[column] - b[column]) < CLOSE * size for a, b in zip(whole, summed, strict=True))


@settings(max_examples=60, deadline=None)
@given(members())
def test_mirror(member: Any) -> None:
    segments, supports, loads = member
    n = len(segments)
    mirrored = (
        [[r[0], r[2], r[1], *r[3:7], -r[7]] for r in reversed(segments)],
        [[n - node, k, -s] for node, k, s in supports],
        [[n - node, -f] for node, f in loads],
    )
    rows = AX_SEGMENTS(*tables(member), WANTED)
    other = [[r[1], r[0], -r[3], -r[2]] for r in reversed(AX_SEGMENTS(*tables(mirrored), WANTED))]
    assert near(rows, other)


@settings(max_examples=60, deadline=None)
@given(members(), st.data())
def test_splitting_a_segment_changes_nothing(member: Any, data: st.DataObject) -> None:
    segments, supports, loads = member
    at = data.draw(st.integers(0, len(segments) - 1))
    part = data.draw(st.floats(0.1, 0.9))
    row = segments[at]
    middle = row[1] + (row[2] - row[1]) * part
    first = [row[0] * part, row[1], middle, *row[3:6], row[6] * part, row[7]]
    second = [row[0] * (1 - part), middle, row[2], *row[3:6], row[6] * (1 - part), row[7]]
    moved = lambda node: node + (node > at)  # noqa: E731 - a name for one expression
    split = (
        [*segments[:at], first, second, *segments[at + 1 :]],
        [[moved(n), k, s] for n, k, s in supports],
        [[moved(n), f] for n, f in loads],
    )
    rows = AX_SEGMENTS(*tables(member), WANTED)
    parts = AX_SEGMENTS(*tables(split), WANTED)
    joined = [parts[at][0], parts[at + 1][1], parts[at][2], parts[at + 1][3]]
    assert near(rows, [*parts[:at], joined, *parts[at + 2 :]])


@settings(max_examples=40, deadline=None)
@given(members(), st.data())
def test_a_load_at_x_equals_a_load_at_a_node_made_there(member: Any, data: st.DataObject) -> None:
    segments, supports, _ = member
    part = data.draw(st.floats(0.1, 0.9))
    first, supports_table, _ = tables(member)
    x = segments[0][0] * part / 1e3
    rows = AX_SEGMENTS(first, supports_table, [["x (m)", "Force (kN)"], [x, 25]], WANTED)
    row = segments[0]
    middle = row[1] + (row[2] - row[1]) * part
    split = [
        [row[0] * part, row[1], middle, *row[3:6], row[6] * part, row[7]],
        [row[0] * (1 - part), middle, row[2], *row[3:6], row[6] * (1 - part), row[7]],
        *segments[1:],
    ]
    moved = [[n + (n > 0), k, s] for n, k, s in supports]
    parts = AX_SEGMENTS(*tables((split, moved, [[1, 25]])), WANTED)
    assert near(rows, [[parts[0][0], parts[1][1], parts[0][2], parts[1][3]], *parts[2:]])


@settings(max_examples=40, deadline=None)
@given(members())
def test_units_change_nothing(member: Any) -> None:
    segments, supports, loads = member
    inch, kip, ksi = 25.4, 4.4482216152605, 6.894757293168361
    imperial = (
        [
            [
                "Length (in)",
                "Diameter (in)",
                "End diameter (in)",
                "E (ksi)",
                "Alpha (1e-6/°F)",
                "dT (°F)",
                "Misfit (in)",
                "q (kip/ft)",
            ],
            *(
                [
                    r[0] / inch,
                    r[1] / inch,
                    r[2] / inch,
                    r[3] * 1e3 / ksi,
                    r[4] / 1.8,
                    r[5] * 1.8,
                    r[6] / inch,
                    r[7] / (kip / 0.3048),
                ]
                for r in segments
            ),
        ],
        [
            ["Node", "Stiffness (kip/in)", "Settlement (in)"],
            *([n, None if k is None else k * inch / kip, s / inch] for n, k, s in supports),
        ],
        [["Node", "Force (lbf)"], *([n, f * 1e3 / kip] for n, f in loads)],
    )
    assert near(AX_SEGMENTS(*tables(member), WANTED), AX_SEGMENTS(*imperial, WANTED))


@settings(max_examples=30, deadline=None)
@given(st.lists(members(), min_size=2, max_size=4), st.randoms())
def test_the_order_of_rows_changes_nothing(some: Any, random: Any) -> None:
    rows = [[f"M{m}", i + 1, *row] for m, (segments, _, _) in enumerate(some) for i, row in enumerate(segments)]
    ends = [[f"M{m}", *row] for m, (_, supports, _) in enumerate(some) for row in supports]
    acts = [[f"M{m}", *row] for m, (_, _, loads) in enumerate(some) for row in loads]
    shuffled = rows.copy()
    random.shuffle(shuffled)
    random.shuffle(ends)
    head = ["Mark", "Order", *HEADINGS]
    others = [["Mark", "Node", "Stiffness (kN/mm)", "Settlement (mm)"], *ends], [["Mark", "Node", "Force (kN)"], *acts]
    plain = AX_SEGMENTS([head, *rows], *others, WANTED)
    mixed = AX_SEGMENTS([head, *shuffled], *others, WANTED)
    assert near([plain[rows.index(row)] for row in shuffled], mixed)


@settings(max_examples=40, deadline=None)
@given(members())
def test_one_member_alone_equals_the_same_member_in_a_schedule(member: Any) -> None:
    alone = AX_SEGMENTS(*tables(member), WANTED)
    segments, supports, loads = tables(member)
    marked = [["Mark", *segments[0]], ["first", 100, 10, 10, 200, 12, 5, 0, 0], *(["me", *row] for row in segments[1:])]
    ends = [["Mark", *supports[0]], ["first", 0, None, 0], *(["me", *row] for row in supports[1:])]
    acts = [["Mark", *loads[0]], *(["me", *row] for row in loads[1:])]
    assert near(alone, AX_SEGMENTS(marked, ends, acts, WANTED)[1:])


def test_the_near_check_can_fail() -> None:
    assert not near([[1.0, 2.0]], [[1.0, 2.1]])
    assert scale([[1.0, -5.0]]) == pytest.approx(5.0)
