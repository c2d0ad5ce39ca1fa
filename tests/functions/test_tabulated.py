"""AX_MATERIAL: values against the standards that they are tabulated from (recalled, not read from the documents)."""

from __future__ import annotations

import math

import pytest

from xlaxial import CellError
from xlaxial.data.materials import materials
from xlaxial.functions import AX_MATERIAL


@pytest.mark.parametrize(
    ("arguments", "expected"),
    [
        (("S355", "Yield, 16 mm", "MPa"), 355),  # EN 10025-2:2019 table 6, from memory
        (("S355J2", "fy at 40 mm", "N/mm2"), 345),  # the same
        (("S 235", "Yield, 100.5 mm", "MPa"), 195),  # the same
        (("S355", "E", "GPa"), 210),  # EN 1993-1-1:2005 3.2.6
        (("S355", "G", "GPa"), 210 / 2.6),  # EN 1993-1-1:2005 3.2.6: E / (2 (1 + nu)), about 81 GPa
        (("S355", "Alpha", "1e-6/K"), 12),  # EN 1993-1-1:2005 3.2.6
        (("A992", "Fy", "ksi"), 50),  # ASTM A992, from memory
        (("A36", "E", "ksi"), 29000),  # AISC 360-22
        (("A36", "Alpha", "1e-6/°F"), 6.5),  # common practice, no source
        (("1.4401", "E", "GPa"), 200),  # EN 1993-1-4:2006 2.1.3
        (("316", "Alpha", "1e-6/K"), 16),  # EN 10088-1:2014, from memory
        (("6082-T6", "E", "GPa"), 70),  # EN 1999-1-1:2007 3.2.5
        (("C30/37", "E", "GPa"), 33),  # EN 1992-1-1:2004 table 3.1
        (("C30/37", "Poisson's ratio", None), 0.2),  # EN 1992-1-1:2004 3.1.3(4)
        (("42CrMo4", "Yield, 2 in", "MPa"), 650),  # EN ISO 683-2:2018, 40 to 100 mm, from memory
    ],
)
def test_values(arguments: tuple[str, ...], expected: float) -> None:
    assert AX_MATERIAL(*arguments) == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("name", [name for name in materials() if name.startswith("C") and "/" in name])
def test_concrete_follows_the_formulas_of_its_table(name: str) -> None:
    """EN 1992-1-1:2004 table 3.1: fcm = fck + 8, Ecm = 22 (fcm/10)^0.3 GPa (rounded), fctm = 0.30 fck^(2/3) to C50/60."""
    fck, fcm, fctm, modulus = (AX_MATERIAL(name, what, "MPa") for what in ("fck", "fcm", "fctm", "E"))
    assert fcm == pytest.approx(fck + 8)
    assert modulus / 1e3 == pytest.approx(22 * (fcm / 10) ** 0.3, abs=0.6)
    expected = 0.30 * fck ** (2 / 3) if fck <= 50 else 2.12 * math.log(1 + fcm / 10)
    assert fctm == pytest.approx(expected, abs=0.06)


def test_every_material_has_a_source_and_sane_values() -> None:
    for material in materials().values():
        assert len(material.source) > 20
        assert 10e9 < material.modulus < 250e9
        assert 5e-6 < material.alpha < 30e-6
        assert 0.15 < material.poisson < 0.4
        thickness = [strength.thickness for strength in material.strengths]
        assert thickness == sorted(thickness)
        yields = [s.yield_stress for s in material.strengths if s.yield_stress == s.yield_stress]
        assert all(10e6 < value < 1500e6 for value in yields)


@pytest.mark.parametrize(
    ("arguments", "code"),
    [
        (("S355", "Yield", "MPa"), "#VALUE!"),  # depends on thickness: never guessed
        (("S355", "Yield, 300 mm", "MPa"), "#VALUE!"),
        (("S355", "Yield, 16", "MPa"), "#VALUE!"),
        (("S999", "E", "GPa"), "#VALUE!"),
        (("S355", "E"), "#NAME?"),
        (("S355", "E", "kN"), "#NAME?"),
        (("S355", "Colour", "MPa"), "#NAME?"),
        (("C30/37", "Yield", "MPa"), "#N/A"),
        ((CellError("#REF!"), "E", "GPa"), "#REF!"),
        ((None, "E", "GPa"), "#VALUE!"),
    ],
)
def test_errors(arguments: tuple[object, ...], code: str) -> None:
    assert AX_MATERIAL(*arguments) == CellError(code)
