"""Settings: two columns, name and value; every name that any function reads is published here."""

from __future__ import annotations

import difflib
from dataclasses import dataclass, field, replace
from typing import Any

from xlaxial.cells import CellError, cell_address
from xlaxial.problems import AxialError, Problem
from xlaxial.tables.numbers import parse_number
from xlaxial.units import normal


@dataclass(frozen=True)
class Setting:
    """One setting."""

    name: str
    default: Any
    help: str
    source: str = "common practice, no source"
    choices: tuple[str, ...] = ()  # texts that it takes; empty: a number or free text, as the default is
    least: float | None = None  # a number must be above this


SETTINGS: tuple[Setting, ...] = (
    Setting("Behaviour", "elastic", "elastic, or elastoplastic where segments may yield", choices=("elastic",)),
    Setting("Strength factor", 1.0, "resistance is Yield times this factor", "the code in force decides", least=0.0),
    Setting("Blank mark", "error", "what a blank Mark means", choices=("error", "as above")),
    Setting("Decimal mark", ".", "decimal mark of numbers typed as text", choices=(".", ",")),
)
_BY_NAME = {normal(setting.name): setting for setting in SETTINGS}


@dataclass(frozen=True)
class Settings:
    """The settings of one call: what is not named has its default."""

    values: dict[str, Any] = field(default_factory=lambda: {s.name: s.default for s in SETTINGS})
    headings: tuple[tuple[str, str], ...] = ()  # (our term, the user's heading) by rows "Heading: term"
    named: tuple[str, ...] = ()  # settings that the user gave
    problems: tuple[Problem, ...] = ()

    def __getitem__(self, name: str) -> Any:
        return self.values[name]


DEFAULTS = Settings()


def read_settings(rows: Any) -> Settings:
    """Read a settings table.

    Parameters
    ----------
    rows : rows of cells or None
        Two columns, name and value; further columns and rows without a name are passed over. A heading row such as
        "Setting", "Value" is passed over too.

    Returns
    -------
    Settings
        With a problem for each row that is not understood: an unknown name is never ignored.
    """
    if rows is None:
        return DEFAULTS
    values = dict(DEFAULTS.values)
    headings: list[tuple[str, str]] = []
    named: list[str] = []
    problems: list[Problem] = []
    for i, row in enumerate(rows):
        if not row or row[0] is None or row[0] == "":
            continue
        place = cell_address(rows, i, 0)
        value = row[1] if len(row) > 1 else None
        try:
            name = _read_row(row[0], value, values, headings, first=not named and not headings)
        except AxialError as wrong:
            problems.append(replace(wrong.problem, cell=place, table="settings"))
            continue
        if name in named:
            problems.append(Problem(f"the setting {name!r} stands twice", "keep one of them", place, table="settings"))
        elif name:
            named.append(name)
    return Settings(values, tuple(headings), tuple(named), tuple(problems))


def _read_row(label: Any, value: Any, values: dict[str, Any], headings: list[tuple[str, str]], *, first: bool) -> str:
    """Put one row's setting into `values` or `headings`; return its name, empty for a heading row."""
    if isinstance(label, CellError) or isinstance(value, CellError):
        raise AxialError(Problem("an error value stands in this setting", "mend the cell's formula"))
    name = str(label).strip()
    before, colon, term = name.partition(":")
    if colon and normal(before) == "heading":
        if not isinstance(value, str) or not value.strip():
            raise AxialError(Problem(f"{name!r} names no heading", "write your own heading's text beside it"))
        headings.append((term.strip(), value.strip()))
        return ""
    setting = _BY_NAME.get(normal(name))
    if setting is None:
        if first and normal(name) in ("setting", "settings", "name"):
            return ""
        near = difflib.get_close_matches(name, [s.name for s in SETTINGS], 1, 0.5)
        known = near[0] if near else ", ".join(s.name for s in SETTINGS)
        raise AxialError(Problem(f"{name!r} is no setting", f"write {known}, or delete the row"))
    if value is None or value == "":
        return ""
    if setting.choices:
        found = next((c for c in setting.choices if c == str(value).strip().lower()), None)
        if found is None:
            raise AxialError(Problem(f"{name} cannot be {value!r}", "write " + " or ".join(setting.choices)))
        values[setting.name] = found
        return setting.name
    number = parse_number(value, values["Decimal mark"])[0] if isinstance(value, str) else value
    if isinstance(number, bool) or not isinstance(number, (int, float)):
        raise AxialError(Problem(f"{name} is {value!r}, not a number", "write a number"))
    if setting.least is not None and not number > setting.least:
        raise AxialError(Problem(f"{name} is {number:g}", f"write a number above {setting.least:g}"))
    values[setting.name] = float(number)
    return setting.name
