"""Zip archives: checked from their directory before anything is unpacked, and never to disk."""

import io
import struct
import zipfile
from collections.abc import Callable
from dataclasses import replace
from typing import TYPE_CHECKING

from app.intake.csv_files import MAX_BYTES, refuse_size
from app.intake.problems import IntakeError, Problem, counted, display_name, quoted, refusal

if TYPE_CHECKING:
    from app.intake.reading import Release

MAX_UNPACKED = 4 * MAX_BYTES
MAX_RATIO = 200
MAX_MEMBERS = 2_000
MAX_FILES = 200
_SMALL = 8 * 1024 * 1024  # below this a high ratio does no harm
_DIRECTORY = 4 * 1024 * 1024
_CHUNK = 1024 * 1024
_METHODS = (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED)


def is_archive(content: bytes) -> bool:
    """Tell whether a file begins as a zip archive does."""
    return content.startswith((b"PK\x03\x04", b"PK\x05\x06"))


def open_archive(file: str, content: bytes) -> zipfile.ZipFile:
    """Open a zip archive whose directory promises nothing harmful.

    Raises
    ------
    IntakeError
        It is damaged, locked, packed in another way than by deflation, has too many members, or
        would unpack to too much.
    """
    refuse_size(file, len(content))
    _refuse_directory(file, content)
    try:
        archive = zipfile.ZipFile(io.BytesIO(content))
    except Exception:  # hostile bytes: whatever the library raises means that it is damaged
        raise refusal(file, "must be a whole zip archive, but it is damaged") from None
    members = archive.infolist()
    if len(members) > MAX_MEMBERS:
        raise refusal(
            file,
            f"an archive must not have more than {MAX_MEMBERS:,} members,"
            f" but this one has {len(members):,}",
        )
    for member in members:
        if member.flag_bits & 0x1:
            raise refusal(file, "an archive must be open, but this one asks for a password")
        if member.compress_type not in _METHODS:
            raise refusal(
                file,
                "an archive must be packed by deflation or not at all,"
                f" but {quoted(member.filename)} is packed in another way",
            )
    total = sum(member.file_size for member in members)
    if total > MAX_UNPACKED:
        raise refusal(
            file,
            f"an archive must not unpack to more than {MAX_UNPACKED / 1024**2:g} MB,"
            f" but this one promises {total / 1024**2:,.0f} MB",
        )
    if total > _SMALL and total > MAX_RATIO * len(content):
        raise refusal(
            file,
            f"an archive must not unpack to more than {MAX_RATIO} times its size,"
            f" but this one promises {total / len(content):,.0f} times",
        )
    return archive


def _refuse_directory(file: str, content: bytes) -> None:
    """Raise where the end of the archive tells of a directory too large to read in good time."""
    end = content.rfind(b"PK\x05\x06", max(0, len(content) - 65_557))
    if end < 0 or end + 22 > len(content):
        raise refusal(file, "must be a whole zip archive, but its directory is missing")
    size = struct.unpack_from("<L", content, end + 12)[0]
    if size > _DIRECTORY or content[max(0, end - 20) : end].startswith(b"PK\x06\x07"):
        raise refusal(
            file, f"an archive must not have more than {MAX_MEMBERS:,} members, but this one may"
        )


def archive_names(file: str, content: bytes) -> frozenset[str]:
    """Return the names of the members of an archive, after the checks of `open_archive`."""
    with open_archive(file, content) as archive:
        return frozenset(archive.namelist())


def unpacked(file: str, archive: zipfile.ZipFile, member: zipfile.ZipInfo) -> bytes:
    """Unpack one member, piece by piece, never more than its directory entry promised.

    Raises
    ------
    IntakeError
        The member is damaged or longer than a file may be.
    """
    if member.file_size > MAX_UNPACKED:
        raise refusal(file, f"{quoted(member.filename)} must be smaller to be unpacked, but is not")
    pieces = []
    try:
        with archive.open(member) as stream:
            while piece := stream.read(_CHUNK):
                pieces.append(piece)
    except Exception:  # hostile bytes, as above
        raise refusal(
            file, f"{quoted(member.filename)} must unpack as packed, but it is damaged"
        ) from None
    return b"".join(pieces)


def read_archive(
    file: str, content: bytes, read: Callable[[str, bytes], "Release"]
) -> tuple[list["Release"], list[Problem]]:
    """Read each file that a zip archive holds.

    Parameters
    ----------
    file : str
        Display name of the archive.
    content : bytes
        The archive.
    read : callable
        Reads a member, given its display name and its bytes.

    Returns
    -------
    tuple of list of Release and list of Problem
        One release a member that could be read, problems under "archive, member"; and a warning
        for each that could not.

    Raises
    ------
    IntakeError
        The archive is refused, or no member can be read.
    """
    releases: list[Release] = []
    warnings: list[Problem] = []
    refusals: list[IntakeError] = []
    with open_archive(file, content) as archive:
        members = [member for member in archive.infolist() if _is_data(member.filename)]
        if not members:
            raise refusal(file, "an archive must hold a release file, but this one holds none")
        if len(members) > MAX_FILES:
            message = f"an archive must not hold more than {MAX_FILES} files, but this one holds"
            raise refusal(file, f"{message} {len(members):,}")
        for member in members:
            name = f"{file}, {display_name(member.filename)}"
            try:
                inside = unpacked(name, archive, member)
                releases.append(_named(read(display_name(member.filename), inside), name))
            except IntakeError as error:
                refusals.append(error)
                warnings.append(replace(error.problem, file=name, severity="warning"))
    if not releases:
        first = refusals[0].problem
        others = counted("", len(refusals) - 1, "file that was not read").strip()
        message = f"{first.message} {others}".rstrip()
        raise refusal(warnings[0].file, message, row=first.row, column=first.column)
    return releases, warnings


def _is_data(path: str) -> bool:
    """Tell members that hold data from folders and from what file managers leave behind."""
    parts = path.replace("\\", "/").split("/")
    return bool(parts[-1]) and not parts[-1].startswith(".") and "__MACOSX" not in parts


def _named(release: "Release", name: str) -> "Release":
    """Put the name of archive and member on a release and all that was found in it."""
    inside = release.name
    return replace(
        release,
        name=name,
        series=tuple(
            replace(one, source=name) if one.source == inside else one for one in release.series
        ),
        problems=tuple(replace(one, file=name) for one in release.problems),
    )
