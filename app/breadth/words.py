"""The breadth of a price change in sentences with their numbers."""

import numpy as np

from analytics.series import period_label
from app.breadth.bridge import Breadth
from app.breadth.core import MEDIAN, TOTAL, TRIMMED, cuts, short_name
from app.words import counted, plain, signed

CLOSE = 0.3  # percentage points within which two rates are called close


def over_words(shown: Breadth) -> str:
    """Return what rates are taken over: ``12-month``, ``one-month``, ``4-quarter``."""
    return f"{shown.span}-{shown.noun}" if shown.span > 1 else f"one-{shown.noun}"


def print_words(shown: Breadth) -> str:
    """Return the period of the print, for example ``Oct 2026``."""
    return period_label(shown.periods[-1])


def sentence(shown: Breadth) -> str:
    """Return the headline: how many components rose, and which one gave most."""
    rates = shown.rates[-1]
    known = ~np.isnan(rates)
    span = f"the {counted(shown.span, shown.noun)} to" if shown.span > 1 else ""
    when = f"over {span} {print_words(shown)}" if span else f"in {print_words(shown)}"
    rose = f"Prices of {int((rates > 0).sum())} of {counted(int(known.sum()), 'component')} rose"
    return f"{rose} {when}{_most(shown)}."


def _most(shown: Breadth) -> str:
    if shown.weighted is None or np.isnan(shown.rate[-1]):
        return ""
    points, rate = shown.weighted.points[-1], shown.rate[-1]
    high, low = int(np.nanargmax(points)), int(np.nanargmin(points))
    digits = 1 if shown.span > 1 else 2
    top, bottom = short_name(shown.names[high]), short_name(shown.names[low])
    least = 0.5 * 10.0**-digits
    gave, took = plain(points[high], digits), plain(-points[low], digits)
    if rate >= least and least <= points[high] <= rate:
        return f"; {top} gave {gave} of the {plain(rate, digits)} points"
    if rate <= -least and rate <= points[low] <= -least:
        return f"; {bottom} took {took} of the {plain(-rate, digits)} points that all items lost"
    total = f"all items {signed(rate, digits)} %" if abs(rate) >= least else "all items unchanged"
    if points[high] >= least and points[low] <= -least:
        return f"; {top} gave {gave} points and {bottom} took {took}, {total}"
    return f"; {total}"


def verdict(shown: Breadth) -> str:
    """Return what core measures and diffusion say, with their numbers."""
    if shown.weighted is None:
        return (
            f"Without weights that can be used there are no contributions and no core measures."
            f" {_spread(shown)}"
        )
    measures = shown.weighted.measures
    rate, median, trimmed = (float(measures[n][-1]) for n in (TOTAL, MEDIAN, TRIMMED))
    digits = 1 if shown.span > 1 else 2
    if any(np.isnan(value) for value in (rate, median, trimmed)):
        return _spread(shown)
    words = (
        f"All items {signed(rate, digits)} %, weighted median {signed(median, digits)} %, mean"
        f" without {trim_words(shown)} {signed(trimmed, digits)} %"
    )
    apart = CLOSE if shown.span > 1 else CLOSE / shown.per_year
    if rate - median > apart and rate - trimmed > apart:
        said = ": a few large rises pull the total above what the middle of the basket did"
    elif median - rate > apart and trimmed - rate > apart:
        said = ": a few falls hold the total below what the middle of the basket did"
    else:
        said = ""
    extra = next((n for n in measures if n not in (TOTAL, MEDIAN, TRIMMED)), None)
    without = ""
    if extra is not None and not np.isnan(measures[extra][-1]):
        without = f" {extra}: {signed(float(measures[extra][-1]), digits)} %."
    return f"{words}{said}.{without} {_spread(shown)}"


def trim_words(shown: Breadth) -> str:
    """Return what the trimmed mean cuts: ``15 % on each side``."""
    lower, upper = cuts(shown.state)
    if lower == upper:
        return f"{lower:g} % on each side"
    return f"{lower:g} % below and {upper:g} % above"


def _spread(shown: Breadth) -> str:
    known = int((~np.isnan(shown.rates[-1])).sum())
    over = shown.above[-1]
    faster = f"{round(over * known / 100)} of {known} rise faster than {shown.state.pace} % a year"
    share = ""
    if shown.weighted is not None and not np.isnan(shown.weighted.above[-1]):
        share = f" ({shown.weighted.above[-1]:.0f} % of the weight)"
    index = float(shown.diffusion[-1])
    history = shown.diffusion[shown.start :]
    history = history[~np.isnan(history)]
    below = 100.0 * (np.mean(history < index) + 0.5 * np.mean(history == index))
    return f"Diffusion {index:.0f}, rank {below:.0f} of its own history; {faster}{share}."


def adding_up(shown: Breadth) -> str:
    """Say how far contributions add up to the published total."""
    assert shown.weighted is not None
    parts, rate = float(shown.weighted.points[-1].sum()), float(shown.rate[-1])
    if shown.total is None:
        return f"The contributions add up to {plain(parts, 2)}, the rate of the chained total."
    if np.isnan(rate):
        return f"The contributions add up to {plain(parts, 2)}; the published total has no rate."
    gap = float(shown.residual[-1])
    left = "less than 0.001" if abs(gap) < 0.0005 else signed(gap, 3)
    return (
        f"The contributions add up to {plain(parts, 3)}; {shown.total.name} as published changed by"
        f" {plain(rate, 3)}, so {left} points are rounding and anything else that the"
        " components do not carry."
    )


def tracking_words(shown: Breadth) -> str:
    """Say on what the comparison with the later trend rests."""
    assert shown.weighted is not None
    found = shown.weighted.tracking
    if not found.trend_n:
        return "The record is too short to tell how near a measure comes to the trend."
    best = found.names[int(np.argmin(found.trend_rmse))]
    ahead = ""
    if found.next_n:
        ahead = (
            f" To the change over the {counted(shown.per_year, shown.noun)} that followed,"
            f" {lower_first(found.names[int(np.argmin(found.next_rmse))])} came nearest."
        )
    return (
        f"Nearest to the centred {2 * shown.per_year + 1}-{shown.noun} mean of the total came"
        f" {lower_first(best)}.{ahead} {counted(found.trend_n, shown.noun)} that overlap: about"
        f" {max(1, found.trend_n // (2 * shown.per_year + 1))} separate ones, so small differences"
        " say little."
    )


def lower_first(words: str) -> str:
    """Return words with a small first letter."""
    return words[:1].lower() + words[1:]
