"""The add-in file (.xlam): made from the template in the installed xlwings, with our module and our settings.

Nothing of xlwings' own VBA is left in it that a worksheet could call: its functions start any Python command that a
formula names, so a workbook from a stranger could.
"""

from __future__ import annotations

import io
import re
import zipfile
from dataclasses import dataclass
from importlib.util import find_spec
from pathlib import Path
from xml.sax.saxutils import escape

from xlaxial.hosts.excel.project import Project, ProjectError
from xlaxial.hosts.excel.vba import Names

FILE_NAME = "xlaxial.xlam"
SHEET = "xlaxial"
"""Name of the add-in's one sheet, which holds its settings."""

_TEMPLATE = "quickstart_addin.xlam"
_PROJECT, _WORKBOOK, _SHEET, _CORE = (
    "xl/vbaProject.bin",
    "xl/workbook.xml",
    "xl/worksheets/sheet1.xml",
    "docProps/core.xml",
)
_OURS, _THEIRS = "Module1", "xlwings"  # modules of the template
_LIBRARIES = {bits: re.compile(rf"xlwings{bits}-([\w.]+)\.dll") for bits in (64, 32)}
_WHEN = (2020, 1, 1, 0, 0, 0)  # one date for all parts: the same input gives the same file

_ROWS = ("Python", "Library folder", "xlaxial", "xlwings")


class AddinError(ValueError):
    """The add-in cannot be made or read; the text says why, in one line."""


@dataclass(frozen=True)
class Settings:
    """What the add-in's sheet holds."""

    python: str  # path of the interpreter without a console that runs the functions
    library_folder: str  # folder of xlwings' library (DLL)
    version: str  # of xlaxial
    xlwings: str  # version of xlwings


@dataclass(frozen=True)
class Template:
    """The template of the installed xlwings."""

    parts: dict[str, bytes]  # content by part of the zip, in its order
    project: Project
    xlwings: str  # version of xlwings
    library64: str  # file name of its library for 64-bit Excel
    library32: str  # file name of its library for 32-bit Excel
    notice: str  # xlwings' copyright notice, as VBA comments

    def names(self, version: str) -> Names:
        """Return what the module is made for."""
        return Names(version, self.xlwings, self.library64, self.library32)


def template_file() -> Path:
    """Return the template's path; raises `AddinError` where xlwings is not installed."""
    spec = find_spec("xlwings")
    if spec is None or spec.origin is None:
        raise AddinError("xlwings is not installed; run 'pip install xlwings'")
    return Path(spec.origin).with_name(_TEMPLATE)


def read_template(path: Path | None = None) -> Template:
    """Read the template.

    Parameters
    ----------
    path : pathlib.Path, optional
        The file; that of the installed xlwings where left out.

    Raises
    ------
    AddinError
        The file is missing, or is not as the supported versions of xlwings have it.
    """
    path = path or template_file()
    parts = _parts(path)
    try:
        project = Project(parts[_PROJECT])
    except (KeyError, ProjectError) as wrong:
        raise AddinError(f"{path.name}: not a template of a supported xlwings ({wrong})") from None
    modules = project.modules()
    theirs = modules.get(_THEIRS, "")
    found = {bits: pattern.search(theirs) for bits, pattern in _LIBRARIES.items()}
    if found[64] is None or found[32] is None or _OURS not in modules or "XLPyDLLActivateAuto" not in theirs:
        raise AddinError(f"{path.name}: not a template of a supported xlwings (its VBA modules are others)")
    return Template(parts, project, found[64][1], found[64][0], found[32][0], _notice(theirs))


def _notice(text: str) -> str:
    """Return the first block of comments that holds the copyright."""
    lines = text.split("\n")
    first = next((n for n, line in enumerate(lines) if "license" in line.lower() and line.startswith("'")), 0)
    last = first
    while last < len(lines) and (lines[last].startswith("'") or not lines[last].strip()):
        last += 1
    return "\n".join(lines[first:last]).strip()


