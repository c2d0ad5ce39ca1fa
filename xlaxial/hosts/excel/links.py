"""The add-in's path in a workbook's formulas: found, removed, or led elsewhere.

Excel stores the formula of an add-in as ``[1]!AX_...`` with a link part that holds the add-in's path: the formula fails
wherever the add-in stands elsewhere. The plain name works in every host.
"""

from __future__ import annotations

import copy
import os
import posixpath
import re
import shutil
import tempfile
import zipfile
from collections.abc import Collection, Mapping
from dataclasses import dataclass, field
from pathlib import Path
from xml.sax.saxutils import quoteattr

from xlaxial.hosts.excel.addin import FILE_NAME
from xlaxial.hosts.excel.formulas import Call, Reference, elements, named_links
from xlaxial.hosts.headless.errors import WorkbookError
from xlaxial.hosts.headless.package import read_part

TYPES, _ROOT = "[Content_Types].xml", "_rels/.rels"
_PATH_TYPE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/externalLinkPath"
_STARTUP_TYPE = "http://schemas.microsoft.com/office/2006/relationships/xlExternalLinkPath/xlStartup"
# Formulas outside the elements that are known: in attributes of shapes and controls, and in old drawings.
_ELSEWHERE = re.compile(rb'(?:macro|textlink|fmla\w*|ref)="[^"<>]*?\[(\d+)\]|<x:Fmla\w+>[^<]*?\[(\d+)\]', re.IGNORECASE)

Edits = list[tuple[int, int, bytes]]


@dataclass(frozen=True)
class Link:
    """A link to another file."""

    number: int  # as formulas name it, from 1
    relation: str  # its id among the workbook's relations
    part: str  # name of its part in the zip
    target: str  # path of the other file; empty where it has none


@dataclass
class Workbook:
    """What of a workbook has to do with links."""

    main: str  # name of the workbook's own part
    links: list[Link]
    calls: dict[str, list[Call]] = field(default_factory=dict)  # our calls with a prefix, by part
    references: dict[str, list[Reference]] = field(default_factory=dict)  # other namings of links, by part
    fixed: set[int] = field(default_factory=set)  # links named where no number can be changed

    def ours(self) -> set[int]:
        """Return the numbers of links to the add-in."""
        named = {number for calls in self.calls.values() for call in calls for number in call.links}
        named |= {link.number for link in self.links if _base(link.target) == FILE_NAME}
        return named & {link.number for link in self.links if link.part}

    def used(self) -> set[int]:
        """Return the numbers of links that anything but our calls names."""
        return self.fixed | {r.link for found in self.references.values() for r in found}


def _base(target: str) -> str:
    return re.split(r"[\\/]", target)[-1].lower()


def read_links(package: zipfile.ZipFile, functions: Collection[str]) -> Workbook:
    """Look through a workbook.

    Parameters
    ----------
    package : zipfile.ZipFile
        The workbook.
    functions : collection of str
        Names of our functions, in upper case.
    """
    parts = package.namelist()
    main = next(
        (r["Target"].lstrip("/") for r in _relations(package, _ROOT) if r["Type"].endswith("/officeDocument")), ""
    )
    if not main.endswith(".xml"):
        raise WorkbookError("is no .xlsx or .xlsm workbook")
    targets = {r["Id"]: _resolved(main, r["Target"]) for r in _relations(package, _relations_of(main))}
    book = Workbook(main, [])
    for number, (*_, attributes) in enumerate(elements(read_part(package, main), {"externalReference"}), 1):
        relation = next((value for key, value in attributes.items() if key.rpartition(":")[2] == "id"), "")
        part = targets.get(relation, "")
        outside = [r for r in _relations(package, _relations_of(part)) if r.get("TargetMode") == "External"]
        book.links.append(Link(number, relation, part, outside[0]["Target"] if outside else ""))
    for part in parts:
        if not part.endswith((".xml", ".vml")) or "externalLinks/" in part or part == TYPES:
            continue
        data = read_part(package, part)
        if part.endswith(".xml") and not part.endswith(("sharedStrings.xml", "styles.xml")):
            calls, references = named_links(data, functions)
            if calls:
                book.calls[part] = calls
            if references:
                book.references[part] = references
        book.fixed |= {int(a or b) for a, b in _ELSEWHERE.findall(data)}
    return book


def _relations_of(part: str) -> str:
    folder, base = posixpath.split(part)
    return posixpath.join(folder, "_rels", base + ".rels")


def _relations(package: zipfile.ZipFile, part: str) -> list[dict[str, str]]:
    if part not in package.namelist():
        return []
    found = [attributes for *_, attributes in elements(read_part(package, part), {"Relationship"})]
    return [attributes for attributes in found if {"Id", "Type", "Target"} <= attributes.keys()]


def _resolved(main: str, target: str) -> str:
    if target.startswith("/"):
        return target.lstrip("/")
    return posixpath.normpath(posixpath.join(posixpath.dirname(main), target))


