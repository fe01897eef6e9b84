"""A draft worked out: every part with its words, chart and numbers, and where they came from."""

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from typing import Any

from app.brief.key_figures import KeyFigure, newest_period
from app.brief.parts import Draft, Part
from app.brief.remembered import Remembered, remembered
from app.brief.series_used import Provenance, provenance
from app.brief.sources import Shown, settle, source, sources
from app.compute import Bridge
from app.state import StateError, ViewState
from app.words import slug

OF_THE_JOB = ("reading", "breadth", "lag", "outlook")  # pages that a brief begins with
CAUTION = (
    "What stands here describes past data. An association is not a cause, and nothing here is"
    " investment or policy advice. Official statistics and your desk's own qualified judgement come"
    " first."
)


@dataclass(frozen=True, eq=False)
class Section:
    """One part of the brief, worked out.

    Attributes
    ----------
    part : Part
        As asked for.
    page, heading : str
        Title of the page, and of the view; empty for words.
    shown : Shown or None
        What the page says; None for words, and where `refusal` says why there is nothing.
    stem : str
        Name of its files, without ending; empty unless it is a view.
    used : tuple of Provenance
        Series behind it.
    refusal : str
        Why it cannot be shown, in one sentence.
    """

    part: Part
    page: str = ""
    heading: str = ""
    shown: Shown | None = None
    stem: str = ""
    used: tuple[Provenance, ...] = ()
    refusal: str = ""

    @property
    def chart(self) -> dict[str, Any] | None:
        """The figure of the view, if it has one."""
        return self.shown.charts.get(self.part.view) if self.shown and self.part.view else None

    @property
    def name(self) -> str:
        """Page and view, as sizes of charts are looked up."""
        return f"{self.part.page} {self.part.view}"


@dataclass(frozen=True, eq=False)
class Figured:
    """A key figure with the page and state that it belongs to."""

    page: str
    state: str
    figure: KeyFigure


@dataclass(frozen=True, eq=False)
class Brief:
    """Everything that goes into the files.

    Attributes
    ----------
    draft : Draft
        As asked for.
    title : str
        As written, or made from the print.
    sections : tuple of Section
        In order.
    series : tuple of Provenance
        Every series behind a number, each once.
    figures : tuple of Figured
        Key figures of every page and state.
    remembered : Remembered
        What it shows from the workspace besides the series.
    """

    draft: Draft
    title: str
    sections: tuple[Section, ...]
    series: tuple[Provenance, ...]
    figures: tuple[Figured, ...]
    remembered: Remembered

    @property
    def refusals(self) -> tuple[str, ...]:
        """Sentences on the parts that cannot be shown."""
        return tuple(
            f"{each.page}{f', {each.heading}' if each.heading else ''}: {each.refusal}"
            for each in self.sections
            if each.refusal
        )


Question = tuple[str, ViewState]


def questions(draft: Draft) -> dict[Question, tuple[str, ...]]:
    """Return the pages and states of a draft, each once, with the views wanted of it."""
    found: dict[Question, list[str]] = {}
    for part in draft.parts:
        if part.kind != "words":
            views = found.setdefault((part.page, part.state), [])
            if part.view and part.view not in views:
                views.append(part.view)
    return {question: tuple(views) for question, views in found.items()}


def settled(page: str, state: ViewState, bridge: Bridge, views: Iterable[str]) -> Shown | str:
    """Return what a page shows, or the sentence that says why it shows nothing."""
    try:
        return settle(state, bridge, source(page), views)
    except ValueError as error:
        return str(error)


def numbers_of(section: Section, bridge: Bridge) -> str:
    """Return the numbers of a view as CSV text.

    Raises
    ------
    ValueError
        There are none, in one sentence.
    """
    part = section.part
    return source(part.page).export(part.view, part.state.to_query(), bridge)[1]


def assembled(
    draft: Draft, bridge: Bridge, known: Mapping[Question, Shown | str] | None = None
) -> Brief:
    """Put a draft together; what cannot be shown says why, and the rest stands.

    `known` holds what `settled` gave for each of `questions`; without it, that is done here.

    Raises
    ------
    StateError
        A part names a page or view that there is not.
    """
    for part in draft.parts:
        if part.kind != "words":
            source(part.page, part.view)
    if known is None:
        known = {
            (page, state): settled(page, state, bridge, views)
            for (page, state), views in questions(draft).items()
        }
    series: dict[tuple[str, str], Provenance] = {}
    used: dict[Question, tuple[Provenance, ...]] = {}
    figures: list[Figured] = []
    for (page, state), found in known.items():
        if isinstance(found, str):
            continue
        behind = source(page).series(state, bridge)
        used[page, state] = tuple(provenance(one, state, bridge) for one in behind)
        series |= {(one.name, one.fingerprint): one for one in used[page, state]}
        made = source(page).key_figures(state, bridge)
        figures += [Figured(page, state.to_query(), figure) for figure in made]
    sections, number = [], 0
    for part in draft.parts:
        if part.kind == "words":
            sections.append(Section(part))
            continue
        number += part.kind == "view"
        question = part.page, part.state
        sections.append(_section(part, number, known[question], used.get(question, ())))
    return Brief(
        draft=draft,
        title=draft.title or _usual_title(bridge),
        sections=tuple(sections),
        series=tuple(series.values()),
        figures=tuple(figures),
        remembered=remembered(draft, {one.name for one in series.values()}, bridge),
    )


def _section(part: Part, number: int, found: Shown | str, used: tuple[Provenance, ...]) -> Section:
    page = source(part.page)
    common: dict[str, Any] = {
        "part": part,
        "page": page.title,
        "heading": page.views.get(part.view, ""),
        "used": used,
    }
    if part.view:
        common["stem"] = f"{number:02d}-{slug(part.page)}-{slug(part.view)}"
    if isinstance(found, str):
        return Section(**common, refusal=found)
    return Section(**common, shown=found)


def _usual_title(bridge: Bridge) -> str:
    try:
        return f"Prices and money, {newest_period(ViewState(), bridge)}"
    except ValueError:
        return "Prices and money"


def prefilled(
    bridge: Bridge,
    form: str = "full",
    given: Mapping[str, ViewState] | None = None,
    day: str = "",
) -> Draft:
    """Return the usual brief: each page in the order of the job that has something to say.

    `given` holds the state of a page where it is not the one that the page opens with; `day` is
    the date whose vintages are used, empty for the newest.

    Raises
    ------
    StateError
        No page has anything to say.
    """
    parts: list[Part] = []
    for name, page in sources().items():
        if name not in OF_THE_JOB:
            continue
        state = (given or {}).get(name) or opening(name, bridge, day)
        try:
            page.show(state, bridge, ())
        except ValueError:
            continue
        parts.append(Part(kind="verdict", page=name, state=state))
        views = page.leading[:1] if form == "one-page" else page.leading
        parts += [Part(kind="view", page=name, view=view, state=state) for view in views]
    if not parts:
        raise StateError("a brief must have something to show, but no page can show these files")
    return Draft(form=form, parts=tuple(parts))


def opening(page: str, bridge: Bridge, day: str = "") -> ViewState:
    """Return the state that a page opens with, its series named."""
    view = bridge.workspace.as_of(day)
    usual = replace(view.opening_state(), as_of=day)
    if page == "breadth":
        return ViewState(as_of=day)
    if page == "reading":
        return ViewState(series=usual.response if view.series else "", as_of=day)
    return usual
