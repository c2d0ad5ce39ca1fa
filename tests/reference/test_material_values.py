"""Materials against the formulas of their standards, and against tables set down apart from the data files.

"public page": compared with a reproduction of the standard's table on a public page, not with the document itself.
"""

from __future__ import annotations

import math

import pytest

from xlaxial.data.materials import lookup, materials

CONCRETE = [name for name in materials() if name.startswith("C") and "/" in name]
KSI = 4448.2216152605 / 0.0254**2  # Pa, from 1 lbf = 4.4482216152605 N (exact) and 1 in = 25.4 mm (exact)


def test_all_classes_of_concrete_are_there() -> None:
    """EN 1992-1-1:2004 table 3.1 (public page): cylinder and cube strengths of the fourteen classes."""
    cylinder = (12, 16, 20, 25, 30, 35, 40, 45, 50, 55, 60, 70, 80, 90)
    cube = (15, 20, 25, 30, 37, 45, 50, 55, 60, 67, 75, 85, 95, 105)
    assert [f"C{a}/{b}" for a, b in zip(cylinder, cube, strict=True)] == CONCRETE
    assert [lookup(name).fck / 1e6 for name in CONCRETE] == pytest.approx(cylinder, rel=1e-12)


@pytest.mark.parametrize("name", CONCRETE)
def test_concrete_follows_the_formulas_of_its_table(name: str) -> None:
    """EN 1992-1-1:2004 table 3.1, last column: fcm, Ecm (printed to 1 GPa), fctm (printed to 0.1 MPa)."""
    concrete = lookup(name)
    fck, fcm = concrete.fck / 1e6, concrete.fcm / 1e6
    assert fcm == pytest.approx(fck + 8, rel=1e-12)
    assert concrete.modulus / 1e9 == pytest.approx(22 * (fcm / 10) ** 0.3, abs=0.5)
    fctm = 0.30 * fck ** (2 / 3) if fck <= 50 else 2.12 * math.log(1 + fcm / 10)
    assert concrete.fctm / 1e6 == pytest.approx(fctm, abs=0.05 + 1e-9)
    assert concrete.alpha == pytest.approx(10e-6, rel=1e-12)  # 3.1.3(5)


@pytest.mark.parametrize(
    ("name", "steps"),
    [
        # EN 10025-2:2004 table 7 (public page), MPa for up to 16, 40, 63, 80, 100, 150, 200, 250 mm
        ("S235", (235, 225, 215, 215, 215, 195, 185, 175)),
        ("S275", (275, 265, 255, 245, 235, 225, 215, 205)),
        ("S355", (355, 345, 335, 325, 315, 295, 285, 275)),
        ("S450J0", (450, 430, 410, 390, 380, 380)),
    ],
)
def test_yield_of_non_alloy_steels(name: str, steps: tuple[int, ...]) -> None:
    ends = (16, 40, 63, 80, 100, 150, 200, 250)
    steel = lookup(name)
    assert [steel.yield_at(to / 1e3) / 1e6 for to in ends[: len(steps)]] == pytest.approx(steps, rel=1e-12)
    assert len(steel.strengths) == len(steps)


@pytest.mark.parametrize(
    ("name", "least"),
    [
        # EN 1993-1-1:2005 table 3.1, from memory: fy for t up to 40 mm, and over 40 up to 80 mm
        ("S235", (235, 215)),
        ("S275", (275, 255)),
        ("S355", (355, 335)),
        ("S420N", (420, 390)),
        ("S460N", (460, 430)),
        ("S460M", (460, 430)),
        ("S355H", (355, 335)),
    ],
)
def test_yield_is_never_above_the_simplified_table_of_the_design_standard(name: str, least: tuple[int, int]) -> None:
    steel = lookup(name)
    assert steel.yield_at(0.016) == pytest.approx(least[0] * 1e6, rel=1e-12)
    assert all(steel.yield_at(t) <= least[0] * 1e6 * (1 + 1e-12) for t in (0.03, 0.04))
    assert all(steel.yield_at(t) <= least[1] * 1e6 * (1 + 1e-12) for t in (0.0401, 0.063, 0.08))


@pytest.mark.parametrize(
    ("name", "diameter", "yields", "tensile"),
    [
        # ISO 683-2:2018 (public page): 42CrMo4 quenched and tempered
        ("42CrMo4", 16, 900, 1100),
        ("42CrMo4", 40, 750, 1000),
        ("42CrMo4", 60, 650, 900),
        ("42CrMo4", 160, 550, 800),
        ("42CrMo4", 250, 500, 750),
        # EN 10083-2:2006 (public page)
        ("C45E+QT", 16, 490, 700),
        ("C45E+QT", 40, 430, 650),
        ("C45E+QT", 100, 370, 630),
        ("C45E+N", 16, 340, 620),
        ("C45E+N", 100, 305, 580),
        ("C45E+N", 250, 275, 560),
    ],
)
def test_heat_treated_bars(name: str, diameter: float, yields: float, tensile: float) -> None:
    strength = lookup(name).strength_at(diameter / 1e3)
    assert strength.yield_stress / 1e6 == pytest.approx(yields, rel=1e-12)
    assert strength.tensile / 1e6 == pytest.approx(tensile, rel=1e-12)


