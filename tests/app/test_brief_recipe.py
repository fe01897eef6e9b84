"""The recipe: made again to the byte, held against new data, refused in a sentence."""

import errno
import json
import os
import re
import subprocess
import sys
import tomllib
import zlib
from pathlib import Path

import numpy as np
import pytest

from app.brief import chromium, folder, pictures
from app.brief.building import zipped
from app.brief.folder import FolderError, check_folder, write_folder
from app.brief.parts import Draft, Part
from app.brief.pictures import png_with, svg_with
from app.brief.recipe import (
    FORMAT,
    RecipeError,
    compared,
    missing_series,
    read_recipe,
    recipe_text,
    same_files,
)
from app.cli import main
from app.state import ViewState
from tests.app.briefs import built, desk, quick, write_files

ROOT = Path(__file__).resolve().parents[2]


@pytest.fixture(scope="module")
def files(tmp_path_factory):
    return write_files(tmp_path_factory.mktemp("desk"))


@pytest.fixture(scope="module")
def bridge(files):
    return desk(files)


@pytest.fixture(scope="module")
def draft():
    state = quick(ViewState(windows="1:8", shifts="0:14", window=4, shift=9))
    reading = quick(ViewState(series="Consumer prices"))
    return Draft(
        title="Prices “now”",
        parts=(
            Part(kind="verdict", page="reading", state=reading),
            Part(kind="view", page="reading", view="rank", state=reading),
            Part(kind="words", words='Line one\n\n"quoted" \\ back = [x]\n'),
            Part(kind="view", page="breadth", view="core"),
            Part(kind="verdict", page="lag", state=state),
            Part(kind="view", page="lag", view="surface", state=state),
        ),
    )


@pytest.fixture(scope="module")
def made(draft, bridge):
    return built(draft, bridge)


@pytest.fixture(scope="module")
def recipe(made):
    return read_recipe(made.files["recipe.toml"].decode())


def run(arguments, capsys):
    with pytest.raises(SystemExit) as ended:
        main([str(each) for each in arguments])
    told = capsys.readouterr()
    return ended.value.code, told.out, told.err


# Again ---------------------------------------------------------------------------------------


def test_a_recipe_gives_back_the_draft_and_what_stood_behind_it(made, recipe, draft):
    assert recipe.draft == draft
    assert [one.name for one in recipe.series] == [one.name for one in made.brief.series]
    assert [vars(one) for one in recipe.series] == [vars(one) for one in made.brief.series]
    values = [(one.page, one.figure.key, one.figure.value) for one in made.brief.figures]
    assert [(one.page, one.figure.key, one.figure.value) for one in recipe.figures] == values
    assert len(values) > 15
    assert {"pricewake", "python", "numpy", "pandas", "scipy"} <= recipe.versions.keys()


