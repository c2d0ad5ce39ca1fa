"""Heading text to unit: the one place that meets pint. Temperatures are differences; no unit is ever guessed."""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from fractions import Fraction
from functools import cache, lru_cache
from typing import Any

from xlaxial.problems import UnitError


@dataclass(frozen=True)
class Dimension:
    """One kind of quantity."""

    name: str  # "force"
    si: str  # its SI unit, as pint reads it
    examples: tuple[str, ...]  # units as the trade writes them, for help and remedies


DIMENSIONS: dict[str, Dimension] = {
    dimension.name: dimension
    for dimension in (
        Dimension("length", "m", ("mm", "m", "in", "ft")),
        Dimension("area", "m**2", ("mm2", "cm2", "in2")),
        Dimension("force", "N", ("kN", "N", "kip", "lbf")),
        Dimension("stress", "Pa", ("MPa", "GPa", "N/mm2", "ksi", "psi")),
        Dimension("stiffness", "N/m", ("kN/mm", "kN/m", "kip/in", "lbf/in")),
        Dimension("line load", "N/m", ("kN/m", "N/mm", "kip/ft", "lbf/in")),
        Dimension("expansion", "1/K", ("1e-6/K", "1/K", "1e-6/°F")),
        Dimension("temperature difference", "K", ("K", "°C", "°F")),
        Dimension("strain", "one", ("µε", "%", "-")),
        Dimension("ratio", "one", ("-", "%")),
        Dimension("moment", "N*m", ("kN·m", "N·mm", "kip·in", "lbf·ft")),
        Dimension("second moment of area", "m**4", ("cm4", "mm4", "in4")),
        Dimension("section modulus", "m**3", ("cm3", "mm3", "in3")),
        Dimension("angle", "rad", ("deg", "rad")),
        Dimension("density", "kg/m**3", ("kg/m3", "lb/ft3")),
        Dimension("subgrade modulus", "N/m**3", ("kN/m3", "pci")),
        Dimension("flexibility", "m/N", ("mm/kN", "in/kip")),
    )
}


@dataclass(frozen=True)
class Unit:
    """A unit as a user wrote it."""

    text: str
    factor: float  # SI value of one unit


_LONGEST = 40
_POWER = 6
_SAME_FORCE = frozenset({"density"})  # dimensions in which lb, kg and t are masses

# spelling -> name in the definitions file
_SPELLINGS = {
    **{
        name: name
        for name in ("m", "mm", "cm", "um", "micron", "in", "inch", "inches", "ft", "feet", "foot", "mil", "uin")
    },
    **{name: name for name in ("K", "degC", "degF", "N", "kN", "MN", "kgf", "tf", "lbf", "kip", "kips")},
    **{
        name: name
        for name in ("Pa", "kPa", "MPa", "GPa", "bar", "psi", "ksi", "pcf", "pci", "plf", "klf", "rad", "deg")
    },
    **{name: name for name in ("ppm", "microstrain")},
    "in": "inch",
    "um": "micrometer",
    '"': "inch",
    "''": "inch",
    "'": "foot",
    "°C": "kelvin",
    "°K": "kelvin",
    "°F": "degF",
    "°": "degree",
    "%": "percent",
    "‰": "permille",
    "uε": "microstrain",
    "ue": "microstrain",
    "uin": "microinch",
    "N": "newton",
}
_MASSES = {"kg": "kilogram", "g": "gram", "t": "tonne", "lb": "pound", "lbs": "pound"}
_COMPOUND = {"kNm": ("kN", "m"), "Nm": ("N", "m"), "Nmm": ("N", "mm"), "kNmm": ("kN", "mm"), "MNm": ("MN", "m")}
_REFUSED = {
    "t": "write tf for tonne-force, or kN",
    "T": "write tf for tonne-force, or kN",
    "ton": "write tf for tonne-force, kip for 1000 lbf, or kN",
    "tons": "write tf for tonne-force, kip for 1000 lbf, or kN",
    "tonne": "write tf for tonne-force, or kN",
    "tonnes": "write tf for tonne-force, or kN",
    "kg": "write kgf for kilogram-force, or N",
    "k": "write kip, or kN",
    "K": "write kip, or kN",
    "mPa": "write MPa",
    "mpa": "write MPa",
    "mN": "write MN, or N",
    "mn": "write MN, or N",
    "M": "write MPa, MN or m",
}
_TOKEN = re.compile(r"\s*(?:([A-Za-zε°%‰\"']+)\s*(?:\^|\*\*)?(-?\d+)?|([*/() ])|(-)(?=\s*[A-Za-z]))")
_RAISED = re.compile("[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+")
# a power of ten is marked as one, by a caret, a superscript or its sign: 103 kN is no unit, 10^3 kN is
_POWER_OF_TEN = re.compile(
    r"^\s*[x×*]?\s*(?:10\s*(?:(?:\^|\*\*)\s*\(?(-?\d{1,2})\)?|(-\d{1,2}))|1(?:\.0*)?[eE]([+-]?\d{1,2}))"
    r"(?=\s*[*/A-Za-z°]|$)\s*\*?\s*"
)


