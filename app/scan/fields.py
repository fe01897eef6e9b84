"""Rows of the table of state fields that the scan of every pair is set by."""

from app.state_kinds import Choice, Text

_NAMES = r"(?=\S)[^\x00-\x1f\x7f-\x9f\ud800-\udfff]{1,4000}(?<=\S)"

DRIVERS = Text(
    label="Drivers",
    pattern=rf"({_NAMES})?",
    shape="names of series within an economy parted by |, or empty",
    help="Names within an economy, such as Broad money, parted by |; empty takes all money.",
)
RESPONSES = Text(
    label="Responses",
    pattern=rf"({_NAMES})?",
    shape="names of series within an economy parted by |, or empty",
    help="Names within an economy, such as Consumer prices, parted by |; empty takes all prices.",
)
SIGN = Choice(
    label="Relations looked for",
    options={"any": "of either sign", "positive": "positive only"},
    help="Positive is for who would call no negative relation a finding, and said so beforehand.",
)
CORRECTION = Choice(
    label="Found means",
    options={
        "bh": "few false ones (Benjamini-Hochberg)",
        "holm": "not one false one (Holm)",
    },
    help="Which p, adjusted for the number of pairs, has to be .05 or below to be found.",
    display=True,
)
AXES = Choice(
    label="Axes of the averages",
    options={"linear": "percent a year", "log": "percent a year, logarithmic"},
    help="Logarithmic axes keep hyperinflations from owning the line.",
)
LEAGUE_COLUMNS = {  # columns of the table of pairs, and how each is called
    "economy": "economy",
    "window": "window",
    "shift": "shift",
    "correlation": "correlation",
    "p_search": "search-adjusted p",
    "p_scan": "p by Benjamini-Hochberg",
    "p_holm": "p by Holm",
    "share": "share on one episode",
}
LEAGUE = Choice(
    label="Order of the pairs",
    options={
        f"{column}-{way}": f"{words}, {'descending' if way == 'down' else 'ascending'}"
        for column, words in LEAGUE_COLUMNS.items()
        for way in ("down", "up")
    },
    help="Column that the pairs are ordered by.",
    display=True,
)
LEAGUE_ROWS = Choice(
    label="Pairs listed",
    options={"top": "the first ones", "all": "all"},
    help="Whether every pair is listed or only the first ones.",
    display=True,
)

BEGIN = Choice(
    label="Search on this page",
    options={"no": "only a moderate number of pairs", "yes": "however many there are"},
    help="Whether the page searches a large number of pairs, which takes it a while.",
    display=True,
)

RESULT = Text(
    label="Opened result",
    pattern=r"([0-9a-f]{16})?",
    shape="the mark of a result that is open, or empty",
    help="Mark of a result file that was opened on the Scan page; empty scans the loaded files.",
)

SETTINGS = (  # fields of the state that a scan's numbers depend on, besides the series
    "growth",
    "first",
    "last",
    "season",
    "meet",
    "windows",
    "shifts",
    "sign",
    "surrogates",
    "seed",
)
SCAN_FIELDS = (*SETTINGS, "as_of", "axes")
SCAN_VIEWS = ("pairs", "surfaces", "shifts", "averages")
