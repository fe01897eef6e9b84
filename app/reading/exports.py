"""The numbers of each view of the Reading page as CSV, every digit kept."""

import re
import unicodedata
from collections.abc import Callable, Iterable, Sequence
from typing import Any

import numpy as np

from analytics.families import FAMILIES
from analytics.print_rates import average_rate
from analytics.rates import growth_rate
from analytics.series import Series, period_code
from app.compute import Bridge
from app.exports import csv_text
from app.places import software_version
from app.reading.bridge import completed_reading, reading
from app.reading.result import Reading
from app.reading.words import sentence
from app.state import ViewState

Rows = Iterable[Sequence[Any]]
TESTED = ("distribution", "quantiles")  # views whose header names the test of the fit


def csv_export(name: str, query: str, bridge: Bridge) -> tuple[str, str]:
    """Return file name and text of one view of the Reading page.

    Raises
    ------
    ValueError
        No such view, a refused value, or no such series; one sentence.
    """
    state = ViewState.from_query(query)
    known = completed_reading(state, bridge) if name in TESTED else reading(state, bridge)
    return f"{file_stem(name, known)}.csv", view_text(name, known)


def view_text(name: str, known: Reading) -> str:
    """Return one view as CSV text under a header that names what it holds.

    Raises
    ------
    ValueError
        No such view.
    """
    if name not in VIEWS:
        raise ValueError(f"view must be one of {', '.join(VIEWS)}, but got {name!r}")
    return csv_text(header(known), VIEWS[name](known))


def header(known: Reading) -> list[tuple[str, str]]:
    """Name what a file holds: sentence, series with fingerprint, state, test, version."""
    loaded, test = known.loaded, known.goodness
    lines = [
        ("Pricewake", software_version()),
        ("view", sentence(known)),
        (
            "series",
            f"{loaded.name}; {loaded.unit or 'unit not named'}; source"
            f" {loaded.source or 'not named'}; {loaded.kind} as used: fingerprint"
            f" {loaded.fingerprint}",
        ),
        ("state", f"/reading?{known.state.to_query()}"),
        *[("note", note) for note in known.notes],
    ]
    if test is not None:
        lines.append(
            (
                "test of the fit",
                f"{test.fit.family}; Anderson-Darling {test.anderson_darling!r} p"
                f" {test.p_anderson_darling!r}; Cramer-von Mises {test.cramer_von_mises!r} p"
                f" {test.p_cramer_von_mises!r}; Kolmogorov {test.kolmogorov!r} p"
                f" {test.p_kolmogorov!r}; dependence of order {test.order}; draws {test.draws};"
                f" seed {test.seed}",
            )
        )
    lines += [(f"missing ({part})", why) for part, why in known.refused.items()]
    return [*lines, ("note", "past readings of this series; not a forecast and not advice")]


def file_stem(name: str, known: Reading) -> str:
    """Return a file name without ending, in plain letters."""
    words = f"reading {name} {known.series.name} {period_code(known.series.last)}"
    plain = unicodedata.normalize("NFKD", words).encode("ascii", "ignore").decode()
    return re.sub(r"[^A-Za-z0-9]+", "-", plain).strip("-").lower()[:120]


