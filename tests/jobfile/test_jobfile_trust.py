"""The job file's promise: whatever happens, the file holds the state before an entry or after it, never less."""

from __future__ import annotations

import errno
import json
import os
import random
import stat
import subprocess
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldtool.job.changes import Put, apply
from fieldtool.job.job import Job
from fieldtool.job.place import Site
from fieldtool.jobfile.bytes_in import document
from fieldtool.jobfile.opening import JobFile, load, read_job
from fieldtool.jobfile.problems import JobFileProblem, SaveProblem
from fieldtool.jobfile.rows import job_from, plain_rows
from fieldtool.jobfile.salvage import UNREADABLE
from fieldtool.jobfile.shelf import free_path, open_sample, safe_name, shelf
from fieldtool.jobfile.swap import Files, generations
from tests.jobs import SAMPLES, facts

NOW = datetime(2026, 12, 1, 9, 0, tzinfo=UTC)


def small(name: str = "a") -> Job:
    return Job(site=Site(name=name))


class Stopped(BaseException):
    """The process is gone at this file call."""


class CountedFiles(Files):
    """Stops, or fails, at the n-th file call; what was written but not yet synced is dropped or garbled."""

    def __init__(self, at: int, *, failure: OSError | None = None, garble: bool = False) -> None:
        self.left, self.failure, self.garble = at, failure, garble

    def _call(self) -> None:
        self.left -= 1
        if self.left == 0:
            raise self.failure if self.failure is not None else Stopped

    def write_new(self, path: Path, data: bytes) -> None:
        try:
            self._call()
        except BaseException:
            path.write_bytes(b"\x00garbage" if self.garble else data[: len(data) // 2])
            raise
        super().write_new(path, data)

    def sync(self, handle: int) -> None:
        self._call()
        super().sync(handle)

    def link(self, old: Path, new: Path) -> None:
        self._call()
        super().link(old, new)

    def replace(self, old: Path, new: Path) -> None:
        self._call()
        super().replace(old, new)

    def remove(self, path: Path) -> None:
        if not path.name.endswith(".new"):
            self._call()
        super().remove(path)

    def sync_folder(self, folder: Path) -> None:
        self._call()
        super().sync_folder(folder)


def _saved_twice(folder: Path) -> Path:
    path = folder / "job.json"
    file = JobFile.create(path, small("first"), NOW)
    file.save(small("before"))
    file.close()
    return path


@pytest.mark.parametrize("garble", [False, True])
def test_stopped_at_any_file_call_the_file_opens_as_before_or_after(tmp_path: Path, garble: bool) -> None:
    """After SQLite's crash test: the loop finds its own end, so no stopping place is forgotten."""
    for call in range(1, 50):
        folder = tmp_path / f"{call}"
        folder.mkdir()
        path = _saved_twice(folder)
        file = JobFile.open(path, NOW, files=CountedFiles(call, garble=garble))
        try:
            file.save(small("after"))
        except Stopped:
            file.close()
            again = JobFile.open(path, NOW)
            assert again.job.site.name in ("before", "after")
            again.save(small("later"))
            again.close()
            assert read_job(path).site.name == "later"
        else:
            file.close()
            assert read_job(path).site.name == "after"
            assert call > 5
            return
    raise AssertionError("the save never finished")


@pytest.mark.parametrize("number", [errno.ENOSPC, errno.EIO, errno.EROFS])
def test_a_failing_file_call_says_so_and_harms_nothing(tmp_path: Path, number: int) -> None:
    failed = 0
    for call in range(1, 50):
        folder = tmp_path / f"{call}"
        folder.mkdir()
        path = _saved_twice(folder)
        file = JobFile.open(path, NOW, files=CountedFiles(call, failure=OSError(number, "told so by the test")))
        try:
            file.save(small("after"))
        except SaveProblem as problem:
            failed += 1
            assert str(problem).endswith((".", "F6."))
            file.close()
            opened = JobFile.open(path, NOW)
            assert opened.job.site.name in ("before", "after")
            opened.close()
        else:
            file.close()
            assert failed >= 4
            return


def test_a_file_cut_short_at_any_byte_gives_a_good_generation(tmp_path: Path) -> None:
    path = _saved_twice(tmp_path)
    data = path.read_bytes()
    for cut in range(len(data)):
        path.write_bytes(data[:cut])
        opened = JobFile.open(path, NOW, want_write=False)
        whole = cut == len(data) - 1
        assert opened.job.site.name == ("before" if whole and opened.job.site.name == "before" else "first")
        opened.close()


def test_random_flips_never_change_a_reading_in_silence(tmp_path: Path) -> None:
    path = open_sample(SAMPLES / "mill_cottages.json", tmp_path)
    data, whole = path.read_bytes(), read_job(path)
    rng = random.Random(7)
    for _ in range(10_000):
        flipped = bytearray(data)
        flipped[rng.randrange(len(flipped))] ^= 1 << rng.randrange(8)
        path.write_bytes(bytes(flipped))
        try:
            found = load(path).job
        except JobFileProblem as problem:
            assert problem.sentence
        else:
            assert found == whole


def test_a_damaged_file_is_set_aside_and_the_person_told(tmp_path: Path) -> None:
    path = _saved_twice(tmp_path)
    path.write_bytes(path.read_bytes().replace(b"before", b"befogg"))
    opened = JobFile.open(path, NOW)
    assert opened.job.site.name == "first"
    assert "damaged" in opened.notes[0]
    assert (tmp_path / "job.json.damaged-1").read_bytes().count(b"befogg") == 1
    opened.save(small("on"))
    opened.close()
    assert read_job(path).site.name == "on"


def test_five_generations_are_kept(tmp_path: Path) -> None:
    path = tmp_path / "job.json"
    file = JobFile.create(path, small("0"), NOW)
    for number in range(1, 9):
        file.save(small(str(number)))
    file.close()
    assert [load(item).job.site.name for item in generations(path)] == ["7", "6", "5", "4", "3"]


def test_a_medium_without_links_is_copied_instead(tmp_path: Path) -> None:
    class NoLinks(Files):
        folder_sync = False

        def link(self, old: Path, new: Path) -> None:
            raise OSError(errno.EPERM, "no links here")

    path = _saved_twice(tmp_path)
    file = JobFile.open(path, NOW, files=NoLinks())
    file.save(small("after"))
    file.close()
    assert load(generations(path)[0]).job.site.name == "before"


def test_a_reader_in_the_way_of_the_replace_is_waited_for(tmp_path: Path) -> None:
    """Windows: no replace over a file that somebody holds open, no folder sync, no O_NOFOLLOW."""

    class HeldOpen(Files):
        folder_sync = False
        replace_tries = 4
        refused = 0

        def rename(self, old: Path, new: Path) -> None:
            if new.name == "job.json" and self.refused < self.most:
                self.refused += 1
                raise PermissionError(errno.EACCES, "held open by a reader")
            super().rename(old, new)

        most = 3

    path = _saved_twice(tmp_path)
    file = JobFile.open(path, NOW, files=HeldOpen())
    file.save(small("after"))
    assert read_job(path).site.name == "after"
    held = HeldOpen()
    held.most = 99
    file._files = held
    with pytest.raises(SaveProblem):
        file.save(small("never"))
    assert read_job(path).site.name == "after"
    file._files = Files()
    file.save(small("at last"))
    file.close()
    assert read_job(path).site.name == "at last"


def test_what_a_damaged_file_held_is_told_row_by_row(tmp_path: Path) -> None:
    """A reading that the opened copy lacks is named with its place and its figure, also from a file cut short."""
    path = open_sample(SAMPLES / "larch_row.json", tmp_path)
    file = JobFile.open(path, NOW)
    job = file.job
    point = job.points[0]
    reading = job.readings[0].model_copy(
        update={"id": "m900", "circuit": point.circuit, "point": point.id, "test": "zs", "stage": "as_found",
                "value": 0.61, "raw": "0.61", "sign": "=", "replaces": None, "withdraws": None, "at": NOW}
    )  # fmt: skip
    file.save(apply(job, [Put("readings", reading)], at=NOW))
    file.close()
    whole = path.read_bytes()
    for damaged in (whole.replace(b'"site"', b'"silt"'), whole[:-9]):
        path.write_bytes(damaged)
        opened = JobFile.open(path, NOW)
        assert any("Zs" in line and point.name in line and "0.61" in line for line in opened.differences)
        assert "damaged" in opened.notes[0]
        opened.close()
        next(tmp_path.glob("*.damaged-*")).unlink()
    path.write_bytes(b"\x00" * 40)
    opened = JobFile.open(path, NOW)
    assert opened.differences == (UNREADABLE,)
    opened.close()


def test_a_second_opener_reads_and_keeps_up(tmp_path: Path) -> None:
    path = _saved_twice(tmp_path)
    writer, reader = JobFile.open(path, NOW), JobFile.open(path, NOW)
    assert not writer.read_only
    assert reader.read_only
    assert "has this job since" in reader.holder
    with pytest.raises(SaveProblem):
        reader.save(small("no"))
    writer.save(small("news"))
    found = reader.reload_if_changed()
    assert found is not None
    assert found.site.name == "news"
    writer.close()


def test_the_lock_of_a_killed_process_is_taken_over(tmp_path: Path) -> None:
    path = _saved_twice(tmp_path)
    code = (
        "import sys,time,datetime,pathlib\nfrom fieldtool.jobfile.opening import JobFile\n"
        f"f=JobFile.open(pathlib.Path({str(path)!r}),datetime.datetime.now(datetime.UTC))\n"
        "print('held',flush=True)\ntime.sleep(60)\n"
    )
    other = subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE, text=True)
    assert other.stdout is not None
    assert other.stdout.readline().strip() == "held"
    assert JobFile.open(path, NOW).read_only
    other.kill()
    other.wait()
    file = JobFile.open(path, NOW)
    assert not file.read_only
    file.close()


def test_a_hand_written_file_is_welcome_and_sealed_at_its_first_save(tmp_path: Path) -> None:
    path = tmp_path / "hand.json"
    path.write_text(json.dumps({"site": {"name": "by hand"}}))
    file = JobFile.open(path, NOW)
    file.save(file.job)
    file.close()
    assert load(path).generation == 1
    path.write_bytes(path.read_bytes().replace(b"by hand", b"by hook"))
    with pytest.raises(JobFileProblem, match="damaged"):
        read_job(path)


def test_a_file_of_an_older_make_is_migrated_and_kept(tmp_path: Path) -> None:
    path = tmp_path / "old.json"
    path.write_bytes((Path(__file__).parent.parent / "old_files" / "shape_0.json").read_bytes())
    file = JobFile.open(path, NOW)
    assert file.job.supply.system == "tn_c_s"
    assert file.job.boards[0].name == "board in the hall"
    file.save(file.job)
    file.close()
    assert b'"earthing"' in (tmp_path / "old.json.older-make").read_bytes()


def test_a_file_of_a_newer_make_opens_for_looking_only(tmp_path: Path) -> None:
    path = tmp_path / "new.json"
    path.write_text(json.dumps({"about": {"schema": 99}, "site": {"name": "later"}, "drones": []}))
    file = JobFile.open(path, NOW)
    assert file.read_only
    assert "newer make" in file.holder
    with pytest.raises(JobFileProblem) as told:
        read_job(path)
    assert told.value.code == "other-schema"


@pytest.mark.parametrize(
    "content, code",
    [
        (b"", "empty"),
        (b"   \n", "empty"),
        (b"not json", "not-json"),
        (b"[1, 2]", "not-a-job"),
        (b'{"a": 1, "a": 2}', "not-json"),
        (b'{"site": {"name": NaN}}', "not-json"),
        (b'{"supply": {"u0_v": 1e999}}', "not-json"),
        (b"\xff\xfe\x00", "not-json"),
        (b'{"x":' + b"[" * 100_000 + b"]" * 100_000 + b"}", "not-a-job"),
        (b'{"site": {"name": "a\\u202eb"}}', "not-a-job"),
        (b'{"site": {"name": "a\\u001b[31m"}}', "not-a-job"),
        (b'{"site": {"colour": "red"}}', "not-a-job"),
        (b'{"about": {"generation": 4}}', "damaged"),
    ],
)
def test_hostile_and_broken_content_gets_one_sentence(tmp_path: Path, content: bytes, code: str) -> None:
    path = tmp_path / "x.json"
    path.write_bytes(content)
    with pytest.raises(JobFileProblem) as told:
        read_job(path)
    assert told.value.code == code
    assert "\n" not in told.value.sentence
    assert len(told.value.sentence) < 140


def test_a_megabyte_in_a_name_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "x.json"
    path.write_text(json.dumps({"site": {"name": "x" * 1_000_000}}))
    with pytest.raises(JobFileProblem, match="site"):
        read_job(path)


@settings(max_examples=60)
@given(st.binary(max_size=300))
def test_any_bytes_open_or_are_refused_in_a_sentence(data: bytes) -> None:
    try:
        body = document(data, Path("x.json"))
    except JobFileProblem as problem:
        assert problem.sentence
    else:
        assert isinstance(body, dict)


SCALARS = (
    st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False, allow_infinity=False) | st.text(max_size=20)
)
ANY_JSON = st.recursive(SCALARS, lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=8), inner, max_size=3), max_leaves=6)  # fmt: skip


