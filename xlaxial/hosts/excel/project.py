"""A VBA project: its modules read, and written with other source text.

Source: Microsoft Open Specifications, [MS-OVBA] 2.2 (streams) and 2.3.4.2 (the dir stream).
"""

from __future__ import annotations

import io
import struct
from collections.abc import Iterator, Mapping

from xlaxial.hosts.excel.compound import Path, write_compound
from xlaxial.hosts.excel.compression import compress, decompress

_PROJECT_NAME, _PROJECT_VERSION, _MODULE_NAME, _MODULE_STREAM, _MODULE_OFFSET = 0x04, 0x09, 0x19, 0x1A, 0x31
_CODE_PAGE = "cp1252"  # of the template; our own text is ASCII


class ProjectError(ValueError):
    """The bytes are no VBA project that can be taken."""


class Project:
    """A VBA project in a compound file.

    Parameters
    ----------
    data : bytes
        The part ``vbaProject.bin`` of a workbook.

    Raises
    ------
    ProjectError
        A stream is missing, or the project holds compiled code of some version, which would win over its text.
    ModuleNotFoundError
        The library olefile is not installed.
    """

    def __init__(self, data: bytes) -> None:
        import olefile  # type: ignore[import-untyped,import-not-found,unused-ignore]  # it ships no type information

        try:
            file = olefile.OleFileIO(io.BytesIO(data))
            self._streams: dict[Path, bytes] = {tuple(p): file.openstream(p).read() for p in file.listdir()}
            self._dir = decompress(self._streams["VBA", "dir"])
            version = self._streams["VBA", "_VBA_PROJECT"]
        except (OSError, KeyError, ValueError) as wrong:
            raise ProjectError(f"no VBA project ({wrong})") from None
        if version[2:4] != b"\xff\xff":
            raise ProjectError("the project holds compiled code of its own")

    def modules(self) -> dict[str, str]:
        """Return the source text of every module by its name."""
        found = {}
        for name, (stream, at, _) in self._offsets().items():
            text = decompress(self._streams["VBA", stream][at:])
            found[name] = text.decode(_CODE_PAGE).replace("\r\n", "\n")
        return found

    def replaced(self, texts: Mapping[str, str], name: str) -> bytes:
        """Return the project with another name and other text in some modules.

        Parameters
        ----------
        texts : mapping
            Source text by module; lines end with a line feed.
        name : str
            Name of the project.

        Raises
        ------
        ProjectError
            There is no such module.
        """
        offsets = self._offsets()
        directory = bytearray(self._dir)
        streams = dict(self._streams)
        for module, text in texts.items():
            if module not in offsets:
                raise ProjectError(f"the project has no module {module}")
            stream, _, record = offsets[module]
            streams["VBA", stream] = compress(text.replace("\n", "\r\n").encode(_CODE_PAGE))
            struct.pack_into("<I", directory, record, 0)
        at, size = next((at, size) for kind, at, size in _records(self._dir) if kind == _PROJECT_NAME)
        old = bytes(directory[at : at + size])
        directory[at - 4 : at + size] = struct.pack("<I", len(name)) + name.encode("ascii")
        streams["VBA", "dir"] = compress(bytes(directory))
        streams["PROJECT",] = self._streams["PROJECT",].replace(
            b'\r\nName="' + old + b'"', b'\r\nName="' + name.encode("ascii") + b'"'
        )
        return write_compound(streams)

    def _offsets(self) -> dict[str, tuple[str, int, int]]:
        """Return by module: its stream, where its text begins there, where the dir stream says so."""
        found: dict[str, tuple[str, int, int]] = {}
        module = stream = ""
        for kind, at, size in _records(self._dir):
            if kind == _MODULE_NAME:
                module = stream = self._dir[at : at + size].decode(_CODE_PAGE)
            elif kind == _MODULE_STREAM:
                stream = self._dir[at : at + size].decode(_CODE_PAGE)
            elif kind == _MODULE_OFFSET:
                found[module] = (stream, struct.unpack_from("<I", self._dir, at)[0], at)
        return found


def _records(directory: bytes) -> Iterator[tuple[int, int, int]]:
    """Yield kind, place and size of the records of a dir stream."""
    at = 0
    while at + 6 <= len(directory):
        kind, size = struct.unpack_from("<HI", directory, at)
        if kind == _PROJECT_VERSION:
            size = 6  # the size that stands there is of its first field only (2.3.4.2.1.11)
        yield kind, at + 6, size
        at += 6 + size
