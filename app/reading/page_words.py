"""The words and tables beside the charts of the Reading page."""

import math
from typing import Any

from dash import html

from analytics.families import FAMILIES
from analytics.print_rates import doubling_time
from analytics.seasonal import HERE
from analytics.series import period_label
from app.reading.alerts import Alert
from app.reading.episode_words import episode_words
from app.reading.result import Reading
from app.reading.words import fit_words, of_hundred, span_words, tail_words, year_words
from app.words import counted, plain, signed

_COLUMNS = (
    ("one", "Over one {noun}", 2),
    ("quarter_annualised", "3 months, annualised", 2),
    ("half_annualised", "6 months, annualised", 2),
    ("year", "12 months", 2),
    ("annual_average", "Annual averages", 2),
)
_AMONG = {
    "all": "all {n} {noun}s",
    "prior": "the {n} earlier {noun}s",
    "rolling": "the last {n} {noun}s",
    "since": "{n} {noun}s since {since}",
    "season": "{n} readings of the same {noun} of the year",
}


def alert_list(known: Reading, found: tuple[Alert, ...]) -> list[Any]:
    """Return the alerts and the notes on the data, or nothing."""
    parts: list[Any] = []
    if found:
        said = [html.Li([html.Strong("Alert. "), a.sentence], title=a.rule) for a in found]
        parts.append(html.Ul(said, className="alert-list", role="list"))
    notes = [note for note in known.notes if HERE not in note]  # that one stands under the rates
    return [*parts, *(html.P(note, className="message") for note in notes)]


def rate_table(known: Reading) -> list[Any]:
    """Return the table of rates in both formulas, and the cumulative change under it."""
    if known.series.kind == "rate":
        return [
            html.P(
                f"{known.series.name} is a rate already and is used as it is: there is no growth"
                " rate, base effect or carry-over of it.",
                className="quiet",
            ),
            *_season(known),
        ]
    if not known.rates:
        return [html.P(f"{known.refused.get('rates', 'There are no rates')}.", className="quiet")]
    head = [html.Th("Rate, percent", scope="col")]
    head += [html.Th(words.format(noun=known.noun), scope="col") for _, words, _ in _COLUMNS]
    rows = [
        html.Tr(
            [
                html.Th(words, scope="row"),
                *(html.Td(_shown(getattr(known.rates[key], name), d)) for name, _, d in _COLUMNS),
            ],
            className="chosen" if key == known.state.formula else "",
        )
        for key, words in (("percent", "percent"), ("log", "100 × log"))
    ]
    table = html.Table([html.Thead(html.Tr(head)), html.Tbody(rows)], className="table figures")
    return [table, html.P(_cumulative(known), className="quiet"), *_season(known)]


def _season(known: Reading) -> list[Any]:
    """Say that the season was taken out of rates over less than a year, or that they hold it."""
    if known.short is not None:
        return [html.P(note, className="quiet") for note in known.notes if HERE in note]
    if known.series.adjustment != "no" or known.year == 1:
        return []
    text = (
        f"{known.series.name} is said to be unadjusted: rates over less than a year hold its"
        ' season. It can be taken out here, though not officially: "Season" above.'
    )
    return [html.P(text, className="quiet")]


def _cumulative(known: Reading) -> str:
    rates, parts = known.rates["percent"], []
    if known.factor is not None:
        factor = float(known.factor.values[-1])
        since = period_label(known.factor.first)
        parts.append(
            f"Since {since}: {signed(100 * (factor - 1), 1)} percent, {_times(factor)} the level."
        )
    elif "factor" in known.refused:
        parts.append(f"No cumulative change: {known.refused['factor']}.")
    if not math.isnan(rates.year):
        years = float(doubling_time(rates.year)) * known.year
        parts.append(
            f"At the {year_words(known)} rate the level doubles in {span_words(years, known)}."
            if math.isfinite(years)
            else f"At the {year_words(known)} rate the level never doubles."
        )
    else:
        parts.append(
            f"A {year_words(known)} rate needs {known.year + 1} {known.noun}s in a row up to the"
            f" print; {known.series.name} has {known.series.values.size} in all."
        )
    return " ".join(parts)


