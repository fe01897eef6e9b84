"""Rows of the table of state fields that the tools of the Lag page are set by."""

from app.state_kinds import CELL, NAMES, SPANS, Choice, Text, Whole

LEFT_OUT = Text(
    label="Months left out",
    pattern=SPANS,
    shape="stretches such as 1978-03:1983-05 parted by commas, or empty",
    help="Months that no pair may read on either side, such as 1978-03:1983-05.",
)
PINNED = Text(
    label="Pinned cell",
    pattern=CELL,
    shape="window and shift such as 12:24, or empty",
    help="Cell such as 12:24 that the chosen one is put beside.",
    display=True,
)
POINTS = Choice(
    label="Scatter shows",
    options={
        "points": "months",
        "margins": "months, with counts at the sides",
        "counts": "counts in squares",
    },
    help="Each month as a point, or how many months fall into each bin of either side.",
    display=True,
)
BAND = Choice(
    label="Slice",
    options={"off": "none", "driver": "of the driver", "response": "of the response"},
    help="A band on one axis; the mean of the other side in it, and its path as the band sweeps.",
    display=True,
)
BAND_PLACE = Whole(
    label="Middle of the slice",
    low=0,
    high=100,
    help="Where the band stands, from the least (0) to the largest value (100).",
    display=True,
)
BAND_WIDTH = Whole(
    label="Width of the slice",
    low=2,
    high=50,
    help="Width of the band in percent of the range of its side.",
    display=True,
)
PEAKS = Choice(
    label="Peaks",
    options={
        "off": "not marked",
        "0.5": "by half a standard deviation",
        "1": "by one standard deviation",
        "2": "by two standard deviations",
    },
    help="Marks peaks that stand out this far, and joins those that meet across the shift.",
    display=True,
)
RESPONSES = Text(
    label="Other responses",
    pattern=NAMES,
    shape="names of loaded series parted by |, or empty",
    help="Series that the driver is held against, parted by |; empty takes the chosen one only.",
    display=True,
)