@cache
def _registry() -> Any:
    from importlib.resources import files

    import pint

    lines = files("xlaxial.data").joinpath("units.txt").read_text(encoding="utf-8").splitlines()
    return pint.UnitRegistry(lines, non_int_type=Fraction, cache_folder=None)


def _plain(text: str) -> str:
    """Text of a unit in few characters: superscripts, dots, minus signs and quotes made alike."""
    text = _RAISED.sub(lambda found: "^" + unicodedata.normalize("NFKC", found[0]), text)
    text = unicodedata.normalize("NFKC", text).strip()
    for old, new in (
        ("−", "-"), ("–", "-"), ("·", "*"), ("⋅", "*"), ("∙", "*"), ("•", "*"), ("×", "*"), ("μ", "u"), ("µ", "u"),
        ("º", "°"), ("˚", "°"), ("′′", '"'), ("″", '"'), ("′", "'"), ("’’", '"'), ("’", "'"), ("”", '"'), ("ϵ", "ε"),
    ):  # fmt: skip
        text = text.replace(old, new)
    text = re.sub(r"^\(-\)$", "-", text)
    text = re.sub(r"(?:°\s+|\bdeg\.?\s+)([CFK])\b", r"°\1", text)
    text = text[:-1] if text.endswith(("in.", "ft.")) else text
    return re.sub(r"\b(?:sq\.?|square)\s*(mm|cm|m|in|ft)\b\.?", r"\g<1>2", text)


def unit_factors(text: str) -> tuple[Fraction, list[tuple[str, int]], list[tuple[str, int]]] | None:
    """Split a unit's text into a power of ten, the factors before the first slash and those after it; None if none."""
    rest = _plain(text)
    if not rest or len(rest) > _LONGEST:
        return None
    if rest in ("-", "1", "--"):
        return Fraction(1), [("one", 1)], []
    scale = Fraction(1)
    power = _POWER_OF_TEN.match(rest)
    if power:
        scale = Fraction(10) ** int(power[1] or power[2] or power[3])
        rest = rest[power.end() :]
    elif re.match(r"1\s*/", rest):
        rest = rest[1:]
    above: list[tuple[str, int]] = []
    below: list[tuple[str, int]] = []
    divided, bracket, closed, due, at = False, False, False, False, 0  # due: a unit must follow
    slashes = 0
    while at < len(rest):
        found = _TOKEN.match(rest, at)
        if found is None or found.end() == at:
            return None
        at = found.end()
        name, exponent, mark = found[1], found[2], found[3]
        if mark == " ":
            continue
        if closed:
            return None
        if name:
            number = int(exponent) if exponent else 1
            parts = _COMPOUND.get(name, (name,))
            if not 0 < abs(number) <= _POWER or (len(parts) > 1 and exponent):
                return None
            (below if divided else above).extend((part, number) for part in parts)
        elif mark == "/":
            divided, slashes = True, slashes + 1
        elif mark == "(":
            if bracket:
                return None
            bracket = True
        elif mark == ")":
            if due or not bracket:
                return None
            bracket, closed = False, True
        due = mark is not None and mark in "/(*"
    if bracket or due or slashes > 2 or not (above or below):
        return None
    return scale, above, below


@lru_cache(maxsize=4096)
def unit(text: str, dimension: str) -> Unit:
    """Read a unit.

    Parameters
    ----------
    text : str
        As the trade writes it: "kN/mm", "N/mm²", "1e-6/K", "µm/m·K" (all that follows the first slash divides).
    dimension : str
        A key of `DIMENSIONS`; temperatures are differences.

    Returns
    -------
    Unit
        With its SI factor, the nearest double to the exact ratio.

    Raises
    ------
    UnitError
        The unit is not known, is ambiguous, or is of another dimension; says what to write instead.
    """
    wanted = DIMENSIONS[dimension]
    shown = text.strip()[:_LONGEST]
    remedy = f"write a unit of {dimension} such as " + ", ".join(wanted.examples)
    parsed = unit_factors(text)
    if parsed is None:
        raise UnitError(f"{shown!r} is not understood as a unit", remedy)
    scale, above, below = parsed
    expression = f"{scale.numerator} / {scale.denominator}.0"
    for sign, factors in ((1, above), (-1, below)):
        for name, exponent in factors:
            expression += f" * {_named(name, dimension, shown, remedy)} ** ({sign * exponent})"
    registry = _registry()
    quantity = registry.parse_expression(expression).to_root_units()
    if quantity.dimensionality != registry.parse_expression(wanted.si).dimensionality or _confused(
        dimension, above + below
    ):
        actual = _dimension_of(quantity.dimensionality)
        of = f"a unit of {actual}" if actual else "no unit"
        raise UnitError(
            f"{shown!r} is {of}, not of {dimension}" if actual else f"{shown!r} is no unit of {dimension}", remedy
        )
    return Unit(shown, float(quantity.magnitude))


