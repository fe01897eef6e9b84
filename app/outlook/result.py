"""What is known about an outlook: the result that page, command and files are made from."""

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
import pandas as pd

from analytics.backtest import Backtest
from analytics.backtest_scores import Scores
from analytics.direct import DirectForecasts
from analytics.forecast_tests import wilson
from analytics.intervals import LEVELS, Fan
from analytics.outlook import ImpliedPath, RelationGap
from analytics.series import FloatArray
from analytics.statement_scores import RunningCoverage, StatementScore
from app.outlook.inputs import Inputs
from app.outlook.statements import Kept, Statement
from app.state import ViewState

OFF_FROM = 8  # outcomes that an interval's past coverage must have to be judged


@dataclass(frozen=True)
class Held:
    """How often an interval of a level held in the past.

    Attributes
    ----------
    level, share : float
        As named, and as seen over all past dates, whose outcomes overlap.
    n : int
        Outcomes that do not overlap: so many the share is worth.
    low, high : float
        Wilson's 95 % interval of the share for that number.
    """

    level: float
    share: float
    n: int
    low: float
    high: float

    @property
    def off(self) -> bool:
        """Whether the level lies outside what the past allows."""
        return self.n >= OFF_FROM and not self.low <= self.level <= self.high


@dataclass(frozen=True, eq=False)
class DriverLine:
    """One driver, or a combination, beside the others.

    Attributes
    ----------
    name : str
        The driver, or what the combination is.
    window, shift : int or None
        Its cell; None for a combination.
    path : ndarray of float, shape (H,)
        The target, from the first period ahead on.
    scores : Scores
        Of its past forecasts.
    weight : float or None
        In the combination by past errors, at the horizon looked at.
    """

    name: str
    window: int | None
    shift: int | None
    path: FloatArray
    scores: Scores
    weight: float | None = None


@dataclass(frozen=True, eq=False)
class Judged:
    """A statement and what came of it; without a score, `refusal` says why."""

    said: Statement
    score: StatementScore | None
    refusal: str = ""


@dataclass(frozen=True, eq=False)
class Outlook:
    """Everything that the page shows; a part that cannot be said is None and named in `refused`.

    Attributes
    ----------
    found : Inputs
        The series.
    history : ndarray of float
        The target at each period of the response.
    path : ImpliedPath or None
        What the cell implies.
    fan : Fan or None
        The target's path with its distribution.
    gap : RelationGap or None
        Expected and observed, through time.
    direct : DirectForecasts or None
        Each horizon by its own regression, with the driver and without.
    backtest, scores, added : Backtest and Scores or None
        Past forecasts; scores of the relation against the benchmarks; scores of the direct
        regression with the driver against the one without.
    gain : tuple or None
        Dates and cumulative difference of squared errors at the horizon looked at.
    dated : int
        Past dates that were answered from vintages.
    lines : tuple of DriverLine
        Single drivers, then combinations.
    kept : Kept
        Statements.
    judged : tuple of Judged
        Each with its score, oldest first.
    running : mapping of str to RunningCoverage
        Coverage of the statements that stand, by target.
    refused : mapping of str to str
        Part to the sentence that says why it is missing.
    offered : tuple of str
        Some series that may be further drivers.
    """

    state: ViewState
    found: Inputs
    history: FloatArray
    path: ImpliedPath | None = None
    fan: Fan | None = None
    gap: RelationGap | None = None
    direct: DirectForecasts | None = None
    backtest: Backtest | None = None
    scores: Scores | None = None
    added: Scores | None = None
    gain: tuple[pd.PeriodIndex, FloatArray] | None = None
    dated: int = 0
    lines: tuple[DriverLine, ...] = ()
    kept: Kept = field(default_factory=Kept)
    judged: tuple[Judged, ...] = ()
    running: Mapping[str, RunningCoverage] = field(default_factory=dict)
    refused: Mapping[str, str] = field(default_factory=dict)
    levels: tuple[float, ...] = LEVELS
    offered: tuple[str, ...] = ()

    @property
    def reach(self) -> int:
        """Periods ahead that the path has."""
        return 0 if self.path is None else int(self.path.ahead.size)

    @property
    def periods(self) -> pd.PeriodIndex:
        """The periods of the path."""
        return self.found.pair.ahead(self.reach)

    @property
    def gap_rank(self) -> FloatArray:
        """Rank of each gap among all of them, 0 to 100; empty without gaps."""
        if self.gap is None:
            return np.zeros(0)
        order = np.sort(self.gap.gap)
        return 100.0 * np.searchsorted(order, self.gap.gap, side="right") / order.size

    @property
    def added_share(self) -> FloatArray | None:
        """Share of the squared errors of past forecasts that the driver took away, by horizon."""
        return None if self.added is None else 1.0 - self.added.ratio[0] ** 2

    def held(self, row: int, horizon: int) -> Held | None:
        """Return how often an interval of the fan held in the past, None where nobody knows."""
        if self.fan is None or not 1 <= horizon <= self.fan.ahead.size:
            return None
        share = float(self.fan.measured[row, horizon - 1])
        n = int(self.fan.judged[horizon - 1]) // horizon
        if not n:
            return None
        low, high = wilson(round(share * n), n)
        return Held(self.levels[row], share, n, low, high)
