"""The zip behind a workbook: opened with limits, its sheets' parts found, entity declarations refused."""

from __future__ import annotations

import posixpath
import xml.parsers.expat
import zipfile
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from xlaxial.hosts.headless.errors import WorkbookError

_COMPOUND_FILE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_MOST_BYTES = 1 << 30  # unpacked, all parts together
_MOST_RATIO = 400  # unpacked over packed, of a part above a megabyte
_MOST_PARTS = 20_000
_STRICT = "purl.oclc.org/ooxml"  # in the namespaces of ISO/IEC 29500 strict files
_SHEET_TYPE = "/worksheet"


@dataclass(frozen=True)
class SheetPart:
    """One worksheet of a workbook."""

    name: str  # as on its tab
    part: str  # name of the part in the zip
    dynamic: frozenset[str]  # cells whose array formula spills by itself (cm in the XML)


def open_package(path: Path) -> zipfile.ZipFile:
    """Open a workbook's zip.

    Raises
    ------
    WorkbookError
        The file is missing, no workbook, encrypted, of the old binary kind, damaged or beyond the limits.
    """
    try:
        with path.open("rb") as file:
            head = file.read(8)
    except OSError as wrong:
        raise WorkbookError(f"{path.name}: cannot be read ({wrong.strerror})") from None
    if head.startswith(_COMPOUND_FILE):
        raise WorkbookError(f"{path.name}: is encrypted or an old .xls; save it as .xlsx without a password")
    try:
        package = zipfile.ZipFile(path)
        infos = package.infolist()
        names = {info.filename for info in infos}
    except (zipfile.BadZipFile, OSError, ValueError, NotImplementedError):
        raise WorkbookError(f"{path.name}: is not a workbook, or is damaged") from None
    fault = ""
    if len(infos) > _MOST_PARTS or sum(info.file_size for info in infos) > _MOST_BYTES:
        fault = f"unpacks to more than the limits of {_MOST_PARTS} parts and 1 GiB"
    elif any(i.file_size > 1 << 20 and i.file_size > _MOST_RATIO * max(i.compress_size, 1) for i in infos):
        fault = f"a part unpacks to more than {_MOST_RATIO} times its size"
    elif "[Content_Types].xml" not in names:
        fault = "is no workbook (no content types)"
    if fault:
        package.close()
        raise WorkbookError(f"{path.name}: {fault}")
    return package


def read_part(package: zipfile.ZipFile, name: str) -> bytes:
    """Return a part's bytes; raises WorkbookError where it is missing or damaged."""
    try:
        return package.read(name)
    except KeyError:
        raise WorkbookError(f"the part {name} is missing") from None
    except (zipfile.BadZipFile, OSError, ValueError, NotImplementedError, RuntimeError, EOFError) as wrong:
        raise WorkbookError(f"the part {name} is damaged ({type(wrong).__name__})") from None
    except Exception as wrong:
        if type(wrong).__module__ == "zlib":
            raise WorkbookError(f"the part {name} is damaged") from None
        raise


def scan(
    data: bytes,
    start: Callable[[str, dict[str, str], int], None],
    end: Callable[[str, int], None] | None = None,
) -> None:
    """Walk an XML part; the handlers get names without prefix and the byte offset of the tag.

    Raises
    ------
    WorkbookError
        The XML is not well formed, or declares entities.
    """
    parser = xml.parsers.expat.ParserCreate()
    parser.buffer_text = True

    def refuse(*_: object) -> None:
        raise WorkbookError("the XML declares entities, which are refused")

    parser.EntityDeclHandler = refuse
    parser.StartElementHandler = lambda name, attributes: start(
        name.rpartition(":")[2], attributes, parser.CurrentByteIndex
    )
    if end is not None:
        parser.EndElementHandler = lambda name: end(name.rpartition(":")[2], parser.CurrentByteIndex)
    try:
        parser.Parse(data, True)
    except xml.parsers.expat.ExpatError as wrong:
        raise WorkbookError(f"the XML is not well formed ({wrong})") from None


def refuse_entities(package: zipfile.ZipFile) -> None:
    """Refuse a workbook one of whose XML parts declares entities (before any other reader sees it)."""
    for info in package.infolist():
        if info.filename.endswith((".xml", ".rels", ".vml")) and b"<!ENTITY" in read_part(package, info.filename):
            raise WorkbookError(f"{info.filename} declares entities, which are refused")


def sheet_parts(package: zipfile.ZipFile) -> list[SheetPart]:
    """Find the worksheets of a workbook, in the order of their tabs."""
    workbook = _workbook_part(package)
    relations: dict[str, tuple[str, str]] = {}
    folder, base = posixpath.split(workbook)

    def relation(name: str, attributes: dict[str, str], _: int) -> None:
        if name == "Relationship" and attributes.get("TargetMode") != "External":
            relations[attributes.get("Id", "")] = (attributes.get("Type", ""), attributes.get("Target", ""))

    scan(read_part(package, posixpath.join(folder, "_rels", base + ".rels")), relation)
    found: list[tuple[str, str]] = []

    def sheet(name: str, attributes: dict[str, str], _: int) -> None:
        if name == "workbook" and any(_STRICT in value for value in attributes.values()):
            raise WorkbookError("is in the strict variant of the format; save it as an ordinary .xlsx")
        if name != "sheet":
            return
        key = next((v for k, v in attributes.items() if k.rpartition(":")[2] == "id"), "")
        kind, target = relations.get(key, ("", ""))
        if kind.endswith(_SHEET_TYPE):
            part = target.lstrip("/") if target.startswith("/") else posixpath.normpath(posixpath.join(folder, target))
            found.append((attributes.get("name", ""), part))

    scan(read_part(package, workbook), sheet)
    return [SheetPart(name, part, _dynamic_cells(read_part(package, part))) for name, part in found]


def _workbook_part(package: zipfile.ZipFile) -> str:
    parts: list[str] = []

    def relation(name: str, attributes: dict[str, str], _: int) -> None:
        if name == "Relationship" and attributes.get("Type", "").endswith("/officeDocument"):
            parts.append(attributes.get("Target", "").lstrip("/"))

    scan(read_part(package, "_rels/.rels"), relation)
    if not parts:
        raise WorkbookError("the file holds no workbook part")
    return parts[0]


def _dynamic_cells(data: bytes) -> frozenset[str]:
    if b" cm=" not in data:
        return frozenset()
    cells: set[str] = set()

    def start(name: str, attributes: dict[str, str], _: int) -> None:
        if name == "c" and attributes.get("cm", "0") != "0" and "r" in attributes:
            cells.add(attributes["r"])

    scan(data, start)
    return frozenset(cells)
