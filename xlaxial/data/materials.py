"""Materials with their sources, from materials.csv (SI units) and materials_us.csv (US customary units)."""

from __future__ import annotations

import csv
import difflib
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache, lru_cache
from importlib.resources import files

from xlaxial.problems import AxialError, Problem
from xlaxial.units import normal

EDITION = "2026-12-01"
"""Date of the tabulated data."""

_NAN = float("nan")
_INF = float("inf")
_INCH = 0.0254
_POUND = 0.45359237
_KSI = 1000.0 * _POUND * 9.80665 / _INCH**2

# heading of a data file -> (field, SI value of one unit); inch, pound and standard gravity are exact by definition
_HEADINGS = {
    "E_GPa": ("modulus", 1e9),
    "E_ksi": ("modulus", _KSI),
    "alpha_1e6_per_K": ("alpha", 1e-6),
    "alpha_1e6_per_degF": ("alpha", 1.8e-6),
    "density_kg_per_m3": ("density", 1.0),
    "density_lb_per_ft3": ("density", _POUND / (12.0 * _INCH) ** 3),
    "poisson": ("poisson", 1.0),
    "size_to_mm": ("size_to", 1e-3),
    "size_to_in": ("size_to", _INCH),
    **{f"{field}_MPa": (field, 1e6) for field in ("yield", "tensile", "fck", "fcm", "fctm")},
    **{f"{field}_ksi": (field, _KSI) for field in ("yield", "tensile", "fck", "fcm", "fctm")},
}
_FILES = ("materials.csv", "materials_us.csv")


@dataclass(frozen=True)
class Strength:
    """Strength up to a thickness or diameter."""

    thickness: float  # m, inf where the value does not depend on it
    yield_stress: float  # Pa, nan where the source has none
    tensile: float  # Pa, nan where the source has none


@dataclass(frozen=True)
class Material:
    """One material."""

    name: str
    modulus: float  # Pa
    alpha: float  # 1/K
    density: float  # kg/m3
    poisson: float
    size: str  # what the steps of strength go by: "thickness" or "diameter"; empty where there are none
    strengths: tuple[Strength, ...]  # by rising thickness, at least one
    fck: float  # Pa, concrete only, else nan
    fcm: float  # Pa
    fctm: float  # Pa
    source: str  # of modulus, alpha, density and Poisson's ratio
    strength_source: str  # of the strengths; empty where there are none
    without_yield: str  # what to do where no yield stress is tabulated; may be empty

    @property
    def shear_modulus(self) -> float:
        """G = E / (2 (1 + nu)) of an isotropic material (Pa)."""
        return self.modulus / (2.0 * (1.0 + self.poisson))

    @property
    def secant_modulus(self) -> float:
        """Secant modulus of concrete, Ecm (Pa); nan for other materials."""
        return self.modulus if self.fck == self.fck else _NAN

    @property
    def yield_by_thickness(self) -> tuple[tuple[float, float], ...]:
        """Pairs of the largest thickness (m) and the yield stress up to it (Pa)."""
        return tuple((strength.thickness, strength.yield_stress) for strength in self.strengths)

    def strength_at(self, thickness: float | None) -> Strength:
        """Return the strength at a thickness.

        Parameters
        ----------
        thickness : float or None
            Nominal thickness of the plate or wall, or diameter of the bar (m); None where it is not known.

        Returns
        -------
        Strength
            That of the first step that reaches the thickness.

        Raises
        ------
        AxialError
            The source bounds the thickness and none is given, or it is not positive, or beyond the source's.
        """
        most = self.strengths[-1].thickness
        if thickness is None:
            if len(self.strengths) == 1 and most == _INF:
                return self.strengths[0]
            what = f"the strength of {self.name} depends on its {self.size}"
            if len(self.strengths) == 1:
                what = f"the strength of {self.name} is tabulated for a {self.size} to {most * 1e3:.4g} mm only"
            raise AxialError(Problem(what, 'say which it is, as in "Yield, 40 mm", or fill in Yield'))
        if not thickness > 0.0:
            raise AxialError(
                Problem(f"a {self.size or 'thickness'} of {thickness * 1e3:g} mm is not positive", "mend it")
            )
        for strength in self.strengths:
            if thickness <= strength.thickness * (1.0 + 1e-9):
                return strength
        what = f"a {self.size} of {thickness * 1e3:.4g} mm is beyond the source for {self.name}, which ends at {most * 1e3:.4g} mm"
        raise AxialError(Problem(what, "fill in Yield from the mill's certificate"))

    def yield_at(self, thickness: float | None) -> float:
        """Return the yield stress or 0.2 % proof stress at a thickness.

        Parameters
        ----------
        thickness : float or None
            As for `strength_at` (m).

        Returns
        -------
        float
            Pa.

        Raises
        ------
        AxialError
            As for `strength_at`; code #N/A where no yield stress is tabulated.
        """
        found = self.strength_at(thickness).yield_stress
        if found != found:
            what = f"no yield stress is tabulated for {self.name}"
            raise AxialError(Problem(what, self.without_yield or "fill in Yield", code="#N/A"))
        return found


