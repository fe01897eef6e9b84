"""Second opinions on a lag: other methods and other samples, each with its own answer."""

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from typing import TypeVar

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtri

from analytics.distributed_lag import DistributedLag, distributed_lag
from analytics.effective import without_season
from analytics.prewhitening import PrewhitenedCorrelation, prewhitened_correlation
from analytics.projections import LocalProjections, local_projections
from analytics.readable import Readable
from analytics.robust import surface_inference
from analytics.series import PERIOD_NOUN
from analytics.surface import growth_pair, lag_surface

_Found = TypeVar("_Found")
_NOUN = {12: PERIOD_NOUN["monthly"], 4: PERIOD_NOUN["quarterly"]}


@dataclass(frozen=True, eq=False)
class SampleBest:
    """One sample: the relation in the chosen cell, and the best shift of its own.

    Attributes
    ----------
    start, stop : int
        The months ``start .. stop - 1`` of the series.
    pairs : int
        Pairs of the chosen cell.
    slope, correlation, p : float
        In the chosen cell, p per cell by effective months; nan where it has fewer than 24 pairs.
    best_shift : int
        The shift, window unchanged, with the smallest per-cell p.
    best_slope, best_correlation : float
        There. Being the best of many, they flatter.
    """

    start: int
    stop: int
    pairs: int
    slope: float
    correlation: float
    p: float
    best_shift: int
    best_slope: float
    best_correlation: float


@dataclass(frozen=True, eq=False)
class SampleHalves:
    """Result of `sample_halves`.

    Attributes
    ----------
    first, second : SampleBest
        Older and newer half of the months; they share none.
    """

    first: SampleBest
    second: SampleBest


@dataclass(frozen=True, eq=False)
class Opinion:
    """One method's strongest lag.

    Attributes
    ----------
    method : str
        ``"prewhitened"``, ``"distributed lag"`` or ``"local projection"``.
    shift : int
        Months from driver to response.
    estimate, low, high : float
        There, averaged over the window, with an interval that pays for having picked the
        largest of all lags. A correlation for the first method; for the others percentage
        points of the response for one of the driver, per month of the window.
    clear : bool
        Whether the interval leaves out 0.
    """

    method: str
    shift: int
    estimate: float
    low: float
    high: float
    clear: bool


@dataclass(frozen=True, eq=False)
class SecondOpinions(Readable):
    """Result of `second_opinions`.

    Attributes
    ----------
    window, shift, max_shift : int
        The cell in question, and the longest lag looked at.
    level : float
        Confidence of each opinion's interval, over all its lags at once.
    opinions : tuple of Opinion
        One a method; they are not averaged.
    halves : SampleHalves or None
        Older and newer half, None where a half is too short.
    variants : dict of str to SampleBest
        Other pairs that were handed in, each judged over its whole sample.
    missing : dict of str to str
        What could not be done, and why.
    prewhitened, distributed, projected : result of the method, or None
        In full. Bands of the profiles hold over all lags at once.
    summary : str
        One line: every answer beside the others.
    """

    window: int
    shift: int
    max_shift: int
    level: float
    opinions: tuple[Opinion, ...]
    halves: SampleHalves | None
    variants: dict[str, SampleBest]
    missing: dict[str, str]
    prewhitened: PrewhitenedCorrelation | None
    distributed: DistributedLag | None
    projected: LocalProjections | None
    summary: str


