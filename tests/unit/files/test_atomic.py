"""Writing files: whole or not at all, and never over another file unless told to."""

from __future__ import annotations

import os

import pytest

from screener.errors import ExitCode, OutputError
from screener.files import atomic


@pytest.fixture(autouse=True)
def here(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    return tmp_path


def names(folder):
    return sorted(path.name for path in folder.iterdir())


def test_text_and_bytes_are_written_as_they_are(here):
    atomic.write("a.csv", "é\r\nb\n", force=False)
    atomic.write(here / "b.bin", b"\x00\xff", force=False)
    assert (here / "a.csv").read_bytes() == "é\r\nb\n".encode()
    assert (here / "b.bin").read_bytes() == b"\x00\xff"
    assert names(here) == ["a.csv", "b.bin"]


def test_a_new_file_is_as_readable_as_any_other(here):
    atomic.write("a.csv", "", force=False)
    (here / "b.csv").write_text("")
    assert (here / "a.csv").stat().st_mode == (here / "b.csv").stat().st_mode


def test_an_existing_file_is_kept_unless_forced(here):
    (here / "a.csv").write_text("old")
    with pytest.raises(OutputError) as caught:
        atomic.write("a.csv", "new", force=False)
    assert str(caught.value) == "a.csv  exists already  (--force replaces it)"
    assert caught.value.exit_code == ExitCode.NOT_WRITTEN
    assert (here / "a.csv").read_text() == "old"
    atomic.write("a.csv", "new", force=True)
    assert (here / "a.csv").read_text() == "new"


def test_every_bad_target_is_named_before_anything_is_written(here):
    (here / "folder").mkdir()
    (here / "old").write_text("old")
    with pytest.raises(OutputError) as caught:
        atomic.write_all({"new": "", "folder": "", "old": "", "none/x": ""}, force=False)
    assert [str(problem) for problem in caught.value.problems] == [
        "folder  is not a file  (name a file)",
        "old  exists already  (--force replaces it)",
        "none/x  there is no folder none  (make it first)",
    ]
    assert names(here) == ["folder", "old"]


def test_force_replaces_files_only(here):
    (here / "folder").mkdir()
    with pytest.raises(OutputError, match="is not a file"):
        atomic.write("folder", "", force=True)


def test_many_files_are_written_together(here):
    atomic.write_all({"a": "1", here / "b": b"2"}, force=False)
    assert (here / "a").read_text() + (here / "b").read_text() == "12"


@pytest.mark.parametrize(
    ("step", "failure", "raised"),
    [
        ("fsync", OSError(28, "No space left on device"), OutputError),
        ("fsync", KeyboardInterrupt(), KeyboardInterrupt),
        ("replace", PermissionError(13, "Permission denied"), OutputError),
        ("replace", KeyboardInterrupt(), KeyboardInterrupt),
    ],
)
def test_a_failure_leaves_the_old_file_and_nothing_else(here, monkeypatch, step, failure, raised):
    (here / "a").write_text("old")

    def fail(*_):
        raise failure

    monkeypatch.setattr(os, step, fail)
    with pytest.raises(raised) as caught:
        atomic.write_all({"a": "new", "b": "new"}, force=True)
    assert names(here) == ["a"]
    assert (here / "a").read_text() == "old"
    if raised is OutputError:
        assert str(caught.value) == f"a  could not be written: {failure.strerror}"


def test_the_second_file_may_fail_and_the_first_is_not_yet_in_place(here, monkeypatch):
    flush = os.fsync
    calls = iter([flush, None])

    def fail_second(handle):
        step = next(calls)
        if step is None:
            raise OSError(28, "No space left on device")
        step(handle)

    monkeypatch.setattr(os, "fsync", fail_second)
    with pytest.raises(OutputError, match=r"^b  could not be written: No space left on device$"):
        atomic.write_all({"a": "new", "b": "new"}, force=False)
    assert names(here) == []
