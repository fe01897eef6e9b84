"""The recipe: made again to the byte, held against new data, refused in a sentence."""

import json
import re
import subprocess
import sys
import tomllib
from pathlib import Path

import numpy as np
import pytest

from app.brief.building import zipped
from app.brief.parts import Draft, Part
from app.brief.recipe import (
    FORMAT,
    RecipeError,
    compared,
    missing_series,
    read_recipe,
    recipe_text,
    same_files,
)
from app.lag.evidence import completed
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


def test_key_figures_are_the_results_own(made, bridge):
    state = next(part.state for part in made.draft.parts if part.page == "lag")
    found = {one.figure.key: one.figure.value for one in made.brief.figures if one.page == "lag"}
    known = completed(state, bridge)
    assert found["p_search"] == float(known.search.p)
    assert found["correlation"] == bridge.cell(state).correlation
    assert found["best_shift"] == known.search.best_shift
    assert np.isfinite(list(found.values())).all()


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


def test_missing_series_are_named(recipe, files, tmp_path, run, made):
    only = desk(files[1:])
    assert missing_series(recipe, only) == ("Consumer prices", "Broad money")
    path = tmp_path / "recipe.toml"
    path.write_bytes(made.files["recipe.toml"])
    code, out, err = run("brief", "--recipe", path, "-o", tmp_path / "out", *files[1:])
    assert (code, out) == (2, "")
    assert (
        "the recipe needs series that are not in the files: 'Consumer prices', 'Broad money'" in err
    )
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("content", "said"),
    [(b"\xff\xfe\x00", "must be text"), (b"a = ", "must be TOML"), (None, "No such file")],
)
def test_a_recipe_file_that_is_none_is_refused(content, said, tmp_path, run):
    path = tmp_path / "recipe.toml"
    if content is not None:
        path.write_bytes(content)
    code, _, err = run("brief", "--recipe", path, "-o", tmp_path / "out")
    assert code == 2
    assert said in err
    assert err.count("\n") == 1


def test_a_recipe_takes_no_flags_of_a_new_brief(made, files, tmp_path, run):
    path = tmp_path / "recipe.toml"
    path.write_bytes(made.files["recipe.toml"])
    code, _, err = run("brief", "--recipe", path, "--window", "3", "-o", tmp_path / "o", *files)
    assert code == 2
    assert "--window cannot go with it" in err


# The command ---------------------------------------------------------------------------------


def test_the_command_writes_all_and_says_so(files, tmp_path, run):
    out, table = tmp_path / "brief", tmp_path / "figures.csv"
    flags = ["--surrogates", "99", "--draws", "99", "--window", "4", "--shift", "9"]
    flags += ["--form", "one-page", "--title", "June", "--no-pictures"]
    code, told, _ = run("brief", "-o", out, "--json", "--csv", table, *flags, *files)
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
    again, told, _ = run("brief", "-o", out, *flags, *files)  # in place of the earlier
    assert again == 0
    assert told.startswith("June: ")
