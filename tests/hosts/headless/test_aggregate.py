"""AGGREGATE against the plain spreadsheet functions of the same cells (NumPy and arithmetic as the reference)."""

from __future__ import annotations

import statistics

import pytest

from xlaxial.hosts.headless.aggregate import aggregate

NA = {"type": "Error", "kind": "Na"}
CELLS = [[4.0, "text"], [NA, 1.5], [None, 9.0], [True, -2.0]]
NUMBERS = [4.0, 1.5, 9.0, -2.0]


@pytest.mark.parametrize(
    ("function", "expected"),
    [
        (1, statistics.fmean(NUMBERS)), (2, 4), (3, 6), (4, 9.0), (5, -2.0), (6, 4 * 1.5 * 9 * -2), (7, statistics.stdev(NUMBERS)),
        (8, statistics.pstdev(NUMBERS)), (9, 12.5), (10, statistics.variance(NUMBERS)), (11, statistics.pvariance(NUMBERS)), (12, 2.75),
    ],
)  # fmt: skip
def test_summaries_pass_errors_over_or_keep_them(function: int, expected: float) -> None:
    assert aggregate(function, 6, CELLS) == pytest.approx(expected)
    assert aggregate(function, 4, CELLS) == NA


def test_ranks() -> None:
    assert [aggregate(14, 6, CELLS, k) for k in (1, 2, 4)] == [9.0, 4.0, -2.0]
    assert [aggregate(15, 6, CELLS, k) for k in (1, 2, 4)] == [-2.0, 1.5, 9.0]
    assert aggregate(14, 6, CELLS, 5)["kind"] == aggregate(15, 6, CELLS, 0)["kind"] == "Num"
    assert aggregate(14, 6, CELLS, "x")["kind"] == aggregate(14, 6, CELLS)["kind"] == "Value"


def test_what_cannot_be_known_is_not_evaluated() -> None:
    for option in (0, 1, 2, 3, 5, 7):
        assert aggregate(9, option, CELLS)["kind"] == "NImpl"
    assert aggregate(13, 6, CELLS)["kind"] == aggregate(19, 6, CELLS, 1)["kind"] == "NImpl"


def test_without_numbers() -> None:
    assert aggregate(9, 6, [["a"]]) == aggregate(4, 6, [["a"]]) == 0.0
    assert aggregate(1, 6, [["a"]])["kind"] == "Div"
    assert aggregate(12, 6, [["a"]])["kind"] == "Num"
