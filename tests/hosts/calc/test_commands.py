"""Installing, checking and removing, with the real program."""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from xlaxial.hosts.calc import commands
from xlaxial.hosts.calc.office import Office

_NOBODY = 65534


@pytest.fixture
def whole_machine(office: Office, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Office:
    """The office with a folder of its own for the extensions that every user has, and a user of the name root."""
    (tmp_path / "share").mkdir()
    apart = replace(office, extensions=tmp_path / "share")
    monkeypatch.setattr(commands, "find_office", lambda: apart)
    monkeypatch.setattr(commands, "default_profile", lambda: tmp_path / "home")
    monkeypatch.setattr(commands, "_is_root", lambda: True)
    return apart


@pytest.fixture
def user(whole_machine: Office, monkeypatch: pytest.MonkeyPatch) -> Iterator[Path]:
    """The profile of a user who is not root; where the tests run as root, the extension manager runs as nobody."""
    monkeypatch.setattr(commands, "_is_root", lambda: False)
    home = Path(tempfile.mkdtemp())
    home.chmod(0o777)
    if sys.platform != "win32" and os.geteuid() == 0:
        run = subprocess.run

        def as_nobody(command: list[str], **options: Any) -> subprocess.CompletedProcess[str]:
            if command[0] == str(whole_machine.unopkg):
                options |= {"user": _NOBODY, "group": _NOBODY, "extra_groups": [], "cwd": home}
                options["env"] = {**options["env"], "HOME": str(home)}
            return run(command, **options)

        monkeypatch.setattr("xlaxial.hosts.calc.commands.subprocess.run", as_nobody)
    yield home / "profile"
    shutil.rmtree(home)


@pytest.mark.office
def test_root_installs_for_every_user_checks_and_removes(
    whole_machine: Office, capsys: pytest.CaptureFixture[str]
) -> None:
    assert commands.check() == commands.WRONG
    assert "AX_ABOUT gives #NAME?: the add-in is not installed; run 'xlaxial calc install'" in capsys.readouterr().err
    assert commands.install() == commands.DONE
    said = capsys.readouterr()
    assert said.err == ""
    assert f"LibreOffice {whole_machine.version_text()}" in said.out
    assert "numpy" in said.out
    assert "AX_ABOUT gives: " in said.out
    assert commands.remove() == commands.DONE
    assert list(whole_machine.extensions.iterdir()) == []
    assert commands.remove() == commands.DONE
    assert "the add-in is not installed" in capsys.readouterr().out


@pytest.mark.office
def test_a_user_installs_in_the_profile_checks_and_removes(user: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert commands.install(user) == commands.DONE
    said = capsys.readouterr()
    assert said.err == ""
    assert f"installed in {user}" in said.out
    assert "AX_ABOUT gives: " in said.out
    assert commands.install(user) == commands.DONE  # an upgrade, in place of what stood there
    assert commands.remove(user) == commands.DONE
    assert commands.check(user) == commands.WRONG


@pytest.mark.office
def test_an_add_in_of_another_version_is_told(whole_machine: Office, capsys: pytest.CaptureFixture[str]) -> None:
    assert commands.install() == commands.DONE
    config = whole_machine.extensions / "xlaxial" / "config.json"
    stale = json.loads(config.read_text())
    del stale["functions"]["axMembers"]
    config.write_text(json.dumps(stale))
    assert commands.check() == commands.WRONG
    assert "made by another version" in capsys.readouterr().err


@pytest.mark.office
def test_root_is_told_why_a_profile_cannot_be_used(
    whole_machine: Office, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert commands.install(tmp_path / "profile") == commands.WRONG
    assert "leave the profile out" in capsys.readouterr().err


@pytest.mark.office
def test_a_user_cannot_remove_what_root_installed(
    whole_machine: Office, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    assert commands.install() == commands.DONE
    monkeypatch.setattr(commands, "_is_root", lambda: False)
    assert commands.remove() == commands.WRONG
    assert "remove it as root" in capsys.readouterr().err


def test_an_old_office_is_told(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    old = Office(Path("soffice"), (7, 4, 7, 2), Path("extensions"))
    monkeypatch.setattr(commands, "find_office", lambda: old)
    assert commands.install() == commands.check() == commands.NO_OFFICE
    assert "LibreOffice 7.4.7.2 at soffice is too old; install 25.2 or newer" in capsys.readouterr().err


def test_no_office_is_told(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    monkeypatch.setattr(commands, "find_office", lambda: None)
    assert commands.install() == commands.check() == commands.remove() == commands.NO_OFFICE
    assert "LibreOffice is not found; install version 25.2 or newer" in capsys.readouterr().err
