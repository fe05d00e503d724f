"""The packing around a ride file: gzip, several members in a row, broken ones as far as they go."""

from __future__ import annotations

import zlib

from ridercda.errors import ReaderError

LARGEST_FILE = 512 * 2**20  # unpacked; a day at 20 Hz in text takes a tenth of it [bytes]
_GZIP = b"\x1f\x8b"


def unpacked(stored: bytes) -> tuple[bytes, str]:
    """Return a file's content and what is wrong with its packing; what a broken gzip still holds is returned.

    Raises
    ------
    ReaderError
        If a gzip holds nothing that can be unpacked, or more than `LARGEST_FILE`.
    """
    if not stored.startswith(_GZIP):
        return stored, ""
    pieces: list[bytes] = []
    size = 0
    rest = stored
    while rest.startswith(_GZIP):
        stream = zlib.decompressobj(wbits=31)
        try:
            piece = stream.decompress(rest, LARGEST_FILE + 1 - size)
        except zlib.error:
            piece = _what_unpacks(rest, LARGEST_FILE + 1 - size)
            if not pieces and not piece:
                raise ReaderError("this gzip is damaged; nothing in it can be unpacked") from None
            pieces.append(piece)
            return b"".join(pieces), "The gzip around it is damaged; what could be unpacked was kept"
        pieces.append(piece)
        size += len(piece)
        if size > LARGEST_FILE:
            raise ReaderError(too_large())
        if not stream.eof:
            return b"".join(pieces), "The gzip around it ends early; what could be unpacked was kept"
        rest = stream.unused_data
    return b"".join(pieces), ""


def _what_unpacks(packed: bytes, limit: int) -> bytes:
    stream = zlib.decompressobj(wbits=31)
    pieces: list[bytes] = []
    step = 256
    for at in range(0, len(packed), step):
        try:
            pieces.append(stream.decompress(packed[at : at + step], limit))
        except zlib.error:
            break
    return b"".join(pieces)


def too_large() -> str:
    """Return what to say of a file larger than any ride."""
    return (
        f"the file is larger than {LARGEST_FILE // 2**20} MB unpacked; is it the right one? A ride is smaller"
    )
