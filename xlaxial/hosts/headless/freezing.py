"""Which formulas read, directly or by others, a cell that is not recalculated."""

from __future__ import annotations

import re
from bisect import bisect_left, insort
from collections.abc import Iterable, Sequence
from typing import TypeAlias

from openpyxl.utils import column_index_from_string

Place: TypeAlias = tuple[str, int, int]
"""Sheet in lower case, row, column."""
Area: TypeAlias = tuple[str, int, int, int, int]
"""Sheet in lower case, first column, first row, last column, last row."""

_REFERENCE = re.compile(
    r"(?:('(?:[^']|'')+'|[^'!]+)!)?\$?([A-Z]{1,3})?\$?(\d{1,7})?(?::\$?([A-Z]{1,3})?\$?(\d{1,7})?)?#?$", re.IGNORECASE
)
_ROWS, _COLUMNS = 1 << 20, 1 << 14


def area_of(reference: str, sheet: str) -> Area | None:
    """Return the cells of a reference in a formula of a sheet; None where it is no plain reference."""
    found = _REFERENCE.match(reference)
    if not found or not (found[2] or found[3]):
        return None
    name = (found[1].strip("'").replace("''", "'") if found[1] else sheet).lower()
    pair = ":" in reference[found.end(1) if found[1] else 0 :]
    if not pair and not (found[2] and found[3]):
        return None
    c1 = column_index_from_string(found[2].upper()) if found[2] else 1
    r1 = int(found[3]) if found[3] else 1
    c2 = column_index_from_string(found[4].upper()) if found[4] else (_COLUMNS if pair else c1)
    r2 = int(found[5]) if found[5] else (_ROWS if pair else r1)
    return name, min(c1, c2), min(r1, r2), max(c1, c2), max(r1, r2)


class Readers:
    """Formulas by the cells that they read."""

    def __init__(self) -> None:
        self._cells: list[Sequence[Place]] = []  # what each formula fills
        self._by_cell: dict[Place, list[int]] = {}
        self._by_area: dict[Area, list[int]] = {}
        self._reaching: list[int] = []

    def add(self, fills: Sequence[Place], reads: Iterable[Area], *, reaching: bool) -> None:
        """Add a formula; one that is `reaching` reads cells that its text does not name."""
        number = len(self._cells)
        self._cells.append(fills)
        for area in reads:
            sheet, c1, r1, c2, r2 = area
            if (c1, r1) == (c2, r2):
                self._by_cell.setdefault((sheet, r1, c1), []).append(number)
            else:
                self._by_area.setdefault(area, []).append(number)
        if reaching:
            self._reaching.append(number)

    def downstream(self, frozen: Iterable[Place]) -> set[Place]:
        """Return the cells of every formula that reads a frozen one, directly or by others, and themselves frozen.

        A formula that is reaching counts as a reader as soon as anything is frozen.
        """
        known = set(frozen)
        if not known:
            return set()
        out: set[Place] = set()
        waiting = list(known)
        rows: dict[tuple[str, int], list[int]] = {}  # (sheet, column) -> frozen rows, sorted
        taken: set[int] = set()
        areas = dict(self._by_area)

        def take(number: int) -> None:
            if number in taken:
                return
            taken.add(number)
            fresh = [place for place in self._cells[number] if place not in known]
            known.update(fresh)
            out.update(fresh)
            waiting.extend(fresh)

        for number in self._reaching:
            take(number)
        while waiting:
            while waiting:
                place = waiting.pop()
                insort(rows.setdefault((place[0], place[2]), []), place[1])
                for number in self._by_cell.get(place, ()):
                    take(number)
            for area in [area for area in areas if _holds_any(area, rows)]:
                for number in areas.pop(area):
                    take(number)
        return out


def _holds_any(area: Area, rows: dict[tuple[str, int], list[int]]) -> bool:
    sheet, c1, r1, c2, r2 = area
    columns = (
        range(c1, c2 + 1)
        if c2 - c1 < len(rows)
        else [column for name, column in rows if name == sheet and c1 <= column <= c2]
    )
    for column in columns:
        here = rows.get((sheet, column))
        if here:
            at = bisect_left(here, r1)
            if at < len(here) and here[at] <= r2:
                return True
    return False