def view_words(known: Reading) -> dict[str, Any]:
    """Return the words of each view; a view that is missing says why."""
    return {
        "rates-words": _missing(known, "12-month rate") if known.yearly is None else [],
        "base-words": _base(known),
        "whatif-words": _whatif(known),
        "rank-words": _rank(known),
        "history-words": _history(known),
        "distribution-words": _distribution(known),
        "quantiles-words": _quantiles(known),
        "episodes-words": episode_words(known) or _missing(known, "12-month rate"),
    }


def subtitles(known: Reading) -> dict[str, str]:
    """Return the second line of each saved chart."""
    noun, unit = known.noun, measured_words(known)
    path = known.path
    return {
        "rates": f"{known.series.name}, {known.series.unit or 'unit not named'}"
        + (f"; 3-month rate {HERE}" if known.short is not None else ""),
        "base": f"Exact split of each change in the {year_words(known)} rate; bars to come show"
        f" the pull of the {noun} that drops out",
        "whatif": f"Arithmetic, not a forecast: {path.rate:g} percent in every coming {noun}"
        if path
        else "",
        "rank": f"{unit}; compared with {_among(known)}",
        "history": f"{unit}; rank among the readings that were there then",
        "distribution": f"{unit}; {_among(known)}",
        "quantiles": f"{unit}; {FAMILIES[known.state.family].label} distribution",
        "episodes": f"Above {plain(known.mark, 1)} percent for at least"
        f" {counted(known.state.shortest, noun)}"
        if known.mark is not None
        else "",
    }


def measured_words(known: Reading) -> str:
    """Return what is ranked, with its unit: the axis title of rank and distribution."""
    if known.series.kind == "rate":
        return known.series.unit or known.series.name
    span = {
        "1m": f"rate over one {known.noun}",
        "3m": "3-month rate, annualised",
        "6m": "6-month rate, annualised",
        "12m": f"{year_words(known)} rate",
    }[known.state.measure]
    made = f"; {known.made_here}" if known.made_here else ""
    return f"{span}, percent{made}"


def _among(known: Reading) -> str:
    n = known.standing.n if known.standing else 0
    since = known.state.since or period_label(known.series.first)
    return _AMONG[known.state.among].format(n=n, noun=known.noun, since=since)


def _missing(known: Reading, *names: str) -> list[Any]:
    said = [known.refused[name] for name in names if name in known.refused]
    return [html.P(f"Not shown: {text}.") for text in dict.fromkeys(said)]


def _base(known: Reading) -> list[Any]:
    if known.base is None:
        return _missing(known, "base effect", "rates")
    drops = known.drops
    if drops is None:
        return []
    first, noun = period_label(drops.periods[0]), known.noun
    said = (
        f"Next, in {first}, {plain(float(drops.rate[0]))} percent drops out: the"
        f" {year_words(known)} rate falls if the new {noun} brings less."
    )
    if not math.isnan(drops.usual[0]):
        said += f" Usual for that {noun} of the year: {plain(float(drops.usual[0]))}."
    return [html.P(said)]


def _whatif(known: Reading) -> list[Any]:
    path = known.path
    if path is None:
        return _missing(known, "what-if")
    year = min(known.year, path.periods.size) - 1
    said = (
        f"At {signed(path.rate)} percent in every coming {known.noun}, the {year_words(known)} rate"
    )
    if math.isnan(path.yearly[year]):
        return [html.P(f"{said} cannot be said: earlier values are missing.")]
    return [
        html.P(
            f"{said} would be {plain(float(path.yearly[year]), 1)} percent in"
            f" {period_label(path.periods[year])} and {plain(float(path.yearly[-1]), 1)} percent"
            f" in {period_label(path.periods[-1])}. Arithmetic, not a forecast."
        )
    ]


def _rank(known: Reading) -> list[Any]:
    found = known.standing
    if found is None:
        return _missing(known, "rank")
    others = ", ".join(
        f"{kind} {plain(rank, 1)}" for kind, rank in known.ranks.items() if kind != found.kind
    )
    return [
        html.P(
            f"Rank {plain(found.rank, 1)} ({found.kind}) among {_among(known)}: {found.below}"
            f" below, {found.equal} equal, {found.above} above. By the other definitions: {others}."
        )
    ]