def _rows(name: str) -> Iterator[dict[str, str]]:
    text = files("xlaxial.data").joinpath(name).read_text(encoding="utf-8")
    return csv.DictReader(text.splitlines())


@cache
def _tables() -> tuple[dict[str, Material], dict[str, str]]:
    """Every material by its name, and the names by their normalised spellings."""
    groups: dict[str, list[dict[str, str]]] = {}
    for file in _FILES:
        for row in _rows(file):
            groups.setdefault(row["name"], []).append(row)
    spellings: dict[str, str] = {}
    for name, rows in groups.items():
        for spelling in (name, *filter(None, rows[0]["aliases"].split("|"))):
            if spellings.setdefault(normal(spelling), name) != name:
                raise ValueError(f"{spelling!r} names both {name} and {spellings[normal(spelling)]} in the data")
    return {name: _material(rows) for name, rows in groups.items()}, spellings


def _material(rows: list[dict[str, str]]) -> Material:
    first = rows[0]
    value = _values(first)
    return Material(
        first["name"],
        value["modulus"],
        value["alpha"],
        value["density"],
        value["poisson"],
        first["size"],
        tuple(_strength(_values(row)) for row in rows),
        value["fck"],
        value["fcm"],
        value["fctm"],
        first["source"],
        first["strength_source"],
        first["without_yield"],
    )


def _values(row: dict[str, str]) -> dict[str, float]:
    """Fields of a row in SI units, nan where blank."""
    known = ((_HEADINGS[heading], text) for heading, text in row.items() if heading in _HEADINGS)
    return {field: float(text) * factor if text else _NAN for (field, factor), text in known}


def _strength(value: dict[str, float]) -> Strength:
    to = value["size_to"]
    return Strength(to if to == to else _INF, value["yield"], value["tensile"])


@cache
def _unclear() -> dict[str, str]:
    """What to write instead of a name that does not settle the material, by its normalised spelling."""
    out = {}
    for row in _rows("materials_unclear.csv"):
        note = f" ({row['note']})" if row["note"] else ""
        out[normal(row["name"])] = f"write {' or '.join(row['write'].split('|'))}{note}"
    return out


def materials() -> dict[str, Material]:
    """Return every material by its name, in the order of the data files."""
    return _tables()[0]


@lru_cache(maxsize=1024)
def lookup(name: str) -> Material:
    """Return a material by its name or another spelling; case, spaces and punctuation do not matter.

    Parameters
    ----------
    name : str
        "S355", "S 355 J2", "1.4401", "A572 Gr. 50", "C30/37".

    Returns
    -------
    Material
        The same object for every spelling.

    Raises
    ------
    AxialError
        There is none, with the nearest names as remedy; or the name fits several, with what to write instead.
    """
    table, spellings = _tables()
    key = normal(name)
    if key in spellings:
        return table[spellings[key]]
    shown = name.strip()[:40]
    if key in _unclear():
        raise AxialError(Problem(f"{shown!r} does not settle the material", _unclear()[key]))
    near = difflib.get_close_matches(key[:40], list(spellings), 6, 0.5)
    names = list(dict.fromkeys(spellings[spelling] for spelling in near))[:3]
    remedy = f"did you mean {' or '.join(names)}? Else fill in E, Alpha and Yield" if names else _FILL_IN
    raise AxialError(Problem(f"no material is named {shown!r}", remedy))


_FILL_IN = "fill in E, Alpha and Yield instead"
