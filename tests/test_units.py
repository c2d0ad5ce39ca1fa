"""Units: exact factors, spellings of the trade, refusals that say what to write."""

from __future__ import annotations

import time
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from xlaxial.problems import UnitError
from xlaxial.units import DIMENSIONS, heading_forms, is_unit, normal, strip_brackets, unit

# Exact by definition: SI Brochure, 9th edition; inch, pound and standard gravity: NIST SP 811 (2008), appendix B.
INCH, FOOT, LBF = Fraction(254, 10000), Fraction(3048, 10000), Fraction(45359237, 10**8) * Fraction(980665, 10**5)

EXACT = [
    ("N", "force", Fraction(1)), ("kN", "force", Fraction(1000)), ("MN", "force", Fraction(10**6)), ("KN", "force", Fraction(1000)),
    ("lbf", "force", LBF), ("lb", "force", LBF), ("kip", "force", 1000 * LBF), ("kips", "force", 1000 * LBF),
    ("kgf", "force", Fraction(980665, 10**5)), ("tf", "force", Fraction(980665, 100)),
    ("mm", "length", Fraction(1, 1000)), ("cm", "length", Fraction(1, 100)), ("m", "length", Fraction(1)), ("in", "length", INCH),
    ("in.", "length", INCH), ('"', "length", INCH), ("ft", "length", FOOT), ("'", "length", FOOT), ("µm", "length", Fraction(1, 10**6)),
    ("μm", "length", Fraction(1, 10**6)), ("um", "length", Fraction(1, 10**6)), ("mil", "length", INCH / 1000),
    ("mm²", "area", Fraction(1, 10**6)), ("mm2", "area", Fraction(1, 10**6)), ("mm^2", "area", Fraction(1, 10**6)), ("in²", "area", INCH**2),
    ("sq in", "area", INCH**2), ("MPa", "stress", Fraction(10**6)), ("GPa", "stress", Fraction(10**9)), ("N/mm²", "stress", Fraction(10**6)),
    ("N/mm2", "stress", Fraction(10**6)), ("kN/mm²", "stress", Fraction(10**9)), ("psi", "stress", LBF / INCH**2),
    ("ksi", "stress", 1000 * LBF / INCH**2), ("bar", "stress", Fraction(10**5)), ("kgf/cm2", "stress", Fraction(980665, 10)),
    ("N/mm", "stiffness", Fraction(1000)), ("kN/m", "line load", Fraction(1000)), ("lbf/in", "stiffness", LBF / INCH),
    ("lb/in", "stiffness", LBF / INCH), ("kip/in", "stiffness", 1000 * LBF / INCH), ("kip/ft", "line load", 1000 * LBF / FOOT),
    ("1/K", "expansion", Fraction(1)), ("/K", "expansion", Fraction(1)), ("K⁻¹", "expansion", Fraction(1)), ("1e-6/K", "expansion", Fraction(1, 10**6)),
    ("10⁻⁶/K", "expansion", Fraction(1, 10**6)), ("10^-6/K", "expansion", Fraction(1, 10**6)), ("×10-6/K", "expansion", Fraction(1, 10**6)),
    ("µm/m·K", "expansion", Fraction(1, 10**6)), ("µm/(m·K)", "expansion", Fraction(1, 10**6)), ("µm/m/K", "expansion", Fraction(1, 10**6)),
    ("ppm/K", "expansion", Fraction(1, 10**6)), ("ppm/°C", "expansion", Fraction(1, 10**6)), ("1/°F", "expansion", Fraction(9, 5)),
    ("1e-6/°F", "expansion", Fraction(9, 5 * 10**6)), ("µin/in·°F", "expansion", Fraction(9, 5 * 10**6)),
    ("K", "temperature difference", Fraction(1)), ("°C", "temperature difference", Fraction(1)), ("C", "temperature difference", Fraction(1)),
    ("°F", "temperature difference", Fraction(5, 9)), ("F", "temperature difference", Fraction(5, 9)), ("%", "strain", Fraction(1, 100)),
    ("µε", "strain", Fraction(1, 10**6)), ("mm/m", "strain", Fraction(1, 1000)), ("-", "ratio", Fraction(1)),
    ("kN·m", "moment", Fraction(1000)), ("kNm", "moment", Fraction(1000)), ("kip-in", "moment", 1000 * LBF * INCH), ("ft-lbf", "moment", FOOT * LBF),
    ("cm4", "second moment of area", Fraction(1, 10**8)), ("lb/ft³", "density", Fraction(45359237, 10**8) / FOOT**3),
    ("t/m3", "density", Fraction(1000)), ("mm/kN", "flexibility", Fraction(1, 10**6)),
]  # fmt: skip


@pytest.mark.parametrize(("text", "dimension", "factor"), EXACT)
def test_factors_are_the_nearest_doubles_to_the_exact_ratios(text: str, dimension: str, factor: Fraction) -> None:
    assert unit(text, dimension).factor == float(factor)


