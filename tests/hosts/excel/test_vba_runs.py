"""The add-in's VBA is run by the only other program that runs VBA: LibreOffice's Basic, in its mode for it.

The library that starts Python is replaced by a class of Basic that tells what reached it.
"""

from __future__ import annotations

import io
import json
import os
import re
import subprocess
import sys
import uuid
import zipfile
from pathlib import Path

import pytest

from xlaxial.functions.registry import Argument, Function, load
from xlaxial.hosts.calc.extension import OFFICE_LEAST
from xlaxial.hosts.calc.office import command, environment, find_office, write_settings
from xlaxial.hosts.excel.addin import Settings, build, read_template
from xlaxial.hosts.excel.vba import Names, module_text

HERE = Path(__file__).parent
sys.path.append(str(HERE.parent / "calc"))
from calc_live import office_python  # noqa: E402 - found by the line above

pytestmark = pytest.mark.office

TABLE = Argument("table", "Table.", "table")
LATER = Argument("later", "Later.", "cells", optional=True)
MARK = Argument("mark", "Mark.", "value")
FUNCTIONS = (
    Function("AX_GRID", "Grid.", (TABLE, LATER, MARK), "", "here:x", ""),
    Function("AX_CLOCK", "Clock.", (), "", "here:x", ""),
    Function("AX_ABOUT", "About.", (), "", "here:x", ""),
)
PYTHON = r"C:\A folder\Scripts\pythonw.exe"
TESTS = (HERE / "basic_tests.bas").read_text(encoding="ascii")
PROCEDURES = re.findall(r"^Function (\w+)\(\)", TESTS, re.MULTILINE)
SETTINGS = Settings(PYTHON, r"C:\A & B", "1.2.3", "0.0.1")
HEAD = "Rem Attribute VBA_ModuleType=VBAModule\nOption VBASupport 1\n"
LIBRARY = """
Public Started As Long, Lost As Long, Refuse As Boolean
Private Function XLPyDLLActivateAuto(found As Variant, config As String, mode As Long) As Long
    Started = Started + 1
    If Refuse Then
        found = "no such Python"
        XLPyDLLActivateAuto = 1
    Else
        Set found = New Server
    End If
End Function
Private Function LoadLibraryW(path As Variant) As Long
    LoadLibraryW = 1
End Function
Private Function StrPtr(text As String) As String
    StrPtr = text
End Function
Public Sub axForget()
    Set axKept = Nothing
    axRefused = ""
End Sub
"""


def as_basic(text: str) -> str:
    """Leave out what Basic lacks (attributes, directives, the library); let the tests reach the helpers."""
    text = re.sub(r"^Attribute .*\n", "", text, flags=re.MULTILINE)
    text = re.sub(r"#If.*?#Else\n(.*?)#End If\n", r"\1", text, flags=re.DOTALL)
    text = re.sub(r"^Private Declare .*\n", "", text, flags=re.MULTILINE)
    text = re.sub(r"^Private (Function|Sub) (ax(?:Answer|Take|Command))\b", r"Public \1 \2", text, flags=re.MULTILINE)
    return HEAD + text.replace("\nPrivate axKept", LIBRARY + "\nPrivate axKept", 1)


def as_workbook(path: Path) -> Path:
    """Write the add-in as the kind of workbook that LibreOffice opens: only its content type is another."""
    template = read_template()
    addin = build(template, module_text(load().values(), template.names("1.2.3")), SETTINGS)
    with zipfile.ZipFile(io.BytesIO(addin)) as package, zipfile.ZipFile(path, "w") as out:
        for name in package.namelist():
            kind = (b"addin.macroEnabled.main", b"sheet.macroEnabled.main")
            data = package.read(name)
            out.writestr(name, data.replace(*kind) if name == "[Content_Types].xml" else data)
    return path


@pytest.fixture(scope="module")
def session(tmp_path_factory):
    office = find_office()
    if office is None or not office.at_least(OFFICE_LEAST):
        (pytest.fail if os.environ.get("CI") else pytest.skip)("LibreOffice is not installed")
    python = office_python(office)
    if python is None:
        (pytest.fail if os.environ.get("CI") else pytest.skip)("no Python knows UNO")
    names = Names("1.2.3", "0.0.1", "xlwings64-0.0.1.dll", "xlwings32-0.0.1.dll", module="here")
    profile, empty = tmp_path_factory.mktemp("profile"), tmp_path_factory.mktemp("extensions")
    write_settings(profile)
    pipe = f"xlaxial{uuid.uuid4().hex}"
    job = {
        "pipe": pipe,
        "modules": {
            "Server": (HERE / "basic_server.bas").read_text(encoding="ascii"),
            "Module1": as_basic(module_text(FUNCTIONS, names)),
            "Product": as_basic(module_text(load().values(), names)),
            "Tests": TESTS,
        },
        "cells": {"B1": PYTHON, "B2": r"C:\A folder", "B3": "5", "B4": "text", "C5": "=1/0"},
        "book": as_workbook(tmp_path_factory.mktemp("book") / "xlaxial.xlsm").as_uri(),
        "run": ["Product.AX_ABOUT", *(f"Tests.{name}" for name in PROCEDURES)],
    }
    run = command(office, profile, empty, f"--accept=pipe,name={pipe};urp;")
    process = subprocess.Popen(run, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL, env=environment())
    try:
        done = subprocess.run(
            [python, str(HERE / "basic_session.py")],
            input=json.dumps(job),
            capture_output=True,
            text=True,
            timeout=300,
            check=False,
            env=environment(),
        )
    finally:
        try:
            process.wait(60)
        except subprocess.TimeoutExpired:
            process.kill()
    assert done.returncode == 0, done.stderr
    return json.loads(done.stdout)