def plain(package: zipfile.ZipFile, book: Workbook) -> tuple[dict[str, bytes], set[str]]:
    """Take every prefix from our calls, and the links that nothing else needs.

    Returns
    -------
    dict
        New content by part.
    set of str
        Parts to leave out.
    """
    gone = {n for n in book.ours() if n not in book.used()}
    if any(number > min(gone, default=0) for number in book.fixed if gone):
        gone = {n for n in gone if n > max(book.fixed)}  # numbers behind a removed link move down, which those cannot
    changed: dict[str, bytes] = {}
    for part in book.calls.keys() | book.references.keys():
        edits: Edits = [(call.start, call.end, b"") for call in book.calls.get(part, [])]
        for reference in book.references.get(part, []):
            below = sum(number < reference.link for number in gone)
            if below:
                edits.append((reference.start, reference.end, str(reference.link - below).encode()))
        if edits:
            changed[part] = _edited(read_part(package, part), edits)
    if not gone:
        return changed, set()
    links = [link for link in book.links if link.number in gone]
    dropped = {part for link in links for part in (link.part, _relations_of(link.part))} & set(package.namelist())
    main = changed.get(book.main, read_part(package, book.main))
    changed[book.main] = _without_references(main, gone)
    relations = _relations_of(book.main)
    ids = {link.relation for link in links}
    changed[relations] = _without(read_part(package, relations), "Relationship", "Id", ids)
    names = {"/" + link.part for link in links}
    changed[TYPES] = _without(read_part(package, TYPES), "Override", "PartName", names)
    return changed, dropped


def _without_references(data: bytes, gone: set[int]) -> bytes:
    found = elements(data, {"externalReference"})
    if len(found) == len(gone):
        start, _, _, end, _ = elements(data, {"externalReferences"})[0]
        return data[:start] + data[end:]
    return _edited(data, [(e[0], e[3], b"") for number, e in enumerate(found, 1) if number in gone])


def _without(data: bytes, name: str, attribute: str, values: set[str]) -> bytes:
    return _edited(data, [(e[0], e[3], b"") for e in elements(data, {name}) if e[4].get(attribute) in values])


def _edited(data: bytes, edits: Edits) -> bytes:
    out, at = [], 0
    for start, end, new in sorted(edits):
        out += [data[at:start], new]
        at = end
    return b"".join([*out, data[at:]])


def moved(package: zipfile.ZipFile, book: Workbook, addin: str) -> dict[str, bytes]:
    """Let the links to the add-in lead to another path; calls with another prefix become plain.

    Parameters
    ----------
    package, book
        The workbook.
    addin : str
        Path of the add-in; a bare file name means that it stands in Excel's startup folder, whoever the user is.

    Returns
    -------
    dict
        New content by part.
    """
    ours = book.ours()
    changed: dict[str, bytes] = {}
    for part, calls in book.calls.items():
        edits: Edits = [(call.start, call.end, b"") for call in calls if not _is_link(call, ours)]
        if edits:
            changed[part] = _edited(read_part(package, part), edits)
    bare = not re.search(r"[\\/]", addin)
    kind, target = (_STARTUP_TYPE, addin) if bare else (_PATH_TYPE, "file:///" + addin.removeprefix("file:///"))
    target = target.replace(" ", "%20")
    for link in book.links:
        if link.number not in ours:
            continue
        relations = _relations_of(link.part)
        data = read_part(package, relations)
        edits = []
        for start, text, _, _, attributes in elements(data, {"Relationship"}):
            if attributes.get("TargetMode") != "External" or attributes.get("Target") == target:
                continue
            tag = data[start:text]
            tag = _with_attribute(_with_attribute(tag, "Type", kind), "Target", target)
            edits.append((start, text, tag))
        if edits:
            changed[relations] = _edited(data, edits)
    return changed


def _is_link(call: Call, ours: set[int]) -> bool:
    return len(call.links) == 1 and call.prefix == f"[{call.links[0]}]!" and call.links[0] in ours


def _with_attribute(tag: bytes, name: str, value: str) -> bytes:
    pattern = rb"(\s" + name.encode() + rb"\s*=\s*)(\"[^\"]*\"|'[^']*')"
    return re.sub(pattern, lambda found: found[1] + quoteattr(value).encode("utf-8"), tag, count=1)


def rewrite(path: Path, package: zipfile.ZipFile, changed: Mapping[str, bytes], dropped: Collection[str]) -> None:
    """Write a workbook anew with some parts changed or left out; the old or the new file is whole at any time.

    Raises
    ------
    WorkbookError
        It is open in a spreadsheet program, or cannot be written; it is then as it was.
    """
    if path.with_name("~$" + path.name).exists():
        raise WorkbookError(f"{path.name}: is open in a spreadsheet program; close it first")
    temporary: Path | None = None
    try:
        handle, name = tempfile.mkstemp(prefix=".xlaxial-", suffix=".tmp", dir=path.parent)
        temporary = Path(name)
        with os.fdopen(handle, "w+b") as file:
            with zipfile.ZipFile(file, "w") as out:
                out.comment = package.comment
                for info in package.infolist():
                    if info.filename not in dropped:
                        data = changed.get(info.filename)
                        out.writestr(copy.copy(info), read_part(package, info.filename) if data is None else data)
            file.flush()
            os.fsync(file.fileno())
        with zipfile.ZipFile(temporary) as check:
            if check.testzip() is not None:
                raise WorkbookError(f"{path.name}: what was written does not read back")
        package.close()  # Windows replaces no file that is open
        shutil.copymode(path, temporary)
        shutil.copy2(path, _backup(path))
        temporary.replace(path)
    except OSError as wrong:
        raise WorkbookError(f"{path.name}: cannot be written ({wrong.strerror})") from None
    finally:
        if temporary is not None:
            temporary.unlink(missing_ok=True)


def _backup(path: Path) -> Path:
    names = (path.with_name(f"{path.stem}.backup{n}{path.suffix}") for n in ("", *(f"-{i}" for i in range(2, 1000))))
    return next(name for name in names if not name.exists())
