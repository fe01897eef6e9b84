"""The numbers of each view of the Lag page, row by row, every digit kept."""

from collections.abc import Callable, Iterable, Iterator, Sequence
from typing import Any

import numpy as np

from analytics.lag_profile import LagProfile
from analytics.robust import ParameterPlane
from analytics.series import period_code
from app.compute import Bridge
from app.export_tools import (
    compare_rows,
    count_rows,
    density_rows,
    peak_rows,
    response_rows,
    slice_rows,
)
from app.lag.cells import (
    episode_code,
    inference,
    influence,
    map_hac,
    map_inference,
    without_episode,
)
from app.lag.evidence import completed, directions_work, opinions_work, stability_work
from app.pages.lag import LagView
from app.seasons import season_rows

Rows = Iterable[Sequence[Any]]


def _surface_rows(shown: LagView, bridge: Bridge) -> Rows:
    yield (
        "window",
        "shift",
        "pairs",
        "correlation",
        "slope",
        "per_cell_p",
        "effective_months",
        "naive_p",
        "hac_p",
        "search_adjusted_p",
    )
    surface, known = shown.surface, completed(shown.state, bridge)
    judged, hac = map_inference(shown.state, bridge), map_hac(shown.state, bridge)
    for i, window in enumerate(surface.windows.tolist()):
        for j, shift in enumerate(surface.shifts.tolist()):
            yield (
                window,
                shift,
                int(surface.pairs[i, j]),
                float(surface.correlation[i, j]),
                float(surface.slope[i, j]),
                float(judged.p[i, j]),
                float(judged.effective_months[i, j]),
                float(judged.p_naive[i, j]),
                float(hac.p[i, j]),
                known.p_searched(window, shift),
            )


def _cell_rows(shown: LagView, bridge: Bridge) -> Iterable[Sequence[Any]]:
    yield (
        "part",
        "driver_period",
        "response_period",
        "driver",
        "response",
        "fitted",
        "residual",
        "slice_low",
        "slice_high",
        "count",
    )
    cell, offset = shown.cell, shown.start - shown.cell.start
    for i, month in enumerate(shown.pair.periods[offset + cell.months]):
        yield (
            "pair",
            period_code(month),
            period_code(month + shown.state.shift),
            float(cell.driver[i]),
            float(cell.response[i]),
            float(cell.intercept + cell.slope * cell.driver[i]),
            float(cell.residuals[i]),
            None,
            None,
            None,
        )
    for part, slices in (
        ("driver slice", cell.driver_slices),
        ("response slice", cell.response_slices),
    ):
        for k in range(slices.count.size):
            centre, mean = float(slices.centre[k]), float(slices.mean[k])
            across = part == "driver slice"
            yield (
                part,
                None,
                None,
                centre if across else mean,
                mean if across else centre,
                None,
                None,
                float(slices.edges[k]),
                float(slices.edges[k + 1]),
                int(slices.count[k]),
            )
    for driver, response in cell.ellipse:
        yield "ellipse", None, None, float(driver), float(response), None, None, None, None, None
    yield from slice_rows(shown.state, bridge)
    yield from count_rows(shown.state, bridge)


def _overlay_rows(shown: LagView, _bridge: Bridge) -> Iterable[Sequence[Any]]:
    yield "period", "driver", "response_moved_back"
    overlay = shown.overlay
    for i, period in enumerate(overlay.periods):
        yield period_code(period), float(overlay.driver[i]), float(overlay.response[i])


def _profile_rows(shown: LagView, bridge: Bridge) -> Rows:
    yield "shift", "correlation", "p_as_true_shift", "in_set", "in_preview"
    known = completed(shown.state, bridge)
    if not known.found or known.shift_set is None:
        return
    chosen = known.shift_set
    for i, shift in enumerate(chosen.candidates.tolist()):
        yield (
            shift,
            float(chosen.correlation[i]),
            float(chosen.p_by_shift[i]),
            int(shift in chosen.shifts),
            int(shift in chosen.preview),
        )


def _plane_rows(shown: LagView, bridge: Bridge) -> Rows:
    yield "part", "intercept", "slope", "density"
    plane: ParameterPlane = inference(shown.state, bridge).plane
    yield "estimate", float(plane.estimate[0]), float(plane.estimate[1]), None
    for part, outline in (("robust region", plane.robust), ("naive region", plane.naive)):
        for intercept, slope in outline.tolist():
            yield part, intercept, slope, None
    yield from density_rows(shown.state, bridge)


