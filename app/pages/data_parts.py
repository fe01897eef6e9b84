"""Parts of the Data page: tables of series, files, problems and revisions, and the preview."""

from collections.abc import Sequence
from typing import Any

from dash import html

from analytics.series import period_label
from app.desk.bridge import Revised, all_series
from app.intake.reading import Release
from app.pages.as_of import day_words
from app.pages.data_lists import preview_table, problem_table
from app.pages.tables import names_select, table
from app.state import ViewState
from app.words import MINUS, counted, p_words, plain, signed
from app.workspace import LoadedFile, WorkspaceView

MOST_PRINTS = 24


def files_table(in_view: WorkspaceView, hidden: Sequence[LoadedFile]) -> list[Any]:
    """Return the files in view and those taken out of it, each with what can be done."""
    used = {file for _, file in all_series(in_view).values()}
    current = [file for file in reversed(in_view.files) if file.name in used]
    earlier = [file for file in reversed(in_view.files) if file.name not in used]
    parts: list[Any] = [_files(current, "Files in view")] if current else []
    if earlier:
        words = f"Earlier files ({len(earlier)}): every series of theirs has a newer file"
        parts.append(_fold("earlier", words, _files(earlier, "Earlier files")))
    if hidden:
        out = [
            (
                file.name,
                day_words(file.day),
                day_words(file.hidden),
                _button("Bring back", "show", file.name),
            )
            for file in hidden
        ]
        head = ("File", "Stands from", "Removed", "Change")
        words = f"Out of view ({len(hidden)}): their vintages are kept"
        parts.append(_fold("hidden", words, table(head, out, "Files out of view")))
    return parts


def _files(files: Sequence[LoadedFile], label: str) -> html.Table:
    rows = [
        (
            file.name,
            day_words(file.day),
            f"{len(file.series)} series",
            counted(file.problems, "finding") if file.problems else "nothing",
            _button("Remove from view", "hide", file.name),
        )
        for file in files
    ]
    return table(("File", "Stands from", "Holds", "Found in it", "Change"), rows, label)


def _button(words: str, act: str, file: str) -> html.Button:
    return html.Button(
        words,
        type="button",
        **{"data-act": act, "data-file": file, "aria-label": f"{words}: {file}"},
    )


def preview(found: Sequence[tuple[str, Release]], in_view: WorkspaceView, today: str) -> list[Any]:
    """Return what was understood in files that are not kept yet, with the two ways on."""
    if not found:
        return []
    parts: list[Any] = [
        html.H2("Understood, and not kept yet", id="data-preview-head", tabIndex="-1"),
    ]
    for token, release in found:
        parts += [
            html.Section(
                [
                    html.Div(
                        [
                            html.H3(release.name),
                            *_sheets(token, release),
                            html.Button(
                                "Discard this file",
                                type="button",
                                **{
                                    "data-act": "discard",
                                    "data-token": token,
                                    "aria-label": f"Discard this file: {release.name}",
                                },
                            ),
                        ],
                        className="view-head",
                    ),
                    preview_table(token, release, in_view),
                    *(
                        [problem_table(release.problems, token, ViewState())]
                        if release.problems
                        else []
                    ),
                ],
                className="previewed",
            )
        ]
    parts.append(
        html.Div(
            [
                html.Label(
                    [
                        html.Span("Stands from", title=STANDS),
                        html.Span(
                            className="native",
                            **{
                                "data-entry": "date",
                                "data-name": "stands-from",
                                "data-value": today,
                                "data-label": "Stands from",
                            },
                        ),
                    ],
                    className="control",
                ),
                html.Button(
                    "Keep these series", type="button", className="main", **{"data-act": "keep"}
                ),
                html.Button("Discard all", type="button", **{"data-act": "discard-all"}),
                html.Span(STANDS, className="quiet"),
            ],
            className="keep",
        )
    )
    return parts


