"""When a stored and a new value are the same."""

from __future__ import annotations

from typing import Any

import pytest

from xlaxial import CellError
from xlaxial.hosts.headless.commands import changed_values
from xlaxial.hosts.headless.compare import DIFFERENT, SAME, equal, fifteen_digits
from xlaxial.hosts.headless.patch import write_values
from xlaxial.hosts.headless.recalculate import recalculate
from xlaxial.hosts.headless.stored import StoredValues

NA, NUM = CellError("#N/A"), CellError("#NUM!")


@pytest.mark.parametrize(
    ("stored", "new", "same"),
    [
        (1.0, 1.0 + 1e-10, True),
        (1.0, 1.0 + 1e-8, False),
        (1e12, 1e12 + 1.0, True),
        (1e-10, 1.1e-10, False),
        (5e-13, 8e-13, False),
        (0.0, -2.2e-16, True),
        (0.0, 1e-11, False),
        (3e-17, -8e-17, True),
        (1.0, -1.0, False),
        (1.0, "1", False),
        (1.0, True, False),
        (True, True, True),
        (True, False, False),
        (0.0, False, False),
        ("ok", "ok", True),
        ("ok", "OK", False),
        ("ok", "ok ", False),
        (None, "", True),
        ("", "", True),
        ("", 0.0, False),
        (None, 0.0, False),
        (0.0, "", False),
        (NA, CellError("#N/A"), True),
        (NA, NUM, False),
        (NA, "#N/A", False),
        (1.0, NA, False),
        ("", NA, False),
    ],
)
def test_equal(stored: Any, new: Any, same: bool) -> None:
    assert equal(stored, new, 1e-9) is same
    assert equal(new, stored, 1e-9) is same


@pytest.mark.parametrize(
    ("text", "cut"),
    [
        ("x 0.30000000000000004 kN", "x 0.3 kN"),
        ("0.3333333333333333", "0.333333333333333"),
        ("1.4978661367769956+1.1071487177940904i", "1.497866136777+1.10714871779409i"),
        ("12345678901234567890", "12345678901234567890"),
        ("a0.30000000000000004", "a0.3"),
        ("version 1.2.3.4.5.6.7.8.9.10", "version 1.2.3.4.5.6.7.8.9.10"),
        (0.1 + 0.2, 0.1 + 0.2),
    ],
)
def test_numbers_in_texts_have_15_digits(text: Any, cut: Any) -> None:
    # the complex number is as a spreadsheet stored it; the others from memory of how numbers are joined to text
    assert fifteen_digits(text) == cut


@pytest.mark.parametrize(
    ("cell", "value"),
    [
        (b"<c r='B2'><v>1.5</v></c>", 1.5),
        (b"<c r='B2' t='n'><f>1+1</f><v>45366.50782071759</v></c>", 45366.50782071759),
        (b"<c r='B2' t='b'><v>1</v></c>", True),
        (b"<c r='B2' t='b'><v>0</v></c>", False),
        (b"<c r='B2' t='e'><v>#DIV/0!</v></c>", CellError("#DIV/0!")),
        (b"<c r='B2' t='e'><v>#WHAT?</v></c>", CellError("#VALUE!")),
        (b"<c r='B2' t='str'><v>a &amp; b_x000D_</v></c>", "a & b\r"),
        (b"<c r='B2' t='str'><v></v></c>", ""),
        (b"<c r='B2' t='s'><v>1</v></c>", "second"),
        (b"<c r='B2' t='s'><v>7</v></c>", CellError("#VALUE!")),
        (
            b"<c r='B2' t='inlineStr'><is><r><t>rich</t></r><r><t xml:space='preserve'> text</t></r></is></c>",
            "rich text",
        ),
        (b"<c r='B2' t='inlineStr'><is><t>name</t><rPh sb='0' eb='1'><t>aside</t></rPh></is></c>", "name"),
        (b"<c r='B2' t='d'><v>2024-03-15T12:00:00</v></c>", 45366.5),
        (b"<c r='B2' s='1'/>", None),
        (b"<c/><c><v>7</v></c>", 7.0),
        (b"<c r='B2'><v>abc</v></c>", CellError("#VALUE!")),
    ],
)
def test_stored_values(cell: bytes, value: Any) -> None:
    data = b"<worksheet><sheetData><row r='2'>" + cell + b"</row></sheetData></worksheet>"
    stored = StoredValues(data, lambda: ["first", "second"])[2, 2]
    assert type(stored) is type(value)
    assert stored == value


@pytest.mark.parametrize(
    ("stored", "new", "states"),
    [
        ((1000.0, 1e-14), (1000.0, 3e-14), (SAME, SAME)),  # rounding beside the column's numbers
        ((1000.0, 1e-8), (1000.0, 3e-8), (SAME, DIFFERENT)),
        ((1e15, 0.5), (10.0, 0.75), (DIFFERENT, DIFFERENT)),  # one wrong number hides no other
        ((10.0, 0.5), (1e15, 0.75), (DIFFERENT, DIFFERENT)),
    ],
)
def test_rounding_goes_by_the_numbers_of_a_column_of_ours(
    make_book: Any, stored: tuple[float, ...], new: tuple[float, ...], states: tuple[str, ...]
) -> None:
    book = make_book({"S!C1": 1}, {"S!A1:A2": "=AX_B()"})
    first = recalculate(book, {"AX_B": lambda: [[value] for value in stored]})
    write_values(book, changed_values(first), book)
    again = recalculate(book, {"AX_B": lambda: [[value] for value in new]})
    assert tuple(r.state for r in again.results) == states
