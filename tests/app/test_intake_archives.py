"""Zip archives: what is read of them, and what is refused before anything is unpacked."""

import io
import zipfile

import pytest

from app.intake import archives
from app.intake.reading import IntakeError, read_release
from tests.app.test_intake_xlsx import PLAIN, saved

CSV = b"p,A\n2024-01,1\n2024-02,2\n"
JUNK = b"\x89PNG\r\n"


def zipped(members: dict[str, bytes], method: int = zipfile.ZIP_DEFLATED) -> bytes:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", method) as archive:
        for name, content in members.items():
            archive.writestr(name, content)
    return stream.getvalue()


@pytest.mark.parametrize(
    "path",
    ["a.csv", "deep/er/a.csv", "../../../etc/a.csv", "/etc/a.csv", "C:\\x\\a.csv", "a\u202e.csv"],
)
def test_paths_in_names_do_no_harm(path: str) -> None:
    release = read_release("a.zip", zipped({path: CSV}))
    assert [series.name for series in release.series] == ["A"]
    assert release.name == "a.zip" and release.series[0].source == "a.zip, a.csv"


def test_problems_carry_archive_and_member() -> None:
    release = read_release("a.zip", zipped({"x/b.csv": b"p,A,B\n2024-01,1,x\n"}))
    assert [str(problem) for problem in release.problems] == [
        "a.zip, b.csv, row 2, column 'B': must be a number, but got 'x'"
    ]


def test_what_is_no_data_is_passed_over_and_what_cannot_be_read_is_told() -> None:
    members = {"__MACOSX/._a.csv": JUNK, ".DS_Store": JUNK, "folder/": b"", "a.csv": CSV}
    release = read_release("a.zip", zipped({**members, "chart.png": JUNK}))
    assert [series.name for series in release.series] == ["A"]
    assert [(problem.severity, str(problem)) for problem in release.problems] == [
        (
            "warning",
            "a.zip, chart.png: must be CSV, XLSX, SDMX or a zip of them, but this is a PNG picture",
        )
    ]


def test_several_files_are_read_and_equal_names_told_apart() -> None:
    members = {"old/a.csv": CSV, "new/a.csv": CSV, "b.xlsx": saved(("S", PLAIN))}
    release = read_release("a.zip", zipped(members))
    assert [series.name for series in release.series] == ["a: A", "a: A (2)", "Prices"]


def test_a_stored_workbook_inside_is_no_workbook_outside() -> None:
    content = zipped({"b.xlsx": saved(("S", PLAIN))}, zipfile.ZIP_STORED)
    assert [series.name for series in read_release("a.zip", content).series] == ["Prices"]
    assert read_release("a.zip", content, sheet="S").series[0].name == "Prices"


def promising(content: bytes, size: int) -> bytes:
    return content.replace(len(CSV).to_bytes(4, "little"), size.to_bytes(4, "little"))


def _locked() -> bytes:
    content = bytearray(zipped({"a.csv": CSV}))
    content[6] |= 1
    directory = content.find(b"PK\x01\x02")
    content[directory + 8] |= 1
    return bytes(content)


REFUSED = {
    "nothing": (b"PK\x05\x06" + bytes(18), "must hold a release file, but this one holds none"),
    "folders": (zipped({"a/": b""}), "must hold a release file, but this one holds none"),
    "nested": (
        zipped({"b.zip": zipped({"a.csv": CSV})}),
        "a.zip, b.zip: an archive must not hold another archive, but this one does",
    ),
    "only junk": (
        zipped({"a.png": JUNK, "b.png": JUNK}),
        "a.zip, a.png: must be CSV, XLSX, SDMX or a zip of them, but this is a PNG picture (and 1"
        " more file that was not read)",
    ),
    "password": (_locked(), "must be open, but this one asks for a password"),
    "packed otherwise": (zipped({"a.csv": CSV}, zipfile.ZIP_LZMA), "must be packed by deflation"),
    "bomb by ratio": (zipped({"a.csv": b" " * 30_000_000}), "more than 200 times its size"),
    "bomb by size": (
        promising(zipped({"a.csv": CSV}), 286 * 1024**2),
        "must not unpack to more than 256 MB, but this one promises 286 MB",
    ),
    "damaged": (zipped({"a.csv": CSV * 50}).replace(b"\xdc", b"\xdd", 1)[:-30], "directory is"),
    "wrong sum": (
        zipped({"a.csv": CSV}, zipfile.ZIP_STORED).replace(b"2024-01", b"2024-03", 1),
        "must unpack as packed, but it is damaged",
    ),
    "too many": (zipped({f"{n}.csv": CSV for n in range(201)}), "more than 200 files"),
    "office": (zipped({"mimetype": b"x", "content.xml": b"<a/>"}), "office document of another"),
}


@pytest.mark.parametrize("case", REFUSED)
def test_refused_in_one_sentence(case: str) -> None:
    content, sentence = REFUSED[case]
    with pytest.raises(IntakeError) as caught:
        read_release("a.zip", content)
    assert sentence in str(caught.value) and "\n" not in str(caught.value)
    assert str(caught.value).startswith("a.zip")


def test_a_bomb_is_refused_before_it_is_unpacked(monkeypatch: pytest.MonkeyPatch) -> None:
    def never(*_: object) -> bytes:
        raise AssertionError("unpacked")

    monkeypatch.setattr(archives, "unpacked", never)
    for case in ("bomb by ratio", "bomb by size", "password", "packed otherwise"):
        with pytest.raises(IntakeError):
            read_release("a.zip", REFUSED[case][0])


def test_a_long_directory_is_not_read(monkeypatch: pytest.MonkeyPatch) -> None:
    many = zipped({f"{n}.csv": b"" for n in range(50)})
    monkeypatch.setattr(archives, "MAX_MEMBERS", 40)
    with pytest.raises(IntakeError, match="more than 40 members, but this one has 50"):
        read_release("a.zip", many)
    monkeypatch.setattr(archives, "_DIRECTORY", 1000)
    with pytest.raises(IntakeError, match="more than 40 members, but this one may"):
        read_release("a.zip", many)


def test_a_member_within_a_nested_refusal_leaves_the_others() -> None:
    members = {"b.zip": zipped({"a.csv": CSV}), "a.csv": CSV}
    release = read_release("a.zip", zipped(members))
    assert [series.name for series in release.series] == ["A"]
    assert "must not hold another archive" in str(release.problems[0])
