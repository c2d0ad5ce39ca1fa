"""Numbers typed as text: never by the machine's locale, and never guessed."""

from __future__ import annotations

import re

from xlaxial.problems import AxialError, Problem

_SPACES = "\u00a0\u2009\u202f\u2007 "
_LEADING = re.compile(r"([+-]?)([0-9.," + _SPACES + r"]*[0-9][.,]?)((?:[eE][+-]?[0-9]{1,3})?)(?![0-9.,/])")
_FRACTION = re.compile(r"^[+-]?\d+(?:\s+\d+)?\s*[/⁄]\s*\d+")


def parse_number(text: str, decimal_mark: str = ".") -> tuple[float, str | None]:
    """Read a number, with a unit behind it or not.

    Parameters
    ----------
    text : str
        "12", "−1.5", "1 234.5", "12 in", "3.5 kN/mm".
    decimal_mark : str
        "." or ","; the other one may only separate groups of three digits, and only where that is unmistakable.

    Returns
    -------
    tuple
        The number, and the text of its unit or None.

    Raises
    ------
    AxialError
        It is no number, or can be read in two ways; says how to write it.
    """
    shown = text.strip()[:40]
    plain = text.strip().replace("−", "-")
    if _FRACTION.match(plain):
        raise AxialError(Problem(f"{shown!r} is written as a fraction", "write it as a decimal, such as 0.75"))
    found = (
        _LEADING.match(plain)
        if plain.isascii() or not any(ch.isdigit() and ch not in "0123456789" for ch in plain[:1])
        else None
    )
    if found is None:
        raise AxialError(Problem(f"{shown!r} is not a number", "write a number"))
    sign, digits, exponent = found.groups()
    rest = plain[found.end() :].strip()
    if rest and (rest[0] == "_" or rest[0].isdigit()):
        raise AxialError(Problem(f"{shown!r} is not a number", "write a number"))
    number = float(sign + _digits(digits.rstrip(_SPACES), decimal_mark, shown) + exponent)
    if number in (float("inf"), float("-inf")):
        raise AxialError(Problem(f"{shown!r} is too large", "write a smaller number"))
    return number, rest or None


def _digits(digits: str, mark: str, shown: str) -> str:
    """Return digits with a decimal point and nothing else."""
    group = "," if mark == "." else "."
    spaces = "[" + _SPACES + "]"
    whole, _, part = digits.partition(mark)
    if mark in part or group in part or re.search(spaces, part):
        raise AxialError(Problem(f"{shown!r} is not a number", "write it with one decimal mark"))
    if re.search(spaces, whole):
        if group in whole or not re.fullmatch(rf"\d{{1,3}}(?:{spaces}\d{{3}})+", whole):
            raise AxialError(Problem(f"{shown!r} is not a number", "write it without spaces between the digits"))
        whole = re.sub(spaces, "", whole)
    if group in whole:
        grouped = re.fullmatch(rf"\d{{1,3}}(?:{re.escape(group)}\d{{3}})+", whole)
        if not grouped and whole.count(group) > 1:
            raise AxialError(Problem(f"{shown!r} is not a number", "write it without marks between the digits"))
        if not grouped or (whole.count(group) == 1 and mark not in digits):
            what = (
                f"{shown!r} can be read in two ways" if grouped else f"{shown!r} has a decimal mark other than {mark!r}"
            )
            remedy = f"type it as a number, or set Decimal mark | {group} in the settings"
            raise AxialError(Problem(what, remedy))
        whole = whole.replace(group, "")
    return (whole or "0") + "." + (part or "0")
