"""recipe.toml: all that it takes to make a brief again, and what it showed the last time."""

import hashlib
import platform
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from importlib.metadata import PackageNotFoundError, version
from typing import Any
from urllib.parse import parse_qsl, urlencode

import numpy as np

from app.brief.assembled import Brief, Figured
from app.brief.folder import LISTED
from app.brief.key_figures import KeyFigure
from app.brief.parts import Draft, read_draft
from app.brief.remembered import Remembered, differences, read_remembered, written
from app.brief.series_used import Provenance
from app.brief.sources import source
from app.compute import Bridge
from app.places import software_version
from app.state import ViewState, kind_of

FORMAT = 1
MOST_BYTES = 16 * 2**20  # statements of years
TOGETHER = 4  # series of one span whose changes share a line
LIBRARIES = ("numpy", "pandas", "scipy", "statsmodels", "plotly")


class RecipeError(ValueError):
    """A recipe that cannot be followed; the text is one sentence for the user."""


@dataclass(frozen=True, eq=False)
class Recipe:
    """A recipe as read.

    Attributes
    ----------
    draft : Draft
        What the brief consists of.
    series : tuple of Provenance
        What stood behind it.
    figures : tuple of Figured
        Its key figures.
    sums : mapping of str to str
        SHA-256 of each file of numbers.
    versions : mapping of str to str
        Programs that made it.
    remembered : Remembered or None
        What it showed from the workspace; None where it does not say.
    """

    draft: Draft
    series: tuple[Provenance, ...]
    figures: tuple[Figured, ...]
    sums: Mapping[str, str]
    versions: Mapping[str, str]
    remembered: Remembered | None = None


@dataclass(frozen=True)
class Change:
    """A key figure now and last time, as text; `moved` where the unrounded numbers differ."""

    page: str
    label: str
    before: str
    now: str
    difference: str
    moved: bool


@dataclass(frozen=True)
class Comparison:
    """What differs from the last brief: sentences on the data and programs, and key figures."""

    data: tuple[str, ...]
    figures: tuple[Change, ...]


def recipe_text(brief: Brief, numbers: Mapping[str, str], files: Sequence[str] = ()) -> str:
    """Write the recipe of a brief as TOML; equal briefs give equal texts.

    `numbers` holds the CSV files by name, and `files` is every file beside the recipe.
    """
    import tomli_w

    parts = []
    for part in brief.draft.parts:
        if part.kind == "words":
            parts.append({"kind": "words", "words": part.words})
            continue
        named = {"kind": part.kind, "page": part.page}
        if part.view:
            named["view"] = part.view
        parts.append({**named, "seed": part.state.seed, "state": part.state.to_query()})
    return tomli_w.dumps(
        {
            "format": FORMAT,
            "title": brief.draft.title,
            "form": brief.draft.form,
            LISTED: list(files),
            "versions": versions(),
            "part": parts,
            "series": [vars(one) for one in brief.series],
            "figure": [
                {"page": each.page, "state": each.state, **vars(each.figure)}
                for each in brief.figures
            ],
            "file": [{"name": name, "sha256": sum_of(text)} for name, text in numbers.items()],
            "workspace": written(brief.remembered),
            "usual": {item.name: item.default for item in fields(ViewState)},
        },
        multiline_strings=False,
    )


def sum_of(text: str) -> str:
    """Return the SHA-256 of a file of numbers."""
    return hashlib.sha256(text.encode()).hexdigest()


def versions() -> dict[str, str]:
    """Return the versions of the programs that a brief is made with."""
    found = {"pricewake": software_version(), "python": platform.python_version()}
    for name in LIBRARIES:
        try:
            found[name] = version(name)
        except PackageNotFoundError:  # pragma: no cover - all of them are required
            found[name] = "missing"
    return found


def read_recipe(text: str) -> Recipe:
    """Read a recipe.

    Raises
    ------
    RecipeError
        It is no recipe, comes from a newer program, or a value in it is refused.
    """
    try:
        found = tomllib.loads(text)
    except (tomllib.TOMLDecodeError, RecursionError) as error:
        raise RecipeError(f"a recipe must be TOML, but this file is not: {error}") from error
    written = found.get("format")
    if not isinstance(written, int) or isinstance(written, bool) or written < 1:
        raise RecipeError(
            "a recipe must be a recipe.toml of Pricewake, but this file names no format"
        )
    if written > FORMAT:
        raise RecipeError(
            f"this recipe was written by a newer Pricewake (recipe format {written}; this one reads"
            f" up to {FORMAT}); update the program"
        )
    try:
        return Recipe(
            draft=read_draft(
                {
                    "title": found.get("title", ""),
                    "form": found.get("form", "full"),
                    "parts": _parts(found),
                }
            ),
            series=tuple(Provenance(**_only(Provenance, one)) for one in found.get("series", [])),
            figures=tuple(
                Figured(
                    str(one["page"]),
                    ViewState.from_query(_filled(str(one["state"]), found)).to_query(),
                    KeyFigure(**_only(KeyFigure, one)),
                )
                for one in found.get("figure", [])
            ),
            sums={one["name"]: one["sha256"] for one in found.get("file", [])},
            versions=dict(found.get("versions", {})),
            remembered=read_remembered(found["workspace"]) if "workspace" in found else None,
        )
    except RecipeError:
        raise
    except (KeyError, TypeError, AttributeError) as error:
        raise RecipeError(f"a recipe must keep its shape, but {error} is not as it was") from error
    except ValueError as error:
        raise RecipeError(f"the recipe cannot be followed: {error}") from error


