"""Numbers typed as text."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from xlaxial.problems import AxialError
from xlaxial.tables.numbers import parse_number


@pytest.mark.parametrize(
    ("text", "mark", "expected"),
    [
        ("12", ".", (12.0, None)), (" 12.5 ", ".", (12.5, None)), ("−12", ".", (-12.0, None)), ("+3", ".", (3.0, None)),
        ("1e-6", ".", (1e-6, None)), ("1.2E5", ".", (1.2e5, None)), ("12 in", ".", (12.0, "in")), ("12in", ".", (12.0, "in")),
        ("3.5 kN/mm", ".", (3.5, "kN/mm")), ("1 234.5", ".", (1234.5, None)), ("1\u00a0234\u00a0567", ".", (1234567.0, None)),
        ("50%", ".", (50.0, "%")), ("12.5 µε", ".", (12.5, "µε")), ("1,234.5", ".", (1234.5, None)), ("1,234,567", ".", (1234567.0, None)),
        ("12,5", ",", (12.5, None)), ("1.234,5", ",", (1234.5, None)), ("1 234,5 kN", ",", (1234.5, "kN")), (".5", ".", (0.5, None)),
    ],
)  # fmt: skip
def test_numbers_and_units(text: str, mark: str, expected: tuple[float, str | None]) -> None:
    assert parse_number(text, mark) == expected


@pytest.mark.parametrize(
    ("text", "mark", "says"),
    [
        ("1,234", ".", "two ways"), ("1.234", ",", "two ways"), ("12,5", ".", "decimal mark other"), ("3/4", ".", "fraction"),
        ("1 1/2 in", ".", "fraction"), ("nan", ".", "not a number"), ("inf", ".", "not a number"), ("1_000", ".", "not a number"),
        ("", ".", "not a number"), ("TBC", ".", "'TBC' is not a number"), ("1.2.3", ".", "not a number"), ("١٢", ".", "not a number"),
        ("1e999", ".", "too large"), ("12 34", ".", "not a number"), ("1,23,456", ".", "not a number"), ("--5", ".", "not a number"),
    ],
)  # fmt: skip
def test_what_is_no_number_or_can_be_read_in_two_ways(text: str, mark: str, says: str) -> None:
    with pytest.raises(AxialError, match=says) as refused:
        parse_number(text, mark)
    assert refused.value.problem.remedy


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_number_comes_back_as_it_was(number: float) -> None:
    assert parse_number(repr(number)) == (number, None)
    assert parse_number(repr(number).replace(".", ","), ",") == (number, None)


@given(st.text(max_size=30))
def test_any_text_is_a_number_or_an_error(text: str) -> None:
    try:
        number, _ = parse_number(text)
    except AxialError as refused:
        assert refused.problem.remedy
    else:
        assert abs(number) < float("inf")


def test_feet_and_inches_are_never_thousands() -> None:
    assert parse_number("5'600\"") == (5.0, "'600\"")  # which is no unit
    assert parse_number("100x100 mm") == (100.0, "x100 mm")  # neither is that
