"""Reading a ride file of any kind: unpacking, choosing a reader, and one clear message where none will do."""

from __future__ import annotations

import hashlib
import io
from dataclasses import replace
from pathlib import Path

from ridercda.errors import ReaderError
from ridercda.rides import delimited, fit_file, gpx_file, tcx_file
from ridercda.rides.format import Reader, ReadOptions
from ridercda.rides.packing import LARGEST_FILE, too_large, unpacked
from ridercda.rides.ride import Fault, FaultKind, Ride
from ridercda.watch import NO_WATCH, Watch

PARSER_VERSION = 1
"""Raised whenever a reader gives a different ride for the same bytes, so that rides kept are read anew."""

READERS: tuple[Reader, ...] = (fit_file.READER, tcx_file.READER, gpx_file.READER, delimited.READER)

_HEAD = 4096


def read_ride(path: Path, options: ReadOptions | None = None, watch: Watch = NO_WATCH) -> Ride:
    """Return the raw ride of a file: as recorded, with what the reader noticed of faults.

    Parameters
    ----------
    path : Path
        A FIT, TCX, GPX or delimited text file, or a gzip of one.
    options : ReadOptions, optional
        What the user says about the file.
    watch : Watch
        Told of progress; may stop the reading.

    Returns
    -------
    Ride
        In SI on its own clock, nothing resampled; NaN where a record has no value.

    Raises
    ------
    ReaderError
        If nothing can be read; the message names the file and says what to do.
    Cancelled
        If the watch asks for it.
    """
    try:
        if path.stat().st_size > LARGEST_FILE:
            raise ReaderError(too_large())
        stored = path.read_bytes()
    except FileNotFoundError as error:
        raise ReaderError("there is no such file", path=path) from error
    except IsADirectoryError as error:
        raise ReaderError("this is a folder, not a ride file", path=path) from error
    except OSError as error:
        raise ReaderError(f"the file cannot be read: {error.strerror or error}", path=path) from error
    try:
        return read_bytes(stored, path.name, options or ReadOptions(), watch)
    except ReaderError as error:
        error.path = path
        error.args = (f"{path}: {error}",)
        raise


def read_bytes(stored: bytes, name: str, options: ReadOptions, watch: Watch = NO_WATCH) -> Ride:
    """Return the raw ride of a file's bytes; see `read_ride`.

    Parameters
    ----------
    stored : bytes
        As on disk.
    name : str
        The file's name; its suffix counts where the content tells nothing.
    """
    data, damage = unpacked(stored)
    if not data.strip():
        raise ReaderError("the file is empty")
    reader = reader_for(data[:_HEAD], name)
    ride = reader.read(io.BytesIO(data), options, watch)
    faults = ride.faults
    if damage:
        fault = Fault(FaultKind.FILE_DAMAGED, float(ride.time.min()), float(ride.time.max()), "", damage)
        faults = (fault, *faults)
    return replace(ride, sha256=hashlib.sha256(stored).hexdigest(), faults=faults)


def reader_for(head: bytes, name: str) -> Reader:
    """Return the reader for a file, by its first bytes and, where they tell nothing, by its suffix.

    Raises
    ------
    ReaderError
        If no reader knows it.
    """
    for reader in READERS:
        if reader.sniff(head):
            return reader
    suffixes = [suffix.lower() for suffix in Path(name).suffixes if suffix.lower() != ".gz"]
    for reader in READERS:
        if suffixes and suffixes[-1] in reader.suffixes:
            return reader
    raise ReaderError(f"this is not a ride file that can be read; the formats read are {formats_read()}")


def formats_read() -> str:
    """Return the formats that can be read, for messages."""
    shown = ", ".join(f"{reader.name} ({', '.join(reader.suffixes)})" for reader in READERS)
    return f"{shown}, and a gzip (.gz) of any of them"
