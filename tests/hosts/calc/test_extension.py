"""The extension's files, without the office."""

from __future__ import annotations

import json
import re
import zipfile
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree as ET

import calc_functions

from xlaxial import __version__
from xlaxial.functions.registry import load
from xlaxial.hosts.calc.extension import Source, idl, kinds, pack, programmatic, write_extension

_IDL = """\
module org { module xlaxial { module calc {
interface XFunctions : com::sun::star::uno::XInterface {
  any axEcho( [in] com::sun::star::beans::XPropertySet document, [in] com::sun::star::table::XCellRange argument1, \
[in] com::sun::star::table::XCellRange argument2, [in] any argument3, [in] any argument4 );
  sequence< sequence< any > > axGrid( [in] com::sun::star::beans::XPropertySet document, \
[in] com::sun::star::table::XCellRange argument1, [in] any argument2 );
};
}; }; };
"""


def test_tables_are_ranges_and_what_may_be_left_out_is_of_any_type() -> None:
    assert idl(calc_functions.FUNCTIONS[:2]) == _IDL


def test_a_table_behind_an_optional_argument_of_another_kind_comes_by_its_value() -> None:
    """It stands where formulas often end, so that it must be possible to leave it off."""
    table, second, wanted, mark = calc_functions.FUNCTIONS[0].arguments
    assert kinds(replace(calc_functions.FUNCTIONS[0], arguments=(table, wanted, second))) == ("range", "cells", "table")
    required = replace(mark, optional=False)
    assert kinds(replace(calc_functions.FUNCTIONS[0], arguments=(required, second))) == ("value", "range")


def test_every_registered_function_is_declared_once() -> None:
    declared = re.findall(r"(\w+)\( \[in\]", idl(list(load().values())))
    assert declared == [programmatic(name) for name in load()]
    assert len(set(declared)) == len(declared)


def test_the_files_name_each_other(tmp_path: Path) -> None:
    folder = write_extension(tmp_path / "xlaxial", calc_functions.FUNCTIONS, Source("somewhere:caller", ("/a b/é",)))
    manifest = ET.parse(folder / "META-INF" / "manifest.xml").getroot()
    named = [entry.get("{http://openoffice.org/2001/manifest}full-path") for entry in manifest]
    assert [(folder / str(name)).is_file() for name in named] == [True, True]
    description = ET.parse(folder / "description.xml").getroot()
    space = "{http://openoffice.org/extensions/description/2006}"
    assert [description.find(space + tag).get("value") for tag in ("identifier", "version")] == [  # type: ignore[union-attr]
        "org.xlaxial.calc",
        __version__,
    ]
    config = json.loads((folder / "config.json").read_text(encoding="utf-8"))
    assert config["folders"] == ["/a b/é"]
    assert config["functions"]["axEcho"]["name"] == "AX_ECHO"
    told = [argument["kind"] for argument in config["functions"]["axEcho"]["arguments"]]
    assert told == ["range", "range", "cells", "value"]


def test_the_packed_file_holds_the_folder(tmp_path: Path) -> None:
    folder = write_extension(tmp_path / "xlaxial", calc_functions.FUNCTIONS, Source())
    with zipfile.ZipFile(pack(folder, tmp_path / "xlaxial.oxt")) as archive:
        assert {"META-INF/manifest.xml", "description.xml", "functions.idl", "config.json", "component.py"} <= set(
            archive.namelist()
        )


def test_writing_again_leaves_nothing_of_the_old_extension(tmp_path: Path) -> None:
    (tmp_path / "xlaxial").mkdir()
    (tmp_path / "xlaxial" / "old.py").write_text("")
    assert not (write_extension(tmp_path / "xlaxial", calc_functions.FUNCTIONS, Source()) / "old.py").exists()