def _history(known: Reading) -> list[Any]:
    if known.through_time is None:
        return _missing(known, "rank through time", "rank")
    return [
        html.P(
            f"Each {known.noun} ranked among "
            + (
                f"the {known.state.rank_window} up to it"
                if known.state.among == "rolling"
                else "those up to it"
            )
            + ", not among what came later."
        )
    ]


def _distribution(known: Reading) -> list[Any]:
    if not known.fits:
        return _missing(known, "distribution", "rank")
    best = min(known.fits.values(), key=lambda fit: fit.aic)
    rows = []
    for fit in known.fits.values():
        shape = [f"{n} {plain(v)}" for n, v in fit.parameters.items() if n in ("skew", "df")]
        rows.append(
            html.Tr(
                [
                    html.Th(FAMILIES[fit.family].label, scope="row"),
                    html.Td(plain(fit.parameters["location"], 3)),
                    html.Td(plain(fit.parameters["scale"], 3)),
                    html.Td(", ".join(shape)),
                    html.Td(plain(fit.loglik, 1)),
                    html.Td(plain(fit.aic - best.aic, 1)),
                    html.Td(plain(fit.bic - min(f.bic for f in known.fits.values()), 1)),
                ],
                className="chosen" if fit.family == known.state.family else "",
            )
        )
    if known.kernel is not None:
        kernel = ["kernel", "", plain(known.kernel.bandwidth, 3), "bandwidth"]
        cells = [html.Th(kernel[0], scope="row"), *(html.Td(c) for c in kernel[1:])]
        rows.append(html.Tr([*cells, html.Td(plain(known.kernel.loglik, 1)), html.Td(), html.Td()]))
    head = ("Family", "Location", "Scale", "Shape", "Log-likelihood", "AIC +", "BIC +")
    table = html.Table(
        [
            html.Thead(html.Tr([html.Th(text, scope="col") for text in head])),
            html.Tbody(rows),
        ],
        className="table figures",
    )
    return [
        html.P(fit_words(known)),
        html.Details(
            [
                html.Summary("Fits side by side"),
                table,
                html.P(
                    "AIC + and BIC +: above the best. They take the readings as independent; the"
                    " kernel's log-likelihood leaves each reading out of its own estimate.",
                    className="quiet",
                ),
            ],
            open=False,
        ),
    ]


def _quantiles(known: Reading) -> list[Any]:
    if not known.fits:
        return _missing(known, "distribution", "rank")
    label = FAMILIES[known.state.family].label
    said = []
    if known.fitted is not None:
        said.append(tail_words(known.fitted, known, f"At least as high as the print, {label}"))
    if known.observed is not None:
        said.append(tail_words(known.observed, known, "In the data"))
    parts = [html.P(" ".join(said))] if said else []
    if not known.parts:
        return [*parts, *_missing(known, "sub-samples")]
    family = known.state.family
    rows = [
        html.Tr(
            [
                html.Th(f"{period_label(p.first)} to {period_label(p.last)}", scope="row"),
                html.Td(f"{p.fits[family].n}"),
                html.Td(plain(p.fits[family].parameters["location"], 3)),
                html.Td(plain(p.fits[family].parameters["scale"], 3)),
                html.Td(plain(p.mean, 3)),
                html.Td(f"{of_hundred(1 - float(p.fits[family].cdf(known.print_value)))} of 100"),
                html.Td(f"{of_hundred(p.tail.probability)} of 100"),
            ]
        )
        for p in known.parts
    ]
    head = ("Sub-sample", "n", "Location", "Scale", "Mean", "As high, fitted", "As high, data")
    table = html.Table(
        [
            html.Thead(html.Tr([html.Th(text, scope="col") for text in head])),
            html.Tbody(rows),
        ],
        className="table figures",
    )
    return [*parts, html.Details([html.Summary(f"Sub-samples, {label}"), table], open=False)]


def _shown(value: float, digits: int) -> str:
    return "–" if math.isnan(value) else plain(value, digits)


def _times(factor: float) -> str:
    return f"{factor:,.2f} times" if factor < 1e6 else f"{factor:.3g} times"
