"""What is wrong with an input, where, and how to mend it; made into text once, at the edge."""

from __future__ import annotations

from dataclasses import dataclass, replace


@dataclass(frozen=True)
class Problem:
    """One thing wrong with the inputs of a worksheet function."""

    what: str  # what is wrong, a clause without a full stop
    remedy: str  # how to mend it, an imperative clause without a full stop
    cell: str = ""  # where: "Ties!C5", or "row 5, column 3" of the range; empty for the table as a whole
    mark: str = ""  # the member, where one is concerned
    heading: str = ""  # the column's heading as the user wrote it
    table: str = ""  # which argument: "segments", "supports" ...
    code: str = "#VALUE!"  # the error value that its results show

    def text(self) -> str:
        """Return the whole message on one line: place, what, remedy."""
        place = self.cell or (f"{self.table} table" if self.table else "")
        said = f"{place}: {self.what}" if place else self.what
        return f"{said}; {self.remedy}" if self.remedy else said


class AxialError(ValueError):
    """An input that cannot be used; carries a `Problem`."""

    def __init__(self, problem: Problem) -> None:
        super().__init__(problem.text())
        self.problem = problem

    def at(self, **fields: str) -> AxialError:
        """Return the same error with the named fields of its problem filled in."""
        return AxialError(replace(self.problem, **fields))


class UnitError(AxialError):
    """A unit that is not understood, is ambiguous, or is of another dimension."""

    def __init__(self, what: str, remedy: str) -> None:
        super().__init__(Problem(what, remedy))
