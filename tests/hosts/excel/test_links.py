from __future__ import annotations

import os
import re
import zipfile
from pathlib import Path

import openpyxl
import pytest

from xlaxial.hosts.excel.commands import DONE, FAILED, WRONG, links
from xlaxial.hosts.excel.formulas import named_links

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
R = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006/relationships"
TYPES = "http://schemas.openxmlformats.org/package/2006/content-types"
KIND = "application/vnd.openxmlformats-officedocument.spreadsheetml"
HEAD = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\r\n'
OURS = r"C:\Users\A B\AppData\Roaming\Microsoft\AddIns\xlaxial.xlam"
CORPUS = os.environ.get("XLAXIAL_CORPUS")


def workbook(path: Path, formulas: list[str], targets: tuple[str, ...] = (), **more: str) -> Path:
    """Write a workbook with formulas in column A, links to other files, and further XML in its places."""
    cells = "".join(f'<row r="{n}"><c r="A{n}"><f>{f}</f><v>{n}</v></c></row>' for n, f in enumerate(formulas, 1))
    numbers = range(1, len(targets) + 1)
    kinds = [("xl/workbook.xml", "sheet.main"), ("xl/worksheets/sheet1.xml", "worksheet")]
    kinds += [(f"xl/externalLinks/externalLink{n}.xml", "externalLink") for n in numbers]
    relations = [("rId1", "worksheet", "worksheets/sheet1.xml")]
    relations += [(f"rId{n + 1}", "externalLink", f"externalLinks/externalLink{n}.xml") for n in numbers]
    references = "".join(f'<externalReference r:id="rId{n + 1}"/>' for n in numbers)
    parts = {
        "[Content_Types].xml": f'{HEAD}<Types xmlns="{TYPES}"><Default Extension="rels" ContentType='
        '"application/vnd.openxmlformats-package.relationships+xml"/><Default Extension="xml" ContentType="application/xml"/>'
        + "".join(f'<Override PartName="/{part}" ContentType="{KIND}.{kind}+xml"/>' for part, kind in kinds)
        + "</Types>",
        "_rels/.rels": f'{HEAD}<Relationships xmlns="{PACKAGE}"><Relationship Id="rId1" Type="{R}/officeDocument" '
        'Target="xl/workbook.xml"/></Relationships>',
        "xl/workbook.xml": f'{HEAD}<workbook xmlns="{MAIN}" xmlns:r="{R}"><sheets><sheet name="Sheet1" sheetId="1" '
        'r:id="rId1"/></sheets>'
        + (f"<externalReferences>{references}</externalReferences>" if targets else "")
        + more.get("names", "")
        + "</workbook>",
        "xl/_rels/workbook.xml.rels": f'{HEAD}<Relationships xmlns="{PACKAGE}">'
        + "".join(f'<Relationship Id="{i}" Type="{R}/{kind}" Target="{target}"/>' for i, kind, target in relations)
        + "</Relationships>",
        "xl/worksheets/sheet1.xml": f'{HEAD}<worksheet xmlns="{MAIN}" xmlns:r="{R}"><sheetData>{cells}</sheetData>'
        + more.get("rules", "")
        + "</worksheet>",
        "xl/other.bin": "[1]!AX_FORCES(",
    }
    for n, target in enumerate(targets, 1):
        parts[f"xl/externalLinks/externalLink{n}.xml"] = (
            f'{HEAD}<externalLink xmlns="{MAIN}"><externalBook xmlns:r="{R}" r:id="rId1"><sheetNames>'
            '<sheetName val="Sheet1"/></sheetNames></externalBook></externalLink>'
        )
        parts[f"xl/externalLinks/_rels/externalLink{n}.xml.rels"] = (
            f'{HEAD}<Relationships xmlns="{PACKAGE}"><Relationship Id="rId1" Type="{R}/externalLinkPath" '
            f'Target="{target}" TargetMode="External"/></Relationships>'
        )
    if "controls" in more:
        parts["xl/ctrlProps/ctrlProp1.xml"] = more["controls"]
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as package:
        package.comment = b"a comment"
        for name, text in parts.items():
            info = zipfile.ZipInfo(name, (2024, 5, 6, 7, 8, 10))
            package.writestr(info, text, zipfile.ZIP_DEFLATED)
    return path


