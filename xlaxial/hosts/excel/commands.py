"""The commands ``xlaxial excel install``, ``remove`` and ``check``, and ``xlaxial links``."""

from __future__ import annotations

import os
import sys
import tempfile
from collections import Counter
from collections.abc import Callable, Collection
from functools import wraps
from pathlib import Path
from typing import ParamSpec

from xlaxial import __version__
from xlaxial.functions.registry import load
from xlaxial.hosts.excel.addin import (
    FILE_NAME,
    AddinError,
    Settings,
    Template,
    build,
    read_addin,
    read_template,
)
from xlaxial.hosts.excel.links import TYPES, Workbook, moved, plain, read_links, rewrite
from xlaxial.hosts.excel.machine import (
    Excel,
    Machine,
    find_excel,
    library_folder_of,
    narrow_path,
    obstacles,
    opened_elsewhere,
    this_machine,
)
from xlaxial.hosts.excel.server import log_file
from xlaxial.hosts.excel.vba import module_text
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.package import open_package

DONE, WRONG, FAILED = 0, 1, 2
"""Exit codes: done, something has to be mended, could not be done (no Excel, no workbook)."""

_PROBE = (
    "import sys; sys.path = [p for p in sys.path if p]; import win32com.client, xlaxial, xlwings; "
    "import xlaxial.hosts.excel.udfs; print('versions', xlaxial.__version__, xlwings.__version__)"
)
_ELSEWHERE = (
    "Excel for Windows is not on this machine. "
    r"'xlaxial excel install --to FILE.xlam --python C:\...\pythonw.exe' writes the add-in for a machine that has it: "
    "xlaxial and the same version of xlwings must be installed there in that Python, and the file goes to its folder "
    r"%APPDATA%\Microsoft\Excel\XLSTART"
)

_Given = ParamSpec("_Given")


def _tells_what_is_missing(command: Callable[_Given, int]) -> Callable[_Given, int]:
    @wraps(command)
    def run(*arguments: _Given.args, **named: _Given.kwargs) -> int:
        try:
            return command(*arguments, **named)
        except ModuleNotFoundError as missing:
            if missing.name != "olefile":
                raise
            return _wrong("olefile is not installed, which reads VBA projects; run 'pip install olefile'")
        except AddinError as wrong:
            return _wrong(str(wrong))

    return run


def _wrong(text: str) -> int:
    print(text, file=sys.stderr)
    return WRONG


@_tells_what_is_missing
def install(to: Path | None = None, python: str | None = None, machine: Machine | None = None) -> int:
    """Make the add-in and put it where Excel opens it for every workbook.

    Parameters
    ----------
    to : pathlib.Path, optional
        Where to write it instead; that works without Excel too.
    python : str, optional
        Path of the interpreter that is to run the functions; this one where left out.
    machine : Machine, optional
        The machine; this one where left out.

    Returns
    -------
    int
        Exit code.
    """
    machine = machine or this_machine()
    folder = machine.startup_folder()
    if to is None and folder is None:
        print(_ELSEWHERE)
        return FAILED
    template = read_template()
    try:
        settings = _settings(machine, template, python)
    except ValueError as wrong:
        return _wrong(str(wrong))
    target = to or (folder or Path()) / FILE_NAME
    try:
        if to is None:
            target.parent.mkdir(parents=True, exist_ok=True)
        _write(target, build(template, _module(template), settings))
    except PermissionError:
        return _wrong(f"{target} cannot be written: close Excel and try again")
    except OSError as wrong:
        return _wrong(f"{target} cannot be written ({wrong.strerror})")
    print(f"written: {target}")
    if to is None:
        print(
            "Excel opens it at its next start; it then works in every workbook, and no setting of Excel has to be changed"
        )
        return check(machine)
    print(f"for xlwings {template.xlwings} in {settings.python or 'a Python that is not named: give it with --python'}")
    return DONE


def _settings(machine: Machine, template: Template, python: str | None) -> Settings:
    if python is not None:
        return Settings(python, library_folder_of(python), __version__, template.xlwings)
    if not machine.windows:
        return Settings("", "", __version__, template.xlwings)
    wanted = {template.library64, template.library32}
    folders = {path.parent for path in machine.libraries if path.name in wanted}
    if not folders:
        raise ValueError(f"{template.library64} is not installed: run 'pip install --force-reinstall xlwings'")
    return Settings(narrow_path(machine.interpreter()), str(sorted(folders)[0]), __version__, template.xlwings)


def _module(template: Template) -> str:
    return module_text(load().values(), template.names(__version__))


def _write(path: Path, data: bytes) -> None:
    """Write a file so that the old or the new one stands there whole at any time."""
    handle, name = tempfile.mkstemp(prefix=".xlaxial-", suffix=".tmp", dir=path.parent)
    temporary = Path(name)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        temporary.replace(path)
    finally:
        temporary.unlink(missing_ok=True)


def remove(machine: Machine | None = None) -> int:
    """Remove the add-in from where `install` puts it; return the exit code."""
    machine = machine or this_machine()
    folder = machine.startup_folder()
    if folder is None:
        print("Excel for Windows is not on this machine: nothing to remove")
        return FAILED
    target = folder / FILE_NAME
    if not target.exists():
        print("the add-in is not installed")
        return DONE
    try:
        target.unlink()
    except OSError:
        return _wrong(f"{target} cannot be removed: close Excel and try again")
    print(f"removed: {target}")
    print("'xlaxial links BOOK --plain' takes its path out of a workbook's formulas")
    return DONE


