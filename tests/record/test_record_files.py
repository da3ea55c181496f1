"""Where a record goes: whole or not at all, never over another file, and without its customer where asked."""

from __future__ import annotations

import errno
import io
import json
import os
from pathlib import Path

import pytest
from pypdf import PdfReader

from fieldtool.commands import csv, record
from fieldtool.jobfile.swap import Files
from fieldtool.record.contents import contents
from fieldtool.record.csv_out import findings_csv, readings_csv
from fieldtool.record.html import as_html
from fieldtool.record.paper import PaperProblem, free_name, put_new, written_beside
from fieldtool.record.private import without_customer
from tests.jobs import SAMPLES, made
from tests.record.papers import NOW, squeezed, text_of, whole_visit

LARCH = SAMPLES / "larch_row.json"


def ran(*args: str) -> tuple[int, str, str]:
    out, err = io.StringIO(), io.StringIO()
    code = record.run(list(args), out, err)
    return code, out.getvalue(), err.getvalue()


@pytest.mark.parametrize("suffix", [".pdf", ".html"])
def test_a_record_is_written_once_and_another_file_is_never_overwritten(tmp_path: Path, suffix: str) -> None:
    target = tmp_path / f"kitchen{suffix}"
    code, out, err = ran(str(LARCH), "-o", str(target))
    assert (code, err) == (0, "")
    assert out.count("\n") == 1
    assert target.stat().st_mode & 0o077 == 0
    target.write_bytes(b"somebody's own work")
    code, out, err = ran(str(LARCH), "-o", str(target))
    assert (code, out, err.count("\n")) == (2, "", 1)
    assert "nothing was overwritten" in err
    assert target.read_bytes() == b"somebody's own work"
    assert [path.name for path in tmp_path.iterdir()] == [target.name]


