"""AX_MATERIAL and AX_ABOUT."""

from __future__ import annotations

import re
from typing import Any

from xlaxial import __version__
from xlaxial.caution import CAUTION
from xlaxial.cells import CellError
from xlaxial.data.materials import EDITION, Material, lookup
from xlaxial.functions.registry import ResultWord
from xlaxial.functions.tabulated_help import MATERIAL_WORDS
from xlaxial.problems import AxialError, Problem, UnitError
from xlaxial.tables.numbers import parse_number
from xlaxial.units import DIMENSIONS, normal, unit

_WORDS = {normal(spelling): word for word in MATERIAL_WORDS for spelling in (word.name, *word.aliases)}
_FIELDS = {
    "E": "modulus",
    "G": "shear_modulus",
    "Poisson's ratio": "poisson",
    "Alpha": "alpha",
    "Density": "density",
    "Yield": "yield_stress",
    "Tensile strength": "tensile",
    "fck": "fck",
    "fcm": "fcm",
    "fctm": "fctm",
    "Ecm": "secant_modulus",
}
_BY_SIZE = frozenset({"Yield", "Tensile strength"})
_STRENGTHS = _BY_SIZE | {"fck", "fcm", "fctm"}

_SOURCE_OF = re.compile(r"^source\s*(?:of|,)\s*(.+)$", re.IGNORECASE | re.DOTALL)
_WITH_UNIT = re.compile(r"^(.*\S)\s*[(\[]([^()\[\]]+)[)\]]$", re.DOTALL)
_AT = re.compile(r"^(.*?)(?:\s*,\s*|\s+at\s+)([-+−]?\d.*)$", re.IGNORECASE | re.DOTALL)


def material(name: Any, what: Any, unit_text: Any = None) -> Any:
    """AX_MATERIAL: one tabulated value.

    Parameters
    ----------
    name : cell
        The material.
    what : cell
        "E", "Alpha (1e-6/K)", "Yield, 40 mm", "Source of Yield" ...
    unit_text : cell, optional
        Unit of the answer; due for everything with a dimension, here or in brackets behind `what`.

    Returns
    -------
    float or str
        The value in that unit; a text for a source.

    Raises
    ------
    AxialError
        Code #VALUE! for an unknown material or a missing thickness, #NAME? for an unknown quantity or unit, #N/A
        where the source has no such value.
    """
    name, what, unit_text = (_text(argument) for argument in (name, what, unit_text))
    if not name or not what:
        raise AxialError(Problem("the name or the quantity is blank", 'write them, as in "S355", "E", "GPa"'))
    found = lookup(name)
    if source := _SOURCE_OF.match(what):
        return _source_of(found, source[1])
    if bracketed := _WITH_UNIT.match(what):
        if unit_text:
            raise AxialError(
                Problem("the unit is given twice", f"clear {unit_text!r}, or {bracketed[2]!r}", code="#NAME?")
            )
        what, unit_text = bracketed[1], bracketed[2].strip()
    place = _AT.match(what)
    word = _word(place[1] if place else what)
    if word.dimension == "text":
        return f"{found.source}; {found.strength_source}" if found.strength_source else found.source
    return _in_unit(_value(found, word, _thickness(place[2]) if place else None), word, unit_text)


def _text(argument: Any) -> str:
    """Text of one cell; of a range only where it is one cell."""
    if isinstance(argument, list):
        if len(argument) != 1 or len(argument[0]) != 1:
            raise AxialError(Problem("an argument is a range of several cells", "give one cell"))
        argument = argument[0][0]
    if isinstance(argument, CellError):
        raise AxialError(Problem(f"an argument is {argument}", "mend it", code=argument.code))
    if isinstance(argument, float) and argument.is_integer():
        argument = int(argument)
    return "" if argument is None else str(argument).strip()


def _word(what: str) -> ResultWord:
    word = _WORDS.get(normal(what))
    if word is None:
        known = ", ".join(each.name for each in MATERIAL_WORDS)
        raise AxialError(Problem(f"{what[:40]!r} is not tabulated", f"write one of {known}", code="#NAME?"))
    return word


def _source_of(found: Material, what: str) -> str:
    place = _AT.match(what)
    word = _word(place[1] if place else what)
    source = found.strength_source if word.name in _STRENGTHS else found.source
    if not source:
        raise _none(found, word)
    return source


def _thickness(text: str) -> float:
    number, own = parse_number(text)
    if own is None:
        raise AxialError(Problem("the thickness has no unit", 'write it as "Yield, 40 mm"'))
    return number * unit(own, "length").factor


def _value(found: Material, word: ResultWord, thickness: float | None) -> float:
    """Value in SI units; a thickness said for what does not depend on it is passed over."""
    bearer = found.strength_at(thickness) if word.name in _BY_SIZE else found
    value: float = getattr(bearer, _FIELDS[word.name])
    if value != value:
        raise _none(found, word)
    return value


def _none(found: Material, word: ResultWord) -> AxialError:
    remedy = (found.without_yield if word.name in _BY_SIZE else "") or "fill it in yourself"
    return AxialError(Problem(f"no {word.name} is tabulated for {found.name}", remedy, code="#N/A"))


def _in_unit(value: float, word: ResultWord, unit_text: str) -> float:
    if not unit_text:
        if word.dimension == "ratio":
            return value
        remedy = f'write it as the third argument, such as "{DIMENSIONS[word.dimension].examples[0]}"'
        raise AxialError(Problem(f"{word.name} needs a unit", remedy, code="#NAME?"))
    try:
        return value / unit(unit_text, word.dimension).factor
    except UnitError as wrong:
        raise wrong.at(code="#NAME?") from None


def about() -> list[list[Any]]:
    """AX_ABOUT: version, edition of the data and caution, a line each below 255 characters."""
    lines = [
        f"xlaxial {__version__}",
        f'Tabulated data of {EDITION}; each value with its source: AX_MATERIAL(name, "Source")',
    ]
    half = CAUTION.index(";") + 1
    return [[line] for line in (*lines, CAUTION[:half], CAUTION[half:].strip())]