def _only(kind: type, values: Mapping[str, Any]) -> dict[str, Any]:
    """Take the fields of a class, each of the type that it is declared with."""
    taken = {}
    for name, declared in kind.__annotations__.items():
        value = values[name]
        if declared is float and isinstance(value, int) and not isinstance(value, bool):
            value = float(value)
        if not isinstance(value, declared):
            raise TypeError(name)
        taken[name] = value
    return taken


def _parts(found: Mapping[str, Any]) -> list[Any]:
    return [
        part
        if part.get("kind") == "words"
        else {**part, "state": _filled(str(part.get("state", "")), found)}
        for part in found.get("part", [])
    ]


def _filled(query: str, found: Mapping[str, Any]) -> str:
    """Return a state in which a field that it does not name has the value that was usual then."""
    kinds = {item.name: kind_of(item) for item in fields(ViewState)}
    usual = {
        name: kinds[name].write(value)
        for name, value in dict(found.get("usual", {})).items()
        if name in kinds
    }
    named = dict(parse_qsl(query, keep_blank_values=True))
    unknown = sorted(named.keys() - kinds.keys())
    if unknown:
        raise RecipeError(f"the recipe cannot be followed: a state has no {unknown[0][:40]!r}")
    return urlencode({**usual, **named})


def missing_series(recipe: Recipe, bridge: Bridge) -> tuple[str, ...]:
    """Return the names of series that the recipe needs and that are not loaded."""
    in_view = bridge.workspace.as_of()
    there = {one.name for release in in_view.releases for one in release.series}
    return tuple(dict.fromkeys(one.name for one in recipe.series if one.name not in there))


def compared(recipe: Recipe, brief: Brief, numbers: Mapping[str, str]) -> Comparison:
    """Hold a brief, and its CSV files where they are made, against the recipe it came from."""
    said = [*_data_lines(recipe, brief), *_version_lines(recipe)]
    if recipe.remembered is not None:
        said += differences(recipe.remembered, brief.remembered)
    made = {name: sum_of(text) for name, text in numbers.items()}
    if made and not said and brief.draft.parts == recipe.draft.parts:
        other = [name for name, mark in recipe.sums.items() if made.get(name) != mark]
        if other:
            said.append(
                f"{len(other)} of {len(recipe.sums)} files of numbers differ although data and"
                f" programs are the same: {', '.join(other[:3])}"
            )
    before = {(one.page, one.state, one.figure.key): one.figure for one in recipe.figures}
    figures = [
        _change(one, before[one.page, one.state, one.figure.key])
        for one in brief.figures
        if (one.page, one.state, one.figure.key) in before
    ]
    if not any(change.moved for change in figures):
        figures = []
    return Comparison(tuple(said), tuple(figures))


def same_files(recipe: Recipe, numbers: Mapping[str, str]) -> tuple[int, int]:
    """Return how many files of numbers are the same byte for byte as last time, and of how many."""
    made = {name: sum_of(text) for name, text in numbers.items()}
    return sum(made.get(name) == mark for name, mark in recipe.sums.items()), len(recipe.sums)


def _data_lines(recipe: Recipe, brief: Brief) -> list[str]:
    now = {(one.name, one.kind == "weights"): one for one in brief.series}
    said = []
    spans: dict[str, list[str]] = {}
    for one in recipe.series:
        new = now.get((one.name, one.kind == "weights"))
        if new is None:
            said.append(f"{one.name}: no longer used")
        elif new.fingerprint != one.fingerprint:
            span = f"{one.first} to {one.last} both times"
            if (new.first, new.last) != (one.first, one.last):
                span = f"{one.first} to {one.last} before, {new.first} to {new.last} now"
            changed = f"{one.name}: fingerprint {one.fingerprint} before, {new.fingerprint} now"
            spans.setdefault(span, []).append(changed)
    for span, changes in spans.items():
        said += (
            [f"{line}; {span}" for line in changes]
            if len(changes) < TOGETHER
            else [f"{len(changes)} series, {span}; {'; '.join(changes)}"]
        )
    return said


def _version_lines(recipe: Recipe) -> list[str]:
    return [
        f"{name}: version {recipe.versions[name]} before, {new} now"
        for name, new in versions().items()
        if name in recipe.versions and recipe.versions[name] != new
    ]


def _change(one: Figured, before: KeyFigure) -> Change:
    now = one.figure
    gap = now.value - before.value
    same = now.value == before.value or (np.isnan(now.value) and np.isnan(before.value))
    difference = ""
    if not np.isnan(gap) and now.shape != "p":
        digits = int(now.shape.lstrip("+"))
        gap = round(gap, digits) + 0.0  # no minus before nothing
        difference = KeyFigure("", "", "", gap, f"+{digits}").text
    unit = f", {now.unit}" if now.unit else ""
    return Change(
        source(one.page).title, f"{now.label}{unit}", before.text, now.text, difference, not same
    )
