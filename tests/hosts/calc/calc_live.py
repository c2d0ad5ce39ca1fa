"""A running office without a window, driven over a pipe by a Python that knows UNO."""

from __future__ import annotations

import contextlib
import json
import subprocess
import sys
import uuid
from pathlib import Path
from typing import Any

from xlaxial.hosts.calc.office import Office, command, environment, write_settings


def office_python(office: Office) -> str | None:
    """A Python that can import UNO: this one, the system's, or the office's own."""
    own = [
        str(path) for path in sorted(office.program.glob("python*")) if path.is_file() and path.suffix in ("", ".exe")
    ]
    for candidate in (sys.executable, "/usr/bin/python3", *own):
        with contextlib.suppress(OSError):
            if (
                subprocess.run(
                    [candidate, "-c", "import uno"], capture_output=True, check=False, env=environment()
                ).returncode
                == 0
            ):
                return candidate
    return None


class LiveOffice:
    """An office that stays open until it is stopped.

    Parameters
    ----------
    office : Office
        The program.
    profile, extensions : pathlib.Path
        A private profile, and the folder that holds the extensions' folders.
    python : str
        A Python that can import UNO.
    """

    def __init__(self, office: Office, profile: Path, extensions: Path, python: str) -> None:
        write_settings(profile)
        self._pipe = f"xlaxial{uuid.uuid4().hex}"
        self._python = python
        run = command(office, profile, extensions, f"--accept=pipe,name={self._pipe};urp;")
        self._process = subprocess.Popen(run, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, env=environment())

    def _ask(self, **job: Any) -> Any:
        text = json.dumps({"pipe": self._pipe, **job})
        session = [self._python, str(Path(__file__).with_name("calc_session.py"))]
        done = subprocess.run(
            session, input=text, capture_output=True, text=True, timeout=300, check=False, env=environment()
        )
        if done.returncode:
            raise AssertionError(done.stderr)
        return json.loads(done.stdout) if done.stdout.strip() else None

    def steps(self, *steps: list[Any], book: Path | None = None) -> list[Any]:
        """Open a workbook (a new one where none is given), do the steps in it, and return what each gave."""
        found: list[Any] = self._ask(action="steps", book=book.resolve().as_uri() if book else "", steps=list(steps))
        return found

    def wizard(self, names: list[str]) -> dict[str, Any]:
        """Return what the function wizard says of the named functions."""
        found: dict[str, Any] = self._ask(action="wizard", names=names)
        return found

    def stop(self) -> None:
        """Close the office."""
        with contextlib.suppress(AssertionError, subprocess.TimeoutExpired):
            self._ask(action="stop")
        try:
            self._process.wait(60)
        except subprocess.TimeoutExpired:
            self._process.kill()
            self._process.wait()
