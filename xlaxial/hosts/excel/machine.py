"""Where Excel and Python are on a Windows machine, and what there keeps an add-in from running."""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from importlib.metadata import PackageNotFoundError, files
from pathlib import Path, PureWindowsPath

Registry = Callable[[str, str, str], "str | int | None"]
"""Gives a value of the registry by root ("HKCU", "HKLM"), key and name; None where there is none."""

_OFFICE = r"Software\Microsoft\Office\16.0\Excel"  # 16.0: Excel 2016 and newer
_POLICIES = r"Software\Policies\Microsoft\Office\16.0\Excel"
_APP_PATH = r"SOFTWARE\Microsoft\Windows\CurrentVersion\App Paths\excel.exe"
_CLICK_TO_RUN = r"SOFTWARE\Microsoft\Office\ClickToRun\Configuration"
_BITS = {0x014C: 32, 0x8664: 64, 0xAA64: 64}  # machine field of a program file: x86, x64, ARM (which loads x64)
_MOST_OPENED = 50  # values OPEN, OPEN1 ... that are looked through
_TIMEOUT = 120  # seconds


@dataclass(frozen=True)
class Excel:
    """The installed Excel."""

    program: Path
    bits: int  # 32 or 64; 0 where the program file does not tell
    version: str  # as the installer reports it; empty where it does not
    from_store: bool  # installed from the Microsoft Store


@dataclass(frozen=True)
class Machine:
    """What is asked of the machine; tests put one of their own in its place."""

    windows: bool
    environment: Mapping[str, str]
    registry: Registry
    python: Path  # this interpreter
    libraries: tuple[Path, ...]  # xlwings' libraries (DLLs), as installed
    run: Callable[[Sequence[str]], tuple[int, str]]  # runs a command; its exit code and what it printed

    def startup_folder(self) -> Path | None:
        """Return the folder from which Excel opens every file at its start."""
        roaming = self.environment.get("APPDATA")
        return Path(roaming) / "Microsoft" / "Excel" / "XLSTART" if self.windows and roaming else None

    def interpreter(self) -> Path:
        """Return this Python in its form without a console window, where there is one."""
        silent = self.python.with_name("pythonw.exe")
        return silent if silent.exists() else self.python


def this_machine() -> Machine:
    """Return the machine on which this runs."""
    return Machine(sys.platform == "win32", os.environ, _registry_value, Path(sys.executable), _libraries(), _run_apart)


def _registry_value(root: str, key: str, name: str) -> str | int | None:
    if sys.platform != "win32":
        return None
    import winreg

    roots = {"HKCU": winreg.HKEY_CURRENT_USER, "HKLM": winreg.HKEY_LOCAL_MACHINE}
    for view in (winreg.KEY_WOW64_64KEY, winreg.KEY_WOW64_32KEY):
        try:
            with winreg.OpenKey(roots[root], key, 0, winreg.KEY_READ | view) as opened:
                value, _ = winreg.QueryValueEx(opened, name)
        except OSError:
            continue
        if isinstance(value, (str, int)):
            return value
    return None


def _libraries() -> tuple[Path, ...]:
    try:
        installed = files("xlwings") or []
    except PackageNotFoundError:
        return ()
    return tuple(Path(str(file.locate())).resolve() for file in installed if file.name.lower().endswith(".dll"))


def _run_apart(command: Sequence[str]) -> tuple[int, str]:
    """Run a command as Excel would: from a folder of no meaning, without the paths of this terminal."""
    environment = {name: value for name, value in os.environ.items() if name.upper() != "PYTHONPATH"}
    try:
        done = subprocess.run(
            list(command),
            capture_output=True,
            text=True,
            errors="replace",
            timeout=_TIMEOUT,
            check=False,
            env=environment,
            cwd=tempfile.gettempdir(),
        )
    except (OSError, subprocess.TimeoutExpired) as wrong:
        return -1, str(wrong)
    return done.returncode, done.stdout + done.stderr