def parts(path: Path) -> dict[str, bytes]:
    with zipfile.ZipFile(path) as package:
        return {name: package.read(name) for name in package.namelist()}


def formulas(path: Path) -> list[str]:
    return re.findall("<f>(.*?)</f>", parts(path)["xl/worksheets/sheet1.xml"].decode())


FORMS = {
    "[1]!AX_FORCES(A1,B1)": "AX_FORCES(A1,B1)",
    "[0]!AX_FORCES(A1)": "AX_FORCES(A1)",
    "'C:\\My folder\\xlaxial.xlam'!AX_FORCES(A1)": "AX_FORCES(A1)",
    "&apos;C:\\My folder\\xlaxial.xlam&apos;!AX_FORCES(A1)": "AX_FORCES(A1)",
    "'O''Brien\\xlaxial.xlam'!AX_FORCES(A1)": "AX_FORCES(A1)",
    "xlaxial.xlam!AX_FORCES(A1)": "AX_FORCES(A1)",
    "_xll.AX_FORCES(A1)": "AX_FORCES(A1)",
    "_xldudf_AX_FORCES(A1)": "AX_FORCES(A1)",
    "_xlfn.AX_FORCES(A1)": "AX_FORCES(A1)",
    "[1]!_xldudf_AX_FORCES(A1)": "AX_FORCES(A1)",
    "[1]!ax_forces(A1)": "ax_forces(A1)",
    "[1]!AX_FORCES (A1)": "AX_FORCES (A1)",
    "IF(A1>0,[1]!AX_FORCES(A1),-[1]!AX_STRESSES(A1))": "IF(A1>0,AX_FORCES(A1),-AX_STRESSES(A1))",
    'SUM([1]!AX_FORCES(A1,"kN"))&amp;"x"': 'SUM(AX_FORCES(A1,"kN"))&amp;"x"',
    "AX_FORCES(A1)": "AX_FORCES(A1)",
    '"[1]!AX_FORCES(A1)"&amp;A1': '"[1]!AX_FORCES(A1)"&amp;A1',
    "&quot;[1]!AX_FORCES(A1)&quot;&amp;A1": "&quot;[1]!AX_FORCES(A1)&quot;&amp;A1",
    'A1&amp;"say ""x"" "&amp;[1]!AX_FORCES(A1)': 'A1&amp;"say ""x"" "&amp;AX_FORCES(A1)',
    "Table1[1]+Table1[[#This Row],[2]]": "Table1[1]+Table1[[#This Row],[2]]",
    "AX_FORCES(Table1[[#Headers],[#Data],[1]:[2]])": "AX_FORCES(Table1[[#Headers],[#Data],[1]:[2]])",
    "_xlfn.XLOOKUP(A1,B:B,C:C)": "_xlfn.XLOOKUP(A1,B:B,C:C)",
    "MY_xll.AX_FORCES(A1)": "MY_xll.AX_FORCES(A1)",
}


@pytest.mark.parametrize("form", FORMS)
def test_every_form_becomes_plain(tmp_path, form):
    book = workbook(tmp_path / "b.xlsx", [form], ("file:///" + OURS,))
    assert links(book, to_plain=True) == DONE
    assert [FORMS[form]] == formulas(book)


