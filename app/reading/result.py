"""What is known about one print: the result that page, command and files are made from."""

from collections.abc import Mapping
from dataclasses import dataclass, field

import pandas as pd

from analytics.base_effect import BaseEffects, DropOuts
from analytics.carry_over import CarryOver, Path
from analytics.distribution import Fit, KernelFit
from analytics.goodness import Goodness
from analytics.high_inflation import Run
from analytics.print_rates import PrintRates
from analytics.seasonal import HERE
from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, FloatArray, Series
from analytics.standing import Standing
from analytics.tail import Tail
from app.state import ViewState


@dataclass(frozen=True, eq=False)
class SubSample:
    """The fits over one part of the sample, and how often it gave a reading as high."""

    first: pd.Period
    last: pd.Period
    fits: Mapping[str, Fit]
    mean: float
    tail: Tail


@dataclass(frozen=True, eq=False)
class Reading:
    """Everything that the page shows; a part that cannot be said is None and named in `refused`.

    Attributes
    ----------
    state : ViewState
        As asked for.
    loaded, series : Series
        The series as read, and up to the print with values not above zero left out.
    short : Series or None
        What rates over less than a year are taken of: `series` with its season taken out, where
        that was asked for and could be done; None where it is `series` itself.
    measured : Series or None
        The rate that is ranked and fitted, to the print.
    sample : ndarray of float
        What it is compared with, in the order of time.
    refused : mapping of str to str
        Part to the sentence that says why it is missing.
    """

    state: ViewState
    loaded: Series
    series: Series
    short: Series | None = None
    notes: tuple[str, ...] = ()
    rates: Mapping[str, PrintRates] = field(default_factory=dict)
    measured: Series | None = None
    sample: FloatArray | None = None
    yearly: Series | None = None
    quarter: Series | None = None
    factor: Series | None = None
    standing: Standing | None = None
    ranks: Mapping[str, float] = field(default_factory=dict)
    earlier: Standing | None = None
    through_time: Series | None = None
    base: BaseEffects | None = None
    drops: DropOuts | None = None
    carried: CarryOver | None = None
    path: Path | None = None
    fits: Mapping[str, Fit] = field(default_factory=dict)
    kernel: KernelFit | None = None
    observed: Tail | None = None
    parts: tuple[SubSample, ...] = ()
    mark: float | None = None
    runs: tuple[Run, ...] = ()
    falling: tuple[Run, ...] = ()
    three_years: Series | None = None
    cagan: tuple[Run, ...] = ()
    goodness: Goodness | None = None
    fitted: Tail | None = None
    refused: Mapping[str, str] = field(default_factory=dict)

    @property
    def noun(self) -> str:
        """Month, quarter or year, whichever the series counts in."""
        return PERIOD_NOUN[self.series.frequency]

    @property
    def year(self) -> int:
        """Periods in a year."""
        return PERIODS_PER_YEAR[self.series.frequency]

    @property
    def made_here(self) -> str:
        """What was done to the reading that is ranked; empty where nothing was."""
        return HERE if self.short is not None and self.state.measure != "12m" else ""

    @property
    def print_value(self) -> float:
        """The reading that is ranked; nan where there is none."""
        return float("nan") if self.measured is None else float(self.measured.values[-1])
