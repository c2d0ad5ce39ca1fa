from __future__ import annotations

import io
import os
import random
import re
import warnings
import zipfile
from pathlib import Path
from xml.etree import ElementTree

import olefile
import pytest
from hypothesis import given
from hypothesis import strategies as st

from xlaxial.functions.registry import load
from xlaxial.hosts.excel.addin import AddinError, Settings, build, read_addin, read_template
from xlaxial.hosts.excel.compound import write_compound
from xlaxial.hosts.excel.compression import CompressionError, compress, decompress
from xlaxial.hosts.excel.project import Project, ProjectError
from xlaxial.hosts.excel.vba import module_text

with warnings.catch_warnings():
    warnings.simplefilter("ignore", DeprecationWarning)  # oletools uses older names of pyparsing
    from oletools.olevba import VBA_Parser, decompress_stream

SETTINGS = Settings(r"C:\Users\Jörg & Co\venv\Scripts\pythonw.exe", r"C:\Users\Jörg & Co\venv", "1.2.3", "0.0.1")
OLDEST = os.environ.get("XLAXIAL_OLDEST_XLWINGS")


@pytest.fixture(scope="module", params=["installed", "oldest"])
def template(request):
    if request.param == "oldest" and not OLDEST:
        pytest.skip("XLAXIAL_OLDEST_XLWINGS names no folder with the oldest supported xlwings")
    path = None if request.param == "installed" else Path(str(OLDEST)) / "xlwings" / "quickstart_addin.xlam"
    return read_template(path)


@pytest.fixture(scope="module")
def module(template):
    return module_text(load().values(), template.names("1.2.3"))


@pytest.fixture(scope="module")
def addin(template, module, tmp_path_factory):
    path = tmp_path_factory.mktemp("addin") / "xlaxial.xlam"
    path.write_bytes(build(template, module, SETTINGS))
    return path


# The three examples of [MS-OVBA] 3.2, from memory: compressed containers, and what they hold.
EXAMPLES = {
    "01 19 B0 00 61 62 63 64 65 66 67 68 00 69 6A 6B 6C 6D 6E 6F 70 00 71 72 73 74 75 76 2E": b"abcdefghijklmnopqrstuv.",
    "01 2F B0 00 23 61 61 61 62 63 64 65 82 66 00 70 61 67 68 69 6A 01 38 08 61 6B 6C 00 30 6D 6E 6F 70 06 71 02 70 04 "
    "10 72 73 74 75 76 10 77 78 79 7A 00 3C": b"#aaabcdefaaaaghijaaaaaklaaamnopqaaaaaaaaaaaarstuvwxyzaaa",
    "01 03 B0 02 61 45 00": b"a" * 73,
}


@pytest.mark.parametrize("container", EXAMPLES)
def test_published_examples_decompress(container):
    assert EXAMPLES[container] == decompress(bytes.fromhex(container))


@pytest.mark.parametrize("container", EXAMPLES)
def test_published_examples_compress_as_well(container):
    packed = compress(EXAMPLES[container])
    assert len(packed) <= len(bytes.fromhex(container))
    assert EXAMPLES[container] == bytes(decompress_stream(bytearray(packed)))


@given(st.lists(st.sampled_from([b"a", b"ab", b"Function ", b"\r\n", b"xyz", b"=" * 40]), max_size=3000))
def test_compression_comes_back(words):
    text = b"".join(words)
    packed = compress(text)
    assert text == decompress(packed)
    if text:
        assert text == bytes(decompress_stream(bytearray(packed)))  # oletools


def test_text_that_cannot_be_compressed_comes_back():
    text = random.Random(5).randbytes(3 * 4096)
    packed = compress(text)
    assert text == decompress(packed) == bytes(decompress_stream(bytearray(packed)))


@pytest.mark.parametrize("wrong", [b"", b"\x02", b"\x01\x19\x00", b"\x01\x03\xb0\x01\x45\x00", b"\x01\x03\xb0\x01"])
def test_damaged_containers_are_told(wrong):
    with pytest.raises(CompressionError):
        decompress(wrong)


@pytest.mark.parametrize("sizes", [[0, 1, 63, 64, 65, 4095, 4096, 4097, 512, 200_000], [1], [4096] * 40])
def test_compound_files_read_back(sizes):
    draw = random.Random(7)
    streams = {("VBA", f"Stream {n}"): draw.randbytes(size) for n, size in enumerate(sizes)}
    streams["PROJECT",] = b"text"
    file = olefile.OleFileIO(io.BytesIO(write_compound(streams)), raise_defects=olefile.DEFECT_UNSURE)
    assert set(streams) == {tuple(path) for path in file.listdir()}
    assert file.parsing_issues == []
    for path, data in streams.items():
        assert data == file.openstream(list(path)).read()