def test_nothing_else_changes(tmp_path, capsys):
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)", "A1*2"], ("file:///" + OURS,))
    before = parts(book)
    assert links(book, to_plain=True) == DONE
    after = parts(book)
    gone = {"xl/externalLinks/externalLink1.xml", "xl/externalLinks/_rels/externalLink1.xml.rels"}
    assert gone == set(before) - set(after)
    assert list(after) == [name for name in before if name not in gone]
    sheet = "xl/worksheets/sheet1.xml"
    assert before[sheet].replace(b"[1]!", b"") == after[sheet]
    types = "[Content_Types].xml"
    assert re.sub(rb'<Override PartName="/xl/ext[^>]*>', b"", before[types]) == after[types]
    main, relations = "xl/workbook.xml", "xl/_rels/workbook.xml.rels"
    assert re.sub(rb"<externalReferences>.*</externalReferences>", b"", before[main]) == after[main]
    assert re.sub(rb'<Relationship Id="rId2"[^>]*>', b"", before[relations]) == after[relations]
    untouched = set(after) - {sheet, types, main, relations}
    assert {name: before[name] for name in untouched} == {name: after[name] for name in untouched}
    with zipfile.ZipFile(book) as package:
        assert package.comment == b"a comment"
        assert {(2024, 5, 6, 7, 8, 10)} == {info.date_time for info in package.infolist()}
    assert openpyxl.load_workbook(book)["Sheet1"]["A1"].value == "=AX_FORCES(A1)"
    assert {"b.xlsx", "b.backup.xlsx"} == {file.name for file in tmp_path.iterdir()}
    assert before == parts(tmp_path / "b.backup.xlsx")
    assert "link 1 leads to" in capsys.readouterr().out
    assert links(book) == DONE  # nothing is left to mend


def test_other_links_stay_and_move_down(tmp_path):
    book = workbook(
        tmp_path / "b.xlsx",
        ["[1]!AX_FORCES([2]Sheet1!A1)", "[2]Sheet1!A1:B2+'[3]My sheet'!A1", '"[2]"', "Table1[2]", "[3]!OTHER(1)"],
        ("file:///" + OURS, "two.xlsx", "three.xlsx"),
        names="<definedNames><definedName name=\"x\">'[2]Sheet1'!$A$1</definedName></definedNames>",
    )
    assert links(book, to_plain=True) == DONE
    expected = ["AX_FORCES([1]Sheet1!A1)", "[1]Sheet1!A1:B2+'[2]My sheet'!A1", '"[2]"', "Table1[2]", "[2]!OTHER(1)"]
    assert expected == formulas(book)
    found = openpyxl.load_workbook(book)
    assert [link.file_link.Target for link in found._external_links] == ["two.xlsx", "three.xlsx"]
    assert found.defined_names["x"].attr_text == "'[1]Sheet1'!$A$1"


def test_a_link_that_something_else_uses_stays(tmp_path, capsys):
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)", "[1]!OTHER(A1)"], ("file:///" + OURS,))
    before = parts(book)
    assert links(book, to_plain=True) == DONE
    assert formulas(book) == ["AX_FORCES(A1)", "[1]!OTHER(A1)"]
    assert {name for name, data in parts(book).items() if data != before[name]} == {"xl/worksheets/sheet1.xml"}
    assert "is kept" in capsys.readouterr().out


@pytest.mark.parametrize(("used", "left"), [("[1]", 2), ("[2]", 2), ("[0]", 1)])
def test_links_named_by_controls_keep_their_numbers(tmp_path, used, left):
    control = f'{HEAD}<formControlPr xmlns="{MAIN}" fmlaLink="{used}Sheet1!$A$1"/>'
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)"], (OURS, "two.xlsx"), controls=control)
    assert links(book, to_plain=True) == DONE
    assert formulas(book) == ["AX_FORCES(A1)"]
    assert left == sum("externalLinks/externalLink" in name for name in parts(book))
    assert control.encode() == parts(book)["xl/ctrlProps/ctrlProp1.xml"]


def test_an_unused_link_before_one_that_a_control_names_stays_but_one_behind_it_goes(tmp_path):
    control = f'{HEAD}<formControlPr xmlns="{MAIN}" fmlaLink="[1]Sheet1!$A$1"/>'
    book = workbook(tmp_path / "b.xlsx", ["[2]!AX_FORCES(A1)"], ("one.xlsx", OURS), controls=control)
    assert links(book, to_plain=True) == DONE
    assert [link.file_link.Target for link in openpyxl.load_workbook(book)._external_links] == ["one.xlsx"]


