"""The extension as a folder: made from the functions, needing no SDK and no compiled file."""

from __future__ import annotations

import json
import shutil
import sys
import zipfile
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from importlib.util import find_spec
from pathlib import Path
from xml.etree import ElementTree as ET

from xlaxial import __version__
from xlaxial.functions.registry import Argument, Function

IDENTIFIER = "org.xlaxial.calc"
OFFICE_LEAST = (25, 2)
PYTHON_LEAST = (3, 10)
REQUIRES = ("numpy", "scipy", "pint")

_COMPONENT = "component.py"
_TYPES = "functions.idl"
_MANIFEST = "http://openoffice.org/2001/manifest"
_DESCRIPTION = "http://openoffice.org/extensions/description/2006"
_OFFICE = "http://libreoffice.org/extensions/description/2011"
_UNO = "application/vnd.sun.star.uno-"


@dataclass(frozen=True)
class Source:
    """Where an extension's component finds the code behind its functions."""

    caller: str = "xlaxial.functions.call:caller"  # "module:attribute"; takes a function's name, returns its callable
    folders: tuple[str, ...] = ()  # folders with Python packages, put before the office's own
    requires: tuple[str, ...] = REQUIRES  # modules that must load before any function is called
    python: tuple[int, int] = sys.version_info[:2]  # version of Python for which the packages are installed


def package_folders(packages: Iterable[str] = ("xlaxial", *REQUIRES)) -> tuple[str, ...]:
    """Return the folders from which this Python takes packages, first the ones that hold the named packages."""
    found: list[str] = []
    for package in packages:
        spec = find_spec(package)
        if spec is not None and spec.origin:
            found.append(str(Path(spec.origin).resolve().parents[1]))
    found += [folder for folder in sys.path if Path(folder).name in ("site-packages", "dist-packages")]
    return tuple(dict.fromkeys(found))


def write_extension(folder: Path, functions: Sequence[Function], source: Source, identifier: str = IDENTIFIER) -> Path:
    """Write an extension into a folder, in place of what stood there.

    Parameters
    ----------
    folder : pathlib.Path
        The extension's own folder; made anew.
    functions : sequence of Function
        The worksheet functions.
    source : Source
        Where their code is found when the office calls them.
    identifier : str
        Name of the extension, also of its UNO module: lower-case words parted by points.

    Returns
    -------
    pathlib.Path
        The folder.
    """
    shutil.rmtree(folder, ignore_errors=True)
    (folder / "META-INF").mkdir(parents=True)
    _write_xml(folder / "META-INF" / "manifest.xml", _manifest(), _MANIFEST)
    _write_xml(folder / "description.xml", _description(identifier), _DESCRIPTION)
    (folder / _TYPES).write_text(idl(functions, identifier), encoding="ascii")
    config = json.dumps(_config(functions, source, identifier), indent=1)
    (folder / "config.json").write_text(config + "\n", encoding="utf-8")
    shutil.copyfile(Path(__file__).parent / "template" / _COMPONENT, folder / _COMPONENT)
    return folder


def pack(folder: Path, file: Path) -> Path:
    """Pack an extension's folder into the one file that the office's extension manager takes."""
    with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED) as archive:
        for path in sorted(folder.rglob("*")):
            archive.write(path, path.relative_to(folder).as_posix())
    return file


def programmatic(name: str) -> str:
    """Return a function's name as a UNO method: AX_SEGMENTS is axSegments."""
    first, *others = name.lower().split("_")
    return first + "".join(word.capitalize() for word in others)


def idl(functions: Sequence[Function], identifier: str = IDENTIFIER) -> str:
    """Return the interface of the functions in UNO's interface language.

    A table is declared as a range of cells (see `kinds`): the function is then called in spite of error cells, and
    knows where the range stands. Every other argument is of any type, because only such a one may be left off the end.
    """
    modules = identifier.split(".")
    lines = [
        "".join(f"module {module} {{ " for module in modules).rstrip(),
        "interface XFunctions : com::sun::star::uno::XInterface {",
    ]
    for function in functions:
        result = "any" if function.shape == "cell" else "sequence< sequence< any > >"
        arguments = ["[in] com::sun::star::beans::XPropertySet document"]
        types = ["com::sun::star::table::XCellRange" if kind == "range" else "any" for kind in kinds(function)]
        arguments += [f"[in] {kind} argument{n}" for n, kind in enumerate(types, 1)]
        lines.append(f"  {result} {programmatic(function.name)}( {', '.join(arguments)} );")
    return "\n".join([*lines, "};", "}; " * len(modules)]).rstrip() + "\n"


