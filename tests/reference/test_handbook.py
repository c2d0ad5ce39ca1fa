"""Closed forms of the handbooks, through the worksheet functions.

Sources, by the formula (page numbers not at hand, from memory): Young and Budynas, Roark's Formulas for Stress and
Strain, 7th edition, chapter 7 (tension, compression and composite members) and chapter 16.6 (temperature stresses);
Timoshenko, Strength of Materials, Part I, 3rd edition, chapter I (statically indeterminate bars, own weight, taper).
"""

from __future__ import annotations

import math

import pytest

from xlaxial.functions import AX_MEMBERS, AX_PROFILE, AX_REACTIONS, AX_SEGMENTS

E, ALPHA = 200e9, 12e-6
RIGID_ENDS = [["Node"], [0], [1]]


@pytest.mark.parametrize("a", [0.25, 0.7, 1.1, 1.95])
def test_bar_between_two_supports_with_a_load_at_a(a: float) -> None:
    """Load P at a from the left of a bar of length L: R_left = -P b/L, R_right = -P a/L (Timoshenko, chapter I)."""
    length, load = 2.0, 37.0
    tables = ([["L (m)", "A (mm2)", "E (GPa)"], [length, 450, 200]], RIGID_ENDS, [["x (m)", "Force (kN)"], [a, load]])
    assert AX_REACTIONS(*tables, "kN") == [
        [pytest.approx(-load * (length - a) / length, rel=1e-12)],
        [pytest.approx(-load * a / length, rel=1e-12)],
    ]
    [[most]] = AX_MEMBERS(*tables, "Displacement max (mm)")
    assert most == pytest.approx(load * a * (length - a) / length / (200 * 450) * 1e3, rel=1e-12)


def test_bar_between_springs_shares_a_load_by_stiffness() -> None:
    """Springs kA at the loaded end, kB at the far end of a bar k: the far path has 1/(1/k + 1/kB) (series of springs)."""
    k_a, k_b, k = 30.0, 80.0, 200.0 * 500 / 1500
    tables = ([["L (mm)", "A (mm2)", "E (GPa)"], [1500, 500, 200]], [["Node", "k (kN/mm)"], [0, k_a], [1, k_b]])
    far = 1 / (1 / k + 1 / k_b)
    rows = AX_REACTIONS(*tables, [["Node", "Force (kN)"], [0, 100]], "kN")
    assert rows == [[pytest.approx(-100 * k_a / (k_a + far))], [pytest.approx(-100 * far / (k_a + far))]]


def test_composite_bar_in_parallel() -> None:
    """Two materials side by side share a load as E A (Timoshenko, chapter I)."""
    segments = [["From", "To", "L (mm)", "A (mm2)", "E (GPa)"], ["a", "b", 400, 900, 200], ["a", "b", 400, 6000, 30]]
    rows = AX_SEGMENTS(
        segments, [["Node"], ["a"]], [["Node", "Force (kN)"], ["b", -180]], [["Stress (MPa)", "Elongation (mm)"]]
    )
    stiffness = 200 * 900 + 30 * 6000
    assert rows[0] == [pytest.approx(-180e3 * 200 / stiffness), pytest.approx(-180e3 * 400 / stiffness / 1e3)]
    assert rows[1] == [pytest.approx(-180e3 * 30 / stiffness), pytest.approx(rows[0][1])]


@pytest.mark.parametrize(("k_a", "k_b"), [(20.0, 55.0), (1e3, 1e4), (0.5, 300.0)])
def test_heated_bar_between_yielding_supports(k_a: float, k_b: float) -> None:
    """Restraint factor 1 / (1 + (E A/L)(1/kA + 1/kB)) times the force of full restraint (common practice, no source)."""
    area, length, rise = 800e-6, 6.0, 35.0
    tables = (
        [["L (m)", "A (mm2)", "E (GPa)", "alpha (1e-6/K)", "dT (K)"], [length, area * 1e6, 200, 12, rise]],
        [["Node", "k (kN/mm)"], [0, k_a], [1, k_b]],
    )
    factor = 1 / (1 + E * area / length * (1 / k_a + 1 / k_b) / 1e6)
    assert AX_SEGMENTS(*tables, None, "N") == [[pytest.approx(-factor * E * area * ALPHA * rise, rel=1e-12)]]


def test_fully_restrained_steel_heated_by_50_kelvin() -> None:
    """200 GPa x 12e-6/K x 50 K = 120 MPa (handbook value)."""
    segments = [["L (m)", "A (mm2)", "E (GPa)", "alpha (1e-6/K)", "dT (°C)"], [3, 777, 200, 12, 50]]
    assert AX_SEGMENTS(segments, RIGID_ENDS, None, "Stress (MPa)") == [[pytest.approx(-120.0, rel=1e-13)]]


def test_round_taper_under_end_load() -> None:
    """Elongation 4 P L / (pi E d1 d2) (Timoshenko, chapter I)."""
    segments = [["L (mm)", "d (mm)", "End diameter (mm)", "E (GPa)"], [1300, 44, 19, 71]]
    [[stretch, most]] = AX_SEGMENTS(
        segments, [["Node"], [0]], [["Node", "Force (kN)"], [1, 9]], [["Elongation (mm)", "Stress max (MPa)"]]
    )
    assert stretch == pytest.approx(4 * 9e3 * 1300 / (math.pi * 71e3 * 44 * 19), rel=1e-13)
    assert most == pytest.approx(9e3 / (math.pi / 4 * 19**2), rel=1e-13)


