"""AX_MATERIAL and AX_ABOUT through the worksheet functions; the values themselves: tests/reference/test_material_values.py."""

from __future__ import annotations

from datetime import datetime

import pytest

from xlaxial import CellError, __version__
from xlaxial.data.materials import EDITION, materials
from xlaxial.functions import AX_ABOUT, AX_MATERIAL, AX_SEGMENTS
from xlaxial.functions.tabulated import material
from xlaxial.functions.tabulated_help import MATERIAL_WORDS
from xlaxial.problems import AxialError
from xlaxial.tables.words import ResultWord
from xlaxial.units import normal


@pytest.mark.parametrize(
    ("arguments", "expected"),
    [
        (("S355", "Yield, 16 mm", "MPa"), 355),  # EN 10025-2:2004 table 7, a reproduction on a public page
        (("S355J2", "fy at 40 mm", "N/mm2"), 345),  # the same
        (("S 235", "Yield, 100.5 mm", "MPa"), 195),  # the same
        (("S355", "Yield, 1 in", "MPa"), 345),  # the same: 25.4 mm
        (("S355", "Tensile strength, 120 mm", "MPa"), 450),  # the same
        (("S355", "E", "GPa"), 210),  # EN 1993-1-1:2005 3.2.6, from memory
        (("S355", "G", "GPa"), 210 / 2.6),  # EN 1993-1-1:2005 3.2.6: E / (2 (1 + nu)), about 81 GPa
        (("S355", "Alpha", "1e-6/K"), 12),  # EN 1993-1-1:2005 3.2.6, from memory
        (("S355", "Density", "kg/m3"), 7850),  # EN 1991-1-1:2002 table A.4, from memory
        (("A992", "Fy", "ksi"), 50),  # ASTM A992, a public page
        (("A36", "E", "ksi"), 29000),  # AISC 360-22, from memory
        (("A36", "Alpha", "1e-6/°F"), 6.5),  # common practice, no source
        (("A36", "Density", "lb/ft3"), 490),  # common practice, no source
        (("A193-B7", "Yield, 3 in", "ksi"), 95),  # ASTM A193 table 2, a public page
        (("1.4401", "E", "GPa"), 200),  # EN 1993-1-4:2006 2.1.3, from memory
        ((1.4401, "Alpha", "1e-6/K"), 16),  # EN 10088-1, a public page; the name typed as a number
        ((316.0, "Alpha", "1e-6/°F"), 8.9),  # handbook value, from memory
        (("6082-T6", "E", "GPa"), 70),  # EN 1999-1-1:2007 3.2.5, from memory
        (("EN AW-6082-T6 bar", "Rp0.2 at 30 mm", "MPa"), 260),  # EN 1999-1-1:2007 table 3.2b, from memory
        (("C30/37", "E", "GPa"), 33),  # EN 1992-1-1:2004 table 3.1, a public page
        (("C30/37", "Ecm", "GPa"), 33),  # the same
        (("C30/37", "fck", "MPa"), 30),  # the same
        (("C30/37", "Poisson's ratio", None), 0.2),  # EN 1992-1-1:2004 3.1.3(4), from memory
        (("C30/37", "ν", "%"), 20),  # the same
        (("42CrMo4", "Yield, 2 in", "MPa"), 650),  # ISO 683-2:2018, 40 to 100 mm, a public page
    ],
)
def test_values(arguments: tuple[object, ...], expected: float) -> None:
    assert AX_MATERIAL(*arguments) == pytest.approx(expected, rel=1e-12)


def test_the_unit_may_stand_behind_the_quantity_as_in_a_heading() -> None:
    assert AX_MATERIAL("S355", "E (GPa)") == AX_MATERIAL("S355", "E", "GPa")
    assert AX_MATERIAL("S355", "Yield, 40 mm [ksi]") == AX_MATERIAL("S355", "Yield, 40 mm", "ksi")


def test_what_does_not_depend_on_thickness_may_be_asked_with_one() -> None:
    assert AX_MATERIAL("S355", "E, 40 mm", "GPa") == AX_MATERIAL("S355", "E", "GPa")


@pytest.mark.parametrize("word", MATERIAL_WORDS, ids=lambda word: word.name)
def test_every_spelling_of_a_quantity_gives_the_same(word: ResultWord) -> None:
    name = "C30/37" if word.name[:2] in ("fc", "Ec") else "S355"
    unit = {"stress": "MPa", "expansion": "1/K", "density": "kg/m3"}.get(word.dimension)
    size = ", 40 mm" if word.name in ("Yield", "Tensile strength") else ""
    value = AX_MATERIAL(name, word.name + size, unit)
    assert not isinstance(value, CellError)
    for alias in word.aliases:
        assert AX_MATERIAL(name, f"{alias}{size}", unit) == value


def test_no_spelling_of_a_quantity_means_two_things() -> None:
    seen: dict[str, str] = {}
    for word in MATERIAL_WORDS:
        for spelling in (word.name, *word.aliases):
            assert seen.setdefault(normal(spelling), word.name) == word.name, spelling


def test_one_cell_ranges_are_cells() -> None:
    assert AX_MATERIAL([["S355"]], [["E"]], [["GPa"]]) == AX_MATERIAL("S355", "E", "GPa")