def _episode_rows(shown: LagView, bridge: Bridge) -> Rows:
    yield (
        "first",
        "last",
        "driver",
        "covariance_share",
        "slope_without",
        "slope_change",
        "correlation_without",
        "p_without",
        "effective_months_without",
    )
    for episode in influence(shown.state, bridge).episodes:
        first, last = episode_code(episode, shown.pair, shown.state).split(":")
        yield (
            first,
            last,
            "high" if episode.high else "low",
            episode.share,
            episode.slope_without,
            episode.change,
            episode.correlation_without,
            episode.p_without,
            episode.effective_without,
        )


def _without_rows(shown: LagView, bridge: Bridge) -> Rows:
    yield "part", "driver_period", "driver", "response", "kept"
    found = without_episode(shown.state, bridge)
    if found is None:
        return
    rest, whole = found[1], inference(shown.state, bridge)
    for i in range(rest.driver.size):
        month = period_code(shown.pair.periods[shown.start + i])
        yield "pair", month, float(rest.driver[i]), float(rest.response[i]), int(rest.kept[i])
    low, high = float(rest.driver.min()), float(rest.driver.max())
    for part, intercept, slope in (
        ("line, all", whole.intercept, whole.slope),
        ("line, without", rest.intercept, rest.slope),
    ):
        for end in (low, high):
            yield part, None, end, intercept + slope * end, None


def _opinion_rows(shown: LagView, bridge: Bridge) -> Rows:
    yield "method", "shift", "estimate", "low", "high"
    found = bridge.jobs.complete(opinions_work(shown.state, bridge))
    white = found.prewhitened
    if white is not None:
        for i, shift in enumerate(white.shifts.tolist()):
            bound = float(white.averaged_bound)
            yield "prewhitened correlation", shift, float(white.averaged[i]), -bound, bound
    for name, result in (
        ("distributed lag", found.distributed),
        ("local projection", found.projected),
    ):
        if result is not None:
            yield from _profile(name, result.averaged)
    for opinion in found.opinions:
        yield (
            f"{opinion.method}: strongest",
            opinion.shift,
            opinion.estimate,
            opinion.low,
            opinion.high,
        )
    samples = dict(found.variants)
    if found.halves is not None:
        samples |= {"first half": found.halves.first, "second half": found.halves.second}
    for name, best in samples.items():
        yield f"{name}: strongest", best.best_shift, best.best_slope, None, None
        yield f"{name}: chosen cell", shown.state.shift, best.slope, None, None
    if not completed(shown.state, bridge).refusal:
        both = bridge.jobs.complete(directions_work(shown.state, bridge))
        yield "driver first: search p", both.forward.best_shift, float(both.forward.p), None, None
        yield (
            "response first: search p",
            both.backward.best_shift,
            float(both.backward.p),
            None,
            None,
        )


def _profile(name: str, profile: LagProfile) -> Iterator[Sequence[Any]]:
    columns = (profile.shifts, profile.estimate, profile.low, profile.high)
    for values in zip(*(np.asarray(column).tolist() for column in columns), strict=True):
        yield name, *values


def _stability_rows(shown: LagView, bridge: Bridge) -> Rows:
    yield (
        "last_driver_period",
        "rolling_slope",
        "band_low",
        "band_high",
        "growing_slope",
        "rolling_correlation",
    )
    stable = bridge.jobs.complete(stability_work(shown.state, bridge))
    offset = shown.start - shown.cell.start
    for i, month in enumerate(stable.last_month.tolist()):
        yield (
            period_code(shown.pair.periods[offset + month]),
            float(stable.rolling_slope.estimate[i]),
            float(stable.rolling_slope.low[i]),
            float(stable.rolling_slope.high[i]),
            float(stable.growing_slope.estimate[i]),
            float(stable.rolling_correlation.estimate[i]),
        )


def _season_rows(shown: LagView, bridge: Bridge) -> Rows:
    return season_rows(bridge.prepared(shown.state).seasons)


VIEWS: dict[str, Callable[[LagView, Bridge], Rows]] = {
    "surface": _surface_rows,
    "scatter": _cell_rows,
    "overlay": _overlay_rows,
    "profile": _profile_rows,
    "plane": _plane_rows,
    "episodes": _episode_rows,
    "without": _without_rows,
    "opinions": _opinion_rows,
    "stability": _stability_rows,
    "season": _season_rows,
    "peaks": peak_rows,
    "compare": compare_rows,
    "responses": response_rows,
}
SEARCHED = (
    "surface",
    "profile",
    "plane",
    "episodes",
    "without",
    "opinions",
    "stability",
    "compare",
)