def test_a_link_to_the_add_in_that_no_formula_names_goes(tmp_path):
    book = workbook(tmp_path / "b.xlsx", ["AX_FORCES(A1)"], (OURS,))
    assert links(book) == WRONG
    assert links(book, to_plain=True) == DONE
    assert not any("externalLink" in name for name in parts(book))


def test_rules_names_and_table_columns(tmp_path):
    rules = (
        '<conditionalFormatting sqref="A1"><cfRule type="expression" priority="1"><formula>[1]!AX_FORCES(A1)&gt;0</formula>'
        '</cfRule></conditionalFormatting><dataValidations count="1"><dataValidation type="custom" sqref="A1">'
        "<formula1>[1]!AX_FORCES(A1)&lt;1</formula1></dataValidation></dataValidations>"
    )
    names = '<definedNames><definedName name="x">[1]!AX_FORCES(Sheet1!$A$1)</definedName></definedNames>'
    book = workbook(tmp_path / "b.xlsx", ["1"], (OURS,), rules=rules, names=names)
    before = parts(book)
    assert links(book, to_plain=True) == DONE
    after = parts(book)
    assert before["xl/worksheets/sheet1.xml"].replace(b"[1]!", b"") == after["xl/worksheets/sheet1.xml"]
    assert b">AX_FORCES(Sheet1!$A$1)<" in after["xl/workbook.xml"]


def test_the_links_lead_to_the_startup_folder(tmp_path):
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)", "_xll.AX_FORCES(A1)"], ("file:///" + OURS, "two.xlsx"))
    before = parts(book)
    assert links(book, to="xlaxial.xlam") == DONE
    assert formulas(book) == ["[1]!AX_FORCES(A1)", "AX_FORCES(A1)"]
    after = parts(book)
    relations = "xl/externalLinks/_rels/externalLink1.xml.rels"
    assert b'xlExternalLinkPath/xlStartup" Target="xlaxial.xlam" TargetMode="External"' in after[relations]
    changed = {name for name in before if before[name] != after[name]}
    assert {relations, "xl/worksheets/sheet1.xml"} == changed
    assert links(book, to="xlaxial.xlam") == DONE  # again: nothing to change
    assert after == parts(book)


def test_the_links_lead_to_another_path(tmp_path):
    book = workbook(tmp_path / "b.xlsx", ["[2]!AX_FORCES(A1)"], ("one.xlsx", "file:///" + OURS))
    assert links(book, to=r"D:\New & old\xlaxial.xlam") == DONE
    (one, two) = openpyxl.load_workbook(book)._external_links
    assert (one.file_link.Target, two.file_link.Target) == ("one.xlsx", r"file:///D:\New%20&%20old\xlaxial.xlam")


def test_looking_changes_nothing(tmp_path, capsys):
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)", "[1]!AX_FORCES(A2)", "_xll.AX_FORCES(A1)"], (OURS,))
    before = book.read_bytes()
    assert links(book) == WRONG
    assert before == book.read_bytes()
    out = capsys.readouterr().out
    assert "2 calls written [1]!AX_..." in out
    assert "1 call written _xll.AX_..." in out


def test_a_plain_workbook_is_left_alone(tmp_path, capsys):
    book = workbook(tmp_path / "b.xlsx", ["AX_FORCES(A1)", "[1]Sheet1!A1"], ("other.xlsx",))
    before = book.read_bytes()
    assert links(book, to_plain=True) == DONE
    assert links(book) == DONE
    assert before == book.read_bytes()
    assert "all calls are plain" in capsys.readouterr().out


def test_an_open_workbook_is_not_touched(tmp_path, capsys):
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)"], (OURS,))
    (tmp_path / "~$b.xlsx").touch()
    before = book.read_bytes()
    assert links(book, to_plain=True) == FAILED
    assert before == book.read_bytes()
    assert "close it first" in capsys.readouterr().err


