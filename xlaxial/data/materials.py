"""Materials with their sources, from materials.csv."""

from __future__ import annotations

import csv
import difflib
from dataclasses import dataclass
from functools import cache, lru_cache
from importlib.resources import files

from xlaxial.problems import AxialError, Problem
from xlaxial.units import normal

EDITION = "2026-12-01"
"""Date of the tabulated data."""

_NAN = float("nan")


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
    strengths: tuple[Strength, ...]  # by rising thickness
    fck: float  # Pa, concrete only, else nan
    fcm: float  # Pa
    fctm: float  # Pa
    source: str

    def strength_at(self, thickness: float | None) -> Strength:
        """Return the strength at a nominal thickness or diameter (m).

        Raises
        ------
        AxialError
            It depends on the thickness and none is given, or the thickness is beyond the source's.
        """
        if thickness is None:
            if len({(s.yield_stress, s.tensile) for s in self.strengths}) > 1 or self.strengths[0].thickness < float(
                "inf"
            ):
                what = f"the strength of {self.name} depends on its thickness"
                raise AxialError(Problem(what, 'say which, as in "Yield, 40 mm", or fill in Yield'))
            return self.strengths[0]
        for strength in self.strengths:
            if thickness <= strength.thickness * (1.0 + 1e-9):
                return strength
        most = self.strengths[-1].thickness
        what = f"{thickness * 1e3:g} mm is beyond the source for {self.name}, which ends at {most * 1e3:g} mm"
        raise AxialError(Problem(what, "fill in Yield from the mill's certificate"))

    def yield_at(self, thickness: float | None) -> float:
        """Return the yield stress (Pa) at a nominal thickness or diameter (m); raises AxialError where there is none."""
        found = self.strength_at(thickness).yield_stress
        if found != found:
            raise AxialError(Problem(f"no yield stress is tabulated for {self.name}", "fill in Yield"))
        return found


def _number(text: str, factor: float) -> float:
    return float(text) * factor if text else _NAN


@cache
def materials() -> dict[str, Material]:
    """Return every material by its name, in the order of the data file."""
    text = files("xlaxial.data").joinpath("materials.csv").read_text(encoding="utf-8")
    groups: dict[str, list[dict[str, str]]] = {}
    for row in csv.DictReader(text.splitlines()):
        groups.setdefault(row["name"], []).append(row)
    return {name: _material(rows) for name, rows in groups.items()}


def _material(rows: list[dict[str, str]]) -> Material:
    first = rows[0]
    strengths = tuple(
        Strength(
            float(row["thickness_to_mm"]) / 1e3 if row["thickness_to_mm"] else float("inf"),
            _number(row["yield_MPa"], 1e6),
            _number(row["tensile_MPa"], 1e6),
        )
        for row in rows
    )
    return Material(
        first["name"],
        float(first["E_GPa"]) * 1e9,
        float(first["alpha_1e6_per_K"]) / 1e6,
        _number(first["density_kg_per_m3"], 1.0),
        _number(first["poisson"], 1.0),
        strengths,
        _number(first["fck_MPa"], 1e6),
        _number(first["fcm_MPa"], 1e6),
        _number(first["fctm_MPa"], 1e6),
        first["source"],
    )


@cache
def _spellings() -> dict[str, str]:
    text = files("xlaxial.data").joinpath("materials.csv").read_text(encoding="utf-8")
    out: dict[str, str] = {}
    for row in csv.DictReader(text.splitlines()):
        for spelling in (row["name"], *filter(None, row["aliases"].split("|"))):
            out.setdefault(normal(spelling), row["name"])
    return out


@lru_cache(maxsize=1024)
def lookup(name: str) -> Material:
    """Return a material by its name or another spelling; case, spaces and punctuation do not matter.

    Raises
    ------
    AxialError
        There is none; the nearest names are the remedy.
    """
    key = normal(name)
    found = _spellings().get(key)
    if found is None:
        near = difflib.get_close_matches(key, list(_spellings()), 3, 0.5)
        names = list(dict.fromkeys(_spellings()[spelling] for spelling in near))
        remedy = "did you mean " + " or ".join(names) if names else "fill in E, Alpha and Yield instead"
        raise AxialError(Problem(f"no material is named {name!r}", remedy))
    return materials()[found]
