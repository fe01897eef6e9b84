"""The folder of a brief: written whole or not at all, and never over what others put there."""

import errno
import os
from pathlib import Path

import pytest

from app.brief import folder
from app.brief.folder import FolderError, check_folder, write_folder


def test_a_folder_is_written_whole(tmp_path):
    write_folder(tmp_path / "a" / "b", {"x.txt": b"1", "views/y.txt": b"2"})
    assert (tmp_path / "a" / "b" / "views" / "y.txt").read_bytes() == b"2"
    assert [path.name for path in (tmp_path / "a").iterdir()] == ["b"]


def earlier(place):
    write_folder(place, {"brief.html": b"old", "recipe.toml": b'files = ["brief.html"]'})


def test_an_earlier_brief_gives_way_and_leaves_nothing(tmp_path):
    earlier(tmp_path / "out")
    write_folder(tmp_path / "out", {"brief.html": b"new"})
    assert [path.name for path in tmp_path.rglob("*")] == ["out", "brief.html"]
    assert (tmp_path / "out" / "brief.html").read_bytes() == b"new"


@pytest.mark.parametrize("strange", ["notes.txt", "views/mine.csv", "recipe.toml/inside.txt"])
def test_a_folder_with_other_files_is_left_alone(tmp_path, strange):
    out = tmp_path / "out"
    if not strange.startswith("recipe"):
        earlier(out)
    (out / strange).parent.mkdir(parents=True, exist_ok=True)
    (out / strange).write_text("mine")
    with pytest.raises(FolderError, match=f"also holds '{strange}'"):
        check_folder(out)
    with pytest.raises(FolderError, match="nothing else"):
        write_folder(out, {"brief.html": b"new"})
    assert (out / strange).read_text() == "mine"


@pytest.mark.parametrize("before", [True, False])
def test_a_full_disk_half_way_leaves_nothing_and_keeps_what_was(tmp_path, monkeypatch, before):
    out = tmp_path / "out"
    if before:
        earlier(out)
    written = []

    def full(target, content):
        if len(written) == 2:
            target.write_bytes(content[:1])
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        written.append(target)
        target.write_bytes(content)

    monkeypatch.setattr(folder, "_write", full)
    new = {"brief.html": b"new", "a.csv": b"1", "b.csv": b"22", "c.csv": b"3"}
    with pytest.raises(FolderError, match="the disk is full; nothing was written"):
        write_folder(out, new)
    assert len(written) == 2
    left = sorted(path.relative_to(tmp_path).as_posix() for path in tmp_path.rglob("*"))
    assert left == (["out", "out/brief.html", "out/recipe.toml"] if before else [])
    if before:
        assert (out / "brief.html").read_bytes() == b"old"


def test_a_rename_that_fails_brings_back_what_was(tmp_path, monkeypatch):
    out = tmp_path / "out"
    earlier(out)
    rename = Path.rename

    def refusing(path, target):
        if ".part-" in path.name:
            raise OSError(errno.EACCES, os.strerror(errno.EACCES))
        return rename(path, target)

    monkeypatch.setattr(Path, "rename", refusing)
    with pytest.raises(FolderError, match="Permission denied"):
        write_folder(out, {"brief.html": b"new"})
    assert (out / "brief.html").read_bytes() == b"old"
    assert [path.name for path in tmp_path.iterdir()] == ["out"]


def test_a_folder_that_cannot_be_written_is_told_before_any_work(tmp_path, run):
    place = tmp_path / "file"
    place.write_text("x")
    code, told, err = run("brief", "-o", place, "--no-pictures")
    assert (code, told) == (2, "")
    assert "-o must be a folder" in err
    with pytest.raises(FolderError, match="-o must be a folder"):
        write_folder(place / "under", {"x": b""})
    assert place.read_text() == "x"