def test_the_same_data_give_the_same_bytes_in_another_process(made, files, tmp_path):
    (tmp_path / "recipe.toml").write_bytes(made.files["recipe.toml"])
    out = tmp_path / "again"
    command = [sys.executable, "-m", "app", "brief", "--recipe", str(tmp_path / "recipe.toml")]
    done = subprocess.run(
        [*command, "-o", str(out), "--no-pictures", *map(str, files)],
        cwd=ROOT,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    assert "3 of 3 files of numbers the same to the byte" in done.stdout
    assert "Changed" not in done.stdout
    numbers = {name for name in made.files if name.endswith(".csv")}
    assert len(numbers) == 3
    for name in (*numbers, "recipe.toml"):
        assert (out / name).read_bytes() == made.files[name], name


def test_nothing_changed_says_nothing(made, recipe):
    found = compared(recipe, made.brief, made.csv)
    assert (found.data, found.figures) == ((), ())
    assert same_files(recipe, made.csv) == (3, 3)
    again = built(recipe.draft, made.bridge, before=recipe)
    assert "last time" not in again.files["brief.html"].decode()


def test_a_number_that_differs_by_itself_is_told(made, recipe):
    other = dict(made.csv)
    name = next(iter(other))
    other[name] += "1"
    (said,) = compared(recipe, made.brief, other).data
    assert said.startswith("1 of 3 files of numbers differ although data and programs are the same")


def test_next_month_rolls_forward_and_marks_what_changed(recipe, tmp_path, made):
    later = desk(write_files(tmp_path, months=151))
    again = built(recipe.draft, later, before=recipe)
    changed = "\n".join(again.since.data)
    old = {one.name: one for one in recipe.series}
    new = {one.name: one for one in again.brief.series}
    for name in ("Consumer prices", "Broad money"):
        assert old[name].fingerprint != new[name].fingerprint
        assert (
            f"{name}: fingerprint {old[name].fingerprint} before, {new[name].fingerprint}"
            in changed
        )
    assert "6 series, 2010-01 to 2022-06 before, 2010-01 to 2022-07 now; " in changed
    assert same_files(recipe, again.csv)[0] == 0
    moved = {change.label: change for change in again.since.figures if change.moved}
    assert len(moved) > 10
    before = {one.figure.label: one.figure for one in recipe.figures}
    now = {one.figure.label: one.figure for one in again.brief.figures}
    page = again.files["brief.html"].decode()
    assert "What changed since last time" in page
    for label in ("Consumer prices, rate over one period, %", "correlation at window 4, shift +9"):
        change = moved[label]
        key = label.removesuffix(", %")
        assert change.before == before[key].text
        assert change.now == now[key].text
        gap = now[key].value - before[key].value
        assert float(change.difference.replace("−", "-")) == pytest.approx(gap, abs=0.006)
        assert f">{change.before}</td>" in page
        assert f">{change.now}</td>" in page
    # The recipe of the new brief is the next one's yardstick.
    assert (
        compared(read_recipe(again.files["recipe.toml"].decode()), again.brief, again.csv).data
        == ()
    )


def test_the_usual_values_of_then_are_kept(made):
    text = made.files["recipe.toml"].decode()
    assert 'formula = "percent"' in text
    older = text.replace('formula = "percent"', 'formula = "log"')  # as if log had been usual
    states = [part.state for part in read_recipe(older).draft.parts if part.page == "reading"]
    assert {state.formula for state in states} == {"log"}


def test_equal_briefs_have_equal_recipes_and_archives(made, draft, bridge):
    again = built(draft, bridge)
    assert again.files["recipe.toml"] == made.files["recipe.toml"]
    assert zipped(again.files) == zipped(made.files)
    assert recipe_text(again.brief, {}) == recipe_text(made.brief, {})


# Refusals ------------------------------------------------------------------------------------


def test_a_newer_recipe_is_refused(made):
    text = (
        made.files["recipe.toml"].decode().replace(f"format = {FORMAT}", f"format = {FORMAT + 1}")
    )
    with pytest.raises(RecipeError, match=r"written by a newer Pricewake \(recipe format 2"):
        read_recipe(text)


@pytest.mark.parametrize(
    ("changed", "said"),
    [
        (lambda t: "", "names no format"),
        (lambda t: "format = true", "names no format"),
        (lambda t: t + "\n[", "must be TOML"),
        (lambda t: "x = " + "[" * 5000, "must be TOML"),
        (lambda t: t.replace('kind = "words"', 'kind = "poem"'), "verdict, view, words"),
        (lambda t: t.replace("window=4", "window=400"), "Window must be a whole number"),
        (lambda t: t.replace("window=4", "wendow=4"), "a state has no 'wendow'"),
        (lambda t: t.replace("fingerprint = ", "fingerpaint = "), "must keep its shape"),
        (lambda t: re.sub(r"value = [-0-9.e]+", 'value = "x"', t, count=1), "must keep its shape"),
        (
            lambda t: t.replace("[[part]]", "[[port]]").replace("format", "part = 3\nformat"),
            "shape",
        ),
    ],
)
def test_a_damaged_recipe_is_refused_in_a_sentence(made, changed, said):
    with pytest.raises(RecipeError, match=re.escape(said)):
        read_recipe(changed(made.files["recipe.toml"].decode()))


def test_missing_series_are_named(recipe, files, tmp_path, capsys, made):
    only = desk(files[1:])
    assert missing_series(recipe, only) == ("Consumer prices", "Broad money")
    path = tmp_path / "recipe.toml"
    path.write_bytes(made.files["recipe.toml"])
    code, out, err = run(["brief", "--recipe", path, "-o", tmp_path / "out", *files[1:]], capsys)
    assert (code, out) == (2, "")
    assert (
        "the recipe needs series that are not in the files: 'Consumer prices', 'Broad money'" in err
    )
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("content", "said"),
    [(b"\xff\xfe\x00", "must be text"), (b"a = ", "must be TOML"), (None, "No such file")],
)
def test_a_recipe_file_that_is_none_is_refused(content, said, tmp_path, capsys):
    path = tmp_path / "recipe.toml"
    if content is not None:
        path.write_bytes(content)
    code, _, err = run(["brief", "--recipe", path, "-o", tmp_path / "out"], capsys)
    assert code == 2
    assert said in err
    assert err.count("\n") == 1


