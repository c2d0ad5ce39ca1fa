"""The data files: well formed, found by every spelling, never guessed."""

from __future__ import annotations

import csv
import math
from importlib.resources import files

import pytest

from xlaxial.data.materials import Material, lookup, materials
from xlaxial.problems import AxialError, Problem
from xlaxial.units import normal

NAMES = list(materials())


def _rows(name: str) -> list[dict[str, str]]:
    return list(csv.DictReader(files("xlaxial.data").joinpath(name).read_text(encoding="utf-8").splitlines()))


def _problem(name: str) -> Problem:
    with pytest.raises(AxialError) as caught:
        lookup(name)
    return caught.value.problem


@pytest.mark.parametrize("name", NAMES)
def test_a_material_is_complete_and_its_values_are_possible(name: str) -> None:
    """Bounds that every solid of the table keeps: Young's moduli, densities and expansions of metals and concrete."""
    found = lookup(name)
    assert found is materials()[name]
    assert 20e9 < found.modulus < 220e9
    assert 1e-6 < found.alpha < 24e-6
    assert 2000 < found.density < 9000
    assert 0.15 < found.poisson < 0.4
    assert found.strengths
    for strength in found.strengths:
        assert not strength.yield_stress > strength.tensile
        assert math.isnan(strength.yield_stress) or 100e6 < strength.yield_stress < 1100e6
    assert math.isnan(found.fck) == ("/" not in name)


@pytest.mark.parametrize("name", NAMES)
def test_strength_never_rises_with_thickness_of_steel_and_iron(name: str) -> None:
    """Thicker is never stronger in the product standards of steel and iron; extruded aluminium is the exception."""
    found = lookup(name)
    thickness = [strength.thickness for strength in found.strengths]
    assert thickness == sorted(set(thickness))
    assert found.size in ({"thickness", "diameter"} if thickness != [math.inf] else {"", "thickness", "diameter"})
    if not name.startswith("EN AW-6082"):
        yields = [strength.yield_stress for strength in found.strengths if not math.isnan(strength.yield_stress)]
        assert yields == sorted(yields, reverse=True)


@pytest.mark.parametrize("name", NAMES)
def test_every_value_has_a_source_that_says_how_far_it_is_to_be_trusted(name: str) -> None:
    found = lookup(name)
    said = ("from memory", "seen on a public page", "common practice, no source")
    assert any(how in found.source for how in said)
    has_strength = any(not math.isnan(s.tensile) for s in found.strengths) or not math.isnan(found.fck)
    assert has_strength == any(how in found.strength_source for how in said)
    assert len(f"{found.source}; {found.strength_source}") <= 255  # a longer text is cut in one host
    if math.isnan(found.strengths[0].yield_stress):
        assert found.without_yield


@pytest.mark.parametrize("file", ["materials.csv", "materials_us.csv"])
def test_the_rows_of_a_material_stand_together_and_only_the_first_names_its_properties(file: str) -> None:
    seen: list[str] = []
    for row in _rows(file):
        first = row["name"] not in seen
        assert first or seen[-1] == row["name"]
        assert bool(row["source"]) is first
        assert bool(row["poisson"]) is first
        assert None not in row and None not in row.values()
        seen.append(row["name"])


def test_no_spelling_means_two_things() -> None:
    seen: dict[str, str] = {}
    for file in ("materials.csv", "materials_us.csv"):
        for row in _rows(file):
            for spelling in {row["name"], *row["aliases"].split("|")} - {""}:
                assert seen.setdefault(normal(spelling), row["name"]) == row["name"], spelling
    for row in _rows("materials_unclear.csv"):
        assert normal(row["name"]) not in seen, row["name"]


@pytest.mark.parametrize(
    ("spelling", "name"),
    [
        ("s355", "S355"),
        ("S 355", "S355"),
        ("S355J2", "S355"),
        ("S355 J2+N", "S355"),
        ("S355J2H", "S355H"),
        ("A992", "A992"),
        ("astm a992", "A992"),
        ("Grade 50", "A572-50"),
        ("A572 Gr. 50", "A572-50"),
        ("1.4401", "1.4401"),
        ("X5CrNiMo17-12-2", "1.4401"),
        ("316", "AISI 316"),
        ("AISI 316", "AISI 316"),
        ("316L", "AISI 316L"),
        ("c30/37", "C30/37"),
        ("Concrete C30/37", "C30/37"),
        ("EN-GJL-250", "EN-GJL-250"),
        ("42CrMo4", "42CrMo4"),
        ("6082-T6", "EN AW-6082-T6"),
        ("Ti 6Al 4V", "Ti-6Al-4V"),
        ("Invar", "FeNi36"),
    ],
)
def test_other_spellings(spelling: str, name: str) -> None:
    assert lookup(spelling) is materials()[name]


