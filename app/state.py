"""ViewState: what is looked at. Sliders, addresses, exports, file names and cache keys read this.

One table (the metadata of the fields) carries label, bounds, unit, default and help of every
control; `app.controls` draws them and `app.cli` makes its flags from the same rows.
"""

from dataclasses import Field, dataclass, field, fields, replace
from functools import lru_cache
from typing import Any, cast
from urllib.parse import parse_qsl, urlencode

from app.breadth import fields as breadth_fields
from app.lag import fields as lag_fields
from app.outlook import fields as outlook_fields
from app.reading import fields as reading_fields
from app.scan import fields as scan_fields
from app.state_kinds import (
    NAME,
    PERIOD,
    RANGE,
    SPAN,
    Choice,
    Day,
    FieldKind,
    StateError,
    Text,
    Whole,
)

__all__ = [
    "CELL_FIELDS",
    "Choice",
    "Day",
    "FieldKind",
    "StateError",
    "Text",
    "ViewState",
    "Whole",
    "field_kind",
    "kind_of",
]


def _state(default: Any, kind: FieldKind) -> Any:
    return field(default=default, metadata={"kind": kind})


CELL_FIELDS = ("window", "shift", "without")  # what one surface is looked at through


@dataclass(frozen=True, kw_only=True)
class ViewState:
    """What is looked at; equal states give equal addresses and equal cache keys."""

    driver: str = _state(
        "Broad money",
        Text(
            label="Driver",
            pattern=NAME,
            shape="the name of a loaded series",
            help="The series that may move first, for example broad money.",
        ),
    )
    response: str = _state(
        "Consumer prices",
        Text(
            label="Response",
            pattern=NAME,
            shape="the name of a loaded series",
            help="The series that may follow, for example consumer prices.",
        ),
    )
    window: int = _state(
        12,
        Whole(
            label="Window",
            low=1,
            high=60,
            help="Periods in the trailing average of both series; more is smoother.",
        ),
    )
    shift: int = _state(
        24,
        Whole(
            label="Shift",
            low=-36,
            high=60,
            help="Periods by which the response is read later; above 0 the driver leads.",
        ),
    )
    growth: str = _state(
        "log",
        Choice(
            label="Growth formula",
            options={"log": "log: 100 ln(p/p₋₁)", "percent": "percent: 100 (p/p₋₁ − 1)"},
            help="How growth from one period to the next is computed; a rate is used as it is.",
        ),
    )
    first: str = _state(
        "",
        Text(
            label="From",
            pattern=PERIOD,
            shape="a period such as 1965-03, 1965-Q1 or 1965, or empty",
            help="First period of the sample, such as 1965-03; empty takes the earliest there is.",
        ),
    )
    last: str = _state(
        "",
        Text(
            label="To",
            pattern=PERIOD,
            shape="a period such as 2024-12, 2024-Q4 or 2024, or empty",
            help="Last period of the sample, such as 2024-12; empty takes the newest there is.",
        ),
    )
    months: str = _state(
        "own",
        Choice(
            label="Periods compared",
            options={"own": "all that each cell has", "same": "the same in every cell"},
            help="Whether each cell uses all its periods or only those that every cell has.",
        ),
    )
    season: str = _state(
        "read",
        Choice(
            label="Season",
            options={"read": "as read", "stl": "taken out here (STL)"},
            help="Whether a series said to be unadjusted is adjusted here by STL, not officially.",
        ),
    )
    meet: str = _state(
        "average",
        Choice(
            label="Frequencies meet by",
            options={"average": "average", "last": "last value"},
            help="How the more frequent of two series is brought to the other's periods.",
        ),
    )
    windows: str = _state(
        "",
        Text(
            label="Windows searched",
            pattern=RANGE,
            shape="a range such as 1:60, or empty",
            help="Range of windows on the map, such as 1:60; empty takes one to five years.",
        ),
    )
    shifts: str = _state(
        "",
        Text(
            label="Shifts searched",
            pattern=RANGE,
            shape="a range such as -36:60, or empty",
            help="Range of shifts on the map, such as -36:60; empty takes -3 to 5 years.",
        ),
    )
    surrogates: int = _state(
        2000,
        Whole(
            label="Surrogates",
            low=1,
            high=20000,
            help="Unrelated drivers that the search is held against; more makes p finer.",
        ),
    )
    seed: int = _state(
        1,
        Whole(
            label="Seed",
            low=0,
            high=2**31 - 1,
            help="What the random draws start from; the same seed gives the same p.",
        ),
    )
    without: str = _state(
        "",
        Text(
            label="Without",
            pattern=SPAN,
            shape="a stretch such as 1978-03:1983-05, or empty",
            help="Episode of the driver that is left out of the cell for comparison.",
        ),
    )
    left_out: str = _state("", lag_fields.LEFT_OUT)
    pinned: str = _state("", lag_fields.PINNED)
    points: str = _state("points", lag_fields.POINTS)
    band: str = _state("off", lag_fields.BAND)
    band_place: int = _state(50, lag_fields.BAND_PLACE)
    band_width: int = _state(10, lag_fields.BAND_WIDTH)
    peaks: str = _state("off", lag_fields.PEAKS)
    other_responses: str = _state("", lag_fields.RESPONSES)
    quantity: str = _state(
        "correlation",
        Choice(
            label="Map shows",
            options={
                "correlation": "correlation",
                "slope": "slope",
                "p_cell": "per-cell p (effective months)",
                "p_naive": "naive p",
                "p_hac": "HAC p (Bartlett, fixed-b)",
            },
            help="What the colours of the map stand for.",
            display=True,
        ),
    )
    as_of: str = _state(
        "",
        Day(
            label="As it stood on",
            help="Date such as 2024-03-12 whose vintages are used; empty takes the newest.",
        ),
    )

    aggregate: str = _state("", breadth_fields.AGGREGATE)
    span: str = _state("year", breadth_fields.SPAN)
    link: int = _state(12, breadth_fields.LINK)
    valued: str = _state("link", breadth_fields.VALUED)
    scale: str = _state("no", breadth_fields.SCALE)
    trim: str = _state("15", breadth_fields.TRIM)
    core: str = _state("year", breadth_fields.CORE)
    excluded: str = _state("", breadth_fields.EXCLUDED)
    pace: str = _state("2", breadth_fields.PACE)
    strip: str = _state("rank", breadth_fields.STRIP)
    years: int = _state(10, breadth_fields.YEARS)
    sort: str = _state("points-down", breadth_fields.SORT)
    rows: str = _state("top", breadth_fields.ROWS)

    series: str = _state("", reading_fields.SERIES)
    newest: str = _state("", reading_fields.NEWEST)
    formula: str = _state("percent", reading_fields.FORMULA)
    measure: str = _state("1m", reading_fields.MEASURE)
    among: str = _state("all", reading_fields.AMONG)
    rank_kind: str = _state("mean", reading_fields.RANK_KIND)
    rank_window: int = _state(120, reading_fields.RANK_WINDOW)
    since: str = _state("", reading_fields.SINCE)
    split: str = _state("", reading_fields.SPLIT)
    family: str = _state("laplace", reading_fields.FAMILY)
    draws: int = _state(2000, reading_fields.DRAWS)
    coming: float = _state(0.2, reading_fields.COMING)
    beyond: str = _state("rank", reading_fields.BEYOND)
    level: float = _state(5, reading_fields.LEVEL)
    rank_level: float = _state(90, reading_fields.RANK_LEVEL)
    shortest: int = _state(3, reading_fields.SHORTEST)
    gap: int = _state(1, reading_fields.GAP)
    timeline: str = _state("rates", reading_fields.TIMELINE)
    target: str = _state("yearly", outlook_fields.TARGET)
    scheme: str = _state("expanding", outlook_fields.SCHEME)
    cells: str = _state("remade", outlook_fields.CELLS)
    ahead: str = _state("year", outlook_fields.AHEAD)
    against: str = _state("no change", outlook_fields.AGAINST)
    others: str = _state("", outlook_fields.OTHERS)
    recent: str = _state("10", outlook_fields.RECENT)
    # The Scan page
    drivers: str = _state("", scan_fields.DRIVERS)
    responses: str = _state("", scan_fields.RESPONSES)
    sign: str = _state("any", scan_fields.SIGN)
    correction: str = _state("bh", scan_fields.CORRECTION)
    axes: str = _state("linear", scan_fields.AXES)
    league: str = _state("p_search-up", scan_fields.LEAGUE)
    league_rows: str = _state("top", scan_fields.LEAGUE_ROWS)
    begin: str = _state("no", scan_fields.BEGIN)
    result: str = _state("", scan_fields.RESULT)
    # The Data page
    revised: str = _state(
        "growth",
        Choice(
            label="Revisions of",
            options={"growth": "growth over one period", "values": "values as published"},
            help="Growth over one period, or values; growth stays when an index is re-referenced.",
            display=True,
        ),
    )
    unadjusted: str = _state(
        "",
        Text(
            label="Season of",
            pattern=f"({NAME})?",
            shape="the name of a loaded series, or empty",
            help="Series said to be unadjusted whose season is shown; empty takes the first.",
            display=True,
        ),
    )

    def __post_init__(self) -> None:
        for item in fields(self):
            kind_of(item).check(getattr(self, item.name))

    @classmethod
    def from_query(cls, query: str) -> "ViewState":
        """Read the part of an address after ``?``; unknown keys are ignored.

        Raises
        ------
        StateError
            A value is not allowed.
        """
        return cls(**_values(query))

    @classmethod
    def from_query_or_default(cls, query: str) -> tuple["ViewState", tuple[str, ...]]:
        """Read an address field by field; a refused value gives its sentence and the default."""
        kept: dict[str, Any] = {}
        sentences = []
        kinds = {item.name: kind_of(item) for item in fields(cls)}
        for name, value in _values(query).items():
            try:
                kinds[name].check(value)
                kept[name] = value
            except StateError as error:
                sentences.append(f"{error}; the usual value is shown instead")
        return cls(**kept), tuple(sentences)

    def to_query(self) -> str:
        """Write the fields that differ from their default, in field order."""
        return urlencode(
            [
                (item.name, kind_of(item).write(getattr(self, item.name)))
                for item in fields(self)
                if getattr(self, item.name) != item.default
            ]
        )

    def numbers(self) -> "ViewState":
        """Return the state with display-only fields at their default: the cache key."""
        return _numbers(self)

    def question(self) -> "ViewState":
        """Return `numbers` without the cell chosen: all cells of one surface share it."""
        return _question(self)

    def sentence(self, noun: str = "month", span: str = "", without: str = "") -> str:
        """Say the state in one sentence; `span` and `without` are the sample in words."""
        smoothed = f"{self.window}-{noun} window" if self.window > 1 else f"one {noun} at a time"
        size = f"{abs(self.shift)} {noun}{'' if abs(self.shift) == 1 else 's'}"
        if self.shift > 0:
            relation = f"leading {self.response} by {size}"
        elif self.shift < 0:
            relation = f"following {self.response} by {size}"
        else:
            relation = f"beside {self.response} of the same {noun}"
        stood = f", as it stood on {self.as_of}" if self.as_of else ""
        return f"{self.driver}, {smoothed}, {relation}{', ' + span if span else ''}{without}{stood}"


@lru_cache(maxsize=256)  # asked for several times an answer, and every field is checked
def _numbers(state: ViewState) -> ViewState:
    plain: dict[str, Any] = {i.name: i.default for i in fields(state) if kind_of(i).display}
    return replace(state, **plain)


@lru_cache(maxsize=256)
def _question(state: ViewState) -> ViewState:
    cell: dict[str, Any] = {name: getattr(ViewState, name) for name in CELL_FIELDS}
    return replace(state.numbers(), **cell)


def kind_of(item: "Field[Any]") -> FieldKind:
    """Return the row of the table that belongs to a field of `ViewState`."""
    return cast(FieldKind, item.metadata["kind"])


def field_kind(name: str) -> FieldKind:
    """Return the row of the table for a field by its name."""
    return kind_of(ViewState.__dataclass_fields__[name])


def _values(query: str) -> dict[str, Any]:
    kinds = {item.name: kind_of(item) for item in fields(ViewState)}
    pairs = parse_qsl(query.lstrip("?"), keep_blank_values=True)
    return {name: kinds[name].read(text) for name, text in pairs if name in kinds}
