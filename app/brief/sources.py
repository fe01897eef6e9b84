"""What the pages offer to a brief: their views, and for a state the words, charts and series.

Taken from `app.page_table`, so that a page added there is offered here by itself.
"""

import json
from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from functools import cache, lru_cache
from types import ModuleType
from typing import Any

from analytics.series import Series
from app.brief import lag_source
from app.brief.key_figures import KEY_FIGURES, KeyFigure
from app.brief.series_used import SERIES_USED
from app.compute import Bridge
from app.jobs import Work
from app.pages import lag
from app.state import StateError, ViewState

LEADING = {  # views that a brief begins with, the first one on one page; else every view
    "reading": ("rates", "base", "rank", "distribution"),
    "breadth": ("contributions", "history", "core", "diffusion"),
    "lag": ("surface", "scatter", "overlay", "profile", "episodes"),
    "scan": (),  # long work; there for who chooses it
    "outlook": ("fan", "backtest", "coverage", "gap"),
}


@dataclass(frozen=True, eq=False)
class Shown:
    """What a page says for a state.

    Attributes
    ----------
    state : ViewState
        As shown.
    sentence, verdict, source : str
        Headline, verdict, and the foot of saved charts.
    charts : mapping of str to dict
        Figure of each view, as the chart library takes it.
    subtitles : mapping of str to str
        Second line of saved charts.
    words : mapping of str to component
        What stands by each view.
    notes : tuple of component
        What stands under the verdict.
    jobs : tuple of str
        Long work that is still to be done.
    """

    state: ViewState
    sentence: str
    verdict: str
    source: str
    charts: Mapping[str, dict[str, Any]]
    subtitles: Mapping[str, str]
    words: Mapping[str, Any]
    notes: tuple[Any, ...] = ()
    jobs: tuple[str, ...] = ()


@dataclass(frozen=True, eq=False)
class Source:
    """One page: `show` answers for a state and the views wanted of it."""

    name: str
    title: str
    path: str
    caution: str
    views: Mapping[str, str]
    show: Callable[[ViewState, Bridge, tuple[str, ...]], Shown]
    works: Mapping[str, Callable[[ViewState, Bridge], Work]]
    export: Callable[[str, str, Bridge], tuple[str, str]]

    @property
    def leading(self) -> tuple[str, ...]:
        """Views that a brief begins with."""
        return tuple(v for v in LEADING.get(self.name, tuple(self.views)) if v in self.views)

    def key_figures(self, state: ViewState, bridge: Bridge) -> tuple[KeyFigure, ...]:
        """Return the numbers that the next brief is held against."""
        make = KEY_FIGURES.get(self.name)
        return make(state, bridge) if make else ()

    def series(self, state: ViewState, bridge: Bridge) -> tuple[Series, ...]:
        """Return the series behind a state, as read; those of weights come last."""
        return SERIES_USED.get(self.name, SERIES_USED["lag"])(state, bridge)


def sources() -> dict[str, Source]:
    """Return the pages that have something for a brief, in the order of the job."""
    from app.page_table import EXPORTS, PAGES, WORKS  # which knows the page of the brief too

    found = {}
    for page in PAGES:
        name = _name(page)
        if page is lag:
            views, show = lag_source.VIEWS, _of_lag
        elif hasattr(page, "answer") and hasattr(page, "PLACES"):
            laid = _laid_out(page)
            views, show = {view: one.heading for view, one in laid.items()}, _of_plain(page)
        else:
            continue
        found[name] = Source(
            name=name,
            title=page.TITLE,
            path=page.PATH,
            caution=getattr(page, "CAUTION", ""),
            views=views,
            show=show,
            works=WORKS.get(name, {}),
            export=EXPORTS[name],
        )
    return found


def source(page: str, view: str = "") -> Source:
    """Return a page by its name.

    Raises
    ------
    StateError
        There is no such page, or it has no such view.
    """
    known = sources()
    if page not in known:
        raise StateError(f"a page must be one of {', '.join(known)}, but got {page[:40]!r}")
    if view and view not in known[page].views:
        raise StateError(
            f"a view of {page} must be one of {', '.join(known[page].views)}, but got {view[:40]!r}"
        )
    return known[page]


def _name(page: ModuleType) -> str:
    return str(getattr(page, "NAME", page.PATH.strip("/")))


def _of_lag(state: ViewState, bridge: Bridge, wanted: tuple[str, ...]) -> Shown:
    return Shown(**lag_source.shown(state, bridge, wanted))


@cache
def _of_plain(page: ModuleType) -> Callable[[ViewState, Bridge, tuple[str, ...]], Shown]:
    def show(state: ViewState, bridge: Bridge, _wanted: tuple[str, ...]) -> Shown:
        found = page.answer(state, bridge)
        views = _laid_out(page)
        of_views = {place for view in views.values() for place in view.places}
        of_views |= set(getattr(page, "SCREEN_ONLY", ()))
        return Shown(
            state=found.state,
            sentence=found.sentence,
            verdict=found.verdict,
            source=found.source,
            charts={name: _read(chart) for name, chart in found.charts.items()},
            subtitles=found.subtitles,
            words={
                name: [found.words.get(place, []) for place in view.places]
                for name, view in views.items()
            },
            notes=tuple(
                found.words[place]
                for place in page.PLACES
                if place in found.words and place not in of_views
            ),
            jobs=tuple(found.jobs),
        )

    return show


@dataclass(frozen=True)
class _LaidOut:
    """The heading of a view and the places of words in its section."""

    heading: str
    places: tuple[str, ...]


def _read(chart: Any) -> dict[str, Any]:
    found: dict[str, Any] = json.loads(chart if isinstance(chart, str) else chart.to_json())
    return found


@lru_cache
def _laid_out(page: ModuleType) -> Mapping[str, _LaidOut]:
    """Return the views of a page as its layout has them: a section each, with a heading."""
    from app.workspace import Workspace

    found = {}
    for section in _within(page.layout("", Bridge(Workspace()))):
        if section._type != "Section":
            continue
        inside = [each.to_plotly_json()["props"] for each in _within(section)]
        views = [
            props[mark] for props in inside for mark in ("data-csv", "data-saves") if mark in props
        ]
        heads = [part.children for part in _within(section) if part._type == "H2"]
        if views and heads and isinstance(heads[0], str):
            ids = {props.get("id") for props in inside}
            places = tuple(p for p in page.PLACES if f"{_name(page)}-{p}" in ids)
            found[views[0]] = _LaidOut(heads[0], places)
    return found


def _within(part: Any) -> Iterator[Any]:
    if isinstance(part, list | tuple):
        for each in part:
            yield from _within(each)
    elif hasattr(part, "to_plotly_json"):
        yield part
        yield from _within(getattr(part, "children", None) or [])


def settle(state: ViewState, bridge: Bridge, page: Source, wanted: Iterable[str]) -> Shown:
    """Do the long work that a state still needs, and return what the page says then."""
    wanted = tuple(wanted)
    while True:
        found = page.show(state, bridge, wanted)
        asked = [page.works[kind](state, bridge) for kind in found.jobs if kind in page.works]
        left = [
            work
            for work in asked
            if bridge.jobs.remembered(work) is None and not bridge.jobs.refusal(work)
        ]
        if not left:
            return replace(found, jobs=())
        for work in left:
            try:
                bridge.jobs.complete(work)
            except ValueError:  # kept as a refusal, and said where the result would stand
                continue