def _sheets(token: str, release: Release) -> list[html.Label]:
    """Return the choice of a sheet, where a workbook has several."""
    if len(release.sheets) < 2:
        return []
    options = [
        html.Option(name, value=name, selected=name == release.sheet) for name in release.sheets
    ]
    chooser = html.Select(options, **{"data-sheet": token, "data-value": release.sheet})
    return [html.Label([html.Span("Sheet"), chooser], className="control")]


STANDS = "The date from which these vintages stand: today, or the day an older release came out."


def revisions_words(found: Revised | None, names: Sequence[str], fixed: bool) -> list[Any]:
    """Return the choice of the series, what its revisions say, and the newest of them."""
    if found is None:
        return [
            html.P(
                "The invented economy has one vintage of each series; with your own files, each "
                "month's file adds one."
                if fixed
                else "No series has been loaded twice with different values yet. When the next "
                "release is loaded, its values are compared with what stands here now.",
                className="empty",
            )
        ]
    chooser = html.Div(
        [
            html.Label("Series", htmlFor="field-series"),
            names_select(names, found.name, id="field-series", **{"data-field": "series"}),
        ],
        className="control",
    )
    if found.result is None:
        return [chooser, html.P(f"There are no revisions to show: {found.refusal}.")]
    return [chooser, *[html.P(text) for text in revision_sentences(found)]]


def revision_sentences(found: Revised) -> list[str]:
    """Say how first prints were revised, and whether they were biased."""
    result, noun = found.result, found.noun
    assert result is not None
    days = f"{day_words(found.vintages[0].day)} to {day_words(found.vintages[-1].day)}"
    sentences = [f"{counted(len(found.vintages), 'vintage')}, {days}."]
    if not result.n:
        sentences.append(
            f"No first print has been revised yet: a {noun} counts once a later vintage has it too."
        )
        return sentences
    sentences.append(
        f"{counted(result.n, 'first print')} with a later value: mean revision"
        f" {signed(result.mean, 3)}, mean absolute revision {plain(result.mean_absolute, 3)}"
        f" ({found.unit})."
    )
    bias = found.bias
    if bias is None:
        sentences.append(f"Whether first prints are biased cannot be told: {found.bias_refusal}.")
    else:
        sentences.append(
            f"Regression of the revision on the first print: intercept {signed(bias.intercept, 3)}"
            f" (standard error {plain(bias.se_intercept, 3)}), slope {signed(bias.slope, 3)}"
            f" ({plain(bias.se_slope, 3)}); both zero, as unbiased first prints have it: p"
            f" {p_words(bias.p)} (Newey-West errors, {counted(bias.lags, 'lag')}; with fewer than"
            " 60 first prints this p is too small)."
        )
    return sentences


def prints_table(found: Revised | None) -> list[Any]:
    """Return the newest first prints and revised values."""
    result = found.result if found is not None else None
    if found is None or result is None:
        return []
    places = found.moved[::-1]
    rows = [
        (
            period_label(result.periods[place]),
            f"{plain(result.first[place], 3)}"
            + ("" if result.first_print[place] else " (came with its history)"),
            day_words(found.loaded[place]),
            plain(result.latest[place], 3),
            _change(result.revision[place]) if result.held[place] > 1 else "not yet",
            f"{result.held[place]}",
        )
        for place in places[:MOST_PRINTS]
    ]
    if not rows:
        return []
    head = ("Period", "First value", "Stood from", "Latest", "Revision", "Vintages")
    words = "The CSV has every period."
    if len(places) > len(rows):
        words = f"The newest {len(rows)} of {len(places)}; the CSV has every period."
    note = html.P(words, className="quiet")
    label = "First prints and revisions"
    return [_fold("prints", "The numbers", table(head, rows, label, cards=False), note)]


def _fold(name: str, words: str, *inside: Any) -> html.Details:
    return html.Details([html.Summary(words), *inside], **{"data-stays": name})


def _change(value: float) -> str:
    return f"{value:+z.3f}".replace("-", MINUS)
