"""One pair of a panel: searched from a seed of its own, with what carries it.

The seed is made from the scan's seed and the pair's names, so that order, neighbours and number of
workers change nothing.
"""

import hashlib
from dataclasses import dataclass
from typing import Literal, get_args

import numpy as np

from analytics.influence import episodes
from analytics.search import SearchResult, search_chunk, search_plan, search_result
from analytics.search_plan import SHIFTS, WINDOWS, whole
from analytics.series import PERIODS_PER_YEAR, Pair, period_code
from analytics.shiftset import ShiftSet, shift_set_chunk, shift_set_plan, shift_set_result
from analytics.surface import LagSurface, lag_surface

LEVEL = 0.05
Sign = Literal["any", "positive"]


@dataclass(frozen=True, eq=False)
class PanelPair:
    """One pair of a panel, ready to be searched.

    Attributes
    ----------
    economy : str
        Whose pair it is; may be empty.
    driver, response : str
        What the two are called within the economy.
    pair : Pair
        Growth rates in percent over the common periods.
    windows, shifts : range
        Grid to be searched, in periods; above 0 the driver leads.
    """

    economy: str
    driver: str
    response: str
    pair: Pair
    windows: range = WINDOWS
    shifts: range = SHIFTS

    @property
    def names(self) -> tuple[str, str, str]:
        """Economy, driver and response: no two pairs of a scan share them."""
        return self.economy, self.driver, self.response


@dataclass(frozen=True, kw_only=True)
class PairScan:
    """What one pair of a scan gave; where it was refused, numbers are nan and sets are empty.

    Attributes
    ----------
    economy, driver, response : str
        Names of the pair.
    fingerprint : str
        Of both growth rates and the grid: equal for equal data.
    first, last : str
        First and last period used, such as 1986-12; empty where the pair was refused.
    months : int
        Common periods.
    sign : {"any", "positive"}
        Which relations were looked for.
    window, shift : int
        Cell that stands out most: largest ``|z|`` of the search, or largest z where only positive
        relations were looked for; 0 where refused.
    correlation, slope : float
        Of that cell over all its periods, as the surface has it; percent per percent.
    p_search, p_one_sided : float
        Search-adjusted p of the pair, for relations of any sign and for positive ones.
    p_error : float
        Monte Carlo standard error of the p of the relations that were looked for.
    level_shifts_removed : bool
        Whether both series were freed of level shifts before the search.
    shift_set : tuple of int
        Shifts that fit as well, at the best window; empty where the search does not hold at 5 %.
    identified : bool
        Whether the shift set reaches over no more than half of the shifts searched.
    share : float
        Largest part of the cell's covariance that rests on one episode, 1 = all of it.
    episode : str
        Driver's first and last period in that episode, such as 1978-03:1983-05.
    fragility : float
        Largest relative change of the slope when one episode is removed.
    seed : int
        What the pair's surrogates were drawn from; the scan's seed and the names give it.
    refused : str
        Why there is no search, in one sentence; empty where there is.
    """

    economy: str
    driver: str
    response: str
    fingerprint: str = ""
    first: str = ""
    last: str = ""
    months: int = 0
    sign: Sign = "any"
    window: int = 0
    shift: int = 0
    correlation: float = float("nan")
    slope: float = float("nan")
    p_search: float = float("nan")
    p_one_sided: float = float("nan")
    p_error: float = float("nan")
    level_shifts_removed: bool = False
    shift_set: tuple[int, ...] = ()
    identified: bool = False
    share: float = float("nan")
    episode: str = ""
    fragility: float = float("nan")
    seed: int = 0
    refused: str = ""

    @property
    def names(self) -> tuple[str, str, str]:
        """Economy, driver and response."""
        return self.economy, self.driver, self.response

    @property
    def p(self) -> float:
        """Search-adjusted p of the relations that were looked for."""
        return self.p_search if self.sign == "any" else self.p_one_sided


def pair_seed(seed: int, economy: str, driver: str, response: str) -> int:
    """Seed of one pair, 0 to 2**31 - 1, from the scan's seed and the pair's names.

    Raises
    ------
    ValueError
        The seed is not an integer from 0.

    Examples
    --------
    >>> pair_seed(1, "Uldrevay", "Broad money", "Consumer prices")
    1460573125
    """
    words = "\x1f".join((str(whole("seed", seed, 0)), economy, driver, response))
    digest = hashlib.sha256(words.encode("utf-8", "surrogatepass")).digest()
    return int.from_bytes(digest[:4], "big") & 0x7FFFFFFF


def pair_fingerprint(pair: PanelPair) -> str:
    """Sixteen hexadecimal digits that change when a growth rate, the calendar or the grid does."""
    sides = f"{pair.pair.driver.fingerprint}:{pair.pair.response.fingerprint}"
    grid = f"{pair.windows[0]}:{pair.windows[-1]}:{pair.shifts[0]}:{pair.shifts[-1]}"
    return hashlib.sha256(f"{sides}:{grid}".encode()).hexdigest()[:16]