def build(template: Template, module: str, settings: Settings) -> bytes:
    """Return the add-in file.

    Parameters
    ----------
    template : Template
        See `read_template`.
    module : str
        Source text of our module, from `xlaxial.hosts.excel.vba.module_text`.
    settings : Settings
        What its sheet is to hold.

    Raises
    ------
    AddinError
        The template is not as expected.
    """
    theirs = (
        f'Attribute VB_Name = "{_THEIRS}"\nOption Private Module\n'
        "' This project was made from a template of xlwings; what the module held is not needed here.\n'\n"
        f"{template.notice}\n"
    )
    parts = dict(template.parts)
    try:
        parts[_PROJECT] = template.project.replaced({_OURS: module, _THEIRS: theirs}, SHEET)
        parts[_WORKBOOK] = _workbook(parts[_WORKBOOK].decode("utf-8")).encode("utf-8")
        parts[_SHEET] = _sheet(parts[_SHEET].decode("utf-8"), settings).encode("utf-8")
        parts[_CORE] = _without_people(parts[_CORE].decode("utf-8")).encode("utf-8")
    except KeyError as missing:
        raise AddinError(f"the template has no part {missing}") from None
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as package:
        for name in sorted(parts, key=lambda name: (name != "[Content_Types].xml", name != "_rels/.rels")):
            package.writestr(zipfile.ZipInfo(name, _WHEN), parts[name], zipfile.ZIP_DEFLATED)
    return out.getvalue()


def _one(pattern: str, new: str, text: str) -> str:
    changed, count = re.subn(pattern, lambda _: new, text, flags=re.DOTALL)
    if count != 1:
        raise AddinError(f"the template's XML is not as expected ({pattern})")
    return changed


def _workbook(text: str) -> str:
    text = _one(r'(?<=<sheet name=")[^"]*(?=")', SHEET, text)
    text = _one(r"<calcPr[^>]*/>", "<calcPr />", text)  # its fullCalcOnLoad would recalculate all that is open
    text = re.sub(r"<definedNames\s*/>", "", text)  # the schema wants at least one name in it
    return re.sub(r"<mc:AlternateContent[^>]*>.*?</mc:AlternateContent>", "", text, flags=re.DOTALL)  # a path


def _sheet(text: str, settings: Settings) -> str:
    values = (settings.python, settings.library_folder, settings.version, settings.xlwings)
    rows = "".join(
        f'<row r="{n}">{_cell(f"A{n}", key)}{_cell(f"B{n}", value)}</row>'
        for n, (key, value) in enumerate(zip(_ROWS, values, strict=True), 1)
    )
    text = _one(r"<sheetData>.*</sheetData>", f"<sheetData>{rows}</sheetData>", text)
    return _one(r'<dimension ref="[^"]*"\s*/>', f'<dimension ref="A1:B{len(_ROWS)}" />', text)


def _cell(place: str, text: str) -> str:
    return f'<c r="{place}" t="inlineStr"><is><t xml:space="preserve">{escape(text)}</t></is></c>'


def _without_people(text: str) -> str:
    return re.sub(r"(<(dc:creator|cp:lastModifiedBy)>)[^<]*", r"\1xlaxial", text)


def _parts(path: Path) -> dict[str, bytes]:
    try:
        with zipfile.ZipFile(path) as package:
            return {info.filename: package.read(info) for info in package.infolist()}
    except (OSError, zipfile.BadZipFile) as wrong:
        raise AddinError(f"{path}: cannot be read ({wrong})") from None


def read_addin(path: Path) -> tuple[str, Settings]:
    """Return the source text of our module in an add-in file, and its settings.

    Raises
    ------
    AddinError
        The file is missing, or none of ours.
    """
    parts = _parts(path)
    try:
        module = Project(parts[_PROJECT]).modules()[_OURS]
        cells = re.findall(r"<t[^>]*>([^<]*)</t>", parts[_SHEET].decode("utf-8"))
    except (KeyError, ValueError) as wrong:
        raise AddinError(f"{path.name}: is no add-in of xlaxial ({wrong})") from None
    if tuple(cells[::2]) != _ROWS:
        raise AddinError(f"{path.name}: is no add-in of xlaxial")
    values = [text.replace("&lt;", "<").replace("&gt;", ">").replace("&amp;", "&") for text in cells[1::2]]
    return module, Settings(*values)
