"""Compression of VBA source text in a project's streams.

Source: Microsoft Open Specifications, [MS-OVBA] Office VBA File Format Structure, 2.4.1 Compression and Decompression.
"""

from __future__ import annotations

import struct

_CHUNK = 4096  # bytes of text in a chunk
_SIGNATURE = 0x01  # first byte of a compressed container
_COMPRESSED = 0xB000  # chunk header: compressed flag and the fixed three-bit signature 0b011
_RAW = 0x3000  # chunk header of a chunk that is not compressed
_LEAST = 3  # bytes in the shortest copy
_CANDIDATES = 32  # earlier places of the same three bytes that are tried


class CompressionError(ValueError):
    """The bytes are no compressed container."""


def _offset_bits(done: int) -> int:
    """Bits of a copy token's offset after `done` bytes of the chunk (2.4.1.3.19.1: least power of 2, 4 at least)."""
    return max((done - 1).bit_length(), 4) if done else 4


def decompress(data: bytes) -> bytes:
    """Return the text of a compressed container.

    Parameters
    ----------
    data : bytes
        The container: its signature byte, then chunks.

    Returns
    -------
    bytes
        The text, in the project's code page.

    Raises
    ------
    CompressionError
        The container is damaged.
    """
    if not data or data[0] != _SIGNATURE:
        raise CompressionError("a compressed container begins with 01")
    out = bytearray()
    at = 1
    try:
        while at < len(data):
            header = int.from_bytes(data[at : at + 2], "little")
            end = at + (header & 0x0FFF) + 3
            at += 2
            if end > len(data):
                raise CompressionError("a chunk ends too early")
            if header & 0x7000 != _RAW:
                raise CompressionError("a chunk's signature is wrong")
            if header & 0x8000:
                _decompress_chunk(data, at, end, out)
            else:
                out += data[at : at + _CHUNK]
            at = end
    except (IndexError, struct.error):
        raise CompressionError("a chunk ends too early") from None
    return bytes(out)


def _decompress_chunk(data: bytes, at: int, end: int, out: bytearray) -> None:
    start = len(out)
    while at < end:
        flags = data[at]
        at += 1
        for bit in range(8):
            if at >= end:
                return
            if not flags >> bit & 1:
                out.append(data[at])
                at += 1
                continue
            (token,) = struct.unpack_from("<H", data, at)
            at += 2
            bits = _offset_bits(len(out) - start)
            offset = (token >> (16 - bits)) + 1
            length = (token & (0xFFFF >> bits)) + _LEAST
            if offset > len(out) - start:
                raise CompressionError("a copy reaches before its chunk")
            for _ in range(length):  # a copy may overlap what it writes
                out.append(out[-offset])


def compress(text: bytes) -> bytes:
    """Return a compressed container holding a text.

    Parameters
    ----------
    text : bytes
        The text, in the project's code page.
    """
    out = bytearray([_SIGNATURE])
    for start in range(0, len(text), _CHUNK):
        chunk = text[start : start + _CHUNK]
        packed = _compress_chunk(chunk)
        if len(packed) > _CHUNK:
            out += struct.pack("<H", _RAW | (_CHUNK - 1)) + chunk.ljust(_CHUNK, b"\0")
        else:
            out += struct.pack("<H", _COMPRESSED | (len(packed) - 1)) + packed
    return bytes(out)


def _compress_chunk(chunk: bytes) -> bytes:
    out = bytearray()
    seen: dict[bytes, list[int]] = {}
    at = 0
    while at < len(chunk):
        flags_at = len(out)
        out.append(0)
        for bit in range(8):
            if at >= len(chunk):
                break
            bits = _offset_bits(at)
            length, source = _longest(chunk, at, (0xFFFF >> bits) + _LEAST, seen)
            if length >= _LEAST:
                out += struct.pack("<H", (at - source - 1) << (16 - bits) | (length - _LEAST))
                out[flags_at] |= 1 << bit
            else:
                length = 1
                out.append(chunk[at])
            for place in range(at, at + length):
                seen.setdefault(chunk[place : place + _LEAST], []).append(place)
            at += length
    return bytes(out)


def _longest(chunk: bytes, at: int, most: int, seen: dict[bytes, list[int]]) -> tuple[int, int]:
    """Return length and place of the longest earlier run that matches what stands at `at`."""
    best, source = 0, 0
    most = min(most, len(chunk) - at)
    for place in reversed(seen.get(chunk[at : at + _LEAST], [])[-_CANDIDATES:]):
        length = 0
        while length < most and chunk[place + length] == chunk[at + length]:
            length += 1
        if length > best:
            best, source = length, place
    return best, source