def kinds(function: Function) -> tuple[str, ...]:
    """Return how each argument of a function reaches it: "range" (a place in a sheet), or its own kind (by value).

    A table is a range where everything before it is required or a table too. Such an optional table may be left empty,
    but its separator has to stand: ``=AX_REACTIONS(A1:F4, H1:J3, )``. In return an error cell in it fails its member
    only, and a number that became a date is recognised. By value Calc would refuse the whole call for an error cell,
    and hand a date over as a plain number.
    """
    found: list[str] = []
    for argument in function.arguments:
        leading = all(
            kind == "range" or not before.optional for kind, before in zip(found, function.arguments, strict=False)
        )
        found.append("range" if argument.kind == "table" and leading else argument.kind)
    return tuple(found)


def help_text(function: Function) -> str:
    """Return what the function wizard says of a function; the end is cut off on the page where arguments are entered."""
    return f"{function.summary} Example: {function.example} {function.returns}".rstrip()


def argument_help(argument: Argument, kind: str) -> str:
    """Return what the function wizard says of an argument."""
    if argument.optional and kind == "range":
        return f"{argument.help} May be empty, but its separator must stand."
    return argument.help


def _config(functions: Sequence[Function], source: Source, identifier: str) -> dict[str, object]:
    return {
        "package": "xlaxial",
        "interface": f"{identifier}.XFunctions",
        "implementation": f"{identifier}.AddIn",
        "dispatch": "xlaxial.hosts.calc.dispatch",
        "remedy": "xlaxial calc install",
        "caller": source.caller,
        "folders": list(source.folders),
        "requires": list(source.requires),
        "python": list(source.python),
        "python_least": list(PYTHON_LEAST),
        "functions": {
            programmatic(function.name): {
                "name": function.name,
                "help": help_text(function),
                "shape": function.shape,
                "arguments": [
                    {"name": argument.name, "help": argument_help(argument, kind), "kind": kind}
                    for argument, kind in zip(function.arguments, kinds(function), strict=True)
                ],
            }
            for function in functions
        },
    }


def _manifest() -> ET.Element:
    root = ET.Element(f"{{{_MANIFEST}}}manifest")
    for path, kind in ((_TYPES, "typelibrary;type=RDB"), (_COMPONENT, "component;type=Python")):
        entry = {f"{{{_MANIFEST}}}full-path": path, f"{{{_MANIFEST}}}media-type": _UNO + kind}
        ET.SubElement(root, f"{{{_MANIFEST}}}file-entry", entry)
    return root


def _description(identifier: str) -> ET.Element:
    least = ".".join(map(str, OFFICE_LEAST))
    root = ET.Element(f"{{{_DESCRIPTION}}}description")
    ET.SubElement(root, f"{{{_DESCRIPTION}}}identifier", value=identifier)
    ET.SubElement(root, f"{{{_DESCRIPTION}}}version", value=__version__)
    needs = ET.SubElement(root, f"{{{_DESCRIPTION}}}dependencies")
    office = {"value": least, f"{{{_DESCRIPTION}}}name": f"LibreOffice {least}"}
    ET.SubElement(needs, f"{{{_OFFICE}}}LibreOffice-minimal-version", office)
    name = ET.SubElement(ET.SubElement(root, f"{{{_DESCRIPTION}}}display-name"), f"{{{_DESCRIPTION}}}name", lang="en")
    name.text = "xlaxial: restrained axial members"
    return root


def _write_xml(path: Path, root: ET.Element, namespace: str) -> None:
    prefix = "manifest" if namespace == _MANIFEST else "d"
    ET.register_namespace(prefix, namespace)
    ET.register_namespace("l", _OFFICE)
    ET.ElementTree(root).write(path, encoding="UTF-8", xml_declaration=True)