@settings(max_examples=150, deadline=None)
@given(st.data())
def test_a_job_with_anything_in_the_place_of_anything_opens_or_is_refused_in_a_sentence(data: st.DataObject) -> None:
    body = facts(data.draw(st.sampled_from(["larch_row", "quarry_yard"])))
    place: Any = body
    while True:
        keys = sorted(place) if isinstance(place, dict) else list(range(len(place)))
        key = data.draw(st.sampled_from(keys))
        inner = place[key]
        if not isinstance(inner, dict | list) or not inner or data.draw(st.integers(0, 4)) == 0:
            place[key] = data.draw(ANY_JSON)
            break
        place = inner
    try:
        job = job_from(plain_rows(document(json.dumps(body).encode(), Path("x.json"))), Path("x.json"))
    except JobFileProblem as problem:
        assert problem.sentence
        assert "\n" not in problem.sentence
        assert len(problem.sentence) < 160
    else:
        assert isinstance(job, Job)


def test_a_name_cannot_leave_its_folder(tmp_path: Path) -> None:
    for name in ("../../etc/passwd", "/abs", "..", "", "con\x00trol", "a/b\\c", "." * 300):
        path = free_path(tmp_path, name)
        assert path.parent == tmp_path
        assert safe_name(name).strip("-.")


