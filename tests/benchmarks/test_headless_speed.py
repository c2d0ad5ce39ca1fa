"""Ratios of the headless host, each within one run."""

from __future__ import annotations

import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from openpyxl import Workbook, load_workbook
from openpyxl.worksheet.formula import ArrayFormula

from xlaxial.hosts.headless.calls import engine_function
from xlaxial.hosts.headless.recalculate import SAME, recalculate

N_ROWS, N_CALLS = 5000, 1000


def best(run: Callable[[], Any], times: int = 3) -> float:
    took = []
    for _ in range(times):
        begun = time.perf_counter()
        run()
        took.append(time.perf_counter() - begun)
    return min(took)


@pytest.fixture(scope="module")
def schedule(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """5,000 rows x 12 columns, half of them formulas, one AX_ call over the table and 1,000 single-row calls."""
    book = Workbook()
    sheet = book.active
    sheet.title = "Ties"
    sheet.append(
        [
            "Mark",
            "Length (mm)",
            "Area (mm2)",
            "E (GPa)",
            "dT (K)",
            "Place",
            "L/A",
            "Sum",
            "Ratio",
            "Long",
            "Force (kN)",
            "Check",
        ]
    )
    for i in range(2, N_ROWS + 2):
        given = [f"M{i}", 1000 + i, 500.5 + i % 7, 205, i % 30, "north wall"]
        ordinary = [f"=B{i}/C{i}", f"=SUM(B{i}:E{i})", f"=ROUND(H{i}/$B$2,4)", f'=IF(I{i}>1,"long","short")']
        single = f"=AX_ROW($B{i}:$E{i},L$1,$B$1:$E$1)" if i < N_CALLS + 2 else f"=ABS(G{i}-I{i})"
        sheet.append([*given, *ordinary, None, single])
    sheet["K2"] = ArrayFormula(f"K2:K{N_ROWS + 1}", f"=AX_TABLE(A1:E{N_ROWS + 1},,,K1:K1)")
    path = tmp_path_factory.mktemp("speed") / "schedule.xlsx"
    book.save(path)
    return path


SLACK = 2.0  # over each target: a machine with other work must not fail the build; -s prints the ratios
FUNCTIONS: dict[str, Callable[..., Any]] = {
    "AX_ROW": lambda row, *_: [[row[0][0] * row[0][3]]],
    "AX_TABLE": lambda table, *_: [[row[1] * row[4]] for row in table[1:]],
}


@pytest.mark.benchmark
def test_verify_against_the_load_by_openpyxl(schedule: Path) -> None:
    def load() -> None:
        load_workbook(schedule)
        load_workbook(schedule, data_only=True)

    done = recalculate(schedule, FUNCTIONS)
    assert len(done.results) == N_ROWS * 6
    assert done.count(SAME) == 0
    floor, took = best(load), best(lambda: recalculate(schedule, FUNCTIONS))
    print(f"verify of {N_ROWS} rows: {took / floor:.2f} x openpyxl's load of formulas and values")
    assert took <= SLACK * 3.0 * floor


@pytest.mark.benchmark
def test_own_time_of_a_one_row_call(schedule: Path) -> None:
    """What the host adds to a call: the time in it less the time in the function, and less the engine's own."""
    took: list[float] = []
    inner: list[float] = []

    def function(row: Any, *_: Any) -> Any:
        begun = time.perf_counter()
        answer = [[row[0][0] * 2.0]]
        inner.append(time.perf_counter() - begun)
        return answer

    call = engine_function(function, {})
    for i in range(2000):
        begun = time.perf_counter()
        call(f"{i}:2:Ties", [[1000.0, 500.0, 205.0, 10.0]], "1:12:Ties", "Check", "1:2:Ties", [["a", "b", "c", "d"]])
        took.append(time.perf_counter() - begun)
    own = statistics.median(t - i for t, i in zip(took, inner, strict=True))
    loop = best(lambda: load_workbook(schedule), 1) / (N_ROWS * 12)
    print(f"own time of a one-row call: {own * 1e6:.1f} us, {own / loop:.2f} x openpyxl's load of one cell")
    assert own <= SLACK * 5.0 * loop


@pytest.mark.benchmark
def test_start_of_the_list_of_functions() -> None:
    def run(*arguments: str) -> Callable[[], Any]:
        return lambda: subprocess.run([sys.executable, *arguments], check=True, capture_output=True)

    floor, took = best(run("-c", "import numpy"), 7), best(run("-m", "xlaxial", "functions"), 7)
    print(f"xlaxial functions: {took / floor:.2f} x python -c 'import numpy'")
    assert took <= SLACK * 3.0 * floor