def test_a_recipe_takes_no_flags_of_a_new_brief(made, files, tmp_path, capsys):
    path = tmp_path / "recipe.toml"
    path.write_bytes(made.files["recipe.toml"])
    code, _, err = run(
        ["brief", "--recipe", path, "--window", "3", "-o", tmp_path / "o", *files], capsys
    )
    assert code == 2
    assert "--window cannot go with it" in err


# The command ---------------------------------------------------------------------------------


def test_the_command_writes_all_and_says_so(files, tmp_path, capsys):
    out, table = tmp_path / "brief", tmp_path / "figures.csv"
    flags = ["--surrogates", "99", "--draws", "99", "--window", "4", "--shift", "9"]
    flags += ["--form", "one-page", "--title", "June", "--no-pictures"]
    code, told, _ = run(["brief", "-o", out, "--json", "--csv", table, *flags, *files], capsys)
    assert code == 0
    answer = json.loads(told)
    assert {Path(name) for name in answer["files"]} == {p for p in out.rglob("*") if p.is_file()}
    names = {path.relative_to(out).as_posix() for path in out.rglob("*") if path.is_file()}
    assert {"brief.html", "recipe.toml", "views/01-reading-rates.csv"} <= names
    assert "<title>June</title>" in (out / "brief.html").read_text(encoding="utf-8")
    kept = tomllib.loads((out / "recipe.toml").read_text(encoding="utf-8"))
    assert kept["form"] == "one-page"
    assert sorted(kept["files"]) == sorted(names - {"recipe.toml"})
    states = {part["page"]: part["state"] for part in kept["part"]}
    assert "window=4" in states["lag"]
    assert "window" not in states["reading"]
    rows = table.read_text(encoding="utf-8").splitlines()
    assert any(row.startswith("lag,") and "correlation" in row for row in rows)
    again, told, _ = run(["brief", "-o", out, *flags, *files], capsys)  # in place of the earlier
    assert again == 0
    assert told.startswith("June: ")


def test_without_a_chromium_the_brief_still_comes(draft, bridge, monkeypatch):
    monkeypatch.setenv("BROWSER_PATH", "nowhere/chromium")
    short = Draft(parts=draft.parts[:2])
    found = built(short, bridge, images=True)
    assert sorted({name.rpartition(".")[2] for name in found.files}) == ["csv", "html", "toml"]
    assert found.said == [
        "no PNG and SVG were made: no Chromium was found on this machine",
        "no PDF was made: no Chromium was found on this machine",
    ]


def test_without_the_extra_the_brief_still_comes(draft, bridge, monkeypatch):
    monkeypatch.setattr(pictures.importlib.util, "find_spec", lambda name: None)
    monkeypatch.setattr(chromium, "chromium", lambda: None)
    found = built(Draft(parts=draft.parts[:2]), bridge, images=True)
    assert "pip install 'pricewake[images]'" in found.said[0]


