"""Months that a state leaves out: which they are, and how they are said."""

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from analytics.series import Pair, period_label
from app.state import StateError, ViewState


def left_out_words(pair: Pair, state: ViewState) -> str:
    """Return the stretches left out in words, to follow the sample; nothing where there are none.

    Raises
    ------
    StateError
        A stretch reaches no month of the sample, or ends before it begins.
    """
    found = left_out_spans(pair, state)
    if not found:
        return ""
    said = [
        f"{period_label(pair.periods[a])} to {period_label(pair.periods[b - 1])}" for a, b in found
    ]
    return f", without {' and '.join(said)}"


def left_out_spans(pair: Pair, state: ViewState) -> list[tuple[int, int]]:
    """Return first place and stop of each stretch left out, within the sample.

    Raises
    ------
    StateError
        A stretch reaches no month of the sample, or ends before it begins.
    """
    found = []
    for part in filter(None, state.left_out.split(",")):
        calendar = pair.periods.freqstr
        first, last = (pd.Period(code) for code in part.split(":"))
        low = first.asfreq(calendar, how="start").ordinal - pair.periods[0].ordinal
        stop = last.asfreq(calendar, how="end").ordinal - pair.periods[0].ordinal + 1
        if stop <= low:
            raise StateError(f"Months left out must name stretches from old to new, but got {part}")
        low, stop = max(0, low), min(pair.n, stop)
        if stop <= low:
            ends = " to ".join(period_label(period) for period in pair.periods[[0, -1]])
            raise StateError(f"Months left out must name months of {ends}, but got {part}")
        found.append((low, stop))
    return found


def kept_months(pair: Pair, state: ViewState) -> NDArray[np.bool_] | None:
    """Return which months may be read, shape (n,); None where none is left out."""
    found = left_out_spans(pair, state)
    if not found:
        return None
    kept = np.ones(pair.n, dtype=bool)
    for low, stop in found:
        kept[low:stop] = False
    return kept
