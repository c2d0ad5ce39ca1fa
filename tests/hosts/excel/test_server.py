from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).parents[3]


def run(code: str, folder: Path) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-c", code + "from xlaxial.hosts.excel.server import run; run('{1-2}')"],
        capture_output=True,
        text=True,
        check=False,
        env=os.environ | {"LOCALAPPDATA": str(folder), "PYTHONPATH": str(ROOT)},
    )


SERVE = "import xlwings; xlwings.serve = lambda clsid: "


def test_the_functions_are_loaded_before_the_server_answers(tmp_path):
    done = run(SERVE + "print(clsid, 'xlaxial.hosts.excel.udfs' in __import__('sys').modules); ", tmp_path)
    assert (done.returncode, done.stdout) == (0, "{1-2} True\n"), done.stderr


def test_a_failed_start_is_in_the_log(tmp_path):
    done = run(SERVE + "1 / 0; ", tmp_path)
    assert done.returncode == 1
    log = (tmp_path / "xlaxial" / "excel.log").read_text(encoding="utf-8")
    assert "could not start" in log
    assert "ZeroDivisionError" in log


def test_a_fault_of_a_function_is_in_the_log(tmp_path):
    call = (
        "__import__('sys').modules['xlaxial.hosts.excel.udfs'].registered(["
        "__import__('xlaxial.functions.registry').functions.registry.load()['AX_ABOUT']], "
        "lambda name: lambda: 1 / 0)['AX_ABOUT']('')"
    )
    done = run(SERVE + f"print({call}); ", tmp_path)
    assert done.stdout == "[[2015]]\n", done.stderr
    assert "ZeroDivisionError" in (tmp_path / "xlaxial" / "excel.log").read_text(encoding="utf-8")


def test_a_log_that_cannot_be_written_stops_nothing(tmp_path):
    (tmp_path / "xlaxial").write_text("a file in the folder's place")
    assert run(SERVE + "None; ", tmp_path).returncode == 0
