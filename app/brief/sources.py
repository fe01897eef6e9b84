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
        name = getattr(page, "NAME", page.PATH.strip("/"))
        if page is lag:
            views, show = lag_source.VIEWS, _of_lag
        elif hasattr(page, "answer") and hasattr(page, "PLACES"):
            views, show = _headings(page), _of_plain(page)
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


def _of_lag(state: ViewState, bridge: Bridge, wanted: tuple[str, ...]) -> Shown:
    return Shown(**lag_source.shown(state, bridge, wanted))


@cache
def _of_plain(page: ModuleType) -> Callable[[ViewState, Bridge, tuple[str, ...]], Shown]:
    def show(state: ViewState, bridge: Bridge, _wanted: tuple[str, ...]) -> Shown:
        found = page.answer(state, bridge)
        views = _headings(page)
        of_views = {f"{view}-words" for view in views} | set(views)
        of_views |= set(getattr(page, "SCREEN_ONLY", ()))
        return Shown(
            state=found.state,
            sentence=found.sentence,
            verdict=found.verdict,
            source=found.source,
            charts={name: _read(chart) for name, chart in found.charts.items()},
            subtitles=found.subtitles,
            words={
                view: [found.words.get(f"{view}-words", []), found.words.get(view, [])]
                for view in views
            },
            notes=tuple(
                found.words[place]
                for place in page.PLACES
                if place in found.words and place not in of_views
            ),
            jobs=tuple(found.jobs),
        )

    return show


def _read(chart: Any) -> dict[str, Any]:
    found: dict[str, Any] = json.loads(chart if isinstance(chart, str) else chart.to_json())
    return found


@lru_cache
def _headings(page: ModuleType) -> Mapping[str, str]:
    """Return the views of a page and the heading of each, as its layout has them."""
    from app.workspace import Workspace

    laid = page.layout("", Bridge(Workspace()))
    found = {}
    for part in _within(laid):
        if "view-head" in str(getattr(part, "className", "")).split():
            props = [each.to_plotly_json()["props"] for each in _within(part)]
            named = [p["data-csv"] for p in props if "data-csv" in p]
            words = [p["children"] for p in props if isinstance(p.get("children"), str)]
            if named and words:
                found[named[0]] = words[0]
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
