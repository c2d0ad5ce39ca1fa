from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

HERE = Path(__file__).parent
OLDEST = "0.33.0"


def _run(xlwings_folder: str | None) -> str:
    paths = [xlwings_folder] if xlwings_folder else []
    paths += [str(HERE.parents[2]), *filter(None, [os.environ.get("PYTHONPATH")])]
    done = subprocess.run(
        [
            sys.executable,
            "-m",
            "pytest",
            "-p",
            "no:cacheprovider",
            "-p",
            "no:xdist",
            str(HERE / "stubbed_call_path.py"),
        ],
        capture_output=True,
        text=True,
        timeout=300,
        check=False,
        cwd=HERE,
        env=os.environ | {"PYTHONPATH": os.pathsep.join(paths)},
    )
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


def test_call_path_of_the_installed_xlwings():
    assert " passed" in _run(None)


def test_call_path_of_the_oldest_supported_xlwings():
    # pip install --no-deps --target FOLDER xlwings==0.33.0
    folder = os.environ.get("XLAXIAL_OLDEST_XLWINGS")
    if not folder:
        pytest.skip(f"XLAXIAL_OLDEST_XLWINGS names no folder with xlwings {OLDEST}")
    assert (Path(folder) / f"xlwings-{OLDEST}.dist-info").is_dir()
    assert " passed" in _run(folder)
