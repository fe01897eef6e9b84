"""Statements, breaks and alert rules of a workspace go with the recipe: made again, or told."""

import pytest

from app.brief.parts import Draft, Part
from app.brief.recipe import RecipeError, compared, read_recipe, same_files
from app.brief.remembered import Past, Remembered, differences, remembered, restore
from app.cli import main
from app.commands.parts import workspace_of
from app.compute import Bridge
from app.kept_rules import drop_rule, keep_rule, rule_lines
from app.marks import Mark
from app.outlook.statements import kept_statements
from app.state import ViewState
from app.store import Store
from app.workspace import Workspace
from tests.app.briefs import built, quick, write_files

LAG = quick(ViewState(windows="1:6", shifts="0:12", window=4, shift=9))
READING = quick(ViewState(series="Consumer prices"))
DRAFT = Draft(
    title="Prices",
    parts=(
        Part(kind="verdict", page="reading", state=READING),
        Part(kind="view", page="reading", view="rates", state=READING),
        Part(kind="view", page="outlook", view="statements", state=LAG),
        Part(kind="view", page="outlook", view="gap", state=LAG),
    ),
)
MARK = Mark("Broad money", "2015-06", "before", "new survey")


@pytest.fixture(scope="module")
def kept(tmp_path_factory):
    """A workspace with two statements, the second made of later data, a break and two rules."""
    folder = tmp_path_factory.mktemp("kept")
    early = write_files(folder / "early", months=144)
    files = write_files(folder / "files", months=150)
    places = folder / "early.sqlite", folder / "workspace.sqlite"
    first = Bridge(workspace_of(early, str(places[0])))
    cell = ["--driver", "Broad money", "--response", "Consumer prices"]
    cell += ["--window", "4", "--shift", "9"]
    for place, paths, words in zip(
        places, (early, files), ("It rises.", "It <b>stays</b>, “high”."), strict=True
    ):
        with pytest.raises(SystemExit) as ended:
            main(["outlook", str(paths[0]), *cell, "--say", words, "--workspace", str(place)])
        assert ended.value.code == 0
        if place == places[0]:  # what was said of earlier data, without their vintages
            restore(remembered(DRAFT, (), first), Workspace(path=places[1]))
    bridge = Bridge(workspace_of(files, str(places[1])))
    bridge.workspace.mark(MARK.series, MARK.period, MARK.treatment, MARK.note)
    keep_rule(bridge.workspace.store, "rate_12m above 4")
    drop_rule(bridge.workspace.store, rule_lines(bridge.workspace.store)[0])
    return files, bridge


@pytest.fixture(scope="module")
def made(kept):
    return built(DRAFT, kept[1])


def test_the_recipe_carries_what_the_workspace_remembers(made, kept):
    recipe = read_recipe(made.files["recipe.toml"].decode())
    assert recipe.remembered == made.brief.remembered
    assert [one.id for one in recipe.remembered.statements] == [1, 2]
    assert recipe.remembered.marks == (MARK,)
    assert recipe.remembered.rules == rule_lines(kept[1].workspace.store)
    assert "stays" in made.csv["views/02-outlook-statements.csv"]
    assert compared(recipe, made.brief, made.csv).data == ()


def test_without_the_workspace_every_byte_comes_back(made, kept, tmp_path, run):
    files, _ = kept
    recipe = tmp_path / "recipe.toml"
    recipe.write_bytes(made.files["recipe.toml"])
    out = tmp_path / "again"
    code, said, _ = run("brief", *files, "--recipe", recipe, "-o", out, "--no-pictures")
    assert code == 0
    assert f"{len(made.csv)} files of numbers the same to the byte" in said
    for name, text in made.csv.items():
        assert (out / name).read_bytes().decode() == text
    assert "Changed" not in said
    for name in (*made.csv, "recipe.toml"):
        assert (out / name).read_bytes() == made.files[name], name
    # Another workspace is the one that counts, and what it lacks is named.
    code, said, _ = run(
        *("brief", *files, "--recipe", recipe, "-o", tmp_path / "other", "--no-pictures"),
        *("--workspace", tmp_path / "empty.sqlite"),
    )
    first = made.brief.remembered.statements[0]
    assert f"Changed: statement 1 of {first.day}: not in this workspace (fingerprint" in said
    assert "Changed: break of Broad money at 2015-06 (before): no longer marked." in said
    assert "Changed: alert rule rate_12m above 4: no longer kept." in said
    assert kept_statements(Store(tmp_path / "empty.sqlite")).statements == ()  # nothing put there


def test_differences_name_the_statement(made):
    was = made.brief.remembered
    assert differences(was, was) == []
    first, second = was.statements
    other = Remembered((second, type(first)(**{**vars(first), "content": "{}"})), was.marks, ())
    said = differences(was, other)
    assert said[0].startswith("statement 1: another one in this workspace (fingerprint")
    assert said[1:] == [f"alert rule {line}: no longer kept" for line in was.rules]
    assert differences(Remembered(), Remembered((second,)))[0].endswith(": new")


def test_vintages_that_a_backtest_uses_are_named(tmp_path):
    place = str(tmp_path / "workspace.sqlite")
    for months in (144, 150):
        files = write_files(tmp_path / "files", months=months)
        found = remembered(DRAFT, ("Broad money",), Bridge(workspace_of(files, place)))
    (past,) = found.past
    assert (past.series, past.vintages) == ("Broad money", 2)
    (said,) = differences(found, Remembered(rules=found.rules))
    assert said == (
        f"vintages of Broad money, which the backtest uses: 2 (fingerprint {past.fingerprint})"
        " before, the newest alone now"
    )
    assert differences(found, Remembered(rules=found.rules, past=(Past("Broad money", 2, "0"),)))


def test_what_cannot_be_put_back_is_told(made):
    lone = Workspace()
    (said,) = restore(made.brief.remembered, lone)
    assert said.startswith("the break of Broad money at 2015-06 is not marked: ")
    assert len(kept_statements(lone.statement_store).statements) == 2
    assert restore(Remembered(), Workspace()) == ()


@pytest.mark.parametrize(
    ("was", "now"),
    [
        ('rules = [\n    "', 'rules = [\n    3,\n    "'),
        ("[[workspace.statement]]\nid = 1\n", "[[workspace.statement]]\nid = -1\n"),
        ("[[workspace.statement]]\nid = 1\n", "[[workspace.statement]]\nid = true\n"),
        ("[[workspace.statement]]\nid = 1\n", "[[workspace.statement]]\n"),
        ('period = "2015-06", ', ""),
    ],
)
def test_a_damaged_part_is_refused(made, was, now):
    text = made.files["recipe.toml"].decode()
    assert was in text
    with pytest.raises(RecipeError, match="a recipe must keep its shape"):
        read_recipe(text.replace(was, now, 1))


def test_an_older_recipe_says_nothing_of_the_workspace(made):
    text = made.files["recipe.toml"].decode()
    start = text.index("[workspace]")
    older = text[:start] + text[text.index("[usual]") :]
    recipe = read_recipe(older)
    assert recipe.remembered is None
    assert same_files(recipe, made.csv)[0] == len(made.csv)


def test_a_brief_without_such_pages_carries_no_statement(kept):
    draft = Draft(parts=(Part(kind="view", page="lag", view="scatter", state=LAG),))
    found = built(draft, kept[1]).brief.remembered
    assert (found.statements, found.rules, found.marks) == ((), (), (MARK,))