@pytest.mark.parametrize(
    ("name", "diameter", "yields", "tensile"),
    [
        # AISC 360-05 commentary table C-A3.1 (public page), ksi
        ("A53-B", None, 35, 60),
        ("A500-B round", None, 42, 58),
        ("A500-B shaped", None, 46, 58),
        ("A500-C round", None, 46, 62),
        ("A500-C shaped", None, 50, 62),
        # ASTM values as AISC Manual table 2-4 lists them (public page)
        ("A36", None, 36, 58),
        ("A572-50", None, 50, 65),
        ("A992", None, 50, 65),
        ("A1085", None, 50, 65),
        # ASTM A193 table 2 (public page): in
        ("A193-B7", 2.5, 105, 125),
        ("A193-B7", 4, 95, 115),
        ("A193-B7", 7, 75, 100),
        # ASTM A276 condition A (304, 304L public page; 316, 316L from memory)
        ("AISI 304", None, 30, 75),
        ("AISI 304L", None, 25, 70),
        ("AISI 316", None, 30, 75),
        ("AISI 316L", None, 25, 70),
        # ASTM F1554 and A722, from memory
        ("F1554-36", None, 36, 58),
        ("F1554-55", None, 55, 75),
        ("F1554-105", None, 105, 125),
        ("A722 Type I", None, 0.85 * 150, 150),
        ("A722 Type II", None, 0.80 * 150, 150),
    ],
)
def test_customary_strengths(name: str, diameter: float | None, yields: float, tensile: float) -> None:
    strength = lookup(name).strength_at(None if diameter is None else diameter * 0.0254)
    assert strength.yield_stress / KSI == pytest.approx(yields, rel=1e-12)
    assert strength.tensile / KSI == pytest.approx(tensile, rel=1e-12)


@pytest.mark.parametrize("name", ["A36", "A572-50", "A992", "A500-C round", "A53-B", "F1554-55", "A193-B7"])
def test_customary_steels(name: str) -> None:
    """E 29 000 ksi (AISC 360), 6.5e-6 per degF and 490 lb/ft3 (common practice, no source)."""
    steel = lookup(name)
    assert steel.modulus / KSI == pytest.approx(29000, rel=1e-12)
    assert steel.modulus == pytest.approx(200e9, rel=3e-4)  # the 200 000 MPa that AISC 360 sets beside it
    assert steel.alpha == pytest.approx(6.5e-6 * 1.8, rel=1e-12)
    assert steel.density == pytest.approx(7850, rel=2e-4)


@pytest.mark.parametrize(
    ("name", "modulus", "alpha", "density"),
    [
        # EN 1993-1-1:2005 3.2.6 and EN 1991-1-1 table A.4, from memory
        ("S355", 210, 12, 7850),
        # EN 10088-1 (public page): GPa, 1e-6/K from 20 to 100 degC, kg/m3
        ("1.4301", 200, 16.0, 7900),
        ("1.4307", 200, 16.0, 7900),
        ("1.4401", 200, 16.0, 8000),
        ("1.4404", 200, 16.0, 8000),
        ("1.4462", 200, 13.0, 7800),
        # EN 1999-1-1:2007 3.2.5, from memory
        ("EN AW-6082-T6 bar", 70, 23, 2700),
        ("EN AW-6061-T6", 70, 23, 2700),
        # EN 1563 annex (modulus and density on a public page, for grades of the same matrix)
        ("EN-GJS-400-15", 169, 12.5, 7100),
    ],
)
def test_elastic_properties(name: str, modulus: float, alpha: float, density: float) -> None:
    found = lookup(name)
    assert found.modulus / 1e9 == pytest.approx(modulus, rel=1e-12)
    assert found.alpha * 1e6 == pytest.approx(alpha, rel=1e-12)
    assert found.density == pytest.approx(density, rel=1e-12)


def test_brass_agrees_with_data_in_customary_units() -> None:
    """CuZn39Pb3 as a maker states it on a public page: 14 000 ksi, 11.6e-6 per degF, 0.306 lb/in3, each rounded."""
    brass = lookup("CuZn39Pb3")
    assert brass.modulus == pytest.approx(14000 * KSI, rel=0.01)
    assert brass.alpha == pytest.approx(11.6e-6 * 1.8, rel=0.005)
    assert brass.density == pytest.approx(0.306 * 0.45359237 / 0.0254**3, rel=0.002)


@pytest.mark.parametrize(
    ("name", "shear"),
    [
        ("S355", 81),  # EN 1993-1-1:2005 3.2.6: about 81 000 N/mm2
        ("EN AW-6082-T6", 27),  # EN 1999-1-1:2007 3.2.5: 27 000 N/mm2
    ],
)
def test_shear_modulus_is_that_of_the_standard(name: str, shear: float) -> None:
    assert lookup(name).shear_modulus / 1e9 == pytest.approx(shear, rel=0.005)
