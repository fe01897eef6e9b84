"""The tools of the Lag page: their switches beside the charts, and the words of their folds."""

from typing import Any

from dash import html

from analytics.series import Pair, period_label
from app import controls
from app.compute import Bridge, noun
from app.lag.evidence import Evidence
from app.lag.tools import MOST_RESPONSES, OneCell, OneResponse, Peaks
from app.pages.tables import names_select
from app.state import ViewState
from app.words import as_sentence, counted, p_words, plain, shift_words, signed

MOST_BUTTONS = 20  # names beside each other; more are chosen from a list
SPEEDS = {"3": "slow", "10": "usual", "30": "fast"}  # cells a second


def player() -> html.Details:
    """Return the bar that sweeps window or shift and back."""
    return html.Details(
        [
            html.Summary("Player"),
            html.Div(
                [
                    html.Button("Play", id="play", type="button"),
                    _choice(
                        "play-along",
                        "Sweep",
                        {"shift": "shift", "window": "window"},
                        says="Whether the player moves the shift or the window.",
                    ),
                    _choice(
                        "play-speed", "Speed", SPEEDS, "10", says="3, 10 or 30 cells a second."
                    ),
                    html.Div(
                        [
                            *controls.label(
                                "Place",
                                "field-scrub",
                                "Cell that the player stands on; move it to look around.",
                            ),
                            html.Span(
                                className="native",
                                **{
                                    "data-native": "scrub",
                                    "data-type": "range",
                                    "data-min": "0",
                                    "data-max": "1",
                                },
                            ),
                        ],
                        className="control scrub",
                    ),
                ],
                className="tool-row",
            ),
        ],
        id="tool-player",
        className="tool",
    )


def scatter_tools(state: ViewState) -> html.Details:
    """Return what the scatter can show besides its points: counts and a band that moves."""
    return html.Details(
        [
            html.Summary("Slice and counts"),
            html.Div(
                [
                    controls.select(state, "points"),
                    controls.select(state, "band"),
                    html.Div(
                        [controls.slider(state, "band_place", 0, 100, step=1)],
                        className="band-only",
                    ),
                    html.Div(
                        [controls.slider(state, "band_width", 2, 50, step=1)],
                        className="band-only",
                    ),
                ],
                className="tool-row",
            ),
        ],
        id="tool-scatter",
        className="tool",
        open=state.band != "off" or state.points != "points",
    )


def overlay_tools(state: ViewState) -> html.Details:
    """Return what can be marked and left out in time."""
    return html.Details(
        [
            html.Summary("Peaks and months left out"),
            html.Div(
                [
                    controls.select(state, "peaks"),
                    controls.text(state, "left_out", placeholder="1978-03:1983-05"),
                    html.P(
                        "Or drag across the chart to choose months.",
                        className="quiet tool-hint",
                    ),
                ],
                className="tool-row",
            ),
        ],
        id="tool-overlay",
        className="tool",
        open=state.peaks != "off" or bool(state.left_out),
    )


def range_choice() -> html.Div:
    """Return what can be done with months chosen on the chart through time."""
    return html.Div(
        [
            html.Span(id="range-words"),
            html.Button("Leave these out", id="range-without", type="button"),
            html.Button("Use only these", id="range-only", type="button"),
            html.Button("Look closer", id="range-closer", type="button"),
            html.Button("Cancel", id="range-cancel", type="button"),
        ],
        id="range-choice",
        className="range-choice",
        role="group",
        hidden=True,
        **{"aria-label": "Months chosen on the chart"},
    )


def _choice(
    name: str, label: str, options: dict[str, str], chosen: str = "", *, says: str
) -> html.Div:
    return html.Div(
        [
            *controls.label(label, name, says),
            html.Select(
                [
                    html.Option(words, value=value, selected=value == chosen)
                    for value, words in options.items()
                ],
                id=name,
                **{"aria-describedby": f"help-{name}"},
            ),
        ],
        className="control",
    )


def peak_words(peaks: Peaks | None, pair: Pair, state: ViewState) -> list[Any]:
    """Say which peaks meet across the shift, how far apart, and how easily chance does that."""
    unit = noun(pair)
    if peaks is None:
        return [
            html.P("No peaks are marked: “Peaks and months left out” sets how far one stands out.")
        ]
    found, periods = peaks.found, pair.periods[peaks.first :]
    matched = found.pairs.shape[0]
    rows = [
        html.Tr(
            [
                html.Td(period_label(periods[one])),
                html.Td(period_label(periods[other])),
                html.Td(shift_words(int(distance), unit)),
                html.Td(shift_words(int(distance) - found.shift, unit)),
            ]
        )
        for (one, other), distance in zip(found.pairs.tolist(), found.distance, strict=True)
    ]
    head = ("Driver peaks", "Response peaks", "Distance", "Off the shift by")
    left = " Months left out are not left out here." if state.left_out else ""
    return [
        html.P(
            f"{matched} of the driver's {counted(found.driver.size, 'peak')} meet one of the"
            f" response's {found.response.size} within {counted(found.reach, unit)} of the shift."
            f" Read this with caution: peaks were looked for near the shift, and"
            f" {100 * found.by_chance:.0f} % of all {unit}s lie that near a peak of the response,"
            f" so matches alone do not speak for this shift.{left}"
        ),
        *(
            [
                html.Table(
                    [
                        html.Thead(html.Tr([html.Th(text, scope="col") for text in head])),
                        html.Tbody(rows),
                    ],
                    className="table figures",
                )
            ]
            if rows
            else []
        ),
    ]


