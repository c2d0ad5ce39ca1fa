"""AX_MATERIAL and AX_ABOUT."""

from __future__ import annotations

import re
from typing import Any

from xlaxial import __version__
from xlaxial.caution import CAUTION
from xlaxial.cells import CellError
from xlaxial.data.materials import EDITION, Material, lookup
from xlaxial.problems import AxialError, Problem, UnitError
from xlaxial.tables.numbers import parse_number
from xlaxial.units import DIMENSIONS, normal, unit

# what is asked -> (attribute, dimension)
_QUANTITIES = {
    "E": ("modulus", "stress"),
    "G": ("shear", "stress"),
    "Alpha": ("alpha", "expansion"),
    "Density": ("density", "density"),
    "Poisson's ratio": ("poisson", "ratio"),
    "Yield": ("yield_stress", "stress"),
    "Tensile strength": ("tensile", "stress"),
    "fck": ("fck", "stress"),
    "fcm": ("fcm", "stress"),
    "fctm": ("fctm", "stress"),
    "Source": ("source", "text"),
}
_ALIASES = {
    "Modulus": "E", "Young's modulus": "E", "Modulus of elasticity": "E", "Ecm": "E", "Shear modulus": "G",
    "α": "Alpha", "Thermal expansion": "Alpha", "CTE": "Alpha", "ρ": "Density", "ν": "Poisson's ratio",
    "fy": "Yield", "Yield stress": "Yield", "Yield strength": "Yield", "Rp0.2": "Yield", "ReH": "Yield",
    "fu": "Tensile strength", "Rm": "Tensile strength", "Tensile": "Tensile strength",
}  # fmt: skip
_NAMES = {normal(name): name for name in _QUANTITIES} | {normal(alias): name for alias, name in _ALIASES.items()}
_AT = re.compile(r"^(.*?)(?:\s*,\s*|\s+at\s+)(\d.*)$", re.IGNORECASE)


def material(name: Any, what: Any, unit_text: Any = None) -> Any:
    """AX_MATERIAL: one tabulated value.

    Parameters
    ----------
    name : cell
        The material.
    what : cell
        "E", "Alpha", "Yield, 40 mm" ...
    unit_text : cell, optional
        Unit of the answer; due for everything with a dimension.

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
    place = _AT.match(what)
    asked = _NAMES.get(normal(place[1] if place else what))
    if asked is None:
        raise AxialError(Problem(f"{what!r} is not tabulated", "write " + ", ".join(_QUANTITIES), code="#NAME?"))
    attribute, dimension = _QUANTITIES[asked]
    if dimension == "text":
        return found.source[:255]
    value = _value(found, attribute, _thickness(place[2]) if place else None)
    if value != value:
        raise AxialError(Problem(f"no {asked} is tabulated for {found.name}", "fill it in yourself", code="#N/A"))
    if not unit_text:
        if dimension == "ratio":
            return value
        example = DIMENSIONS[dimension].examples[0]
        raise AxialError(
            Problem(f"{asked} needs a unit", f'write it as the third argument, such as "{example}"', code="#NAME?")
        )
    try:
        return value / unit(unit_text, dimension).factor
    except UnitError as wrong:
        raise wrong.at(code="#NAME?") from None


def _text(argument: Any) -> str:
    if isinstance(argument, list):
        argument = argument[0][0] if argument and argument[0] else None
    if isinstance(argument, CellError):
        raise AxialError(Problem(f"an argument is {argument}", "mend it", code=argument.code))
    if isinstance(argument, float) and argument.is_integer():
        argument = int(argument)
    return "" if argument is None else str(argument).strip()


def _thickness(text: str) -> float:
    number, own = parse_number(text)
    if own is None:
        raise AxialError(Problem("the thickness has no unit", 'write it as "Yield, 40 mm"'))
    return number * unit(own, "length").factor


def _value(found: Material, attribute: str, thickness: float | None) -> float:
    if attribute in ("yield_stress", "tensile"):
        value: float = getattr(found.strength_at(thickness), attribute)
        return value
    if attribute == "shear":
        return found.modulus / (2.0 * (1.0 + found.poisson))
    other: float = getattr(found, attribute)
    return other


def about() -> list[list[Any]]:
    """AX_ABOUT: version, edition of the data and caution, a line each below 255 characters."""
    lines = [
        f"xlaxial {__version__}",
        f'Tabulated data of {EDITION}; each value with its source: AX_MATERIAL(name, "Source")',
    ]
    half = CAUTION.index(";") + 1
    return [[line] for line in (*lines, CAUTION[:half], CAUTION[half:].strip())]
