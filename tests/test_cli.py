"""The command line: exit codes, messages and reports."""

from __future__ import annotations

import dataclasses
import json
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from xml.etree import ElementTree

import pytest
from openpyxl import Workbook, load_workbook

from xlaxial import __version__
from xlaxial.caution import CAUTION
from xlaxial.cli import main

# two segments in a row between rigid ends; the closed form (from memory) of two bars in series, R0 = -P k1 / (k1 + k2), with the
# load at node 1, k = E A / L: k1 = 200 GPa * 500 mm2 / 1000 mm = 100 kN/mm, k2 = 200 * 400 / 800 = 100 kN/mm
ROWS = [["Length (mm)", "Area (mm2)", "E (GPa)"], [1000, 500, 200], [800, 400, 200]]


@pytest.fixture
def book(tmp_path: Path) -> Path:
    """A workbook of ours without stored values."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Ties"
    for row in ROWS:
        sheet.append(row)
    sheet["F1"], sheet["F2"], sheet["F3"] = "Node", 0, 2
    sheet["H1"], sheet["I1"], sheet["H2"], sheet["I2"] = "Node", "Force (kN)", 1, 30
    sheet["K2"] = '=INDEX(AX_REACTIONS(A1:C3,F1:F3,H1:I2,"kN"),1,1)'
    sheet["K3"] = "=K2*2"
    sheet["K4"] = '="x"&K3'
    path = tmp_path / "ties.xlsx"
    book.save(path)
    return path


@pytest.fixture
def filled(book: Path, capsys: pytest.CaptureFixture[str]) -> Path:
    """The same with its values."""
    assert main(["recalc", str(book), "--in-place", "--no-backup"]) == 0
    capsys.readouterr()
    return book


def change(path: Path, cell: str, value: object) -> None:
    """Change one value of a workbook and keep the stored results, as a slip of somebody's hand would."""
    from xlaxial.hosts.headless.patch import write_values

    sheet = load_workbook(path)["Ties"]
    write_values(path, {"xl/worksheets/sheet1.xml": {(sheet[cell].row, sheet[cell].column): value}}, path)


def test_recalc_fills_a_workbook(book: Path, capsys: pytest.CaptureFixture[str]) -> None:
    original = book.read_bytes()
    assert main(["recalc", str(book)]) == 0
    out = capsys.readouterr()
    assert out.out.splitlines() == [
        "ties.xlsx: 3 cells recalculated, 3 changed, written to ties.recalculated.xlsx",
        CAUTION,
    ]
    assert out.err == ""
    assert book.read_bytes() == original
    values = load_workbook(book.with_name("ties.recalculated.xlsx"), data_only=True)["Ties"]
    assert values["K2"].value == pytest.approx(-15.0, rel=1e-9)
    assert values["K3"].value == pytest.approx(-30.0, rel=1e-9)


def test_recalc_again_changes_nothing(filled: Path, capsys: pytest.CaptureFixture[str]) -> None:
    before = filled.read_bytes()
    assert main(["recalc", str(filled), "--in-place"]) == 0
    assert "3 cells recalculated, 0 changed, nothing to write" in capsys.readouterr().out
    assert filled.read_bytes() == before
    assert [path.name for path in filled.parent.iterdir()] == ["ties.xlsx"]


def test_in_place_never_overwrites_a_backup(filled: Path) -> None:
    first = filled.read_bytes()
    change(filled, "I2", 60.0)
    second = filled.read_bytes()
    assert main(["recalc", str(filled), "--in-place"]) == 0
    change(filled, "I2", 90.0)
    assert main(["recalc", str(filled), "--in-place"]) == 0
    assert filled.with_name("ties.backup.xlsx").read_bytes() == second != first
    assert filled.with_name("ties.backup-2.xlsx").exists()


def test_output_over_the_workbook_is_refused(filled: Path, capsys: pytest.CaptureFixture[str]) -> None:
    before = filled.read_bytes()
    assert main(["recalc", str(filled), "--output", str(filled)]) == 2
    assert capsys.readouterr().err == "ties.xlsx: is the workbook itself; use --in-place\n"
    assert filled.read_bytes() == before


def test_verify_holds(filled: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["verify", str(filled)]) == 0
    assert capsys.readouterr().out.splitlines() == ["ties.xlsx", "Ties: 3 same", "Every stored value holds.", CAUTION]


def test_verify_finds_a_changed_input(filled: Path, capsys: pytest.CaptureFixture[str]) -> None:
    change(filled, "I2", 33.0)
    assert main(["verify", str(filled)]) == 1
    out = capsys.readouterr().out
    assert "Ties: 3 different" in out
    assert "Ties!K3: stored -30, now -33 (-10.000000%): =K2*2" in out
    assert "3 stored values do not hold." in out


def test_verify_keeps_to_its_tolerance(filled: Path) -> None:
    change(filled, "K3", -30.0 * (1 + 1e-6))
    assert main(["verify", str(filled)]) == 1
    assert main(["verify", str(filled), "--rtol", "1e-5"]) == 0


def test_verify_names_what_has_no_stored_value(book: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["verify", str(book)]) == 1
    assert "Ties!K3: stored blank, now -30: =K2*2" in capsys.readouterr().out


def test_verify_is_unsure_of_what_it_cannot_evaluate(filled: Path, capsys: pytest.CaptureFixture[str]) -> None:
    sheet = (book := load_workbook(filled))["Ties"]
    sheet["K5"], sheet["K6"] = "=[1]Other!A1", "=K5+K2"
    book.save(filled)
    assert main(["recalc", str(filled), "--in-place", "--no-backup"]) == 3
    capsys.readouterr()
    assert main(["verify", str(filled)]) == 3
    out = capsys.readouterr().out
    assert "Ties: 3 same, 2 not recalculated" in out
    assert "Ties!K5: not recalculated, refers to another workbook: =[1]Other!A1" in out
    assert "Ties!K6: not recalculated, reads a cell that is not recalculated: =K5+K2" in out
    assert "What was recomputed holds; 2 cells could not be recomputed." in out


