"""What an outlook is about: the yearly rate, the window's mean, or a single period's rate."""

from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np
from numpy.typing import ArrayLike

from analytics.series import FloatArray

TargetKind = Literal["yearly", "window", "single"]
Compounding = Literal["log", "percent", "mean"]


@dataclass(frozen=True)
class Target:
    """A rate over the `span` periods that end in a period.

    Attributes
    ----------
    kind : {"yearly", "window", "single"}
        The rate over a year, the mean over the cell's window, or one period's rate.
    span : int
        Periods in it.
    compounding : {"log", "percent", "mean"}
        How the rates of the periods become one: their sum, their compounded product less 1, or
        their mean.
    """

    kind: TargetKind
    span: int
    compounding: Compounding

    def rate(self, spans: FloatArray) -> FloatArray:
        """Rate of each stretch of periods; `spans` has shape (..., span), the result (...)."""
        match self.compounding:
            case "log":
                total: FloatArray = spans.sum(axis=-1)
            case "percent":
                total = 100.0 * (np.prod(1.0 + spans / 100.0, axis=-1) - 1.0)
            case "mean":
                total = spans.mean(axis=-1)
        return total

    def observed(self, response: ArrayLike) -> FloatArray:
        """Rate ending in each period, shape (n,); nan before the first whole span."""
        values = np.asarray(response, dtype=np.float64)
        rates = np.full(values.size, np.nan)
        if values.size >= self.span:
            spans = np.lib.stride_tricks.sliding_window_view(values, self.span)
            rates[self.span - 1 :] = self.rate(spans)
        return rates

    def from_path(self, response: FloatArray, path: FloatArray) -> FloatArray:
        """Rate ending 1 .. H periods ahead, from the observed periods and a path of coming ones.

        Parameters
        ----------
        response : ndarray of float, shape (n,)
            Observed rates, at least span - 1.
        path : ndarray of float, shape (H,)
            One-period rates of the next periods.

        Returns
        -------
        ndarray of float, shape (H,)
        """
        whole = np.concatenate((response[response.size - self.span + 1 :], path))
        return self.rate(np.lib.stride_tricks.sliding_window_view(whole, self.span))

    def from_means(self, response: FloatArray, means: FloatArray) -> FloatArray:
        """Rate ending 1 .. H periods ahead, from a forecast of the mean of its coming periods.

        Parameters
        ----------
        response : ndarray of float, shape (n,)
            Observed rates, at least span - 1.
        means : ndarray of float, shape (H,)
            At h: mean one-period rate of the newest min(h, span) periods up to h ahead.

        Returns
        -------
        ndarray of float, shape (H,)
        """
        ahead = np.arange(1, means.size + 1)
        spans = np.repeat(means[:, None], self.span, axis=1)
        known = response[response.size - self.span + 1 :]
        # Row h - 1 begins with the span - h newest observed periods.
        place = ahead[:, None] - 1 + np.arange(self.span)
        inside = place < known.size
        spans[inside] = known[place[inside]]
        return self.rate(spans)


def outlook_target(
    kind: TargetKind, *, window: int, compounding: Compounding = "log", periods_per_year: int = 12
) -> Target:
    """Build a target; means are taken of window and single rates whatever the compounding.

    Parameters
    ----------
    kind : {"yearly", "window", "single"}
        What is forecast.
    window : int
        Periods averaged in the cell.
    compounding : {"log", "percent", "mean"}
        Of the yearly rate: as the growth rates were taken, or "mean" for a series that is a rate
        itself.
    periods_per_year : int, default 12
        12, 4 or 1.

    Returns
    -------
    Target

    Raises
    ------
    ValueError
        Kind or compounding is unknown, or the window or the year has no period.

    Examples
    --------
    >>> yearly = outlook_target("yearly", window=24)
    >>> yearly.observed([0.2] * 13)[-2:].round(12)
    array([2.4, 2.4])
    >>> yearly.from_path(np.full(12, 0.2), np.full(2, 0.3)).round(12)
    array([2.5, 2.6])
    """
    if kind not in get_args(TargetKind):
        raise ValueError(f"kind must be yearly, window or single, but got {kind!r}")
    if compounding not in get_args(Compounding):
        raise ValueError(f"compounding must be log, percent or mean, but got {compounding!r}")
    if window < 1 or periods_per_year < 1:
        raise ValueError(
            f"window and year must have 1 period or more, but got {window} and {periods_per_year}"
        )
    if kind == "yearly":
        return Target("yearly", periods_per_year, compounding)
    return Target(kind, window if kind == "window" else 1, "mean")
