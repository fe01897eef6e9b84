"""Which series stand behind a page's numbers, and where each came from."""

from collections.abc import Callable
from dataclasses import dataclass

from analytics.series import Series, period_code
from app.breadth.bridge import breadth
from app.compute import Bridge
from app.intake.weights import PREFIX, is_weight
from app.outlook.work import other_drivers
from app.reading.bridge import chosen_series
from app.scan.bridge import question
from app.scan.economies import series_name
from app.state import ViewState


@dataclass(frozen=True)
class Provenance:
    """One series of a brief: what it is, where it came from, and its content as a fingerprint.

    Attributes
    ----------
    name, kind, unit, source, file : str
        As read; `kind` is index, level, rate or weights.
    first, last : str
        Periods as files carry them.
    fingerprint : str
        Changes when values, calendar or kind change.
    day : str
        Date from which the file stands; empty for the invented economy.
    """

    name: str
    kind: str
    unit: str
    source: str
    file: str
    first: str
    last: str
    fingerprint: str
    day: str


def provenance(series: Series, state: ViewState, bridge: Bridge) -> Provenance:
    """Say where a series in view came from."""
    in_view = bridge.in_view(state)
    weights = in_view.weights
    if is_weight(series):
        kind, file = "weights", weights.source if weights is not None else ""
    else:
        kind, file = series.kind, in_view.file_of(series.name)
    days = {each.name: each.day for each in in_view.files}
    return Provenance(
        name=series.name,
        kind=kind,
        unit=series.unit,
        source=series.source or "not named",
        file=file,
        first=period_code(series.first),
        last=period_code(series.last),
        fingerprint=series.fingerprint,
        day=days.get(file, ""),
    )


def _pair(state: ViewState, bridge: Bridge) -> tuple[Series, ...]:
    loaded = bridge.in_view(state).as_read
    return tuple(loaded[name] for name in (state.driver, state.response) if name in loaded)


def _outlook(state: ViewState, bridge: Bridge) -> tuple[Series, ...]:
    loaded = bridge.in_view(state).as_read
    others = tuple(loaded[name] for name in other_drivers(state) if name in loaded)
    return (*_pair(state, bridge), *others)


def _reading(state: ViewState, bridge: Bridge) -> tuple[Series, ...]:
    return (bridge.in_view(state).as_read[chosen_series(state, bridge).name],)


def _breadth(state: ViewState, bridge: Bridge) -> tuple[Series, ...]:
    shown, in_view = breadth(state, bridge), bridge.in_view(state)
    names = [*([shown.total.name] if shown.total else []), *shown.names]
    prices = tuple(in_view.as_read[name] for name in names if name in in_view.as_read)
    wanted = {f"{PREFIX}{name}" for name in shown.names}
    weights = tuple(
        one
        for release in reversed(in_view.releases)
        if in_view.weights is not None and release.name == in_view.weights.source
        for one in release.series
        if is_weight(one) and one.name in wanted
    )
    return (*prices, *weights)


def _scan(state: ViewState, bridge: Bridge) -> tuple[Series, ...]:
    loaded = bridge.in_view(state).as_read
    asked = question(state, bridge)
    pairs = asked.roles.pairs if asked.opened is None else [one.names for one in asked.pairs]
    names = dict.fromkeys(series_name(e, side) for e, *sides in pairs for side in sides)
    return tuple(loaded[name] for name in names if name in loaded)


SERIES_USED: dict[str, Callable[[ViewState, Bridge], tuple[Series, ...]]] = {
    "reading": _reading,
    "breadth": _breadth,
    "lag": _pair,
    "scan": _scan,
    "outlook": _outlook,
}  # page name -> series; of a page that is not here, driver and response