def test_verify_could_not_run(filled: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "bad.xlsx").write_bytes(b"no workbook")
    assert main(["verify", str(filled), str(tmp_path / "bad.xlsx"), str(tmp_path / "none.xlsx")]) == 2
    out = capsys.readouterr()
    assert out.err.splitlines() == [
        "bad.xlsx: is not a workbook, or is damaged",
        "none.xlsx: cannot be read (No such file or directory)",
    ]
    assert "ties.xlsx\nTies: 3 same\n2 of the workbooks could not be run." in out.out


def test_a_fault_of_the_program_is_never_written(
    filled: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    from xlaxial.functions import registry
    from xlaxial.functions.call import caller

    before = filled.read_bytes()
    broken = dataclasses.replace(registry.load()["AX_REACTIONS"], code="xlaxial.nowhere:none")
    monkeypatch.setitem(registry.load(), "AX_REACTIONS", broken)
    caller.cache_clear()
    try:
        assert main(["recalc", str(filled), "--in-place"]) == 2
        assert main(["verify", str(filled)]) == 2
    finally:
        caller.cache_clear()
    out = capsys.readouterr()
    fault = (
        "ties.xlsx: a fault of xlaxial, please report it: AX_REACTIONS failed on its arguments (ModuleNotFoundError: "
    )
    assert [line[: len(fault)] for line in out.err.splitlines()] == [fault, fault]
    assert filled.read_bytes() == before


def test_a_fault_of_the_host_is_no_difference(
    filled: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object) -> None:
        raise RuntimeError("broken")

    monkeypatch.setattr("xlaxial.hosts.headless.recalculate.read_book", broken)
    assert main(["verify", str(filled)]) == 2
    assert capsys.readouterr().err == "ties.xlsx: a fault of xlaxial, please report it: RuntimeError: broken\n"


@pytest.fixture
def report(filled: Path, tmp_path: Path) -> Callable[[str], str]:
    """Return a maker of reports on a workbook with one value that differs, one that does not, and a file that fails."""
    change(filled, "K3", 5.0)
    (tmp_path / "bad.xlsx").write_bytes(b"no workbook")

    def make(ending: str) -> str:
        path = tmp_path / f"report{ending}"
        assert main(["verify", str(filled), str(tmp_path / "bad.xlsx"), "--report", str(path)]) == 2
        return path.read_text(encoding="utf-8")

    return make


def test_json_report(report: Callable[[str], str]) -> None:
    read = json.loads(report(".json"))
    assert read["caution"] == CAUTION
    (workbook,) = read["workbooks"]
    assert workbook["workbook"] == "ties.xlsx"
    assert workbook["sheets"] == {"Ties": {"same": 2, "different": 1, "no stored value": 0, "not recalculated": 0}}
    (cell,) = workbook["cells"]
    assert cell["new"] == pytest.approx(-30.0, rel=1e-9)
    assert {k: cell[k] for k in ("sheet", "cell", "state", "stored", "change", "formula", "reason")} == {
        "sheet": "Ties", "cell": "K3", "state": "different", "stored": 5.0, "change": "-700.000000%",
        "formula": "=K2*2", "reason": None,
    }  # fmt: skip
    assert read["could not run"] == {"bad.xlsx": "bad.xlsx: is not a workbook, or is damaged"}


def test_junit_report(report: Callable[[str], str]) -> None:
    root = ElementTree.fromstring(report(".xml"))
    failure = root.find("./testsuite[@name='ties.xlsx']/testcase[@name='Ties']/failure")
    assert failure is not None
    assert failure.text is not None
    assert failure.text.startswith("K3: stored 5, now -30")
    assert root.find("./testsuite[@name='bad.xlsx']/testcase/error") is not None


def test_html_report_is_self_contained(report: Callable[[str], str]) -> None:
    text = report(".html")
    assert CAUTION in text
    assert "Ties!K3" in text
    assert "is not a workbook, or is damaged" in text
    assert not {"http:", "https:", "<script", "src=", "<link"} & {
        w for w in ("http:", "https:", "<script", "src=", "<link") if w in text
    }


def test_report_of_another_kind_is_refused(filled: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["verify", str(filled), "--report", str(filled.with_name("report.pdf"))]) == 2
    assert "report.pdf: a report ends in .json, .xml or .html" in capsys.readouterr().err


def test_functions_are_listed_and_shown(capsys: pytest.CaptureFixture[str]) -> None:
    from xlaxial.functions.registry import load

    assert main(["functions"]) == 0
    listed = capsys.readouterr().out.splitlines()
    assert [line.split()[0] for line in listed] == list(load())
    assert main(["functions", "ax_segments"]) == 0
    page = capsys.readouterr().out
    assert page.startswith("AX_SEGMENTS(segments, supports, [loads]")
    for argument in load()["AX_SEGMENTS"].arguments:
        assert f"{argument.name}: " in page
    assert main(["functions", "AX_NONE"]) == 2
    assert "no function AX_NONE" in capsys.readouterr().err


def test_as_a_program(filled: Path) -> None:
    def run(*arguments: str) -> subprocess.CompletedProcess[str]:
        return subprocess.run(
            [sys.executable, "-m", "xlaxial", *arguments], capture_output=True, text=True, check=False
        )

    version = run("--version")
    assert (version.returncode, version.stdout) == (0, f"xlaxial {__version__}\n")
    verified = run("verify", str(filled))
    assert (verified.returncode, verified.stderr) == (0, "")
    assert run().returncode == 2