@pytest.mark.parametrize(
    ("text", "dimension", "remedy"),
    [
        ("t", "force", "tf"), ("T", "force", "tf"), ("ton", "force", "kip"), ("tonnes", "force", "tf"), ("kg", "force", "kgf"),
        ("k", "force", "kip"), ("K", "force", "kip"), ("mPa", "stress", "MPa"), ("mpa", "stress", "MPa"), ("M", "length", "MPa, MN or m"),
        ("kN", "length", "mm, m, in, ft"), ("mm", "force", "kN"), ("furlong", "length", "mm, m"), ("9^9^9^9", "length", "mm"), ("deg", "strain", "%"),
        ("kg/cm2", "stress", "kgf"), ("°F", "expansion", "1e-6/K"), ("mn", "force", "MN"), ("Mm", "length", "mm"), ("()", "length", "mm"),
        ("mm)", "length", "mm"), ("__import__('os')", "length", "mm"), ("m" * 200, "length", "mm"), ("", "length", "mm"),
    ],
)  # fmt: skip
def test_refusals_say_what_to_write(text: str, dimension: str, remedy: str) -> None:
    start = time.perf_counter()
    with pytest.raises(UnitError) as refused:
        unit(text, dimension)
    assert remedy in refused.value.problem.remedy
    assert time.perf_counter() - start < 5.0  # a text that hangs the reader would be a way to stop a server


def test_another_dimension_is_named() -> None:
    with pytest.raises(UnitError, match="'kN' is a unit of force, not of length"):
        unit("kN", "length")


@pytest.mark.parametrize(
    ("text", "dimension"),
    [
        ("103 kN", "force"), ("100 mm", "length"), ("x100 mm", "length"), ("x 103 mm", "length"), ("× 1012 mm", "length"), ("x 106 N", "force"),
        ("mm/", "length"), ("kN()", "force"), ("N/(mm)mm", "stress"), ("deg", "ratio"), ("rad·mm", "length"), ("'600\"", "length"),
    ],
)  # fmt: skip
def test_sizes_counts_and_loose_grammar_are_no_units(text: str, dimension: str) -> None:
    with pytest.raises(UnitError):
        unit(text, dimension)


def test_degrees_apart_from_their_scale_are_temperatures() -> None:
    assert [unit(text, "temperature difference").factor for text in ("deg C", "deg. F", "° C", "degC")] == [
        1.0,
        5 / 9,
        1.0,
        1.0,
    ]
    assert unit("10³ kN", "force").factor == unit("10^3 kN", "force").factor == 1e6


@pytest.mark.parametrize("dimension", DIMENSIONS)
def test_the_examples_in_the_remedies_work(dimension: str) -> None:
    for example in DIMENSIONS[dimension].examples:
        assert unit(example, dimension).factor > 0


def test_what_looks_like_a_units_row() -> None:
    assert all(map(is_unit, ("mm", "[mm]", "(kN)", "-", "1e-6/K", "°C", "t", "kg")))
    assert not any(map(is_unit, ("steel", "T1", "A", "E", "L", "1", "12", "S355", "", "both")))
    assert [strip_brackets(text) for text in ("[mm]", " (kN) ", "(a)/(b)", "mm")] == ["mm", "kN", "(a)/(b)", "mm"]


@pytest.mark.parametrize(
    ("heading", "form"),
    [
        ("Length (mm)", ("Length", "mm")), ("Length [mm]", ("Length", "mm")), ("Length, mm", ("Length", "mm")), ("Length / mm", ("Length", "mm")),
        ("Length\n(mm)", ("Length", "mm")), ("Length\u00a0 (mm)", ("Length", "mm")), ("Alpha (1e-6/K)", ("Alpha", "1e-6/K")),
        ("Alpha, µm/(m·K)", ("Alpha", "µm/(m·K)")), ("Stiffness / (kN/mm)", ("Stiffness", "kN/mm")), ("Stiffness / kN/mm", ("Stiffness", "kN/mm")),
        ("Nb,Rd (kN)", ("Nb,Rd", "kN")), ("Alpha (µm/(m·K))", ("Alpha", "µm/(m·K)")), ("Et/E", ("Et/E", None)),
    ],
)  # fmt: skip
def test_headings_split_into_term_and_unit(heading: str, form: tuple[str, str | None]) -> None:
    assert form in heading_forms(heading)
    assert (" ".join(heading.split()), None) in heading_forms(heading)


def test_terms_compare_without_case_spaces_and_punctuation() -> None:
    assert normal("Cross-sectional  AREA.") == normal("cross sectional area")
    assert normal("ΔT") == normal("∆T") == normal("δt")
    assert normal("µ") == normal("μ")
    assert normal("Alpha") != normal("α")


@given(st.text(max_size=60))
def test_any_text_is_a_unit_or_a_unit_error(text: str) -> None:
    for dimension in ("length", "expansion"):
        try:
            assert unit(text, dimension).factor > 0
        except UnitError as refused:
            assert refused.problem.remedy
    heading_forms(text)
    normal(text)