def sample_halves(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    shifts: Iterable[int],
    periods_per_year: int = 12,
) -> SampleHalves:
    """Judge the cell, and look for the best shift, in each half of the sample by itself.

    Parameters
    ----------
    driver, response : array_like of float, shape (T,)
        Growth rates in percent, one a month, same months, no gaps.
    window, shift : int
        The chosen cell.
    shifts : iterable of int, shape (S,)
        Shifts among which each half picks its own, increasing.
    periods_per_year : int, default 12
        Seasonal means taken out of each half first: 12, 4, or 1 for none.

    Returns
    -------
    SampleHalves

    Raises
    ------
    ValueError
        The series cannot be paired, or a half is too short for 24 pairs.

    Examples
    --------
    >>> driver = np.random.default_rng(1).standard_normal(400)
    >>> halves = sample_halves(driver, np.roll(driver, 9), window=3, shift=9, shifts=range(25))
    >>> halves.first.best_shift, halves.second.best_shift
    (9, 9)
    """
    x, y = growth_pair(driver, response)
    leads, middle = list(shifts), x.size // 2
    first, second = (
        _sample_best(x[span], y[span], span.start, window, shift, leads, periods_per_year)
        for span in (slice(0, middle), slice(middle, x.size))
    )
    return SampleHalves(first, second)


def _sample_best(
    driver: ArrayLike,
    response: ArrayLike,
    start: int,
    window: int,
    shift: int,
    shifts: list[int],
    periods_per_year: int,
) -> SampleBest:
    """Judge one sample."""
    x, y = (without_season(v, periods_per_year) for v in growth_pair(driver, response))
    every = sorted({shift, *shifts})
    surface = lag_surface(x, y, windows=[window], shifts=every)
    p = surface_inference(x, y, windows=[window], shifts=every, periods_per_year=1).p[0]
    allowed = np.isin(surface.shifts, shifts) & np.isfinite(p)
    if not allowed.any():
        raise ValueError("a shift must give a cell that varies, but none does")
    best = int(np.argmin(np.where(allowed, p, np.inf)))
    chosen = int(np.searchsorted(surface.shifts, shift))
    return SampleBest(
        start=start,
        stop=start + x.size,
        pairs=int(surface.pairs[0, chosen]),
        slope=float(surface.slope[0, chosen]),
        correlation=float(surface.correlation[0, chosen]),
        p=float(p[chosen]),
        best_shift=int(surface.shifts[best]),
        best_slope=float(surface.slope[0, best]),
        best_correlation=float(surface.correlation[0, best]),
    )