def test_a_failed_write_leaves_the_workbook_whole(tmp_path, monkeypatch, capsys):
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)"], (OURS,))
    before = book.read_bytes()

    def full(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    assert links(book, to_plain=True) == FAILED
    assert "No space left" in capsys.readouterr().err
    assert before == book.read_bytes()
    assert [book] == list(tmp_path.iterdir())


@pytest.mark.skipif(not Path("/proc/self/fd").exists(), reason="this system does not tell which files are open")
def test_the_workbook_is_closed_when_it_is_replaced(tmp_path, monkeypatch):
    """Windows replaces no file that is open."""
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)"], (OURS,))
    replace, held = Path.replace, []

    def watched(self, target):
        for entry in Path("/proc/self/fd").iterdir():
            if entry.exists() and entry.resolve() in (Path(target), self):
                held.append(entry)
        return replace(self, target)

    monkeypatch.setattr(Path, "replace", watched)
    assert links(book, to_plain=True) == DONE
    assert formulas(book) == ["AX_FORCES(A1)"]
    assert held == []


def test_a_reference_without_a_link_part_is_left(tmp_path):
    book = workbook(tmp_path / "b.xlsx", ["[1]!AX_FORCES(A1)"], (OURS,))
    broken = {name: data.replace(b'Id="rId2"', b'Id="rId9"') for name, data in parts(book).items()}
    with zipfile.ZipFile(book, "w") as package:
        for name, data in broken.items():
            package.writestr(name, data)
    assert links(book, to_plain=True) == DONE
    assert formulas(book) == ["AX_FORCES(A1)"]
    assert set(parts(book)) == set(broken)


@pytest.mark.parametrize("content", [b"", b"text", b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(512)])
def test_other_files_are_told(tmp_path, content, capsys):
    book = tmp_path / "b.xlsx"
    book.write_bytes(content)
    assert links(book, to_plain=True) == FAILED
    assert capsys.readouterr().err.startswith("b.xlsx: ")
    assert links(tmp_path / "none.xlsx") == FAILED


def test_utf16_is_refused():
    from xlaxial.hosts.headless.errors import WorkbookError

    data = "<worksheet><f>[1]!AX_FORCES(A1)</f></worksheet>".encode("utf-16")
    with pytest.raises(WorkbookError, match="UTF-16"):
        named_links(data.replace(b"[\x00", b"[\x00"), {"AX_FORCES"})


@pytest.mark.skipif(not CORPUS, reason="XLAXIAL_CORPUS names no folder of workbooks")
@pytest.mark.parametrize(("name", "function"), [("HsGetVal", "HSGETVALUE"), ("56502", "LUCANET")])
def test_workbooks_of_other_people_with_an_add_in(tmp_path, name, function):
    (source,) = Path(str(CORPUS)).rglob(f"{name}.xlsx")
    book = tmp_path / source.name
    book.write_bytes(source.read_bytes())
    before = parts(book)
    assert links(book, to_plain=True, functions=[function]) == DONE
    after = parts(book)
    gone = {name for name in before if "externalLinks/" in name}
    assert gone
    assert gone == set(before) - set(after)
    for part in after:
        if part.startswith("xl/worksheets/sheet"):
            pattern = rb"\[1\]!(?=" + function.encode() + rb"\()"
            assert re.sub(pattern, b"", before[part], flags=re.IGNORECASE) == after[part]
        elif part not in ("[Content_Types].xml", "xl/workbook.xml", "xl/_rels/workbook.xml.rels"):
            assert before[part] == after[part]
    assert openpyxl.load_workbook(book)._external_links == []


@pytest.mark.skipif(not CORPUS, reason="XLAXIAL_CORPUS names no folder of workbooks")
def test_workbooks_of_other_people_without_us_are_plain():
    codes = {}
    for path in sorted(Path(str(CORPUS)).rglob("*.xls[xm]")):
        codes[path.name] = links(path)
    assert WRONG not in codes.values()
    assert list(codes.values()).count(DONE) > 0.9 * len(codes)
