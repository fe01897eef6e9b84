"""A folder that is written whole or not at all: into a sibling first, then renamed."""

import errno
import os
import secrets
import shutil
import tomllib
from collections.abc import Mapping
from pathlib import Path

RECIPE = "recipe.toml"
LISTED = "files"  # in the recipe: every file of the brief, the recipe itself left out


class FolderError(ValueError):
    """A folder that cannot be written; the text is one sentence."""


def write_folder(folder: Path, files: Mapping[str, bytes]) -> None:
    """Write files, by name within the folder, as a new folder or in place of an earlier brief.

    Raises
    ------
    FolderError
        The folder holds something else, cannot be written, or the disk is full; what was there
        before is untouched.
    """
    folder = folder.absolute()
    check_folder(folder)
    part = folder.with_name(f".{folder.name[:80]}.part-{secrets.token_hex(4)}")
    before = folder.with_name(f".{folder.name[:80]}.before-{secrets.token_hex(4)}")
    try:
        folder.parent.mkdir(parents=True, exist_ok=True)
        part.mkdir()
        for name, content in files.items():
            target = part / name
            target.parent.mkdir(exist_ok=True)
            _write(target, content)
        if folder.exists():
            folder.rename(before)
        try:
            part.rename(folder)
        except OSError:
            if before.exists():
                before.rename(folder)
            raise
    except OSError as error:
        raise FolderError(_sentence(folder, error)) from error
    finally:
        shutil.rmtree(part, ignore_errors=True)
    shutil.rmtree(before, ignore_errors=True)


def check_folder(folder: Path) -> None:
    """Refuse a folder that holds anything but an earlier brief, before any work is done.

    Raises
    ------
    FolderError
        It is a file, holds something else, or cannot be read.
    """
    try:
        if not folder.exists():
            return
        if not folder.is_dir():
            raise FolderError(f"-o must be a folder, but {str(folder)!r} is a file")
        there = {
            path.relative_to(folder).as_posix()
            for path in folder.rglob("*")
            if not path.is_dir() or path.is_symlink()
        }
    except OSError as error:
        raise FolderError(_sentence(folder, error)) from error
    strange = sorted(there - _of_earlier(folder))
    if strange:
        more = f" and {len(strange) - 1} more" if len(strange) > 1 else ""
        raise FolderError(
            "-o must be a new or an empty folder, or one with an earlier brief and nothing else,"
            f" but {str(folder)!r} also holds {strange[0]!r}{more}"
        )


def _of_earlier(folder: Path) -> set[str]:
    """Return the files that the recipe in a folder says are its brief."""
    try:
        found = tomllib.loads((folder / RECIPE).read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return set()
    listed = found.get(LISTED, [])
    return {RECIPE, *(str(name) for name in listed)} if isinstance(listed, list) else set()


def _write(target: Path, content: bytes) -> None:
    with target.open("xb") as file:
        file.write(content)
        file.flush()
        os.fsync(file.fileno())


def _sentence(folder: Path, error: OSError) -> str:
    if error.errno in (errno.ENOSPC, errno.EDQUOT):
        return f"the disk is full; nothing was written to {str(folder)!r}"
    reason = error.strerror or str(error)
    return f"-o must be a folder that may be written, but got {str(folder)!r}: {reason}"