@pytest.mark.parametrize(
    ("name", "named"),
    [("S335", "S355"), ("S355JX", "S355"), ("1.4402", "1.4401"), ("C30/38", "C30/37"), ("A922", "A992")],
)
def test_an_unknown_name_is_answered_with_the_nearest(name: str, named: str) -> None:
    problem = _problem(name)
    assert problem.what == f"no material is named {name!r}"
    assert problem.remedy.startswith("did you mean ")
    assert named in problem.remedy


def test_a_name_like_no_other_is_answered_with_what_to_fill_in() -> None:
    assert _problem("unobtainium alloy").remedy == "fill in E, Alpha and Yield instead"
    assert len(_problem("x" * 5000).text()) < 200


@pytest.mark.parametrize(
    ("name", "remedy"),
    [
        ("C45", "C45/55"),  # a steel of EN 10083-2 and short for a concrete class
        ("C30", "C30/37"),  # has been a cube strength too
        ("C45E", "C45E+N"),  # weaker by a third where it is only normalised
        ("A500 Grade C", "A500-C round"),  # round and shaped tubes differ
        ("S460", "S460M"),
        ("brass", "CuZn39Pb3"),
        ("Steel", "S355"),
    ],
)
def test_a_name_that_fits_several_is_never_guessed(name: str, remedy: str) -> None:
    problem = _problem(name)
    assert "does not settle the material" in problem.what
    assert remedy in problem.remedy


def test_every_name_that_a_remedy_of_the_data_offers_is_known() -> None:
    for row in _rows("materials_unclear.csv"):
        for offered in row["write"].split("|"):
            assert lookup(offered).name == offered
            assert f"write {row['write'].split('|')[0]}" in _problem(row["name"]).remedy


def test_strength_steps_include_their_upper_end() -> None:
    steel = lookup("S355")
    assert steel.yield_by_thickness[0] == (0.016, 355e6)
    assert [steel.yield_at(t) / 1e6 for t in (0.001, 0.016, 0.0160001, 0.040, 0.0400001, 0.250)] == [
        355, 355, 345, 345, 335, 275,
    ]  # fmt: skip
    assert steel.yield_at(0.63 * 0.0254) == 345e6  # 16.002 mm
    assert steel.yield_at(1.6e-2 * (1 + 1e-15)) == 355e6  # rounding is not thickness


@pytest.mark.parametrize("thickness", [0.0, -0.01, math.nan])
def test_a_thickness_that_is_none_is_refused(thickness: float) -> None:
    for name in ("S355", "A992", "Copper"):
        with pytest.raises(AxialError, match="is not positive"):
            lookup(name).yield_at(thickness)


@pytest.mark.parametrize(
    ("name", "thickness", "said"),
    [
        ("S355", None, "the strength of S355 depends on its thickness"),
        ("42CrMo4", None, "the strength of 42CrMo4 depends on its diameter"),
        ("1.4462", None, "tabulated for a thickness to 160 mm only"),
        ("S355", 0.2501, "a thickness of 250.1 mm is beyond the source for S355, which ends at 250 mm"),
        ("A193-B7", 0.2, "a diameter of 200 mm is beyond the source for A193-B7, which ends at 177.8 mm"),
        ("C30/37", None, "no yield stress is tabulated for C30/37"),
        ("6082-T6", 0.02, "no yield stress is tabulated for EN AW-6082-T6; its strength depends on the product"),
    ],
)
def test_what_is_not_tabulated_is_refused(name: str, thickness: float | None, said: str) -> None:
    with pytest.raises(AxialError, match=said):
        lookup(name).yield_at(thickness)


def test_what_does_not_depend_on_thickness_needs_none() -> None:
    found: Material = lookup("A992")
    assert found.yield_at(None) == found.yield_at(0.05)
