"""The office program: where it is, which version, and one workbook converted by it without a window."""

from __future__ import annotations

import os
import re
import shutil
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path
from xml.etree import ElementTree as ET

_SETTINGS = "http://openoffice.org/2001/registry"
_PLACES = (
    "/usr/lib/libreoffice/program",
    "/usr/lib64/libreoffice/program",
    "/opt/libreoffice25.2/program",
    "/Applications/LibreOffice.app/Contents/MacOS",
    "C:/Program Files/LibreOffice/program",
)
_RECALCULATE_ALWAYS = "0"
_PYTHON = ("PYTHONHOME", "PYTHONPATH", "PYTHONSTARTUP", "VIRTUAL_ENV")


class OfficeError(Exception):
    """The office program is absent, too old, or did not do what was asked; its text is one line for a person."""


@dataclass(frozen=True)
class Office:
    """An installed LibreOffice."""

    soffice: Path  # the program
    version: tuple[int, ...]  # such as (25, 2, 3, 2); empty where it does not say
    extensions: Path  # folder whose extensions every user of the machine has

    @property
    def program(self) -> Path:
        """Folder of the program's files."""
        return _program(self.soffice)

    @property
    def unopkg(self) -> Path:
        """The program that adds extensions to a user's profile."""
        return self.program / ("unopkg.com" if sys.platform == "win32" else "unopkg")

    def at_least(self, least: tuple[int, ...]) -> bool:
        """Tell whether the version is the given one or newer."""
        return self.version >= least

    def version_text(self) -> str:
        """Return the version as it is written."""
        return ".".join(map(str, self.version)) or "unknown"


def find_office() -> Office | None:
    """Return the installed office: the one that SOFFICE names, the one on the path, or one in a usual place."""
    named = os.environ.get("SOFFICE")
    on_path = shutil.which("soffice") or shutil.which("libreoffice")
    candidates = [named] if named else [on_path, *(str(Path(place) / "soffice") for place in _PLACES)]
    for candidate in candidates:
        if candidate is not None and (found := shutil.which(candidate)):
            soffice = Path(found)
            if sys.platform == "win32" and soffice.with_suffix(".com").exists():
                soffice = soffice.with_suffix(".com")  # the one that writes to the console and waits
            share = _program(soffice).parent / ("Resources" if sys.platform == "darwin" else "share")
            return Office(soffice, _version(soffice), share / "extensions")
    return None


def _program(soffice: Path) -> Path:
    """Return the folder of the program's files; what stands on the path may be a script in another folder."""
    folders = [soffice.resolve().parent, *map(Path, _PLACES)]
    known = (folder for folder in folders if any((folder / name).exists() for name in ("bootstraprc", "bootstrap.ini")))
    return next(known, folders[0])


def _version(soffice: Path) -> tuple[int, ...]:
    try:
        said = subprocess.run([soffice, "--version"], capture_output=True, text=True, timeout=60, check=False).stdout
    except (OSError, subprocess.TimeoutExpired):
        return ()
    found = re.search(r"\b(\d+(?:\.\d+)+)", said)
    return tuple(int(part) for part in found[1].split(".")) if found else ()


def default_profile() -> Path:
    """Return the folder of the current user's profile."""
    if sys.platform == "win32":
        return Path(os.environ["APPDATA"]) / "LibreOffice" / "4"
    if sys.platform == "darwin":
        return Path.home() / "Library" / "Application Support" / "LibreOffice" / "4"
    return Path(os.environ.get("XDG_CONFIG_HOME") or Path.home() / ".config") / "libreoffice" / "4"


