"""What `pricewake brief` reads and prints."""

from dataclasses import replace
from pathlib import Path
from typing import Any

import click

from app.brief.assembled import opening, prefilled
from app.brief.building import Building
from app.brief.parts import Draft, Part, read_draft
from app.brief.recipe import MOST_BYTES, Recipe, missing_series, read_recipe, same_files
from app.commands.parts import state_of
from app.compute import Bridge
from app.exports import csv_text
from app.places import software_version
from app.words import counted

_SIDES = {"reading": ("series",), "lag": ("driver", "response", "window", "shift")}


def recipe_of(path: Path) -> Recipe:
    """Read a recipe from a file.

    Raises
    ------
    RecipeError or UsageError
        It cannot be read or followed; one sentence.
    """
    try:
        with path.open("rb") as file:
            content = file.read(MOST_BYTES + 1)
        if len(content) > MOST_BYTES:
            raise click.UsageError(
                f"--recipe must be a recipe.toml, but {str(path)!r} is too large"
            )
        text = content.decode("utf-8")
    except UnicodeDecodeError:
        raise click.UsageError(f"--recipe must be text, but {str(path)!r} is not") from None
    except OSError as error:
        raise click.UsageError(
            f"--recipe must be a file that can be read, but got {str(path)!r}: {error.strerror}"
        ) from error
    return read_recipe(text)


def draft_of(
    before: Recipe | None,
    bridge: Bridge,
    flags: dict[str, str | None],
    form: str | None,
    title: str | None,
) -> Draft:
    """Return the draft of the recipe, else the usual one in the states that the flags name.

    Raises
    ------
    UsageError
        Flags that belong to a new brief go with a recipe, or it needs series that are not there.
    """
    if before is None:
        given = {name: text for name, text in flags.items() if text is not None}
        states = {
            page: state_of(
                opening(page, bridge),
                {name: text for name, text in given.items() if _belongs(name, page)},
            )
            for page in ("reading", "breadth", "lag", "outlook")
        }
        draft = prefilled(bridge, form or "full", states)
        return read_draft_title(draft, title)
    named = [name for name, text in flags.items() if text is not None]
    if named:
        raise click.UsageError(
            f"a recipe holds its own views, so --{named[0].replace('_', '-')} cannot go with it"
        )
    lacking = missing_series(before, bridge)
    if lacking:
        listed = ", ".join(repr(name) for name in lacking[:4])
        more = f" and {len(lacking) - 4} more" if len(lacking) > 4 else ""
        raise click.UsageError(f"the recipe needs series that are not in the files: {listed}{more}")
    draft = before.draft if form is None else replace(before.draft, form=form)
    if draft.form == "one-page" != before.draft.form:
        draft = replace(draft, parts=_first_views(draft.parts))
    return read_draft_title(draft, title)


def _first_views(parts: tuple[Part, ...]) -> tuple[Part, ...]:
    """Return the parts with the first view of each page and state alone, as one page holds."""
    seen, kept = set(), []
    for part in parts:
        question = part.page, part.state
        if part.kind != "view" or question not in seen:
            kept.append(part)
        if part.kind == "view":
            seen.add(question)
    return tuple(kept)


def read_draft_title(draft: Draft, title: str | None) -> Draft:
    """Return the draft with a title that was given, checked as one that a page sends."""
    if title is None:
        return draft
    return replace(draft, title=read_draft({"title": title, "parts": []}).title)


def _belongs(name: str, page: str) -> bool:
    """Whether a flag is for a page: one for a series is for the page that looks at it."""
    owned = {field for fields in _SIDES.values() for field in fields}
    sides = _SIDES["lag"] if page == "outlook" else _SIDES.get(page, ())
    return name not in owned or name in sides


def lines(building: Building, folder: Path) -> list[str]:
    """Return what to print: the files, what is missing, and what changed since last time."""
    brief, before, since = building.brief, building.before, building.since
    assert brief is not None
    kinds: dict[str, int] = {}
    for name in building.files:
        kind = name.rpartition(".")[2]
        kinds[kind] = kinds.get(kind, 0) + 1
    inside = ", ".join(f"{n} {kind.upper()}" for kind, n in kinds.items())
    found = [f"{brief.title}: {counted(len(building.files), 'file')} in {folder} ({inside})."]
    found += [f"{text[:1].upper()}{text[1:]}." for text in building.said]
    if before is None or since is None:
        return found
    if brief.draft.parts == before.draft.parts:
        same, of = same_files(before, building.csv)
        found.append(
            f"Since last time: {same} of {counted(of, 'file')} of numbers the same to the byte."
        )
    found += [f"Changed: {line}." for line in since.data]
    moved = [change for change in since.figures if change.moved]
    seen = [change for change in moved if change.before != change.now]
    found += [
        f"{change.page}, {change.label}: {change.before} before, {change.now} now."
        for change in seen
    ]
    if len(seen) < len(moved):
        found.append(
            f"{counted(len(moved) - len(seen), 'more key figure')} moved by less than is shown."
        )
    return found


def figures_csv(building: Building) -> str:
    """Return the key figures now, and last time where there was one, as CSV text."""
    brief, before = building.brief, building.before
    assert brief is not None
    earlier = {
        (one.page, one.state, one.figure.key): one.figure.value
        for one in (before.figures if before else ())
    }
    rows: list[list[Any]] = [["page", "state", "figure", "unit", "last_time", "now"]]
    rows += [
        [
            one.page,
            one.state,
            one.figure.label,
            one.figure.unit,
            earlier.get((one.page, one.state, one.figure.key)),
            one.figure.value,
        ]
        for one in brief.figures
    ]
    head = [("Pricewake", software_version()), ("view", f"key figures of {brief.title}")]
    return csv_text(head, rows)
