"""Workbooks of other libraries' tests, many malformed on purpose; skipped where they are absent.

The folder is named by XLAXIAL_CORPUS, or stands beside the project.
"""

from __future__ import annotations

import collections
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

FOLDER = Path(os.environ.get("XLAXIAL_CORPUS", Path(__file__).parents[4] / "shared" / "corpus"))
PROGRAM = """
import json, sys, time
from pathlib import Path
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.recalculate import recalculate
for name in sys.stdin.read().splitlines():
    begun, states, said = time.monotonic(), {}, ""
    try:
        for result in recalculate(Path(name), {}, seconds=10.0).results:
            states[result.state] = states.get(result.state, 0) + 1
    except WorkbookError as wrong:
        said = str(wrong)
    print(json.dumps([Path(name).name, states, said, time.monotonic() - begun]), flush=True)
"""


@pytest.mark.skipif(not FOLDER.is_dir(), reason="the corpus is not here")
def test_every_workbook_is_verified_or_refused_in_one_line() -> None:
    paths = sorted(p for p in FOLDER.rglob("*") if p.suffix in (".xlsx", ".xlsm", ".xltx"))
    ran = subprocess.run(
        [sys.executable, "-c", PROGRAM],
        input="\n".join(map(str, paths)),
        capture_output=True,
        text=True,
        check=False,
        timeout=900,
    )
    assert ran.stderr == ""
    answers = [json.loads(line) for line in ran.stdout.splitlines()]
    assert [answer[0] for answer in answers] == [path.name for path in paths]
    totals: collections.Counter[str] = collections.Counter()
    for name, states, said, seconds in answers:
        totals.update(states)
        totals["workbooks refused"] += bool(said)
        assert "\n" not in said
        assert said == "" or said.startswith(name)
        assert seconds < 60, name
    print(len(paths), dict(totals))
    agreed = totals["same"] / (totals["same"] + totals["different"])
    assert agreed >= 0.995, totals
    assert totals["same"] > 25_000
