"""Writes a compound file, the container of a VBA project; olefile, which reads them, cannot change a stream's size.

Source: Microsoft Open Specifications, [MS-CFB] Compound File Binary File Format, version 3 (sectors of 512 bytes).
"""

from __future__ import annotations

import struct
from collections.abc import Mapping
from dataclasses import dataclass, field

Path = tuple[str, ...]
"""Names from the root down: ("VBA", "dir")."""

_SECTOR, _MINI, _CUTOFF = 512, 64, 4096  # bytes; streams shorter than the cutoff stand in the mini stream
_FREE, _END, _FAT = 0xFFFFFFFF, 0xFFFFFFFE, 0xFFFFFFFD
_STORAGE, _STREAM, _ROOT = 1, 2, 5
_HEADER_FATS = 109  # entries of the header's own list of allocation sectors


@dataclass
class _Entry:
    name: str
    kind: int
    data: bytes = b""
    children: list[int] = field(default_factory=list)
    left: int = _FREE
    right: int = _FREE
    child: int = _FREE
    start: int = _END
    size: int = 0


def write_compound(streams: Mapping[Path, bytes]) -> bytes:
    """Return a compound file that holds some streams.

    Parameters
    ----------
    streams : mapping
        Content by path; the storages on the way are made.

    Raises
    ------
    ValueError
        A name is longer than 31 characters, or the file would exceed the header's own allocation list (7 MB).
    """
    entries = _directory(streams)
    sectors = _Sectors()
    mini = bytearray()
    mini_fat: list[int] = []
    for entry in entries[1:]:
        if not entry.data:
            continue
        if entry.size >= _CUTOFF:
            entry.start = sectors.add(entry.data)
            continue
        entry.start = len(mini_fat)
        count = -(-entry.size // _MINI)
        mini_fat += [entry.start + n + 1 for n in range(count - 1)] + [_END]
        mini += entry.data.ljust(count * _MINI, b"\0")
    entries[0].start, entries[0].size = sectors.add(bytes(mini)), len(mini)
    mini_fat_count = -(-len(mini_fat) * 4 // _SECTOR)
    packed_mini_fat = struct.pack(f"<{len(mini_fat)}I", *mini_fat).ljust(mini_fat_count * _SECTOR, b"\xff")
    mini_fat_start = sectors.add(packed_mini_fat)
    directory_start = sectors.add(_packed_directory(entries))
    fat_sectors, fat = sectors.table()
    header = struct.pack(
        "<8s16x5H6x9I",
        b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1",
        0x003E,  # minor version
        3,  # major version
        0xFFFE,  # byte order
        9,  # sector size 2**9
        6,  # mini sector size 2**6
        0,
        len(fat_sectors),
        directory_start,
        0,
        _CUTOFF,
        mini_fat_start,
        mini_fat_count,
        _END,  # no further list of allocation sectors
        0,
    )
    listed = fat_sectors + [_FREE] * (_HEADER_FATS - len(fat_sectors))
    return header + struct.pack(f"<{_HEADER_FATS}I", *listed) + b"".join(sectors.data) + fat


class _Sectors:
    """Sectors in the order of the file, and the chain that joins those of one stream."""

    def __init__(self) -> None:
        self.data: list[bytes] = []
        self._next: list[int] = []

    def add(self, data: bytes) -> int:
        """Append a stream; return the number of its first sector, or the end mark where it is empty."""
        if not data:
            return _END
        first = len(self.data)
        for at in range(0, len(data), _SECTOR):
            self.data.append(data[at : at + _SECTOR].ljust(_SECTOR, b"\0"))
            self._next.append(len(self.data))
        self._next[-1] = _END
        return first

    def table(self) -> tuple[list[int], bytes]:
        """Return the numbers of the sectors that hold the allocation table, and the table."""
        per = _SECTOR // 4
        count = 1
        while count * per < len(self.data) + count:
            count += 1
        if count > _HEADER_FATS:
            raise ValueError("the compound file would be too large")
        numbers = list(range(len(self.data), len(self.data) + count))
        chain = self._next + [_FAT] * count
        chain += [_FREE] * (count * per - len(chain))
        return numbers, struct.pack(f"<{len(chain)}I", *chain)


def _directory(streams: Mapping[Path, bytes]) -> list[_Entry]:
    entries = [_Entry("Root Entry", _ROOT)]
    storages: dict[Path, int] = {(): 0}
    for path, data in streams.items():
        for depth in range(1, len(path)):
            here = path[:depth]
            if here not in storages:
                storages[here] = len(entries)
                entries[storages[here[:-1]]].children.append(len(entries))
                entries.append(_Entry(here[-1], _STORAGE, start=0))
        entries[storages[path[:-1]]].children.append(len(entries))
        entries.append(_Entry(path[-1], _STREAM, data, size=len(data)))
    for entry in entries:
        if len(entry.name) > 31:
            raise ValueError(f"{entry.name}: the name is longer than 31 characters")
        ordered = sorted(entry.children, key=lambda n: (len(entries[n].name), entries[n].name.upper()))
        entry.child = _tree(entries, ordered)
    return entries


def _tree(entries: list[_Entry], ordered: list[int]) -> int:
    """Make siblings a binary search tree, every node black (2.6.4 allows it); return its root."""
    if not ordered:
        return _FREE
    middle = len(ordered) // 2
    entry = entries[ordered[middle]]
    entry.left, entry.right = _tree(entries, ordered[:middle]), _tree(entries, ordered[middle + 1 :])
    return ordered[middle]


def _packed_directory(entries: list[_Entry]) -> bytes:
    packed = []
    for entry in entries:
        name = entry.name.encode("utf-16-le") + b"\0\0"
        links = (entry.left, entry.right, entry.child)
        packed.append(struct.pack("<64sHBB3I36xIQ", name, len(name), entry.kind, 1, *links, entry.start, entry.size))
    unused = struct.pack("<64xHBB3I36xIQ", 0, 0, 0, _FREE, _FREE, _FREE, 0, 0)
    packed += [unused] * (-len(packed) % (_SECTOR // len(unused)))
    return b"".join(packed)
