from __future__ import annotations

import os
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import openpyxl
import pytest

HERE = Path(__file__).parent
sys.path.append(str(HERE))  # the helpers beside this file, by their own names

import calc_functions  # noqa: E402 - found by the line above
from calc_live import LiveOffice, office_python  # noqa: E402 - as above

from xlaxial.functions.registry import load  # noqa: E402 - as above
from xlaxial.hosts.calc.extension import OFFICE_LEAST, Source, package_folders, write_extension  # noqa: E402 - as above
from xlaxial.hosts.calc.office import Office, convert, find_office  # noqa: E402 - as above

Convert = Callable[[Path], Path]


def _absent(reason: str) -> None:
    """Skip for want of a program, but fail where CI is set: there it must be installed."""
    if os.environ.get("CI"):
        pytest.fail(reason)
    pytest.skip(reason)


@pytest.fixture(scope="session")
def office() -> Office:
    found = find_office()
    if found is None or not found.at_least(OFFICE_LEAST):
        _absent(f"LibreOffice {'.'.join(map(str, OFFICE_LEAST))} or newer is not installed")
    assert found is not None
    return found


@pytest.fixture(scope="session")
def extensions(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder that holds the extension of the tests' own functions."""
    folder = tmp_path_factory.mktemp("extensions")
    source = Source("calc_functions:caller", (str(HERE), *package_folders()))
    write_extension(folder / "xlaxial", calc_functions.FUNCTIONS, source)
    return folder


@pytest.fixture(scope="session")
def calculate(office: Office, extensions: Path, tmp_path_factory: pytest.TempPathFactory) -> Convert:
    """Opens a workbook in the office, recalculates it and saves it; gives the saved file."""
    out, profile = tmp_path_factory.mktemp("out"), tmp_path_factory.mktemp("profile")
    return lambda book: convert(book, out, profile, extensions, office=office)


@pytest.fixture(scope="session")
def live(office: Office, extensions: Path, tmp_path_factory: pytest.TempPathFactory) -> Iterator[LiveOffice]:
    """A running office with the extension of the tests' own functions."""
    python = office_python(office)
    if python is None:
        _absent("no Python here can import UNO")
    assert python is not None
    running = LiveOffice(office, tmp_path_factory.mktemp("live"), extensions, python)
    yield running
    running.stop()


@pytest.fixture(scope="session")
def product(office: Office, tmp_path_factory: pytest.TempPathFactory) -> Iterator[LiveOffice]:
    """A running office with the product's own functions, as `xlaxial calc install` makes them."""
    python = office_python(office)
    if python is None:
        _absent("no Python here can import UNO")
    assert python is not None
    folder = tmp_path_factory.mktemp("product")
    write_extension(folder / "xlaxial", list(load().values()), Source(folders=package_folders()))
    running = LiveOffice(office, tmp_path_factory.mktemp("user"), folder, python)
    yield running
    running.stop()


@pytest.fixture(scope="session")
def save(tmp_path_factory: pytest.TempPathFactory) -> Callable[[openpyxl.Workbook, str], Path]:
    """Saves a workbook of a test and gives its path."""
    folder = tmp_path_factory.mktemp("books")

    def save_as(book: openpyxl.Workbook, name: str) -> Path:
        book.save(folder / name)
        return folder / name

    return save_as
