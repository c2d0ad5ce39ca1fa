"""The commands ``xlaxial calc install``, ``remove`` and ``check``."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path
from typing import Any

import openpyxl
from openpyxl.worksheet.formula import ArrayFormula

from xlaxial.functions.registry import load
from xlaxial.hosts.calc import probe
from xlaxial.hosts.calc.extension import (
    IDENTIFIER,
    OFFICE_LEAST,
    REQUIRES,
    Source,
    pack,
    package_folders,
    write_extension,
)
from xlaxial.hosts.calc.office import Office, OfficeError, convert, default_profile, environment, find_office

DONE, WRONG, NO_OFFICE = 0, 1, 2
"""Exit codes: done, something has to be mended, no LibreOffice that could be used."""

_FOLDER = "xlaxial"
_ABOUT = "AX_ABOUT"


def install(profile: Path | None = None) -> int:
    """Install the add-in and check it.

    Parameters
    ----------
    profile : pathlib.Path, optional
        Folder of the profile; the current user's own where left out. As root, for whom LibreOffice adds nothing to a
        profile, it must be left out: the add-in is then installed for every user of the machine.

    Returns
    -------
    int
        Exit code.
    """
    office = _usable_office()
    if office is None:
        return NO_OFFICE
    try:
        if _is_root():
            place = _refuse_profile(profile, office)
            _write(place)
        else:
            place = profile or default_profile()
            with tempfile.TemporaryDirectory() as folder:
                packed = pack(_write(Path(folder) / _FOLDER), Path(folder) / f"{_FOLDER}.oxt")
                Path(folder).chmod(0o755)
                if _own(place):  # overwritten alone, its functions stay unknown
                    _unopkg(office, place, "remove", IDENTIFIER)
                _unopkg(office, place, "add", "--force", "--suppress-license", str(packed))
    except (OfficeError, OSError) as wrong:
        print(f"not installed: {wrong}", file=sys.stderr)
        return WRONG
    print(f"installed in {place}; restart LibreOffice if it is open")
    return check(profile)


def remove(profile: Path | None = None) -> int:
    """Remove the add-in from where `install` puts it; return the exit code."""
    office = find_office()
    if office is None:
        print("LibreOffice is not found", file=sys.stderr)
        return NO_OFFICE
    installed = _installed(office, profile)
    if installed is None:
        print("the add-in is not installed")
        return DONE
    try:
        if _is_root():
            shutil.rmtree(_refuse_profile(profile, office))
        elif installed.parent == office.extensions:
            print(f"the add-in is installed for every user, in {installed}: remove it as root", file=sys.stderr)
            return WRONG
        else:
            _unopkg(office, profile or default_profile(), "remove", IDENTIFIER)
    except (OfficeError, OSError) as wrong:
        print(f"not removed: {wrong}", file=sys.stderr)
        return WRONG
    print(f"removed from {installed}; restart LibreOffice if it is open")
    return DONE


def check(profile: Path | None = None) -> int:
    """Check by behaviour whether the functions work in LibreOffice; return the exit code.

    Workbooks of a few cells are recalculated without a window, in a temporary profile to which the extensions of the
    given one are copied: an open LibreOffice is not disturbed, and nothing of the user's is changed.
    """
    office = _usable_office()
    if office is None:
        return NO_OFFICE
    print(f"LibreOffice {office.version_text()}: {office.soffice}")
    with tempfile.TemporaryDirectory() as folder:
        try:
            return max(_check_python(office, Path(folder)), _check_installed(office, profile, Path(folder)))
        except OfficeError as wrong:
            print(wrong, file=sys.stderr)
            return WRONG


def _usable_office() -> Office | None:
    office = find_office()
    least = ".".join(map(str, OFFICE_LEAST))
    if office is None:
        print(f"LibreOffice is not found; install version {least} or newer", file=sys.stderr)
    elif not office.at_least(OFFICE_LEAST):
        print(
            f"LibreOffice {office.version_text()} at {office.soffice} is too old; install {least} or newer",
            file=sys.stderr,
        )
        return None
    return office


def _is_root() -> bool:
    return hasattr(os, "geteuid") and os.geteuid() == 0


def _refuse_profile(profile: Path | None, office: Office) -> Path:
    if profile is not None:
        raise OfficeError("as root nothing can be added to a profile; leave the profile out, or run as its user")
    return office.extensions / _FOLDER


def _write(folder: Path) -> Path:
    return write_extension(folder, list(load().values()), Source(folders=package_folders()))


def _unopkg(office: Office, profile: Path, *arguments: str) -> None:
    run = [str(office.unopkg), *arguments, f"-env:UserInstallation={profile.resolve().as_uri()}"]
    try:
        done = subprocess.run(run, capture_output=True, text=True, timeout=300, check=False, env=environment())
    except subprocess.TimeoutExpired:
        raise OfficeError("LibreOffice's extension manager does not answer; close LibreOffice and try again") from None
    if done.returncode:
        raise OfficeError(" ".join((done.stderr or done.stdout).split())[-300:] or "unopkg gave no reason")


def _installed(office: Office, profile: Path | None) -> Path | None:
    """Return the folder of the installed extension: the user's own, else the machine's."""
    everyone = office.extensions / _FOLDER
    return _own(profile or default_profile()) or (everyone if (everyone / "config.json").exists() else None)


def _own(profile: Path) -> Path | None:
    """Return the folder of the extension in a profile."""
    packages = profile / "user" / "uno_packages" / "cache" / "uno_packages"
    for config in packages.glob("*/*/config.json"):
        if str(_config(config.parent).get("implementation", "")).startswith(IDENTIFIER):
            return config.parent
    return None


def _config(folder: Path) -> dict[str, Any]:
    found: dict[str, Any] = json.loads((folder / "config.json").read_text(encoding="utf-8"))
    return found


def _answer(office: Office, profile: Path, extensions: Path, formula: str) -> list[list[Any]]:
    """Return what an array formula gives in a new workbook, eight rows by three columns."""
    book = openpyxl.Workbook()
    sheet = book.create_sheet("Check", 0)
    sheet["A1"] = ArrayFormula("A1:C8", formula)
    path = profile.parent / f"{profile.name}.xlsx"
    book.save(path)
    saved = convert(path, profile, profile, extensions, office=office)
    return [[cell.value for cell in row] for row in openpyxl.load_workbook(saved, data_only=True)["Check"]["A1:C8"]]


def _check_python(office: Office, folder: Path) -> int:
    """Tell which Python the office runs, and which of the packages it can load."""
    source = Source("xlaxial.hosts.calc.probe:caller", package_folders(), ())
    write_extension(folder / "probe" / "probe", [probe.FUNCTION], source, "org.xlaxial.probe")
    rows = _answer(office, folder / "python", folder / "probe", probe.FUNCTION.example)
    first = rows[0][0]
    if first == "#NAME?":
        print(
            "LibreOffice loads no add-in in Python; install its Python support (in Debian: python3-uno)",
            file=sys.stderr,
        )
        return WRONG
    if first != "Python":
        print(first, file=sys.stderr)
        return WRONG
    code = DONE
    for name, version, fault in rows[: len(REQUIRES) + 1]:
        if fault:
            code = WRONG
            print(f"{name} does not load in LibreOffice: {fault}", file=sys.stderr)
        else:
            print(f"{name} {version} in LibreOffice")
    inside, here = str(rows[0][1]).split(".")[:2], [str(part) for part in sys.version_info[:2]]
    if code and inside != here:
        wanted = ".".join(inside)
        print(
            f"the packages here are for Python {'.'.join(here)}, LibreOffice runs {wanted}: "
            f"install xlaxial with Python {wanted} and run its 'xlaxial calc install'",
            file=sys.stderr,
        )
    return code


def _check_installed(office: Office, profile: Path | None, folder: Path) -> int:
    """Tell whether a workbook's formula reaches the installed add-in, and whether that one is up to date."""
    installed = _installed(office, profile)
    own = (profile or default_profile()) / "user" / "uno_packages"
    if own.is_dir():
        shutil.copytree(own, folder / "user" / "user" / "uno_packages")
    answer = _answer(office, folder / "user", office.extensions, f"={_ABOUT}()")[0][0]
    if answer == "#NAME?" or installed is None:
        print(f"{_ABOUT} gives {answer}: the add-in is not installed; run 'xlaxial calc install'", file=sys.stderr)
        return WRONG
    print(f"{_ABOUT} gives: {answer}")
    now = json.loads(json.dumps(_config(_write(folder / _FOLDER))))
    if _config(installed) != now:
        print(
            f"the add-in in {installed} was made by another version or from other folders; run 'xlaxial calc install'",
            file=sys.stderr,
        )
        return WRONG
    return WRONG if "xlaxial calc install" in str(answer) else DONE
