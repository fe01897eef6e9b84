"""From a state to the pairs of a scan, and to what came of it."""

import hashlib
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Any
from urllib.parse import urlencode

from analytics.long_averages import LongAverages, long_averages, yearly_average
from analytics.panel import (
    PairScan,
    PanelPair,
    PanelScan,
    pair_fingerprint,
    pair_scan,
    pair_seed,
    panel_result,
    refused_scan,
)
from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, Pair, period_code
from app.compute import Bridge, grid
from app.jobs import Work
from app.places import software_version
from app.scan.economies import Roles, economy_of, roles, series_name
from app.scan.fields import SETTINGS
from app.scan.opened import Opened
from app.state import StateError, ViewState, field_kind

LONG = 5  # years that a long average has at least


@dataclass(frozen=True)
class EconomyAverage:
    """Average growth of one economy's driver and response, percent a year, and over when."""

    economy: str
    driver: float
    response: float
    first: str
    last: str


@dataclass(frozen=True, eq=False)
class Question:
    """What a scan asks: its settings and its pairs.

    Attributes
    ----------
    state : ViewState
        As given; only `settings` and the series count.
    settings : str
        What the numbers depend on besides the series, as an address carries it.
    roles : Roles
        Which series were paired.
    pairs : tuple of PanelPair
        Those that can be searched.
    refused : tuple of PairScan
        Those that cannot be paired, each with the reason.
    averages : tuple of EconomyAverage
        One an economy of five years or more, of its first driver and response.
    opened : Opened or None
        The result file that is looked at, where one is; then `pairs` and `averages` are of those
        rows whose series are loaded just as they were.
    """

    state: ViewState
    settings: str
    roles: Roles
    pairs: tuple[PanelPair, ...]
    refused: tuple[PairScan, ...]
    averages: tuple[EconomyAverage, ...]
    opened: Opened | None = None

    @property
    def chunks(self) -> int:
        """Pairs to be searched: one a chunk."""
        return len(self.pairs)

    @cached_property
    def noun(self) -> str:
        """Month, quarter or year where all pairs agree, else period."""
        found = {PERIOD_NOUN[one.pair.driver.frequency] for one in self.pairs}
        if self.opened is not None:
            found = {_noun(scan.first) for scan in self.opened.panel.pairs if not scan.refused}
        return found.pop() if len(found) == 1 else "period"

    @cached_property
    def pairs_of(self) -> Counter[str]:
        """How many pairs each economy has."""
        return Counter(economy for economy, _, _ in self.roles.pairs)

    def result(self, scans: list[PairScan]) -> PanelScan:
        """Put the searched pairs, in any order, and the refused ones together, as in the files."""
        by_names = {scan.names: scan for scan in (*self.refused, *scans)}
        return panel_result([by_names[names] for names in self.roles.pairs])


@dataclass(frozen=True, eq=False)
class Scan:
    """What is known of a scan: the question, the pairs once they are searched, the averages.

    Attributes
    ----------
    question : Question
        What is asked.
    panel : PanelScan or None
        None while pairs are still to be searched.
    averages : LongAverages or None
        None where there are too few economies.
    no_averages : str
        Why there are none, in one sentence.
    """

    question: Question
    panel: PanelScan | None
    averages: LongAverages | None
    no_averages: str


def settings(state: ViewState) -> str:
    """Return what a scan's numbers depend on besides the series, as an address carries it."""
    return urlencode([(name, field_kind(name).write(getattr(state, name))) for name in SETTINGS])


def draws(state: ViewState) -> dict[str, Any]:
    """Return what each pair is searched with, for `pair_scan`."""
    return {"surrogates": state.surrogates, "seed": state.seed, "sign": state.sign}


def scan_key(state: ViewState, bridge: Bridge) -> str:
    """Return the key of a scan: settings, pairs asked for, and every series in view."""
    in_view = bridge.in_view(state)
    parts = [software_version(), settings(state), state.drivers, state.responses, state.result]
    for name, series in in_view.series.items():
        parts += [name, series.fingerprint, series.adjustment]
    return hashlib.sha256("\n".join(parts).encode()).hexdigest()[:32]


def question(state: ViewState, bridge: Bridge) -> Question:
    """Return the pairs of a scan.

    Raises
    ------
    ValueError
        There is no pair, a driver or response is named that is not there, or the result that is
        named is not held; one sentence.
    """
    if state.result:
        return _reopened(state, bridge)
    return bridge.memory.once(
        "scan-question:" + scan_key(state, bridge), lambda: _question(state, bridge)
    )


def _question(state: ViewState, bridge: Bridge) -> Question:
    return _paired(
        state, bridge, roles(bridge.in_view(state).series, state.drivers, state.responses)
    )