def test_too_large_a_compound_file_is_refused():
    with pytest.raises(ValueError, match="too large"):
        write_compound({("x",): bytes(8 << 20)})


def test_a_project_with_compiled_code_is_refused(template):
    streams = {("VBA", "dir"): compress(b""), ("VBA", "_VBA_PROJECT"): b"\xcc\x61\x97\x00\x00\x00\x00"}
    with pytest.raises(ProjectError, match="compiled"):
        Project(write_compound(streams))


def test_oletools_reads_our_module(addin, module):
    parser = VBA_Parser(str(addin))
    found = {stream.rpartition("/")[2]: code for _, stream, _, code in parser.extract_macros()}
    parser.close()
    assert {"ThisWorkbook", "Dictionary", "xlwings", "Sheet2", "Module1"} == set(found)
    assert module == found["Module1"].replace("\r\n", "\n")


def test_nothing_of_xlwings_can_be_called_from_a_sheet(addin):
    parser = VBA_Parser(str(addin))
    texts = {stream.rpartition("/")[2]: code for _, stream, _, code in parser.extract_macros()}
    parser.close()
    code = [line for line in texts["xlwings"].splitlines() if line and not line.startswith("'")]
    assert code == ['Attribute VB_Name = "xlwings"', "Option Private Module"]
    assert "BSD 3-clause" in texts["xlwings"]
    assert "Copyright" in texts["xlwings"]
    assert "RunPython" not in "".join(texts.values())


def test_add_in_reads_back(addin, module):
    assert (module, SETTINGS) == read_addin(addin)


def test_the_untouched_parts_are_those_of_the_template(addin, template):
    changed = {"xl/vbaProject.bin", "xl/workbook.xml", "xl/worksheets/sheet1.xml", "docProps/core.xml"}
    with zipfile.ZipFile(addin) as package:
        assert package.testzip() is None
        assert set(template.parts) == set(package.namelist())
        assert changed == {name for name in package.namelist() if package.read(name) != template.parts[name]}


def test_relationships_and_content_types_are_whole(addin):
    with zipfile.ZipFile(addin) as package:
        parts = {name: package.read(name) for name in package.namelist()}
    for name, data in parts.items():
        if name.endswith((".xml", ".rels")):
            ElementTree.fromstring(data)
    types = ElementTree.fromstring(parts["[Content_Types].xml"])
    overrides = {e.get("PartName"): e.get("ContentType") for e in types if e.tag.endswith("Override")}
    defaults = {e.get("Extension") for e in types if e.tag.endswith("Default")}
    assert {part.lstrip("/") for part in overrides} <= set(parts)
    for name in parts:
        assert "/" + name in overrides or name.rpartition(".")[2] in defaults or name == "[Content_Types].xml"
    assert overrides["/xl/workbook.xml"] == "application/vnd.ms-excel.addin.macroEnabled.main+xml"
    assert overrides["/xl/vbaProject.bin"] == "application/vnd.ms-office.vbaProject"
    relations = ElementTree.fromstring(parts["xl/_rels/workbook.xml.rels"])
    targets = {e.get("Id"): (e.get("Type").rpartition("/")[2], e.get("Target")) for e in relations}
    assert {f"xl/{target}" for _, target in targets.values()} <= set(parts)
    assert ("vbaProject", "vbaProject.bin") in targets.values()
    sheet = ElementTree.fromstring(parts["xl/workbook.xml"]).find(".//{*}sheet")
    (key,) = [value for name, value in sheet.attrib.items() if name.endswith("}id")]
    assert targets[key] == ("worksheet", "worksheets/sheet1.xml")
    assert sheet.get("name") == "xlaxial"


def test_the_add_in_forces_no_recalculation_and_carries_no_path_or_person(addin):
    with zipfile.ZipFile(addin) as package:
        workbook = package.read("xl/workbook.xml").decode()
        core = package.read("docProps/core.xml").decode()
    assert "fullCalcOnLoad" not in workbook
    assert "absPath" not in workbook
    assert re.findall(r"<(?:dc:creator|cp:lastModifiedBy)>([^<]*)", core) == ["xlaxial", "xlaxial"]


def test_the_same_input_gives_the_same_file(template, module):
    assert build(template, module, SETTINGS) == build(template, module, SETTINGS)


def test_other_files_are_no_add_in(tmp_path):
    other = tmp_path / "other.xlam"
    with pytest.raises(AddinError, match="cannot be read"):
        read_addin(other)
    other.write_bytes(b"no zip")
    with pytest.raises(AddinError, match="cannot be read"):
        read_addin(other)
    with zipfile.ZipFile(other, "w") as package:
        package.writestr("x", "y")
    with pytest.raises(AddinError, match="no add-in"):
        read_addin(other)
    with pytest.raises(AddinError, match="not a template"):
        read_template(other)