def find_excel(machine: Machine) -> Excel | None:
    """Find Excel, or return None."""
    if not machine.windows:
        return None
    found = machine.registry("HKLM", _APP_PATH, "") or machine.registry("HKCU", _APP_PATH, "")
    if not isinstance(found, str) or not found:
        return None
    program = Path(found.strip('"'))
    version = machine.registry("HKLM", _CLICK_TO_RUN, "VersionToReport")
    return Excel(program, program_bits(program), str(version or ""), "windowsapps" in found.lower())


def program_bits(program: Path) -> int:
    """Return whether a program file is of 32 or 64 bits; 0 where it does not tell.

    Source: Microsoft PE Format, offsets 0x3C (where the header is) and header + 4 (the machine).
    """
    try:
        with program.open("rb") as file:
            head = file.read(0x40)
            file.seek(int.from_bytes(head[0x3C:0x40], "little"))
            header = file.read(6)
    except OSError:
        return 0
    if head[:2] != b"MZ" or header[:4] != b"PE\0\0":
        return 0
    return _BITS.get(int.from_bytes(header[4:6], "little"), 0)


def obstacles(machine: Machine, folder: str) -> list[str]:
    """Return what keeps an add-in in a folder from running, each in one line with its remedy.

    Parameters
    ----------
    machine : Machine
        The machine.
    folder : str
        The startup folder.
    """
    found = []
    if _security(machine, "AllLocationsDisabled", r"\Trusted Locations"):
        found.append(
            "trusted locations are switched off; switch them on in Excel's Trust Center, or ask your administrator"
        )
    elif folder.startswith("\\\\") and not _security(machine, "AllowNetworkLocations", r"\Trusted Locations"):
        found.append(
            f"{folder} is on a network, which Excel does not trust; allow it in the Trust Center, Trusted Locations"
        )
    if _security(machine, "DisableAllAddins"):
        found.append("all add-ins are switched off; switch them on in Excel's Trust Center, Add-ins")
    if _security(machine, "RequireAddinSig"):
        found.append("Excel wants add-ins to be signed, and this one is not; change it in the Trust Center, Add-ins")
    return found


def _security(machine: Machine, name: str, below: str = "") -> bool:
    """Tell whether a security setting is on; a policy wins over the user's own choice."""
    policy = machine.registry("HKCU", _POLICIES + r"\Security" + below, name)
    value = machine.registry("HKCU", _OFFICE + r"\Security" + below, name) if policy is None else policy
    return value not in (None, 0, "0")


def opened_elsewhere(machine: Machine, file_name: str) -> list[str]:
    """Return the entries by which Excel opens an add-in of a file name from another folder at its start."""
    values = (machine.registry("HKCU", _OFFICE + r"\Options", f"OPEN{n or ''}") for n in range(_MOST_OPENED))
    return [str(value) for value in values if value is not None and file_name.lower() in str(value).lower()]


def library_folder_of(python: str) -> str:
    """Return the folder where xlwings' libraries stand by default beside an interpreter of another machine."""
    folder = PureWindowsPath(python).parent
    return str(folder.parent if folder.name.lower() == "scripts" else folder)


def narrow_path(path: Path) -> str:
    r"""Return a path that the machine's 8-bit code page can write, if need be its short form (``PROGRA~1``).

    Raises
    ------
    ValueError
        There is no such path.
    """
    text = str(path)
    if sys.platform != "win32":
        return text
    import ctypes

    short = ctypes.create_unicode_buffer(1024)
    for candidate in (text, short.value if ctypes.windll.kernel32.GetShortPathNameW(text, short, 1024) else ""):
        if candidate and candidate.encode("mbcs", "replace").decode("mbcs") == candidate:
            return candidate
    raise ValueError(f"{text} has letters that Windows' code page lacks; install Python in a folder with plain letters")