@pytest.mark.parametrize("name", list(materials()))
def test_every_material_tells_its_source_whole(name: str) -> None:
    found = materials()[name]
    whole = AX_MATERIAL(name, "Source")
    assert whole.startswith(found.source) and whole.endswith(found.strength_source)
    assert len(whole) <= 255
    assert AX_MATERIAL(name, "Source of E") == found.source
    of_strength = AX_MATERIAL(name, "Source of fck" if "/" in name else "Source of Yield")
    assert of_strength == (found.strength_source or CellError("#N/A"))


@pytest.mark.parametrize(
    ("arguments", "code", "said"),
    [
        (("S355", "Yield", "MPa"), "#VALUE!", "the strength of S355 depends on its thickness; say which it is"),
        (("1.4462", "Yield", "MPa"), "#VALUE!", "to 160 mm only"),
        (("S355", "Yield, 300 mm", "MPa"), "#VALUE!", "ends at 250 mm"),
        (("S355", "Yield, 0 mm", "MPa"), "#VALUE!", "is not positive"),
        (("S355", "Yield, -16 mm", "MPa"), "#VALUE!", "is not positive"),
        (("S355", "Yield, −16 mm", "MPa"), "#VALUE!", "is not positive"),
        (("S355", "Yield, 16", "MPa"), "#VALUE!", "the thickness has no unit"),
        (("S355", "Yield, 16 kN", "MPa"), "#VALUE!", "not of length"),
        (("S355", "Yield at 500 °C", "MPa"), "#VALUE!", "not of length"),
        (("S355", "Yield, 1,234 mm", "MPa"), "#VALUE!", "two ways"),
        (("S999", "E", "GPa"), "#VALUE!", "did you mean"),
        (("C45", "E", "GPa"), "#VALUE!", "write C45E"),
        (("S355", "E"), "#NAME?", "E needs a unit"),
        (("S355", "E", ""), "#NAME?", "E needs a unit"),
        (("S355", "E", "kN"), "#NAME?", "not of stress"),
        (("S355", "E (kN)"), "#NAME?", "not of stress"),
        (("S355", "E (GPa)", "MPa"), "#NAME?", "the unit is given twice"),
        (("S355", "Poisson's ratio", "MPa"), "#NAME?", "not of ratio"),
        (("S355", "Colour", "MPa"), "#NAME?", "write one of E, G"),
        (("S355", "Source of colour"), "#NAME?", "write one of E, G"),
        (("C30/37", "Yield", "MPa"), "#N/A", "ask for fck"),
        (("6082-T6", "Yield, 20 mm", "MPa"), "#N/A", "write EN AW-6082-T6 bar"),
        (("EN-GJL-250", "Yield", "MPa"), "#N/A", "no yield stress"),
        (("S355", "fck", "MPa"), "#N/A", "no fck is tabulated"),
        (("S355", "Ecm", "GPa"), "#N/A", "no Ecm is tabulated"),
        (("Copper", "Source of Yield"), "#N/A", "no Yield is tabulated"),
        ((CellError("#REF!"), "E", "GPa"), "#REF!", "an argument is #REF!"),
        (("S355", "E", CellError("#DIV/0!")), "#DIV/0!", "an argument is"),
        ((None, "E", "GPa"), "#VALUE!", "blank"),
        (("S355", " ", "GPa"), "#VALUE!", "blank"),
        (([["S355"], ["S275"]], "E", "GPa"), "#VALUE!", "several cells"),
        (([], "E", "GPa"), "#VALUE!", "several cells"),
        ((datetime(2026, 3, 4), "E", "GPa"), "#VALUE!", "no material is named"),
        ((True, "E", "GPa"), "#VALUE!", "no material is named"),
    ],
)
def test_errors(arguments: tuple[object, ...], code: str, said: str) -> None:
    assert AX_MATERIAL(*arguments) == CellError(code)
    with pytest.raises(AxialError) as caught:
        material(*arguments)
    assert said in caught.value.problem.text()


def test_the_segments_table_takes_yield_by_the_diameter_of_the_row() -> None:
    table = [
        ["Mark", "Length (mm)", "Diameter (mm)", "Material", "dT (K)"],
        ["T1", 1000, 16, "S355", -50],
        ["T2", 1000, 17, "S355", -50],
        ["T3", 1000, 300, "S355", -50],
        ["T4", 1000, 17, "C45", -50],
    ]
    rows = AX_SEGMENTS(table, [["Node"], [0], [1]], None, [["Stress (MPa)", "Utilisation", "Status"]])
    stress = 210e3 * 12e-6 * 50
    assert rows[0][:2] == pytest.approx([stress, stress / 355])
    assert rows[1][:2] == pytest.approx([stress, stress / 345])
    assert rows[2][:2] == [pytest.approx(stress), CellError("#N/A")]
    assert "is beyond the source for S355" in rows[2][2]
    assert rows[3][:2] == [CellError("#VALUE!")] * 2
    assert "C45/55" in rows[3][2]


def test_about_is_lines_that_no_host_cuts() -> None:
    lines = AX_ABOUT()
    assert lines[0] == [f"xlaxial {__version__}"]
    assert EDITION in lines[1][0]
    assert [len(line) for line in lines] == [1] * 4
    assert all(len(line[0]) < 255 for line in lines)