def _rates_rows(known: Reading) -> Rows:
    """Give every rate of every period, in both formulas, and the cumulative factor."""
    series, year = known.series, known.year
    short = known.short or series
    columns: dict[str, Series | None] = {}
    if known.short is not None:
        columns["value_adjusted_here"] = short
    if series.kind == "rate":
        columns["rate"] = series
    else:
        for formula in ("percent", "log"):
            for name, span, annualised in (
                ("rate_1m", 1, False),
                ("rate_3m_annualised", year // 4, True),
                ("rate_6m_annualised", year // 2, True),
                ("rate_12m", year, False),
            ):
                if 1 <= span < series.values.size:
                    columns[f"{name}_{formula}"] = _rate(
                        short if span < year else series, span, formula, annualised
                    )
            if series.values.size > 2 * year:
                columns[f"annual_average_{formula}"] = _or_empty(
                    lambda formula=formula: average_rate(series, formula=formula)
                )
    if known.factor is not None:
        columns["factor"] = known.factor
    found = {name: _values(each, series) for name, each in columns.items() if each is not None}
    yield "period", "value", *found
    for i, period in enumerate(series.periods):
        row = (float(values[i]) for values in found.values())
        yield period_code(period), float(series.values[i]), *row


def _rate(series: Series, span: int, formula: Any, annualised: bool) -> Series | None:
    return _or_empty(lambda: growth_rate(series, span=span, formula=formula, annualised=annualised))


def _or_empty(make: Callable[[], Series]) -> Series | None:
    try:
        return make()
    except ValueError:  # gaps leave no such rate
        return None


def _values(rate: Series, series: Series) -> np.ndarray:
    """Lay a rate on the calendar of the series."""
    whole = np.full(series.values.size, np.nan)
    start = rate.first.ordinal - series.first.ordinal
    whole[start : start + rate.values.size] = rate.values
    return whole


def _base_rows(known: Reading) -> Rows:
    yield (
        "period",
        "part",
        "yearly_rate",
        "change",
        "new",
        "base",
        "rate_new",
        "rate_dropped",
        "usual",
        "pull",
    )
    if known.base is not None:
        base = known.base
        parts = (base.yearly, base.change, base.new, base.base, base.rate_new, base.rate_dropped)
        for i, period in enumerate(base.periods):
            yield period_code(period), "observed", *(float(p[i]) for p in parts), None, None
    if known.drops is not None:
        drops = known.drops
        for i, period in enumerate(drops.periods):
            coming = (float(part[i]) for part in (drops.rate, drops.usual, drops.pull))
            yield period_code(period), "to come", None, None, None, None, None, *coming


def _whatif_rows(known: Reading) -> Rows:
    yield "period", "part", "level", "yearly_rate"
    if known.yearly is not None:
        values = _values(known.yearly, known.series)
        for i in range(max(0, values.size - 2 * known.year), values.size):
            level = float(known.series.values[i])
            yield period_code(known.series.periods[i]), "observed", level, float(values[i])
    if known.path is not None:
        path = known.path
        for i, period in enumerate(path.periods):
            yield period_code(period), "if", float(path.level[i]), float(path.yearly[i])


def _rank_rows(known: Reading) -> Rows:
    yield "value", "share_at_or_below"
    if known.standing is not None:
        values = known.standing.values
        for i in range(values.size):
            yield float(values[i]), (i + 1) / values.size


def _history_rows(known: Reading) -> Rows:
    yield "period", "measured", "rank_then"
    if known.measured is None:
        return
    ranks = np.full(known.measured.values.size, np.nan)
    if known.through_time is not None:
        ranks = _values(known.through_time, known.measured)
    for i, period in enumerate(known.measured.periods):
        yield period_code(period), float(known.measured.values[i]), float(ranks[i])


def _distribution_rows(known: Reading) -> Rows:
    yield "part", "family", "name", "value"
    for fit in known.fits.values():
        for name, value in fit.parameters.items():
            yield "fit", fit.family, name, value
        for name in ("n", "loglik", "aic", "bic"):
            yield "fit", fit.family, name, getattr(fit, name)
    if known.kernel is not None:
        yield "fit", "kernel", "bandwidth", known.kernel.bandwidth
        yield "fit", "kernel", "loglik_leave_one_out", known.kernel.loglik
    for source, tail in (("data", known.observed), (known.state.family, known.fitted)):
        if tail is not None:
            for name in ("probability", "low", "high", "level", "return_period"):
                yield "tail", source, name, getattr(tail, name)
    for part in known.parts:
        span = f"{period_code(part.first)}:{period_code(part.last)}"
        for fit in part.fits.values():
            for name, value in {**fit.parameters, "n": fit.n, "loglik": fit.loglik}.items():
                yield f"sub-sample {span}", fit.family, name, value
        yield f"sub-sample {span}", "data", "mean", part.mean
        yield f"sub-sample {span}", "data", "tail probability", part.tail.probability
    if known.sample is not None:
        for value in np.sort(known.sample[~np.isnan(known.sample)]).tolist():
            yield "reading", "data", "value", value


def _quantile_rows(known: Reading) -> Rows:
    yield "family", "probability", "fitted", "observed"
    if known.standing is None or known.state.family not in known.fits:
        return
    values = known.standing.values
    shares = (np.arange(values.size) + 0.5) / values.size
    fitted = known.fits[known.state.family].quantile(shares)
    label = FAMILIES[known.state.family].name
    for i in range(values.size):
        yield label, float(shares[i]), float(fitted[i]), float(values[i])


def _episode_rows(known: Reading) -> Rows:
    yield "kind", "first", "last", "length", "peak", "peak_period", "mean", "open"
    for kind, runs in (
        (f"yearly rate above {known.mark!r}", known.runs),
        ("yearly rate below 0", known.falling),
        ("Cagan: above 50 a month", known.cagan),
    ):
        for run in runs:
            yield (
                kind,
                period_code(run.first),
                period_code(run.last),
                run.length,
                run.peak,
                period_code(run.peak_period),
                run.mean,
                int(run.open),
            )
    if known.three_years is not None:
        for i, period in enumerate(known.three_years.periods):
            code = period_code(period)
            yield (
                "change over three years",
                code,
                code,
                None,
                float(known.three_years.values[i]),
                None,
                None,
                None,
            )


VIEWS: dict[str, Callable[[Reading], Rows]] = {
    "rates": _rates_rows,
    "base": _base_rows,
    "whatif": _whatif_rows,
    "rank": _rank_rows,
    "history": _history_rows,
    "distribution": _distribution_rows,
    "quantiles": _quantile_rows,
    "episodes": _episode_rows,
}
