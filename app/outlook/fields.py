"""Rows of the table of state fields that the Outlook page is set by."""

from app.state_kinds import Choice, Text

_NAMES = r"(?=\S)[^\x00-\x1f\x7f-\x9f\ud800-\udfff]{1,2000}(?<=\S)"
AHEAD_YEARS = {"quarter": 0.25, "half": 0.5, "year": 1.0, "two": 2.0, "three": 3.0}

TARGET = Choice(
    label="Outlook of",
    options={
        "yearly": "12-month rate",
        "window": "mean over the window",
        "single": "rate of one period",
    },
    help="Which rate of the response the path, its intervals and the backtest are about.",
)
SCHEME = Choice(
    label="Each past date uses",
    options={"expanding": "all that it knew", "rolling": "its latest ten years"},
    help="Whether the backtest is expanding (all periods before a date) or rolling.",
)
CELLS = Choice(
    label="Window and shift",
    options={"remade": "chosen anew each year", "kept": "the chosen cell"},
    help="Whether the backtest re-makes the choice of window and shift with the data of each date.",
)
AHEAD = Choice(
    label="Ahead",
    options={
        "quarter": "3 months",
        "half": "6 months",
        "year": "12 months",
        "two": "24 months",
        "three": "36 months",
    },
    help="How far ahead the chart through time and the verdict look.",
)
AGAINST = Choice(
    label="Against",
    options={
        "no change": "no change",
        "autoregression": "autoregression",
        "mean so far": "mean so far",
    },
    help="Benchmark that the chart through time holds the relation against.",
)
OTHERS = Text(
    label="Other drivers",
    pattern=f"({_NAMES})?",
    shape="names of loaded series parted by |, or empty",
    help="Further drivers whose paths are combined with the first one's, parted by |.",
)
RECENT = Choice(
    label="History drawn",
    options={"5": "5 years", "10": "10 years", "25": "25 years", "all": "all"},
    help="How much of the past the fan chart shows.",
    display=True,
)

OUTLOOK_FIELDS = (
    "driver",
    "response",
    "window",
    "shift",
    "growth",
    "first",
    "last",
    "season",
    "meet",
    "target",
    "scheme",
    "cells",
    "ahead",
    "against",
    "others",
)
OUTLOOK_VIEWS = (
    "fan",
    "gap",
    "direct",
    "backtest",
    "coverage",
    "through",
    "drivers",
    "statements",
)
