from __future__ import annotations

import struct
from dataclasses import replace
from pathlib import Path

import pytest

from xlaxial import __version__
from xlaxial.functions.registry import load
from xlaxial.hosts.excel import commands
from xlaxial.hosts.excel.addin import read_addin, read_template
from xlaxial.hosts.excel.machine import Machine, library_folder_of, program_bits, this_machine

XLWINGS = read_template().xlwings
SECURITY = r"Software\Microsoft\Office\16.0\Excel\Security"
POLICY = r"Software\Policies\Microsoft\Office\16.0\Excel\Security"
OPTIONS = r"Software\Microsoft\Office\16.0\Excel\Options"


def program(path: Path, machine: int) -> Path:
    """Write the head of a program file for a kind of machine."""
    path.write_bytes(b"MZ" + bytes(58) + struct.pack("<I", 0x80) + bytes(64) + b"PE\0\0" + struct.pack("<H", machine))
    return path


@pytest.fixture
def registry(tmp_path):
    excel = program(tmp_path / "EXCEL.EXE", 0x8664)
    return {
        ("HKLM", r"SOFTWARE\Microsoft\Windows\CurrentVersion\App Paths\excel.exe", ""): str(excel),
        ("HKLM", r"SOFTWARE\Microsoft\Office\ClickToRun\Configuration", "VersionToReport"): "16.0.17029.20028",
    }


@pytest.fixture
def machine(tmp_path, registry):
    """A Windows machine with Excel and a virtual environment, as far as the commands look."""
    scripts = tmp_path / "venv" / "Scripts"
    scripts.mkdir(parents=True)
    for name in ("python.exe", "pythonw.exe"):
        (scripts / name).touch()
    libraries = tuple(tmp_path / "venv" / f"xlwings{bits}-{XLWINGS}.dll" for bits in (32, 64))
    for library in libraries:
        library.touch()
    return Machine(
        True,
        {"APPDATA": str(tmp_path / "Roaming")},
        lambda *key: registry.get(key),
        scripts / "python.exe",
        libraries,
        lambda command: (0, f"versions {__version__} {XLWINGS}\n"),
    )


def addin(machine):
    return machine.startup_folder() / "xlaxial.xlam"


def test_install_puts_the_add_in_where_excel_opens_it(machine, tmp_path, capsys):
    assert commands.install(machine=machine) == commands.DONE
    assert tmp_path / "Roaming" / "Microsoft" / "Excel" / "XLSTART" / "xlaxial.xlam" == addin(machine)
    module, settings = read_addin(addin(machine))
    assert str(tmp_path / "venv" / "Scripts" / "pythonw.exe") == settings.python
    assert str(tmp_path / "venv") == settings.library_folder
    assert (__version__, XLWINGS) == (settings.version, settings.xlwings)
    assert all(f"Public Function {name}(" in module for name in load())
    out = capsys.readouterr().out
    assert "Excel 16.0.17029.20028, 64 bit" in out
    assert "all is in place" in out
    assert [addin(machine)] == list(machine.startup_folder().iterdir())  # no temporary file is left


def test_install_again_over_an_older_one(machine):
    assert commands.install(machine=machine) == commands.DONE
    first = addin(machine).read_bytes()
    assert commands.install(machine=machine) == commands.DONE
    assert first == addin(machine).read_bytes()


def test_a_locked_add_in_is_told(machine, monkeypatch, capsys):
    def locked(*_):
        raise PermissionError(13, "in use")

    monkeypatch.setattr(Path, "replace", locked)
    assert commands.install(machine=machine) == commands.WRONG
    assert "close Excel" in capsys.readouterr().err
    assert list(machine.startup_folder().iterdir()) == []


def test_install_without_the_library(machine, capsys):
    assert commands.install(machine=replace(machine, libraries=())) == commands.WRONG
    assert f"xlwings64-{XLWINGS}.dll is not installed" in capsys.readouterr().err


def test_remove(machine, capsys):
    assert commands.remove(machine) == commands.DONE
    assert "not installed" in capsys.readouterr().out
    commands.install(machine=machine)
    assert commands.remove(machine) == commands.DONE
    assert not addin(machine).exists()


def test_check_before_install(machine, capsys):
    assert commands.check(machine) == commands.WRONG
    assert "run 'xlaxial excel install'" in capsys.readouterr().err


def installed_then(machine, capsys, change):
    """Install, change the machine, check; return what is wrong."""
    commands.install(machine=machine)
    capsys.readouterr()
    code = commands.check(change(machine) or machine)
    wrong = capsys.readouterr().err
    assert code == commands.WRONG, wrong
    return wrong


@pytest.mark.parametrize(
    ("key", "value", "told"),
    [
        ((SECURITY + r"\Trusted Locations", "AllLocationsDisabled"), 1, "trusted locations are switched off"),
        ((POLICY + r"\Trusted Locations", "AllLocationsDisabled"), 1, "trusted locations are switched off"),
        ((SECURITY, "DisableAllAddins"), 1, "all add-ins are switched off"),
        ((SECURITY, "RequireAddinSig"), 1, "signed"),
        ((OPTIONS, "OPEN2"), '/R "C:\\Old\\xlaxial.xlam"', "from elsewhere"),
    ],
)
def test_settings_that_are_in_the_way(machine, registry, capsys, key, value, told):
    assert told in installed_then(machine, capsys, lambda _: registry.update({("HKCU", *key): value}))


