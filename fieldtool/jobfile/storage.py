"""TinyDB's storage seam over a whole-file swap: one change of a job is one write of the whole document.

TinyDB gives the tables and the form of the document; it never writes by itself, because its own storage overwrites
in place and has no transaction.
"""

from __future__ import annotations

import hashlib
import re
from pathlib import Path
from typing import Any

import orjson
from tinydb import TinyDB
from tinydb.storages import Storage

from fieldtool.jobfile.bytes_in import document, read_bytes
from fieldtool.jobfile.swap import Files, replace_whole

__all__ = ["JobStorage", "check_holds", "open_tables"]


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

    def write(self, data: dict[str, dict[str, Any]]) -> None:
        """Put a whole document in the file's place, sealed with the checksum of what is written.

        Everything is serialised before the first byte is written. Raises SaveProblem, or TypeError for what JSON
        cannot say.
        """
        about = {**data["about"]["1"], "check": _BLANK}
        text = _readable({**data, "about": {"1": about}})
        replace_whole(self.path, _sealed(text), self.files)


_BLANK = "0" * 64
_CHECK = re.compile(rb'"check":\s*"([0-9a-f]{64})"')


def _sealed(text: bytes) -> bytes:
    """The text with the checksum of itself, taken while the check was blank, in the check's place."""
    digest = hashlib.sha256(text).hexdigest().encode()
    return text.replace(_BLANK.encode(), digest, 1)


def check_holds(data: bytes) -> bool:
    """True where the checksum inside a document is that of the document."""
    found = _CHECK.search(data)
    if found is None:
        return False
    blank = data[: found.start(1)] + _BLANK.encode() + data[found.end(1) :]
    return hashlib.sha256(blank).hexdigest().encode() == found.group(1)


def _readable(whole: dict[str, Any]) -> bytes:
    """The document as text that a person can read: one row on one line."""
    tables = []
    for name, table in whole.items():
        rows = [f"  {orjson.dumps(key).decode()}: ".encode() + orjson.dumps(row) for key, row in table.items()]
        inside = b",\n".join(rows)
        tables.append(
            b' "' + name.encode() + b'": {\n' + inside + b"\n }" if rows else b' "' + name.encode() + b'": {}'
        )
    return b"{\n" + b",\n".join(tables) + b"\n}\n"


def open_tables(path: Path, files: Files | None = None) -> TinyDB:
    """A job file as TinyDB tables, over our own storage."""
    return TinyDB(path, files, storage=JobStorage)
