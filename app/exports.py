"""A state and its result as files: CSV text, and the names that files carry."""

import csv
import io
import re
import unicodedata
from collections.abc import Callable, Iterable, Sequence
from typing import Any

from analytics.series import period_code
from app.compute import Bridge, noun
from app.pages.lag import LagView, view
from app.places import software_version
from app.state import ViewState

_FORMULA = tuple("=+-@\t\r\n＝＋－＠")  # the wide ones count in East Asian editions
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")


def csv_export(name: str, query: str, bridge: Bridge) -> tuple[str, str]:
    """Return file name and text of one view of the Lag page as CSV.

    Parameters
    ----------
    name : {"surface", "scatter", "overlay"}
        Which view.
    query : str
        The state as an address carries it.
    bridge : Bridge
        Loaded series and their results.

    Raises
    ------
    ValueError
        No such view, a refused value, or a state that shows nothing; one sentence.
    """
    if name not in VIEWS:
        raise ValueError(f"view must be one of {', '.join(VIEWS)}, but got {name!r}")
    shown = view(ViewState.from_query(query), bridge)
    text = csv_text(header(shown), VIEWS[name](shown))
    return f"{file_stem(name, shown.state)}.csv", text


def header(shown: LagView) -> list[tuple[str, str]]:
    """Name what a file holds: sentence, series with fingerprints, state, cell, version."""
    pair, cell, unit = shown.pair, shown.cell, noun(shown.pair)
    sides = [
        (
            role,
            f"{rate.name}; {rate.unit or 'percent'}; source {rate.source or 'not named'}; "
            f"{loaded.kind} as read: fingerprint {loaded.fingerprint}; "
            f"growth as used: fingerprint {rate.fingerprint}",
        )
        for role, rate, loaded in zip(
            ("driver", "response"), (pair.driver, pair.response), shown.loaded, strict=True
        )
    ]
    return [
        ("Pricewake", software_version()),
        ("view", shown.sentence),
        *sides,
        ("state", f"/lag?{shown.state.to_query()}"),
        (
            "left out",
            f"{pair.lost_driver} {unit}s of the driver and {pair.lost_response} of the response"
            " that the other does not have",
        ),
        (
            "cell",
            f"n {cell.n}; slope {cell.slope!r}; intercept {cell.intercept!r}; "
            f"correlation {cell.correlation!r}; naive standard error {cell.se_naive!r}; "
            f"naive p {cell.p_naive!r}",
        ),
        ("note", "an association in past data; not a cause and not advice"),
    ]


def csv_text(head: Iterable[tuple[str, str]], rows: Iterable[Sequence[Any]]) -> str:
    """Write RFC 4180 text under ``#`` lines; text that a spreadsheet would run is defused.

    Numbers keep every digit; nan is an empty field.
    """
    out = io.StringIO(newline="")
    for key, value in head:
        plain = re.sub(r"[\s,\"]+", " ", f"{key}: {value}".replace(",", ";"))
        out.write(f"# {plain}\r\n")
    writer = csv.writer(out, lineterminator="\r\n")
    for row in rows:
        writer.writerow([_field(value) for value in row])
    return out.getvalue()


def file_stem(name: str, state: ViewState) -> str:
    """Return a file name without ending: view, series, window and shift, in plain letters."""
    words = (
        f"{name} {state.driver} {state.response} window {state.window} shift {state.shift}".replace(
            "shift -", "shift minus "
        )
    )
    ascii_words = unicodedata.normalize("NFKD", words).encode("ascii", "ignore").decode()
    return re.sub(r"[^A-Za-z0-9]+", "-", ascii_words).strip("-").lower()[:120]


def _field(value: Any) -> str:
    if value is None or (isinstance(value, float) and value != value):
        return ""
    if isinstance(value, float):
        return repr(float(value))
    text = str(value)
    if text.startswith(_FORMULA) and not _NUMBER.fullmatch(text):
        return "'" + text
    return text


def _surface_rows(shown: LagView) -> Iterable[Sequence[Any]]:
    yield "window", "shift", "pairs", "correlation", "slope"
    surface = shown.surface
    for i, window in enumerate(surface.windows):
        for j, shift in enumerate(surface.shifts):
            yield (
                int(window),
                int(shift),
                int(surface.pairs[i, j]),
                float(surface.correlation[i, j]),
                float(surface.slope[i, j]),
            )


def _cell_rows(shown: LagView) -> Iterable[Sequence[Any]]:
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
    cell, months = shown.cell, shown.pair.periods
    for i in range(cell.n):
        month = months[shown.start + i]
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


def _overlay_rows(shown: LagView) -> Iterable[Sequence[Any]]:
    yield "period", "driver", "response_moved_back"
    overlay = shown.overlay
    for i, period in enumerate(overlay.periods):
        yield period_code(period), float(overlay.driver[i]), float(overlay.response[i])


VIEWS: dict[str, Callable[[LagView], Iterable[Sequence[Any]]]] = {
    "surface": _surface_rows,
    "scatter": _cell_rows,
    "overlay": _overlay_rows,
}