def _reopened(state: ViewState, bridge: Bridge) -> Question:
    """Return the question behind a result file, with those of its pairs that are loaded."""
    opened = bridge.results.found(state.result)
    if opened is None:
        raise StateError(
            "the result of this address is not held any more; open its file again, or go back to"
            " the loaded files"
        )
    state = opened.in_state(state)
    was = {scan.names: scan.fingerprint for scan in opened.panel.pairs}
    found = Roles(
        tuple(was),
        *(tuple(dict.fromkeys(names[side] for names in was)) for side in (1, 2)),
        len({economy for economy, _, _ in was}),
        (),
    )
    loaded = {economy_of(name) for name in bridge.in_view(state).series}
    there = [names for names in was if {(names[0], each) for each in names[1:]} <= loaded]
    asked = bridge.memory.once(
        f"scan-opened:{scan_key(state, bridge)}",
        lambda: _paired(state, bridge, replace(found, pairs=tuple(there)), was),
    )
    return replace(asked, state=state, roles=found, refused=(), opened=opened)


def _paired(
    state: ViewState,
    bridge: Bridge,
    found: Roles,
    was: Mapping[tuple[str, str, str], str] | None = None,
) -> Question:
    """Pair the series; with the fingerprints of a result file, only what is still the same."""
    pairs, refused, averages = [], [], {}
    for economy, driver, response in found.pairs:
        one = replace(
            state, driver=series_name(economy, driver), response=series_name(economy, response)
        )
        try:
            paired = bridge.pair(one)
        except ValueError as error:
            refused.append(
                PairScan(
                    economy=economy,
                    driver=driver,
                    response=response,
                    sign=state.sign,
                    seed=pair_seed(state.seed, economy, driver, response),
                    refused=str(error),
                )
            )
            continue
        whole = PanelPair(economy, driver, response, paired)
        if was is not None and not _as_it_was(whole, one, was):
            continue
        if economy not in averages and paired.n >= LONG * PERIODS_PER_YEAR[paired.driver.frequency]:
            averages[economy] = _average(economy, paired, one, bridge)
        try:
            windows, shifts = grid(paired, one)
        except ValueError as error:
            refused.append(refused_scan(whole, state.seed, str(error), state.sign))
            continue
        pairs.append(replace(whole, windows=windows, shifts=shifts))
    return Question(
        state, settings(state), found, tuple(pairs), tuple(refused), tuple(averages.values())
    )


def _as_it_was(pair: PanelPair, state: ViewState, was: Mapping[tuple[str, str, str], str]) -> bool:
    """Whether growth rates and grid have the fingerprint that the result file gives."""
    try:
        windows, shifts = grid(pair.pair, state)
    except ValueError:
        return False
    return pair_fingerprint(replace(pair, windows=windows, shifts=shifts)) == was[pair.names]


def _noun(code: str) -> str:
    """Return the noun of a period as files carry it: ``2024-03``, ``2024-Q1`` or ``2024``."""
    return "quarter" if "Q" in code else "month" if "-" in code else "year"


def _average(economy: str, pair: Pair, state: ViewState, bridge: Bridge) -> EconomyAverage:
    """Average both sides; a series that is a rate already is not multiplied to a year."""
    in_view = bridge.in_view(state)
    means = [
        yearly_average(rate, periods_per_year=1 if in_view.named(name).kind == "rate" else None)
        for rate, name in ((pair.driver, state.driver), (pair.response, state.response))
    ]
    periods = pair.periods
    return EconomyAverage(economy, *means, period_code(periods[0]), period_code(periods[-1]))


def scan_work(state: ViewState, bridge: Bridge) -> Work:
    """Return the search of every pair as work, a chunk a pair."""

    def chunk(plan: Question, index: int) -> PairScan:
        return pair_scan(plan.pairs[index], **draws(state))

    return Work(
        "scan:" + scan_key(state, bridge),
        lambda: question(state, bridge),
        chunk,
        lambda plan, scans: plan.result(scans),
    )


def scan(state: ViewState, bridge: Bridge, panel: PanelScan | None = None) -> Scan:
    """Gather what is known of a scan without any long work.

    `panel` is the result where it was made elsewhere.

    Raises
    ------
    ValueError
        There is no pair; one sentence.
    """
    asked = question(state, bridge)
    if asked.opened is not None:
        state, panel = asked.opened.in_state(state), asked.opened.panel
    known = panel or bridge.jobs.remembered(scan_work(state, bridge))
    averages, why = None, ""
    try:
        averages = long_averages(
            [one.economy for one in asked.averages],
            [one.driver for one in asked.averages],
            [one.response for one in asked.averages],
            log=state.axes == "log",
        )
    except ValueError as error:
        why = str(error)
        if asked.opened is not None and not asked.averages:
            why = "a result file holds no series, and those behind this one are not loaded"
    return Scan(replace(asked, state=state), known, averages, why)


WORK = {"scan": scan_work}