def test_area_that_varies_linearly_under_end_load() -> None:
    """Elongation P L ln(A2/A1) / (E (A2 - A1)) (by integration)."""
    segments = [["L (mm)", "A (mm2)", "End area (mm2)", "E (GPa)"], [2000, 300, 900, 205]]
    [[stretch]] = AX_SEGMENTS(segments, [["Node"], [0]], [["Node", "Force (kN)"], [1, 50]], "Elongation (mm)")
    assert stretch == pytest.approx(50e3 * 2000 * math.log(3) / (205e3 * 600), rel=1e-13)


def test_hanging_bar_under_its_own_weight() -> None:
    """Elongation w L^2 / (2 E A), largest force w L at the top (Timoshenko, chapter I)."""
    weight, length, area = 0.385, 40.0, 4900.0
    segments = [["L (m)", "A (mm2)", "E (GPa)", "q (kN/m)"], [length, area, 200, weight]]
    [[force, stretch]] = AX_SEGMENTS(segments, [["Node"], [0]], None, [["Force (kN)", "Elongation (mm)"]])
    assert force == pytest.approx(weight * length, rel=1e-13)
    assert stretch == pytest.approx(weight * length**2 / (2 * 200 * area) * 1e3, rel=1e-13)


def test_distributed_load_on_a_bar_held_at_both_ends_halves_only_where_it_is_uniform() -> None:
    """Uniform area: q L/2 at each end. Linear area: R_right = -q g/f with f, g the integrals of 1/EA and x/EA."""
    uniform = [["L (m)", "A (mm2)", "E (GPa)", "q (kN/m)"], [3, 500, 200, 12]]
    assert AX_REACTIONS(uniform, RIGID_ENDS, None, "kN") == [[pytest.approx(-18)], [pytest.approx(-18)]]
    tapered = [["L (m)", "A (mm2)", "End area (mm2)", "E (GPa)", "q (kN/m)"], [3, 500, 1500, 200, 12]]
    f = 3 * math.log(3) / 1000  # times 1/E, areas in mm2
    g = 3 / 1000 * (3 - 500 * 3 / 1000 * math.log(3))
    rows = AX_REACTIONS(tapered, RIGID_ENDS, None, "kN")
    assert rows == [[pytest.approx(-12 * g / f)], [pytest.approx(-12 * 3 + 12 * g / f)]]


def test_settlement_of_a_support_and_lack_of_fit() -> None:
    """N = E A (settlement - misfit) / L between rigid supports."""
    segments = [["L (mm)", "A (mm2)", "E (GPa)", "Misfit (mm)"], [2500, 640, 200, 0.6]]
    supports = [["Node", "Settlement (mm)"], [0, None], [1, 1.4]]
    assert AX_SEGMENTS(segments, supports, None, "kN") == [[pytest.approx(200 * 640 * (1.4 - 0.6) / 2500)]]


def test_assembly_that_holds_itself_has_no_reaction() -> None:
    """A tie through a sleeve: N = alpha dT (difference) / (sum of flexibilities), reaction zero."""
    segments = [
        ["From", "To", "L (mm)", "A (mm2)", "E (GPa)", "alpha (1e-6/K)", "dT (K)"],
        ["l", "r", 300, 314, 205, 12, 60],
        ["l", "r", 300, 500, 70, 23, 60],
    ]
    f = 300 / (205e3 * 314) + 300 / (70e3 * 500)
    expected = (23e-6 - 12e-6) * 60 * 300 / f / 1e3
    rows = AX_SEGMENTS(segments, [["Node"], ["l"]], None, "kN")
    assert rows == [[pytest.approx(expected, rel=1e-12)], [pytest.approx(-expected, rel=1e-12)]]
    assert AX_REACTIONS(segments, [["Node"], ["l"]], None, "kN") == [[pytest.approx(0.0, abs=1e-9)]]


def test_extremes_inside_a_segment_against_a_fine_profile() -> None:
    """The exact extremes bound 1,001 stations of the same member and are met by them to the stations' spacing."""
    segments = [
        ["L (mm)", "d (mm)", "End diameter (mm)", "E (GPa)", "q (kN/m)", "alpha (1e-6/K)", "dT (K)"],
        [1700, 58, 27, 105, 22, 17, -9],
        [900, 27, 41, 105, -14, 17, 11],
    ]
    tables = (segments, [["Node", "k (kN/mm)"], [0, None], [2, 60]], [["Node", "Force (kN)"], [1, -12]])
    words = [["Stress max (MPa)", "Stress min (MPa)", "Displacement max (mm)", "Displacement min (mm)"]]
    exact = AX_SEGMENTS(*tables, words)
    stations = AX_PROFILE(*tables, None, [["Segment", "Stress (MPa)", "Displacement (mm)"]], None, None, 1001)
    for number, row in enumerate(exact, 1):
        stresses = [s[1] for s in stations if s[0] == number]
        moved = [s[2] for s in stations if s[0] == number]
        found = [max(stresses), min(stresses), max(moved), min(moved)]
        assert row == [pytest.approx(value, rel=2e-5, abs=1e-9) for value in found]
        assert row[0] >= found[0] - 1e-12
        assert row[1] <= found[1] + 1e-12
        assert row[2] >= found[2] - 1e-12
        assert row[3] <= found[3] + 1e-12
