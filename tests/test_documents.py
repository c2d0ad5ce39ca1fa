"""The documents and help texts are current, and what they show is what comes out."""

from __future__ import annotations

import re
import subprocess
import sys
from pathlib import Path

import pytest

from xlaxial.caution import CAUTION
from xlaxial.functions import AX_ABOUT, AX_FORCES, AX_REACTIONS
from xlaxial.functions.call import caller
from xlaxial.functions.document import with_table
from xlaxial.functions.help import listing, page
from xlaxial.functions.registry import load
from xlaxial.tables.headings import TABLES
from xlaxial.units import DIMENSIONS, normal

ROOT = Path(__file__).parents[1]
README = ROOT / "README.md"


def test_the_readme_lists_every_function_from_the_registry() -> None:
    text = README.read_text(encoding="utf-8")
    assert with_table(text) == text, "run python -m xlaxial.functions.document README.md"


def test_the_readme_and_about_show_the_caution() -> None:
    plain = " ".join(README.read_text(encoding="utf-8").replace(">", " ").split())
    assert CAUTION in plain
    assert CAUTION in " ".join(row[0] for row in AX_ABOUT())


def test_the_readmes_first_formula_gives_the_numbers_that_it_says() -> None:
    text = README.read_text(encoding="utf-8")
    segments = [
        ["Length (mm)", "Area (mm2)", "E (GPa)", "Alpha (1e-6/K)", "dT (K)"],
        [1200, 600, 205, 12, 15],
        [800, 450, 205, 12, 15],
    ]
    supports = [["Node", "Stiffness (kN/mm)"], [0, None], [2, 40]]
    force = AX_FORCES(segments, supports, None, "kN")[0][0]
    reactions = AX_REACTIONS(segments, supports, None, "kN")
    assert f"−{-force:.3f} kN (compression)" in text
    assert f"{reactions[0][0]:.3f} and −{-reactions[1][0]:.3f} kN" in text


@pytest.mark.parametrize("name", list(load()))
def test_every_function_is_declared_for_every_host(name: str) -> None:
    function = load()[name]
    assert re.fullmatch(r"AX_[A-Z]+", name)
    assert function.summary.isascii()
    assert len(function.summary) <= 255
    assert len(function.arguments) <= 60
    for argument in function.arguments:
        assert argument.name.isidentifier()
        assert argument.name.lower() not in (
            "case",
            "loop",
            "next",
            "class",
            "property",
        )
        assert argument.help.isascii()
        assert len(argument.help) <= 255
    for word in function.words:
        assert word.dimension in DIMENSIONS or word.dimension in ("text", "count", "flag")
    assert callable(function.implementation())
    assert caller(name).__name__ == name
    assert function.example.startswith(f"={name}(")
    shown = page(name)
    assert function.summary.split(".")[0][:40] in shown.replace("\n", " ")
    assert all(word.name in shown for word in function.words)
    assert name in listing()


@pytest.mark.parametrize("kind", TABLES)
def test_no_spelling_of_a_heading_means_two_things(kind: str) -> None:
    seen: dict[str, str] = {}
    for term in TABLES[kind].terms:
        for spelling in (term.name, *term.aliases):
            assert seen.setdefault(normal(spelling), term.name) == term.name, spelling
        assert term.dimension in DIMENSIONS or term.dimension in ("text", "count")


def test_help_loads_nothing_heavy() -> None:
    code = "import sys, xlaxial.cli; xlaxial.cli.main(['functions']); print(sorted({'numpy','scipy','pint','openpyxl'} & set(sys.modules)))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.splitlines()[-1] == "[]"


def test_nothing_in_the_project_names_a_place_of_a_machine() -> None:
    for path in [README, ROOT / "DEVELOPERS.md", *(ROOT / "xlaxial").rglob("*.py")]:
        text = path.read_text(encoding="utf-8")
        assert "/work/" not in text and "/root/" not in text, path