@pytest.mark.parametrize(
    "args",
    [
        (str(LARCH), "-o", "x.doc"), (str(LARCH),), (str(LARCH), "-o", "no/such/folder/x.pdf"),
        ("nosuch.json", "-o", "x.pdf"), (".", "-o", "x.pdf"), (str(LARCH), "-o", "x.pdf", "--nonsense"),
    ],
)  # fmt: skip
def test_what_cannot_be_written_ends_with_two_and_one_sentence(
    tmp_path: Path, args: tuple[str, ...], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    code, out, err = ran(*args)
    assert (code, out, err.count("\n")) == (2, "", 1)
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("what", ["record", "findings"])
def test_a_cable_that_no_table_has_is_one_sentence(tmp_path: Path, what: str) -> None:
    body = whole_visit()
    body["circuits"][0]["cable"] = "no_such_cable"
    path = tmp_path / "job.json"
    path.write_text(json.dumps(body))
    out, err = io.StringIO(), io.StringIO()
    if what == "record":
        code = record.run([str(path), "-o", str(tmp_path / "r.pdf")], out, err)
    else:
        code = csv.run(["out", str(path), "-o", str(tmp_path / "f.csv"), "--what", "findings"], out, err)
    assert (code, out.getvalue(), err.getvalue().count("\n")) == (2, "", 1)
    assert "no_such_cable" in err.getvalue()
    assert list(tmp_path.iterdir()) == [path]


def test_the_same_content_is_no_quarrel(tmp_path: Path) -> None:
    assert put_new(tmp_path / "a.csv", b"one") is True
    assert put_new(tmp_path / "a.csv", b"one") is False
    with pytest.raises(PaperProblem, match="nothing was overwritten"):
        put_new(tmp_path / "a.csv", b"two")
    assert (tmp_path / "a.csv").read_bytes() == b"one"


class Failing(Files):
    """The file calls, one of which fails."""

    def __init__(self, call: str) -> None:
        self.call = call

    def write_new(self, path: Path, data: bytes) -> None:
        if self.call == "write":
            super().write_new(path, data[: len(data) // 2])
            raise OSError(errno.ENOSPC, "full")
        super().write_new(path, data)

    def link(self, old: Path, new: Path) -> None:
        if self.call == "link":
            raise OSError(errno.EIO, "broken")
        if self.call == "race":
            new.write_bytes(b"theirs")
        if self.call == "no second names":
            raise OSError(errno.EPERM, "not here")
        super().link(old, new)


@pytest.mark.parametrize("call", ["write", "link"])
def test_a_failure_leaves_nothing_half_written(tmp_path: Path, call: str) -> None:
    with pytest.raises(PaperProblem):
        put_new(tmp_path / "a.pdf", b"content", Failing(call))
    assert list(tmp_path.iterdir()) == []


def test_a_file_that_appears_meanwhile_is_kept(tmp_path: Path) -> None:
    with pytest.raises(PaperProblem, match="nothing was overwritten"):
        put_new(tmp_path / "a.pdf", b"ours", Failing("race"))
    assert (tmp_path / "a.pdf").read_bytes() == b"theirs"


def test_a_medium_without_second_names_takes_a_record_too(tmp_path: Path) -> None:
    assert put_new(tmp_path / "a.pdf", b"ours", Failing("no second names"))
    assert [path.name for path in tmp_path.iterdir()] == ["a.pdf"]


def test_a_link_that_leads_nowhere_is_not_written_through(tmp_path: Path) -> None:
    os.symlink(tmp_path / "elsewhere", tmp_path / "a.pdf")
    with pytest.raises(PaperProblem):
        put_new(tmp_path / "a.pdf", b"ours")
    assert not (tmp_path / "elsewhere").exists()


def test_beside_the_job_each_record_gets_a_name_of_its_own(tmp_path: Path) -> None:
    job = made(whole_visit())
    path = tmp_path / "kitchen.json"
    first, second = written_beside(job, path, NOW), written_beside(job, path, NOW)
    assert "kitchen-record.pdf" in first
    assert "kitchen-record-2.pdf" in second
    assert free_name(path, ".pdf").name == "kitchen-record-3.pdf"
    assert len(PdfReader(tmp_path / "kitchen-record-2.pdf").pages) > 5
    assert "no such folder" in written_beside(job, tmp_path / "gone" / "kitchen.json", NOW)


SECRETS = ("Ada Quillfeather", "07000 900461", "12 Nowhere Parade", "Larkspur Lodge", "Pat Occupant")


def private_visit() -> dict[str, object]:
    body = whole_visit()
    body["site"] |= {
        "name": "Larkspur Lodge", "customer": "Ada Quillfeather", "contact": "07000 900461",
        "address": "12 Nowhere Parade\nUnder Tarn", "note": "ask Ada Quillfeather first", "invented": False,
    }  # fmt: skip
    body["readings"][0]["note"] = "ADA QUILLFEATHER was watching, from 12 Nowhere Parade"
    body["points"][0]["note"] = "Pat Occupant keeps the key"
    body["isolation"][2] |= {"kind": "permission", "detail": "Ada said yes"}
    return body


def test_without_the_customer_nothing_of_theirs_is_in_any_export(tmp_path: Path) -> None:
    body = private_visit()
    job = made(body)
    bare = without_customer(job)
    pdf = tmp_path / "r.pdf"
    path = tmp_path / "job.json"
    path.write_text(job.model_dump_json(by_alias=True))
    assert ran(str(path), "-o", str(pdf), "--without-customer")[0] == 0
    reader = PdfReader(pdf)
    exports = [
        text_of(reader), str(reader.metadata), as_html(contents(bare, NOW)).decode(), readings_csv(bare).decode("utf-8-sig"),
        findings_csv(bare).decode("utf-8-sig"),
    ]  # fmt: skip
    for text in exports:
        for secret in (*SECRETS, "Ada said yes", "Under Tarn"):
            assert squeezed(secret).lower() not in squeezed(text).lower(), secret
    with_them = squeezed(as_html(contents(job, NOW)).decode())
    assert all(squeezed(secret) in with_them for secret in SECRETS)


def test_without_the_customer_the_verdict_and_the_readings_are_the_same() -> None:
    job = made(private_visit())
    bare = without_customer(job)
    titles = [s.title for s in contents(job, NOW).sections]
    assert [s.title for s in contents(bare, NOW).sections] == titles
    for before, after in zip(job.readings, bare.readings, strict=True):
        assert after.model_copy(update={"note": before.note}) == before
    assert findings_csv(bare) == findings_csv(job)


def test_csv_goes_out_without_the_customer_too(tmp_path: Path) -> None:
    path = tmp_path / "job.json"
    path.write_text(made(private_visit()).model_dump_json(by_alias=True))
    out, err = io.StringIO(), io.StringIO()
    assert csv.run(["out", str(path), "-o", str(tmp_path / "r.csv"), "--without-customer"], out, err) == 0
    assert b"quillfeather" not in (tmp_path / "r.csv").read_bytes().lower()