def _confused(dimension: str, factors: list[tuple[str, int]]) -> bool:
    """Whether a unit without dimension stands for another kind: an angle is no strain."""
    names = {name for name, _ in factors}
    angles = {"deg", "rad", "°"}
    return not names <= angles if dimension == "angle" else bool(names & angles)


def _dimension_of(dimensionality: Any) -> str:
    registry = _registry()
    for dimension in DIMENSIONS.values():
        if registry.parse_expression(dimension.si).dimensionality == dimensionality:
            return dimension.name
    return ""


def _named(name: str, dimension: str, shown: str, remedy: str) -> str:
    """Return pint's name of one unit in a column of a dimension."""
    if dimension in _SAME_FORCE and name in _MASSES:
        return _MASSES[name]
    if name in ("C", "F") and dimension in ("temperature difference", "expansion"):
        return "kelvin" if name == "C" else "degF"
    if name in ("lb", "lbs"):
        return "pound_force"
    if name in _REFUSED and not (name == "K" and dimension in ("temperature difference", "expansion")):
        raise UnitError(f"{shown!r} is ambiguous", _REFUSED[name])
    if name == "one" or name in _SPELLINGS:
        return _SPELLINGS.get(name, name)
    slips = [
        spelling
        for spelling in _SPELLINGS
        if spelling.casefold() == name.casefold() and (spelling[0] == name[0] or name.isupper() or name[0] not in "mM")
    ]
    if len({_SPELLINGS[slip] for slip in slips}) == 1:
        return _SPELLINGS[slips[0]]
    raise UnitError(f"{shown!r} is not understood as a unit", remedy)


@lru_cache(maxsize=4096)
def is_unit(text: str) -> bool:
    """Whether a text is a unit of some kind, an ambiguous one included; bare numbers are not."""
    text = strip_brackets(text)
    if text in _REFUSED and text.lower() not in ("m", "k"):
        return True
    if not text or text.isdecimal():
        return False
    for dimension in DIMENSIONS:
        try:
            unit(text, dimension)
        except UnitError:
            continue
        return True
    return False


def strip_brackets(text: str) -> str:
    """Return a unit's text without the brackets around it."""
    text = text.strip()
    for left, right in ("()", "[]"):
        if text.startswith(left) and text.endswith(right) and text.find(right) == len(text) - 1:
            return text[1:-1].strip()
    return text


_BRACKETS = re.compile(r"^(.*?)\s*(?:\((.*)\)|\[(.*)\])\s*$", re.DOTALL)


@lru_cache(maxsize=8192)
def heading_forms(text: str) -> tuple[tuple[str, str | None], ...]:
    """Return the ways to split a heading into a term and its unit's text, in the order in which to try them."""
    text = " ".join(text.replace("\u00a0", " ").split())
    forms: list[tuple[str, str | None]] = []
    for opening in ("(", "["):
        at = text.find(opening)
        if at > 0 and text.endswith(")" if opening == "(" else "]"):
            forms.append((text[:at].rstrip(" ,/"), text[at + 1 : -1].strip()))
    found = _BRACKETS.match(text)
    if found and found[1]:
        last = max(text.rfind("("), text.rfind("["))
        forms.append((text[:last].rstrip(" ,/"), text[last + 1 : -1].strip()))
    whole: tuple[str, str | None] = (text, None)
    if not text.endswith("-"):  # a bare dash is the unit of a number without dimension
        forms.append(whole)
    for mark in (",", "/"):
        for at in dict.fromkeys((text.rfind(mark), text.find(mark))):
            if 0 < at < len(text) - 1:
                forms.append((text[:at].strip(), strip_brackets(text[at + 1 :])))
    return tuple(dict.fromkeys([*forms, whole]))


@lru_cache(maxsize=16384)
def normal(text: str) -> str:
    """Return a term in the form in which terms are compared: case, spaces and punctuation do not matter."""
    text = unicodedata.normalize("NFKC", text).replace("\u2206", "Δ").replace("ϵ", "ε").replace("∑", "Σ")
    return "".join(ch for ch in text.casefold() if ch.isalnum() or ch in "%‰")