def test_only_the_owner_can_read(tmp_path: Path) -> None:
    folder = tmp_path / "deep" / "jobs"
    file = JobFile.create(folder / "a.json", small(), NOW)
    file.close()
    assert stat.S_IMODE(os.stat(folder).st_mode) == 0o700
    assert stat.S_IMODE(os.stat(folder / "a.json").st_mode) == 0o600


def test_the_shelf_lists_a_broken_file_as_a_row(tmp_path: Path) -> None:
    _saved_twice(tmp_path)
    (tmp_path / "broken.json").write_text("{")
    rows = {row.path.name: row for row in shelf(tmp_path)}
    assert rows["job.json"].problem == ""
    assert "not JSON" in rows["broken.json"].problem


def test_a_link_is_written_through_and_stays_a_link(tmp_path: Path) -> None:
    real = tmp_path / "real"
    real.mkdir()
    path = _saved_twice(real)
    link = tmp_path / "link.json"
    link.symlink_to(path)
    file = JobFile.open(link, NOW)
    file.save(small("through"))
    file.close()
    assert link.is_symlink()
    assert read_job(path).site.name == "through"


def test_samples_stay_as_they_are(tmp_path: Path) -> None:
    before = (SAMPLES / "larch_row.json").read_bytes()
    copied = open_sample(SAMPLES / "larch_row.json", tmp_path)
    file = JobFile.open(copied, NOW)
    job = apply(file.job, [Put("site", file.job.site.model_copy(update={"note": "x"}))], at=NOW + timedelta(hours=1))
    file.save(job)
    file.close()
    assert (SAMPLES / "larch_row.json").read_bytes() == before
    assert facts("larch_row")["site"]["note" if "note" in facts("larch_row")["site"] else "name"]