@_tells_what_is_missing
def check(machine: Machine | None = None) -> int:
    """Check everything that the functions need in Excel; return the exit code."""
    machine = machine or this_machine()
    folder = machine.startup_folder()
    if folder is None:
        print(_ELSEWHERE)
        return FAILED
    excel = find_excel(machine)
    if excel is None:
        print("Excel is not found", file=sys.stderr)
        return FAILED
    bits = f", {excel.bits} bit" if excel.bits else ""
    print(f"Excel {excel.version or '(version not told)'}{bits}: {excel.program}")
    print(f"faults of the functions are written to {log_file()}")
    template = read_template()
    wrong = [*_of_excel(machine, excel, folder), *_of_addin(machine, excel, template, folder / FILE_NAME)]
    for line in wrong:
        print(f"wrong: {line}", file=sys.stderr)
    if not wrong:
        print("all is in place; type =AX_ABOUT() into a cell to see it run")
    return WRONG if wrong else DONE


def _of_excel(machine: Machine, excel: Excel, folder: Path) -> list[str]:
    found = []
    if excel.from_store:
        found.append(
            "this Office is the one of the Microsoft Store, in which add-ins cannot start Python; "
            "install Office from office.com instead"
        )
    found += obstacles(machine, str(folder))
    found += [
        f"Excel also opens the add-in from elsewhere ({entry}); untick it in Excel's list of add-ins"
        for entry in opened_elsewhere(machine, FILE_NAME)
    ]
    return found


def _of_addin(machine: Machine, excel: Excel, template: Template, addin: Path) -> list[str]:
    if not addin.exists():
        return [f"{addin} is not there; run 'xlaxial excel install'"]
    module, settings = read_addin(addin)
    print(f"add-in of xlaxial {settings.version} for xlwings {settings.xlwings}: {addin}")
    found = []
    if module != _module(template) or settings.version != __version__:
        found.append(
            f"the add-in was made by another version or for another xlwings than this one ({__version__}, "
            f"{template.xlwings}); run 'xlaxial excel install'"
        )
    if Path(f"{addin}:Zone.Identifier").exists():
        found.append("the add-in is marked as coming from the Internet; run 'xlaxial excel install' to make it here")
    names = {32: f"xlwings32-{settings.xlwings}.dll", 64: f"xlwings64-{settings.xlwings}.dll"}
    for bits, name in names.items():
        library = Path(settings.library_folder) / name
        if excel.bits in (0, bits) and not library.exists():
            found.append(
                f"{library} is not there; run 'pip install --force-reinstall xlwings', then 'xlaxial excel install'"
            )
    return found + _of_python(machine, settings)


def _of_python(machine: Machine, settings: Settings) -> list[str]:
    """Run the add-in's interpreter as Excel would."""
    python = Path(settings.python)
    if not settings.python or not python.exists():
        return [f"the add-in's Python ({settings.python or 'none'}) is not there; run 'xlaxial excel install' again"]
    spoken = python.with_name("python.exe")
    code, said = machine.run([str(spoken if spoken.exists() else python), "-B", "-c", _PROBE])
    versions = next((line.split()[1:] for line in said.splitlines() if line.startswith("versions ")), [])
    if code or len(versions) != 2:
        last = (said.strip().splitlines() or ["no reason given"])[-1]
        return [f"{python} cannot run the functions ({last}); run 'pip install xlaxial' with it"]
    print(f"Python {python} runs xlaxial {versions[0]} with xlwings {versions[1]}")
    if versions != [settings.version, settings.xlwings]:
        return ["the add-in was made for other versions than those in its Python; run 'xlaxial excel install'"]
    return []


def links(book: Path, to_plain: bool = False, to: str | None = None, functions: Collection[str] | None = None) -> int:
    """Tell, remove or mend the add-in's path in a workbook's formulas.

    Parameters
    ----------
    book : pathlib.Path
        The workbook; changed in its place, with a backup beside it.
    to_plain : bool, optional
        Make the calls plain.
    to : str, optional
        Path of the add-in to which the links are to lead.
    functions : collection of str, optional
        Names of our functions; those of the registry where left out.

    Returns
    -------
    int
        Exit code: 0 nothing to mend (any more), 1 something to mend (only looked at), 2 could not.
    """
    names = {name.upper() for name in (load() if functions is None else functions)}
    try:
        with open_package(book) as package:
            found = read_links(package, names)
            _tell(found)
            if not to_plain and to is None:
                return WRONG if found.calls or found.ours() else DONE
            dropped: set[str] = set()
            if to is None:
                changed, dropped = plain(package, found)
            else:
                changed = moved(package, found, to)
            if not changed:
                print(f"{book.name}: nothing to change")
                return DONE
            rewrite(book, package, changed, dropped)
            print(
                f"{book.name}: {_count(len(changed) - (TYPES in changed), 'part')} changed; a backup stands beside it"
            )
            kept = found.ours() - {n for n in found.ours() if found.links[n - 1].part in dropped}
            if to is None and kept:
                print(
                    "a link to the add-in is kept, since something else needs it or what follows it: "
                    + ", ".join(found.links[n - 1].target for n in sorted(kept))
                )
    except WorkbookError as wrong:
        text = str(wrong)
        print(text if text.startswith(book.name) else f"{book.name}: {text}", file=sys.stderr)
        return FAILED
    return DONE


def _count(number: int, what: str) -> str:
    return f"{number} {what}" + ("" if number == 1 else "s")


def _tell(found: Workbook) -> None:
    forms = Counter(call.prefix for calls in found.calls.values() for call in calls)
    for prefix, number in sorted(forms.items()):
        print(f"{_count(number, 'call')} written {prefix}AX_...")
    for number in sorted(found.ours()):
        print(f"link {number} leads to {found.links[number - 1].target or 'nowhere'}")
    if not forms and not found.ours():
        print("all calls are plain")
