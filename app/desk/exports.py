"""The views of the Data page as CSV files."""

from typing import Any

from analytics.series import period_code
from app.compute import Bridge
from app.desk import bridge as desk
from app.desk import seasons
from app.exports import csv_text
from app.intake.reading import inspection
from app.places import software_version
from app.seasons import season_rows
from app.state import ViewState
from app.words import slug


def csv_export(name: str, query: str, bridge: Bridge) -> tuple[str, str]:
    """Return file name and text of one view of the Data page: series, revisions or season.

    Raises
    ------
    ValueError
        No such view, a refused value, or a state that shows nothing; one sentence.
    """
    views = {"series": _series, "revisions": _revisions, "season": _season}
    if name not in views:
        raise ValueError(f"view must be one of {', '.join(views)}, but got {name!r}")
    state = ViewState.from_query(query)
    return views[name](state, bridge)


def _head(view: str, state: ViewState) -> list[tuple[str, str]]:
    return [
        ("Pricewake", software_version()),
        ("view", view),
        ("as it stood on", state.as_of or "now"),
        ("address", f"/data?{state.to_query()}"),
    ]


def _series(state: ViewState, bridge: Bridge) -> tuple[str, str]:
    in_view = bridge.in_view(state)
    rows: list[list[Any]] = []
    for series in inspection(in_view.releases)["series"]:
        if desk.all_series(in_view)[series["name"]][1] != series["file"]:
            continue  # a newer file has the name
        if not rows:
            rows.append([*series, "vintages", "source"])
        flat = [" ".join(v) if isinstance(v, list) else v for v in series.values()]
        source = desk.all_series(in_view)[series["name"]][0].source
        rows.append([*flat, in_view.vintages.get(series["name"], 1), source])
    if not rows:
        raise ValueError("nothing is loaded yet; open release files on the Data page")
    return f"series{_dated(state)}.csv", csv_text(_head("what was understood", state), rows)


def _revisions(state: ViewState, bridge: Bridge) -> tuple[str, str]:
    found = desk.revised(state, bridge)
    if found is None:
        raise ValueError("no series has been loaded twice with different values yet")
    if found.result is None:
        raise ValueError(f"there are no revisions of {found.name!r} to show: {found.refusal}")
    result = found.result
    head = _head("first prints and revisions", state)
    head += [("series", f"{found.name}; {found.unit}")]
    head += [
        ("vintage", f"from {one.day}; {one.file}; fingerprint {one.series.fingerprint}")
        for one in found.vintages
    ]
    head.append(
        (
            "first prints counted",
            f"{result.n}; mean revision {result.mean!r}; mean absolute {result.mean_absolute!r}",
        )
    )
    if found.bias is not None:
        values = "; ".join(f"{key} {value!r}" for key, value in vars(found.bias).items())
        head.append(("revision on first print; Newey-West errors; joint F", values))
    else:
        head.append(("bias", f"none: {found.bias_refusal}"))
    columns = ["period", "first", "stood from", "latest", "revision", "vintages"]
    rows: list[list[Any]] = [[*columns, "first print", "counted"]]
    for place, period in enumerate(result.periods):
        rows.append(
            [
                period_code(period),
                float(result.first[place]),
                found.loaded[place],
                float(result.latest[place]),
                float(result.revision[place]),
                int(result.held[place]),
                "yes" if result.first_print[place] else "no",
                "yes" if result.counted[place] else "no",
            ]
        )
    return f"revisions-{slug(found.name)}-{state.revised}{_dated(state)}.csv", csv_text(head, rows)


def _season(state: ViewState, bridge: Bridge) -> tuple[str, str]:
    found = seasons.chosen(state, bridge)
    if found is None:
        raise ValueError("no series in view is said to be unadjusted")
    if found.result is None:
        raise ValueError(f"there is no season of {found.series.name!r} to show: {found.refusal}")
    head = _head("season taken out here", state)
    head += [("series", f"{found.series.name}; fingerprint {found.series.fingerprint}")]
    head += [("source", found.result.adjusted.source)]
    rows = season_rows([(found.series, found.result)])
    return f"season-{slug(found.series.name)}{_dated(state)}.csv", csv_text(head, rows)


def _dated(state: ViewState) -> str:
    return f"-as-of-{state.as_of}" if state.as_of else ""