def test_a_policy_wins_over_the_own_setting(machine, registry, capsys):
    commands.install(machine=machine)
    registry["HKCU", SECURITY, "DisableAllAddins"] = 1
    registry["HKCU", POLICY, "DisableAllAddins"] = 0
    assert commands.check(machine) == commands.DONE
    assert capsys.readouterr().err == ""


def test_office_of_the_store(machine, registry, tmp_path, capsys):
    folder = tmp_path / "WindowsApps"
    folder.mkdir()
    key = ("HKLM", r"SOFTWARE\Microsoft\Windows\CurrentVersion\App Paths\excel.exe", "")
    excel = program(folder / "EXCEL.EXE", 0x8664)
    assert "Microsoft Store" in installed_then(machine, capsys, lambda _: registry.update({key: str(excel)}))


def test_no_excel(machine, registry, capsys):
    commands.install(machine=machine)
    registry.clear()
    assert commands.check(machine) == commands.FAILED
    assert "Excel is not found" in capsys.readouterr().err


def test_a_missing_library_is_told_for_the_bits_of_excel_only(machine, capsys):
    small, large = machine.libraries
    assert f"{large} is not there" in installed_then(machine, capsys, lambda _: large.unlink())
    large.touch()
    small.unlink()
    assert commands.check(machine) == commands.DONE


def test_excel_of_32_bits_wants_its_own_library(machine, tmp_path, capsys):
    program(tmp_path / "EXCEL.EXE", 0x014C)
    small, _ = machine.libraries
    assert f"{small} is not there" in installed_then(machine, capsys, lambda _: small.unlink())


def test_a_stale_add_in_after_an_upgrade(machine, monkeypatch, capsys):
    commands.install(machine=machine)
    capsys.readouterr()
    monkeypatch.setattr(commands, "__version__", "99.0")
    assert commands.check(machine) == commands.WRONG
    assert "made by another version" in capsys.readouterr().err


def test_an_add_in_that_lacks_a_function(machine, monkeypatch, capsys):
    commands.install(machine=machine)
    capsys.readouterr()
    monkeypatch.setattr(commands, "load", lambda: dict(list(load().items())[:-1]))
    assert commands.check(machine) == commands.WRONG
    assert "made by another version" in capsys.readouterr().err


def test_xlwings_upgraded_under_the_add_in(machine, capsys):
    wrong = installed_then(machine, capsys, lambda m: replace(m, run=lambda _: (0, f"versions {__version__} 98.0\n")))
    assert "other versions" in wrong


def test_a_python_that_cannot_run_the_functions(machine, capsys):
    failed = "Traceback\nModuleNotFoundError: No module named 'xlaxial'\n"
    wrong = installed_then(machine, capsys, lambda m: replace(m, run=lambda _: (1, failed)))
    assert "No module named 'xlaxial'" in wrong


def test_a_python_that_is_gone(machine, capsys):
    wrong = installed_then(machine, capsys, lambda m: (m.python.with_name("pythonw.exe").unlink(), None)[1])
    assert "is not there; run 'xlaxial excel install' again" in wrong


def test_something_else_under_the_name(machine, capsys):
    assert "cannot be read" in installed_then(machine, capsys, lambda m: addin(m).write_text("x") and None)


def elsewhere():
    return replace(this_machine(), windows=False)


def test_other_systems_are_told_what_can_be_done_there(capsys):
    for command in (commands.install, commands.check):
        assert command(machine=elsewhere()) == commands.FAILED
        assert "--to FILE.xlam" in capsys.readouterr().out
    assert commands.remove(elsewhere()) == commands.FAILED


def test_other_systems_can_write_the_add_in(tmp_path, capsys):
    python = r"C:\Tools\venv\Scripts\pythonw.exe"
    target = tmp_path / "there.xlam"
    assert commands.install(target, python, elsewhere()) == commands.DONE
    _, settings = read_addin(target)
    assert (python, r"C:\Tools\venv") == (settings.python, settings.library_folder)
    assert commands.install(target, machine=elsewhere()) == commands.DONE
    assert "give it with --python" in capsys.readouterr().out
    assert commands.install(tmp_path / "no folder" / "x.xlam", machine=elsewhere()) == commands.WRONG


def test_without_olefile_the_remedy_is_told(machine, monkeypatch, capsys):
    def missing(*_):
        raise ModuleNotFoundError("No module named 'olefile'", name="olefile")

    monkeypatch.setattr(commands, "read_template", missing)
    assert commands.install(machine=machine) == commands.WRONG
    assert "pip install olefile" in capsys.readouterr().err


def test_where_the_library_stands_beside_an_interpreter():
    assert library_folder_of(r"C:\Py\pythonw.exe") == r"C:\Py"
    assert library_folder_of(r"C:\Py\env\Scripts\pythonw.exe") == r"C:\Py\env"


@pytest.mark.parametrize("content", [b"", b"MZ", b"MZ" + bytes(70), b"text " * 40])
def test_what_is_no_program_tells_no_bits(tmp_path, content):
    path = tmp_path / "x.exe"
    path.write_bytes(content)
    assert program_bits(path) == 0


def test_this_machine_runs_commands():
    machine = this_machine()
    assert machine.run([str(machine.python), "-c", "print('here')"]) == (0, "here\n")
    code, said = machine.run(["/no/such/program"])
    assert code == -1
    assert said
