"""A state and its result as files: CSV text, and the names that files carry."""

import csv
import io
import re
import unicodedata
from collections.abc import Iterable, Sequence
from typing import Any

from app.compute import Bridge, noun
from app.export_rows import SEARCHED, VIEWS
from app.lag.evidence import Evidence, completed
from app.pages.lag import LagView, view
from app.places import software_version
from app.state import ViewState

_FORMULA = tuple("=+-@\t\r\n＝＋－＠")  # the wide ones count in East Asian editions
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?")


def csv_export(name: str, query: str, bridge: Bridge) -> tuple[str, str]:
    """Return file name and text of one view of the Lag page as CSV.

    Parameters
    ----------
    name : str
        A key of `app.export_rows.VIEWS`.
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
    return f"{file_stem(name, shown.state)}.csv", view_text(name, shown, bridge)


def view_text(name: str, shown: LagView, bridge: Bridge) -> str:
    """Return one view as CSV text; what the numbers need and is not there yet is computed first."""
    known = completed(shown.state, bridge) if name in SEARCHED else None
    return csv_text(header(shown, known), VIEWS[name](shown, bridge))


def header(shown: LagView, known: Evidence | None = None) -> list[tuple[str, str]]:
    """Name what a file holds: sentence, series with fingerprints, state, cell, search, version."""
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
        *[("break", said) for said in shown.breaks],
        *[("made here", said) for said in shown.made],
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
        *(_search_lines(known) if known else []),
        ("note", "an association in past data; not a cause and not advice"),
    ]


def _search_lines(known: Evidence) -> list[tuple[str, str]]:
    inference, found = known.inference, known.search
    lines = [
        (
            "cell by effective months",
            f"effective months {inference.effective_months!r}; p {inference.p!r}; standard error"
            f" of the slope {inference.se_robust!r}; fragility {known.influence.fragility!r}",
        )
    ]
    if found is None:
        return [*lines, ("search", f"none: {known.refusal}")]
    left_in = found.p_with_level_shifts
    lines.append(
        (
            "search",
            f"p {float(found.p)!r}; one-sided {float(found.p_one_sided)!r}; Monte Carlo"
            f" standard error of p {found.p_error!r}; best cell window"
            f" {found.best_window} shift {found.best_shift}; surrogates {found.surrogates}; seed"
            f" {found.seed}; level shifts removed {'yes' if found.level_shifts_removed else 'no'}"
            + (f"; p with them {left_in!r}" if left_in is not None else ""),
        )
    )
    lines.append(("null hypothesis", found.method))
    if known.set_refusal:
        lines.append(("shift set", f"none: {known.set_refusal}"))
    if known.found and known.shift_set is not None:
        kept = " ".join(str(int(s)) for s in known.shift_set.shifts)
        lines.append((f"shift set {100 * known.shift_set.level:.0f} %", kept or "empty"))
    return lines


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
    """Return a file name without ending: view, series, window and shift, in plain letters.

    Long series names are cut, so that window and shift always stay in the name.
    """
    sides = f"{_plain(state.driver)[:40]}-{_plain(state.response)[:40]}"
    shift = f"minus-{-state.shift}" if state.shift < 0 else str(state.shift)
    return re.sub("-+", "-", f"{name}-{sides}-window-{state.window}-shift-{shift}")


def _plain(text: str) -> str:
    ascii_text = unicodedata.normalize("NFKD", text).encode("ascii", "ignore").decode()
    return re.sub(r"[^A-Za-z0-9]+", "-", ascii_text).strip("-").lower()


def _field(value: Any) -> str:
    if value is None or (isinstance(value, float) and value != value):
        return ""
    if isinstance(value, float):
        return repr(float(value))
    text = str(value)
    if text.startswith(_FORMULA) and not _NUMBER.fullmatch(text):
        return "'" + text
    return text