def panel_surface(pair: PanelPair) -> LagSurface:
    """Correlation and slope in every cell of a pair's grid.

    Raises
    ------
    ValueError
        As `lag_surface`.
    """
    return lag_surface(
        pair.pair.driver.values,
        pair.pair.response.values,
        windows=pair.windows,
        shifts=pair.shifts,
    )


def pair_scan(
    pair: PanelPair,
    *,
    surrogates: int = 2000,
    seed: int = 1,
    sign: Sign = "any",
    threads: int = 2,
) -> PairScan:
    """Search one pair of a panel: best cell, search-adjusted p, shift set, episodes.

    Parameters
    ----------
    pair : PanelPair
        The pair and its grid.
    surrogates : int, default 2000
        Surrogate drivers.
    seed : int, default 1
        Seed of the scan, 0 or more; the pair's own follows from it by `pair_seed`.
    sign : {"any", "positive"}
        Relations that are looked for. Positive is for who would call no negative one a finding,
        and has said so before looking.
    threads : int, default 2
        Threads used; the result does not depend on it.

    Returns
    -------
    PairScan
        `refused` says why where the pair is too short or cannot be searched.

    Raises
    ------
    ValueError
        Surrogates, seed or sign out of range; what is wrong with the pair itself does not raise.

    Notes
    -----
    The numbers are those of `lag_search`, `shift_set` and `influence.episodes` for the same pair,
    grid and seed.
    """
    count, start = whole("surrogates", surrogates, 1), pair_seed(seed, *pair.names)
    if sign not in get_args(Sign):
        raise ValueError(f"sign must be any or positive, but got {sign!r}")
    try:
        found = _searched(pair, count, start, threads)
        window, shift = _best(found, sign)
        surface = panel_surface(pair)
        place = surface.cell(window, shift)
        carried = episodes(
            pair.pair.driver.values,
            pair.pair.response.values,
            window=window,
            shift=shift,
            periods_per_year=_year(pair),
        )
    except ValueError as error:
        return refused_scan(pair, seed, str(error), sign)
    shifts: ShiftSet | None = None
    if (found.p if sign == "any" else found.p_one_sided) <= LEVEL:
        shifts = _shift_set(pair, window, start, threads)
    heaviest = max(carried.episodes, key=lambda episode: episode.share)
    periods = pair.pair.periods
    return PairScan(
        economy=pair.economy,
        driver=pair.driver,
        response=pair.response,
        fingerprint=pair_fingerprint(pair),
        first=period_code(periods[0]),
        last=period_code(periods[-1]),
        months=pair.pair.n,
        sign=sign,
        window=window,
        shift=shift,
        correlation=float(surface.correlation[place]),
        slope=float(surface.slope[place]),
        p_search=float(found.p),
        p_one_sided=float(found.p_one_sided),
        p_error=found.p_error if sign == "any" else found.p_one_sided_error,
        level_shifts_removed=found.level_shifts_removed,
        shift_set=() if shifts is None else tuple(int(s) for s in shifts.shifts),
        identified=shifts is not None and shifts.identified,
        share=float(heaviest.share),
        episode=":".join(
            period_code(periods[month]) for month in (heaviest.first_month, heaviest.stop_month - 1)
        ),
        fragility=float(carried.fragility),
        seed=start,
    )


def refused_scan(pair: PanelPair, seed: int, sentence: str, sign: Sign = "any") -> PairScan:
    """Line of a pair that cannot be searched: its names, its periods and the reason."""
    return PairScan(
        economy=pair.economy,
        driver=pair.driver,
        response=pair.response,
        fingerprint=pair_fingerprint(pair),
        first=period_code(pair.pair.periods[0]),
        last=period_code(pair.pair.periods[-1]),
        months=pair.pair.n,
        sign=sign,
        seed=pair_seed(seed, *pair.names),
        refused=sentence,
    )


def _best(found: SearchResult, sign: Sign) -> tuple[int, int]:
    """Window and shift of the cell that stands out most among the relations looked for."""
    if sign == "any":
        return found.best_window, found.best_shift
    row, column = np.unravel_index(int(np.nanargmax(found.z)), found.z.shape)
    return int(found.windows[row]), int(found.shifts[column])


def _searched(pair: PanelPair, surrogates: int, seed: int, threads: int) -> SearchResult:
    plan = search_plan(
        pair.pair.driver.values,
        pair.pair.response.values,
        windows=pair.windows,
        shifts=pair.shifts,
        surrogates=surrogates,
        seed=seed,
        periods_per_year=_year(pair),
    )
    return search_result(
        plan, [search_chunk(plan, index, threads=threads) for index in range(plan.chunks)]
    )


def _shift_set(pair: PanelPair, window: int, seed: int, threads: int) -> ShiftSet | None:
    """Shifts that fit as well at the best window; None where they cannot be told."""
    try:
        plan = shift_set_plan(
            pair.pair.driver.values,
            pair.pair.response.values,
            window=window,
            shifts=pair.shifts,
            seed=seed,
        )
        chunks = [shift_set_chunk(plan, index, threads=threads) for index in range(plan.chunks)]
        return shift_set_result(plan, chunks)
    except ValueError:  # a response that the driver gives exactly
        return None


def _year(pair: PanelPair) -> int:
    return PERIODS_PER_YEAR[pair.pair.driver.frequency]
