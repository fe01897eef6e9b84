"""Core measures of a state: which trim, which components are left out, over which changes."""

import re

import numpy as np

from analytics.breadth import change, total_without
from analytics.core_measures import compounded, trimmed_mean, weighted_median
from analytics.series import FloatArray
from analytics.weights import ChainedBasket, basket_shares
from app.intake.problems import quoted
from app.state import StateError, ViewState

FOOD_AND_ENERGY = re.compile(r"food|energy|fuel|petrol|electric|heating|\bgas\b", re.IGNORECASE)
MEDIAN, TRIMMED, TOTAL = "Weighted median", "Trimmed mean", "All items"


def core_measures(
    state: ViewState,
    basket: ChainedBasket,
    shares: FloatArray,
    index: FloatArray,
    rates: FloatArray,
    rates_1: FloatArray,
    span: int,
    left_out: np.ndarray,
    label: str,
    notes: list[str],
) -> dict[str, FloatArray]:
    """Return all items, median, trimmed mean and the basket without, in percent over `span`.

    `shares` are those of the basket over `span` periods.
    """
    lower, upper = cuts(state)
    by_month = state.core == "month" and span > 1
    changes, weights = (rates_1, basket_shares(basket, 1)) if by_month else (rates, shares)
    found = {
        MEDIAN: weighted_median(changes, weights),
        TRIMMED: trimmed_mean(changes, weights, lower=lower, upper=upper),
    }
    if by_month:
        found = {name: compounded(values, span) for name, values in found.items()}
    measures = {TOTAL: change(index, span), **found}
    if left_out.any():
        try:
            measures[label] = change(total_without(basket, left_out), span)
        except ValueError:
            notes.append("Something must be kept, but everything is left out.")
    return measures


def cuts(state: ViewState) -> tuple[float, float]:
    """Return the percent of the weight cut from below and from above.

    Raises
    ------
    StateError
        Nothing would be left.
    """
    low, _, high = state.trim.partition(":")
    lower, upper = float(low), float(high or low)
    if lower + upper >= 100:
        raise StateError(f"Trim must cut less than 100 percent in all, but got {state.trim!r}")
    return lower, upper


def left_out_of(
    state: ViewState, names: tuple[str, ...], notes: list[str]
) -> tuple[np.ndarray, str]:
    """Return which components the exclusion measure leaves out, and its name."""
    if state.excluded == "none":
        return np.zeros(len(names), dtype=bool), ""
    if not state.excluded:
        out = np.array([bool(FOOD_AND_ENERGY.search(name)) for name in names])
        if out.all():
            out[:] = False
        return out, "Without food and energy"
    wanted = dict.fromkeys(part.strip() for part in state.excluded.split("|") if part.strip())
    unknown = [name for name in wanted if name not in names]
    if unknown:
        notes.append(
            f"A component to leave out must be one of those shown, but {quoted(unknown[0])} is"
            " not; it is passed over."
        )
    out = np.array([name in wanted for name in names])
    chosen = [short_name(name) for name in names if name in wanted]
    if len(chosen) <= 2:
        return out, f"Without {' and '.join(chosen)}"
    return out, f"Without {len(chosen)} components"


def short_name(name: str) -> str:
    """Return the name of a component without the code before it.

    Examples
    --------
    >>> short_name("04 Housing and energy"), short_name("04.5.1 Electricity"), short_name("12")
    ('Housing and energy', 'Electricity', '12')
    """
    return re.sub(r"^[0-9][0-9.]*\s+(?=\S)", "", name)