@pytest.fixture(scope="module")
def told(session):
    return session["run"]


EXPECTED = {
    # Types of VBA: 5 Double, 8 String, 11 Boolean; an error value tells no more than that.
    "BlockOfAnswers": "5:1.5 error 8:#N/A 11:True",
    "RowOfAnswers": "5:2015 error error 8:text",
    "TakenBlock": "3,2,0,Sheet1 3x2 5:5",
    "TakenColumns": f"1,2,1,Sheet1 5x2 8:{PYTHON}",
    "TakenRows": "3,1,2,Sheet1 2x3 0:",
    "TakenTallWithAnEnd": f"1,2,0,Sheet1 5000x1 8:{PYTHON}",
    "TakenColumnsBesideTheUsed": "1,8,1,Sheet1 5x1 0:",
    "TakenCell": "3,2,0,Sheet1 5:5",
    "TakenText": " 8:kN",
    "Called": "here.AX_GRID [3x2]  T1 3,2,0,Sheet1;-;; / starts 1",
    "CalledWithNoArguments": "here.AX_CLOCK ",
    "CalledAgainAfterTheProcessEnded": "8:here.AX_GRID 5   3,2,0,Sheet1;-;-; / starts 1",
    "Command": f'"{PYTHON}" -B -c "import sys; sys.path = [p for p in sys.path if p]; '
    "from xlaxial.hosts.excel.server import run; run('$(CLSID)')\"",
    "NotStarted": "error / starts 1 / xlaxial does not run: no such Python - run 'xlaxial excel check' in a terminal",
}


@pytest.mark.parametrize("name", EXPECTED)
def test_vba_does_what_it_should(told, name):
    assert EXPECTED[name] == told[f"Tests.{name}"]


def test_the_command_starts_the_server(told, tmp_path):
    """What Excel would run, with this Python and a stand-in for xlwings' server."""
    code = re.fullmatch(r'"[^"]*" -B -c "([^"]*)"', told["Tests.Command"])
    assert code is not None
    (tmp_path / "numpy.py").write_text("raise RuntimeError('a file of the working folder was loaded')")
    stand_in = "import xlwings; xlwings.serve = lambda clsid: print('serving', clsid); from xlaxial"
    done = subprocess.run(
        [sys.executable, "-B", "-c", code[1].replace("$(CLSID)", "{1-2}").replace("from xlaxial", stand_in)],
        capture_output=True,
        text=True,
        check=False,
        cwd=tmp_path,
        env=os.environ | {"LOCALAPPDATA": str(tmp_path), "PYTHONPATH": str(HERE.parents[2])},
    )
    assert (done.returncode, done.stdout) == (0, "serving {1-2}\n"), done.stderr


def test_the_module_of_all_functions_compiles_and_runs(told):
    assert told["Product.AX_ABOUT"] == "here.AX_ABOUT "


def test_every_procedure_of_the_tests_is_looked_at():
    assert set(EXPECTED) == set(PROCEDURES)


def test_another_program_reads_the_add_in(session):
    """LibreOffice has its own readers of compound files, of their compression and of the workbook."""
    book = session["book"]
    template = read_template()
    expected = module_text(load().values(), template.names("1.2.3"))
    modules = book["modules"]["xlaxial"]
    assert {"ThisWorkbook", "Sheet2", "Dictionary", "xlwings", "Module1"} == set(modules)
    without_attributes = re.sub(r"^Attribute .*\n", "", expected, flags=re.MULTILINE)
    assert HEAD + without_attributes.rstrip() == modules["Module1"].replace("\r\n", "\n").rstrip()
    cells = [["Python", PYTHON], ["Library folder", r"C:\A & B"], ["xlaxial", "1.2.3"], ["xlwings", "0.0.1"]]
    assert ("xlaxial", cells) == (book["sheet"], book["cells"])