def compare_words(
    both: tuple[OneCell, OneCell] | None, known: Evidence, pair: Pair, refused: str
) -> list[Any]:
    """Put the numbers of the pinned cell beside those of the chosen one."""
    if refused:
        return [html.P(as_sentence(refused), className="message")]
    if both is None:
        return [
            html.P("No cell is pinned: a pinned one stands here beside the chosen one."),
            html.Button("Pin this cell", type="button", **{"data-pin": "chosen"}),
        ]
    unit = noun(pair)
    searched = [known.p_searched(one.state.window, one.state.shift) for one in both]
    lines = [
        ("Window", [counted(one.state.window, unit) for one in both]),
        ("Shift", [shift_words(one.state.shift, unit) for one in both]),
        ("Pairs", [counted(one.cell.n, unit) for one in both]),
        ("Correlation", [signed(one.cell.correlation) for one in both]),
        ("Slope", [plain(one.cell.slope, 3) for one in both]),
        ("Intercept", [plain(one.cell.intercept, 3) for one in both]),
        ("Naive p", [p_words(one.cell.p_naive) for one in both]),
        ("Worth, independent", [counted(_worth(one), unit) for one in both]),
        (
            "Slope, 95 % interval",
            [
                f"{plain(one.inference.slope_interval.low, 3)} to"
                f" {plain(one.inference.slope_interval.high, 3)}"
                for one in both
            ],
        ),
        ("Per-cell p", [p_words(one.inference.p) for one in both]),
        (
            "Search-adjusted p of the cell",
            ["not searched" if p is None else p_words(p) for p in searched],
        ),
    ]
    return [
        html.Div(
            [
                html.Button("Pin the chosen cell instead", type="button", **{"data-pin": "chosen"}),
                html.Button("Swap the two", type="button", **{"data-pin": "swap"}),
                html.Button("Take the pin out", type="button", **{"data-pin": ""}),
            ],
            className="tool-row",
        ),
        html.Table(
            [
                html.Thead(
                    html.Tr(
                        [html.Th(text, scope="col") for text in ("Of the cell", "Pinned", "Chosen")]
                    )
                ),
                html.Tbody(
                    [
                        html.Tr([html.Th(name, scope="row"), *[html.Td(v) for v in values]])
                        for name, values in lines
                    ]
                ),
            ],
            className="table figures",
        ),
        *(
            [
                html.P(
                    f"Intervals, per-cell and search-adjusted p read every {unit} of the sample;"
                    " the rest is without the months left out.",
                    className="quiet",
                )
            ]
            if known.rest is not None
            else []
        ),
    ]


def _worth(one: OneCell) -> int:
    return max(3, round(one.inference.effective_months))


def response_words(
    found: tuple[OneResponse, ...] | None, state: ViewState, bridge: Bridge, refused: str
) -> list[Any]:
    """Let responses be chosen, and say what the driver is to each."""
    listed = [name for name in state.other_responses.split("|") if name]
    names = [name for name in bridge.in_view(state).series if name != state.driver]
    others: list[Any] = []
    if len(names) > MOST_BUTTONS:
        others = [
            names_select(
                [name for name in names if name not in listed],
                "",
                first="add a response",
                **{"aria-label": "Add a response", "data-add-response": "yes"},
            )
        ]
        names = [name for name in names if name in listed]
    picks = html.Div(
        [
            html.Button(
                name,
                type="button",
                className="episode",
                **{"data-response": name, "aria-pressed": str(name in listed).lower()},
            )
            for name in names
        ]
        + others,
        className="tool-row",
        role="group",
        **{"aria-label": f"Responses, at most {MOST_RESPONSES}"},
    )
    parts: list[Any] = [
        html.P(f"{state.driver} against other responses, at most {MOST_RESPONSES} at once."),
        picks,
    ]
    if refused:
        return [*parts, html.P(as_sentence(refused), className="message")]
    if not listed:
        return parts
    if found is None:
        return [*parts, html.P("Being searched.")]
    head = (
        "Response",
        "Stands out most at",
        "Correlation there",
        "Search-adjusted p",
        "Paid for all",
    )
    rows = []
    for one in found:
        if one.best is None:
            rows.append(html.Tr([html.Th(one.name, scope="row"), html.Td(one.refusal, colSpan=4)]))
            continue
        window, shift, correlation = one.best
        rows.append(
            html.Tr(
                [
                    html.Th(one.name, scope="row"),
                    html.Td(f"window {window}, shift {shift_words(shift, one.unit)}"),
                    html.Td(signed(correlation)),
                    html.Td(p_words(one.p)),
                    html.Td(p_words(one.p_all)),
                ]
            )
        )
    return [
        *parts,
        html.Table(
            [
                html.Thead(html.Tr([html.Th(text, scope="col") for text in head])),
                html.Tbody(rows),
            ],
            className="table figures",
        ),
        html.P(
            "Each p pays for its own map; the last column also pays for having asked"
            f" {counted(sum(o.best is not None for o in found), 'response')} (Holm 1979).",
            className="quiet",
        ),
    ]