def write_settings(profile: Path) -> None:
    """Write the settings of a private profile: recalculate every workbook when it is opened, ask nothing."""
    name = f"{{{_SETTINGS}}}name"
    root = ET.Element(f"{{{_SETTINGS}}}items")
    for path, prop, value in (
        ("/org.openoffice.Office.Calc/Formula/Load", "OOXMLRecalcMode", _RECALCULATE_ALWAYS),
        ("/org.openoffice.Office.Calc/Formula/Load", "ODFRecalcMode", _RECALCULATE_ALWAYS),
        ("/org.openoffice.Office.Common/Misc", "FirstRun", "false"),
        ("/org.openoffice.Setup/Office", "ooSetupInstCompleted", "true"),
    ):
        item = ET.SubElement(root, "item", {f"{{{_SETTINGS}}}path": path})
        entry = ET.SubElement(item, "prop", {name: prop, f"{{{_SETTINGS}}}op": "fuse"})
        ET.SubElement(entry, "value").text = value
    ET.register_namespace("oor", _SETTINGS)
    (profile / "user").mkdir(parents=True, exist_ok=True)
    ET.ElementTree(root).write(profile / "user" / "registrymodifications.xcu", encoding="UTF-8", xml_declaration=True)


def command(office: Office, profile: Path, extensions: Path | None, *arguments: str) -> list[str]:
    """Return the command that runs the office without a window.

    Parameters
    ----------
    office : Office
        The program.
    profile : pathlib.Path
        Folder of the profile; made where it is absent.
    extensions : pathlib.Path or None
        Folder that holds extensions' folders, taken in place of the machine's own; None takes the machine's own.
    *arguments : str
        What follows.
    """
    run = [str(office.soffice), "--headless", "--norestore", "--nologo", "--nodefault"]
    run.append(f"-env:UserInstallation={profile.resolve().as_uri()}")
    if extensions is not None:
        run.append(f"-env:BUNDLED_EXTENSIONS={extensions.resolve().as_uri()}")
    return [*run, *arguments]


def environment() -> dict[str, str]:
    """Return the environment for the office: without a virtual environment of Python, which its own would take up.

    An embedded Python looks for its libraries beside the first ``python3`` of the path; in an activated virtual
    environment it finds none of the office's own modules there, and no component in Python loads.
    """
    kept = {name: value for name, value in os.environ.items() if name not in _PYTHON}
    own = [Path(folder).resolve() for folder in (sys.prefix, os.environ.get("VIRTUAL_ENV")) if folder]
    virtual = [folder for folder in own if (folder / "pyvenv.cfg").exists()]
    places = kept.get("PATH", "").split(os.pathsep)
    kept["PATH"] = os.pathsep.join(p for p in places if not any(Path(p).resolve().is_relative_to(v) for v in virtual))
    return kept


def convert(
    book: Path,
    outdir: Path,
    profile: Path,
    extensions: Path | None = None,
    *,
    office: Office | None = None,
    to: str = "xlsx",
    timeout: float = 180.0,
) -> Path:
    """Open a workbook in the office, recalculate it wholly and save it.

    Parameters
    ----------
    book : pathlib.Path
        The workbook; not changed.
    outdir : pathlib.Path
        Folder for the result; must not be the workbook's own folder where the type stays the same.
    profile : pathlib.Path
        Folder of a private profile; its settings are written where it is new.
    extensions : pathlib.Path, optional
        Folder that holds extensions' folders, taken in place of the machine's own.
    office : Office, optional
        The program; found where it is not given.
    to : str
        Type of the result.
    timeout : float
        Seconds that the program may take.

    Returns
    -------
    pathlib.Path
        The saved workbook.

    Raises
    ------
    OfficeError
        There is no office, or no result came.
    """
    office = office or find_office()
    if office is None:
        raise OfficeError("LibreOffice is not found; install it, or name its program in the environment as SOFFICE")
    result = outdir / f"{book.stem}.{to}"
    if result.resolve() == book.resolve():
        raise OfficeError(f"{book} would be overwritten; give another folder for the result")
    if not (profile / "user" / "registrymodifications.xcu").exists():
        write_settings(profile)
    result.unlink(missing_ok=True)
    run = command(office, profile, extensions, "--convert-to", to, "--outdir", str(outdir), str(book))
    try:
        done = subprocess.run(run, capture_output=True, text=True, timeout=timeout, check=False, env=environment())
    except subprocess.TimeoutExpired:
        raise OfficeError(f"LibreOffice took more than {timeout:g} s over {book}") from None
    if not result.exists():
        said = " ".join((done.stderr or done.stdout).split())[-300:]
        raise OfficeError(f"LibreOffice did not convert {book}: {said or 'it gave no reason'}")
    return result