def second_opinions(
    driver: ArrayLike,
    response: ArrayLike,
    *,
    window: int,
    shift: int,
    max_shift: int,
    periods_per_year: int = 12,
    level: float = 0.95,
    variants: Mapping[str, tuple[ArrayLike, ArrayLike]] | None = None,
) -> SecondOpinions:
    """Ask three other methods, and the two halves of the sample, for the driver's lead.

    Parameters
    ----------
    driver, response : array_like of float, shape (T,)
        Growth rates in percent, one a month, same months, no gaps.
    window, shift : int
        The cell in question. The methods work on single months and average their answer over
        `window` neighbouring lags.
    max_shift : int
        Lags 0 .. max_shift are looked at. For the opposite direction swap the two series.
    periods_per_year : int, default 12
        Seasonal means taken out first: 12, 4, or 1 for none.
    level : float, default 0.95
        Confidence of each opinion's interval over all lags at once.
    variants : mapping of str to (driver, response), optional
        Other forms of the pair, for example growth by the other formula; for each the best shift
        over the same lags is found.

    Returns
    -------
    SecondOpinions

    Raises
    ------
    ValueError
        The series cannot be paired, or an option is out of range. A method that the sample is
        too short for is named in `SecondOpinions.missing` instead.

    Notes
    -----
    Methods: `prewhitened_correlation` (Box and Jenkins 1976), `distributed_lag` with a smooth
    course (Shiller 1973), `local_projections` (Jorda 2005). An interval over K + 1 lags at once
    has the confidence ``level ** (1 / (K + 1))`` at each (Sidak 1967), which is on the safe
    side because neighbouring lags move together. Of unrelated pairs at most 3 % were called
    clear, but 8 to 12 % by the distributed lag when 240 autocorrelated months had to bear 49 lags
    (own measurement, tests/bench/second_opinions).

    Examples
    --------
    >>> rng = np.random.default_rng(1)
    >>> driver = rng.standard_normal(400)
    >>> response = 0.5 * np.roll(driver, 9) + 0.3 * rng.standard_normal(400)
    >>> second_opinions(driver, response, window=1, shift=9, max_shift=24).summary
    'prewhitened: 9 months; distributed lag: 9; local projection: 9; first half 9, second half 9'
    """
    raw = growth_pair(driver, response)
    if max_shift < 0 or window < 1:
        raise ValueError(
            f"max_shift must be 0 or more and window 1 or more, but got {max_shift}, {window}"
        )
    if not 0.0 < level < 1.0:
        raise ValueError(f"level must be between 0 and 1, but got {level}")
    x, y = (without_season(v, periods_per_year) for v in raw)
    each = level ** (1.0 / (max_shift + 1))
    lags = range(max_shift + 1)
    missing: dict[str, str] = {}

    def attempt(name: str, method: Callable[[], _Found]) -> _Found | None:
        try:
            return method()
        except ValueError as error:
            missing[name] = str(error)
            return None

    prewhitened = attempt(
        "prewhitened", lambda: prewhitened_correlation(x, y, shifts=lags, window=window)
    )
    distributed = attempt(
        "distributed lag",
        lambda: distributed_lag(x, y, max_shift=max_shift, window=window, level=each),
    )
    projected = attempt(
        "local projection",
        lambda: local_projections(
            x, y, max_shift=max_shift, window=window, own_lags=max(4, periods_per_year), level=each
        ),
    )
    halves = attempt(
        "halves",
        lambda: sample_halves(
            *raw, window=window, shift=shift, shifts=lags, periods_per_year=periods_per_year
        ),
    )
    judged: dict[str, SampleBest] = {}
    for name, pair in (variants or {}).items():
        found = attempt(name, _variant(pair, window, shift, list(lags), periods_per_year))
        if found is not None:
            judged[name] = found

    opinions = []
    if prewhitened is not None:
        half = float(ndtri(0.5 + each / 2.0)) * prewhitened.averaged_bound / 2.0
        middle = float(prewhitened.averaged[prewhitened.peak])  # shifts start at 0
        opinions.append(
            _opinion("prewhitened", prewhitened.peak, middle, middle - half, middle + half)
        )
    if distributed is not None:
        opinions.append(
            _opinion(
                "distributed lag", distributed.peak, *distributed.averaged.at(distributed.peak)
            )
        )
    if projected is not None:
        opinions.append(
            _opinion("local projection", projected.peak, *projected.averaged.at(projected.peak))
        )
    return SecondOpinions(
        window=window,
        shift=shift,
        max_shift=max_shift,
        level=level,
        opinions=tuple(opinions),
        halves=halves,
        variants=judged,
        missing=missing,
        prewhitened=prewhitened,
        distributed=distributed,
        projected=projected,
        summary=_summary(opinions, halves, judged, _NOUN.get(periods_per_year, "period")),
    )


def _variant(
    pair: tuple[ArrayLike, ArrayLike],
    window: int,
    shift: int,
    shifts: list[int],
    periods_per_year: int,
) -> Callable[[], SampleBest]:
    return lambda: _sample_best(*pair, 0, window, shift, shifts, periods_per_year)


def _opinion(method: str, shift: int, estimate: float, low: float, high: float) -> Opinion:
    return Opinion(method, shift, estimate, low, high, clear=low > 0.0 or high < 0.0)


def _summary(
    opinions: list[Opinion],
    halves: SampleHalves | None,
    variants: dict[str, SampleBest],
    noun: str,
) -> str:
    """Every answer beside the others; the first carries the unit."""
    parts = []
    for place, opinion in enumerate(opinions):
        unit = f" {noun}" + "s" * (opinion.shift != 1) if place == 0 else ""
        doubt = "" if opinion.clear else " (not told from chance)"
        parts.append(f"{opinion.method}: {opinion.shift}{unit}{doubt}")
    if halves is not None:
        parts.append(
            f"first half {halves.first.best_shift}, second half {halves.second.best_shift}"
        )
    parts.extend(f"{name} {best.best_shift}" for name, best in variants.items())
    return "; ".join(parts) if parts else "the sample is too short for a second opinion"