def test_a_chromium_that_hangs_is_ended(tmp_path, monkeypatch):
    slow = tmp_path / "slow"
    mark = tmp_path / "pid"
    slow.write_text(f"#!/bin/sh\necho $$ > {mark}\nsleep 60 & wait\n")
    slow.chmod(0o755)
    monkeypatch.setenv("BROWSER_PATH", str(slow))
    monkeypatch.setattr(chromium, "PATIENCE", 0.5)
    page = tmp_path / "page.html"
    page.write_text("x")
    with pytest.raises(chromium.NoChromiumError, match="took longer than"):
        chromium.printed(page)
    with pytest.raises(ProcessLookupError):
        os.kill(int(mark.read_text()), 0)


# The folder ----------------------------------------------------------------------------------


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


def test_a_folder_that_cannot_be_written_is_told_before_any_work(tmp_path, capsys):
    (tmp_path / "file").write_text("x")
    for out in (tmp_path / "file", tmp_path / "file" / "under"):
        code, told, err = (
            run(["brief", "-o", out, "--no-pictures"], capsys)
            if out.name == "file"
            else (2, "", _refused(out))
        )
        assert (code, told) == (2, "")
        assert "-o must be a folder" in err
    assert (tmp_path / "file").read_text() == "x"


def _refused(out):
    with pytest.raises(FolderError) as told:
        write_folder(out, {"x": b""})
    return str(told.value)


# Pictures carry where they came from ----------------------------------------------------------


def _png():
    def chunk(kind, body):
        return (
            len(body).to_bytes(4, "big") + kind + body + zlib.crc32(kind + body).to_bytes(4, "big")
        )

    head = (1).to_bytes(4, "big") * 2 + bytes([8, 0, 0, 0, 0])
    return (
        b"\x89PNG\r\n\x1a\n"
        + chunk(b"IHDR", head)
        + chunk(b"IDAT", zlib.compress(b"\0\0"))
        + chunk(b"IEND", b"")
    )


def test_notes_in_a_png_are_chunks_of_their_own():
    found = png_with(_png(), {"Title": "Prices – «up»", "Seed": "1"})
    place, kinds, notes = 8, [], {}
    while place < len(found):
        size = int.from_bytes(found[place : place + 4], "big")
        kind, body = found[place + 4 : place + 8], found[place + 8 : place + 8 + size]
        assert zlib.crc32(kind + body) == int.from_bytes(found[place + 8 + size :][:4], "big")
        kinds.append(kind)
        if kind == b"iTXt":
            key, rest = body.split(b"\0", 1)
            assert rest[:4] == b"\0\0\0\0"
            notes[key.decode()] = rest[4:].decode()
        place += 12 + size
    assert kinds == [b"IHDR", b"iTXt", b"iTXt", b"IDAT", b"IEND"]
    assert notes == {"Title": "Prices – «up»", "Seed": "1"}
    with pytest.raises(ValueError, match="must be a PNG"):
        png_with(b"GIF89a", {})


def test_notes_in_an_svg_are_escaped():
    found = svg_with(b'<svg xmlns="x" width="3"><g/></svg>', "a < b\x01", {"Series": "<b>&"})
    assert found == (
        b'<svg xmlns="x" width="3"><title>a &lt; b</title>'
        b"<desc>Series: &lt;b&gt;&amp;</desc><g/></svg>"
    )
    with pytest.raises(ValueError, match="must be an SVG"):
        svg_with(b"nothing", "", {})


def test_key_figures_are_the_results_own(made, bridge):
    from app.compute import Bridge
    from app.lag.evidence import completed

    assert isinstance(bridge, Bridge)
    state = next(part.state for part in made.draft.parts if part.page == "lag")
    found = {one.figure.key: one.figure.value for one in made.brief.figures if one.page == "lag"}
    known = completed(state, bridge)
    assert found["p_search"] == float(known.search.p)
    assert found["correlation"] == bridge.cell(state).correlation
    assert found["best_shift"] == known.search.best_shift
    assert np.isfinite(list(found.values())).all()
