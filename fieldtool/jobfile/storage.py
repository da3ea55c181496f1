"""TinyDB's storage seam over a whole-file swap: one change of a job is one write of the whole document.

TinyDB gives the tables and the form of the document; it never writes by itself, because its own storage overwrites
in place and has no transaction.
"""

from __future__ import annotations

import hashlib
import re
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import orjson
from tinydb import TinyDB
from tinydb.storages import Storage

from fieldtool.jobfile.bytes_in import document, read_bytes
from fieldtool.jobfile.swap import Files, replace_whole

__all__ = ["JobStorage", "PackedTable", "open_tables", "seal_holds"]


@dataclass(frozen=True, slots=True)
class PackedTable:
    """The rows of a table as the text that goes into the file: ``  "1": {...}``, a row on a line."""

    text: bytes | bytearray


class JobStorage(Storage):
    """Reads a whole document, writes a whole document, in one step."""

    def __init__(self, path: Path, files: Files | None = None) -> None:
        self.path = path
        self.files = files if files is not None else Files()

    def read(self) -> dict[str, dict[str, Any]] | None:
        """The document on the disk; None where there is none. Raises JobFileProblem."""
        if not self.path.exists():
            return None
        return document(read_bytes(self.path), self.path)

    def write(self, data: dict[str, Any]) -> None:
        """Put a whole document in the file's place, sealed with the checksum of what is written.

        A table is a dict of rows as TinyDB has it, or a PackedTable. Everything is serialised before the first byte
        is written. Raises SaveProblem, or TypeError for what JSON
        cannot say.
        """
        about = {**data["about"]["1"], "check": _BLANK}
        replace_whole(self.path, _sealed(_readable({**data, "about": {"1": about}})), self.files)


_BLANK = "0" * 64
_CHECK = re.compile(rb'"check":\s*"([0-9a-f]{64})"')


def _sealed(pieces: list[bytes | bytearray]) -> bytes:
    """The text with the checksum of itself, taken while the check was blank, in the check's place."""
    digest = hashlib.sha256()
    for piece in pieces:
        digest.update(piece)
    where = next(number for number, piece in enumerate(pieces) if _CHECK.search(piece))
    about = bytes(pieces[where]).replace(_BLANK.encode(), digest.hexdigest().encode(), 1)
    return b"".join([*pieces[:where], about, *pieces[where + 1 :]])


def seal_holds(data: bytes) -> bool | None:
    """Whether the checksum inside a document is that of the document; None where it carries none."""
    found = _CHECK.search(data)
    if found is None:
        return None
    blank = data[: found.start(1)] + _BLANK.encode() + data[found.end(1) :]
    return hashlib.sha256(blank).hexdigest().encode() == found.group(1)


def _readable(whole: Mapping[str, dict[str, Any] | PackedTable]) -> list[bytes | bytearray]:
    """The document as text that a person can read, one row on one line; in pieces, because it can be long."""
    pieces: list[bytes | bytearray] = [b"{"]
    for name, table in whole.items():
        inside = table.text if isinstance(table, PackedTable) else _lines(table)
        pieces.append(b'%b "%b": {' % (b",\n" if len(pieces) > 1 else b"\n", name.encode()))
        pieces += [b"\n", inside, b"\n }"] if inside else [b"}"]
    return [*pieces, b"\n}\n"]


def _lines(table: dict[str, Any]) -> bytes:
    return b",\n".join(b"  %b: %b" % (orjson.dumps(key), orjson.dumps(row)) for key, row in table.items())


def open_tables(path: Path, files: Files | None = None) -> TinyDB:
    """A job file as TinyDB tables, over our own storage."""
    return TinyDB(path, files, storage=JobStorage)
