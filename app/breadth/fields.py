"""Rows of the table of state fields that the Breadth page is set by."""

from app.state_kinds import NAME, Choice, Text, Whole

_CUT = r"[0-9]{1,2}(\.[0-9]{1,3})?"
_NAMES = r"(?=\S)[^\x00-\x1f\x7f-\x9f\ud800-\udfff]{1,4000}(?<=\S)"
SORTED_BY = {  # columns of the table of components, and how each is called
    "name": "component",
    "weight": "weight",
    "rate": "12-month rate",
    "rate_1m": "1-month rate",
    "rank": "rank",
    "points": "contribution to the 12-month rate",
    "points_1m": "contribution to the 1-month rate",
}

AGGREGATE = Text(
    label="All items",
    pattern=f"({NAME})?",
    shape="the name of a loaded series, or empty",
    help="Published total that contributions are held against; empty finds the nearest.",
)
SPAN = Choice(
    label="Rate over",
    options={"year": "12 months", "month": "one month"},
    help="Whether contributions, diffusion and core measures are of a year or of a month.",
)
LINK = Whole(
    label="Link month",
    low=1,
    high=12,
    help="Month in which new weights are linked in: 12 is the December before their year.",
)
VALUED = Choice(
    label="Weights are valued at",
    options={"link": "prices of the link month", "year": "mean prices of the year before"},
    help="Prices that the weights belong to; a year's mean prices are updated to the link.",
)
SCALE = Choice(
    label="Weights that do not sum",
    options={"no": "stop and say so", "yes": "scale to their total"},
    help="What to do where the weights of a year do not sum to 1, 100 or 1000.",
)
TRIM = Text(
    label="Trim",
    pattern=rf"{_CUT}(:{_CUT})?",
    shape="percent cut from each side such as 15, or below and above such as 24:31",
    help="Percent of the weight cut from each side, or below and above such as 24:31.",
)
CORE = Choice(
    label="Median and mean of",
    options={"year": "12-month changes", "month": "one-month changes, compounded"},
    help="Which changes of the components the weighted median and trimmed mean are of.",
)
EXCLUDED = Text(
    label="Left out",
    pattern=rf"({_NAMES})?",
    shape="names of components parted by |, or none, or empty",
    help="Components to leave out, parted by |; empty takes food and energy, none nothing.",
)
PACE = Text(
    label="Pace",
    pattern=r"(-?[0-9]{1,2}|[0-9]{3})(\.[0-9]{1,3})?",
    shape="a number of percent a year such as 2 or 2.5",
    help="Percent a year; diffusion also counts the components that rise faster.",
)
STRIP = Choice(
    label="Strip shows",
    options={"rank": "rank in own history", "rate": "rate"},
    help="What the colours of the strip of components by month stand for.",
    display=True,
)
YEARS = Whole(
    label="Years drawn",
    low=1,
    high=200,
    help="How many of the latest years the charts through time show.",
    display=True,
)
SORT = Choice(
    label="Order of the table",
    options={
        f"{column}-{way}": f"{words}, {'descending' if way == 'down' else 'ascending'}"
        for column, words in SORTED_BY.items()
        for way in ("down", "up")
    },
    help="Column that the table of components is ordered by.",
    display=True,
)
ROWS = Choice(
    label="Rows of the table",
    options={"top": "the first ones and the rest as one", "all": "all"},
    help="Whether the table lists every component or sums up those far down.",
    display=True,
)

BREADTH_FIELDS = (
    "aggregate",
    "span",
    "first",
    "last",
    "link",
    "valued",
    "scale",
    "trim",
    "core",
    "excluded",
    "pace",
)
BREADTH_VIEWS = (
    "contributions",
    "history",
    "strip",
    "core",
    "diffusion",
    "weights",
    "table",
    "tracking",
)
