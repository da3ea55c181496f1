"""The HTML record in a browser we did not write (Debian's chromium): no complaint, no request, nothing run."""

from __future__ import annotations

import json
import shutil
import subprocess
from pathlib import Path

import pytest

from fieldtool.record.contents import contents
from fieldtool.record.html import as_html
from tests.jobs import sample
from tests.record.papers import NOW, SAMPLE_NAMES, whole_job
from tests.record.test_record_hostile_text import HOSTILE, Filler

needs_chromium = pytest.mark.skipif(
    shutil.which("chromium") is None, reason="NOT CHECKED AGAINST chromium: the Debian package is not installed here"
)


def opened(folder: Path, page: bytes) -> tuple[str, str, set[str]]:
    """A page opened in the browser: its document afterwards, what the console said, what was asked for."""
    path, log = folder / "record.html", folder / "net.json"
    path.write_bytes(page)
    done = subprocess.run(
        [
            "chromium", "--headless", "--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-extensions",
            "--disable-background-networking", "--disable-component-update", "--disable-sync",
            "--host-resolver-rules=MAP * ~NOTFOUND",
            f"--user-data-dir={folder / 'profile'}", "--enable-logging=stderr", f"--log-net-log={log}",
            "--virtual-time-budget=2000", "--dump-dom", path.as_uri(),
        ],
        capture_output=True, text=True, timeout=120, check=True,
    )  # fmt: skip
    console = "\n".join(line for line in done.stderr.splitlines() if "CONSOLE" in line)
    events = json.loads(log.read_text())["events"]
    # What the browser asks on its own account has no origin; what a page asks for names the page's.
    said = [event["params"] for event in events if "url" in event.get("params", {})]
    asked = {str(item["url"]) for item in said if item.get("initiator", "not an origin") != "not an origin"}
    return done.stdout, console, asked


@needs_chromium
@pytest.mark.parametrize("name", SAMPLE_NAMES)
def test_a_record_opens_without_a_complaint_and_asks_for_nothing(name: str, tmp_path: Path) -> None:
    dom, console, asked = opened(tmp_path, as_html(contents(sample(name), NOW)))
    assert console == ""
    assert {url for url in asked if not url.startswith(("file:", "data:", "chrome"))} == set()
    assert "<svg" in dom
    assert "Ω" in dom


@needs_chromium
def test_hostile_texts_run_nothing_and_ask_for_nothing(tmp_path: Path) -> None:
    job = Filler("".join(HOSTILE)).job(whole_job())
    dom, console, asked = opened(tmp_path, as_html(contents(job, NOW)))
    assert console == ""
    assert not any("outside.example" in url for url in asked)
    assert "<script" not in dom
    assert "<iframe" not in dom
    assert "<img" not in dom


@needs_chromium
def test_the_browser_would_have_told(tmp_path: Path) -> None:
    """The check itself: a page that does ask for something, and does complain, is found out."""
    page = b"<!DOCTYPE html><img src=http://outside.example/x.png><script>console.error('seen')</script>"
    _, console, asked = opened(tmp_path, page)
    assert "seen" in console
    assert any("outside.example" in url for url in asked)
