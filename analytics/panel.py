"""Many pairs of many economies: each searched by itself, and p-values that pay for all of them."""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike

from analytics.pair_scan import (
    LEVEL,
    PairScan,
    PanelPair,
    Sign,
    pair_fingerprint,
    pair_scan,
    pair_seed,
    panel_surface,
    refused_scan,
)
from analytics.series import FloatArray, read_only

__all__ = [
    "LEVEL",
    "PairScan",
    "PanelPair",
    "PanelScan",
    "Sign",
    "adjusted_p",
    "pair_fingerprint",
    "pair_scan",
    "pair_seed",
    "panel_result",
    "panel_scan",
    "panel_surface",
    "refused_scan",
    "unrelated_pairs",
]


@dataclass(frozen=True, eq=False)
class PanelScan:
    """Result of `panel_result`: all pairs together; arrays are read-only.

    Attributes
    ----------
    pairs : tuple of PairScan, length m
        In the order given.
    p_scan : ndarray of float, shape (m,)
        p adjusted for the number of pairs by Benjamini and Hochberg: calling those at or below q
        found keeps the expected share of false ones among them below q. nan where refused.
    p_holm : ndarray of float, shape (m,)
        p adjusted by Holm: calling those at or below a found keeps the probability of even one
        false one below a. nan where refused.
    """

    pairs: tuple[PairScan, ...]
    p_scan: FloatArray = field(repr=False)
    p_holm: FloatArray = field(repr=False)

    def __repr__(self) -> str:
        judged = int(np.isfinite(self.p_scan).sum())
        return (
            f"PanelScan({judged} of {len(self.pairs)} pairs searched, found at 5 %:"
            f" {np.count_nonzero(self.p_scan <= LEVEL)} by Benjamini-Hochberg,"
            f" {np.count_nonzero(self.p_holm <= LEVEL)} by Holm)"
        )

    def to_frame(self) -> pd.DataFrame:
        """One line a pair: the fields of `PairScan`, p_scan and p_holm."""
        frame = pd.DataFrame([vars(pair) for pair in self.pairs])
        return frame.assign(p_scan=self.p_scan, p_holm=self.p_holm)


def panel_result(scans: Sequence[PairScan]) -> PanelScan:
    """Put the pairs of a scan together and adjust their p-values for their number.

    Raises
    ------
    ValueError
        There is no pair, or a pair stands twice.
    """
    if not scans:
        raise ValueError("a scan must have at least one pair, but got none")
    counts = Counter(scan.names for scan in scans)
    twice = next((name for name, count in counts.items() if count > 1), None)
    if twice is not None:
        raise ValueError(f"pairs must have different names, but got {twice!r} twice")
    p = np.array([scan.p for scan in scans])
    return PanelScan(tuple(scans), *(adjusted_p(p, method) for method in ("fdr_bh", "holm")))


def panel_scan(
    pairs: Sequence[PanelPair],
    *,
    surrogates: int = 2000,
    seed: int = 1,
    sign: Sign = "any",
    threads: int = 2,
) -> PanelScan:
    """Search every pair of a panel and adjust the p-values for the number of pairs.

    Parameters
    ----------
    pairs : sequence of PanelPair
        Each economy, driver and response once.
    surrogates, seed, sign, threads
        As in `pair_scan`.

    Returns
    -------
    PanelScan

    Raises
    ------
    ValueError
        There is no pair, a pair stands twice, or surrogates or seed are out of range.

    Examples
    --------
    >>> from analytics.series import Series, align
    >>> rng, month = np.random.default_rng(1), pd.Period("2000-01", "M")
    >>> pairs = []
    >>> for economy, slope in (("Ardenquay", 1.0), ("Belmorrow", 0.0)):
    ...     money = rng.standard_normal(240)
    ...     prices = slope * np.roll(money, 6) + rng.standard_normal(240)
    ...     both = (Series(n, month, v, "rate") for n, v in (("money", money), ("prices", prices)))
    ...     pairs.append(PanelPair(economy, "money", "prices", align(*both), range(1, 4), range(9)))
    >>> scan = panel_scan(pairs, surrogates=199)
    >>> [(pair.economy, pair.shift) for pair in scan.pairs if pair.p_search < 0.01]
    [('Ardenquay', 6)]
    """
    return panel_result(
        [
            pair_scan(pair, surrogates=surrogates, seed=seed, sign=sign, threads=threads)
            for pair in pairs
        ]
    )


def unrelated_pairs(p: ArrayLike, *, above: float = 0.5) -> float:
    """Estimate how many of the pairs are unrelated, from how many have a large p.

    Parameters
    ----------
    p : array_like of float, shape (m,)
        0 to 1, not adjusted; nan is not counted.
    above : float, default 0.5
        Unrelated pairs have a p above this with probability ``1 - above``, related ones hardly.

    Returns
    -------
    float
        ``(1 + #{p > above}) / (1 - above)``, at most the number of pairs: on average not too low,
        and rough where there are few pairs. Storey, Taylor and Siegmund (2004), Strong control,
        conservative point estimation and simultaneous conservative consistency of false discovery
        rates, J. R. Statist. Soc. B 66, 187-205 (formula from memory).

    Raises
    ------
    ValueError
        `above` is not within 0 and 1.

    Examples
    --------
    >>> unrelated_pairs([0.001, 0.002, 0.01, 0.4, 0.6])
    4.0
    """
    if not 0.0 < above < 1.0:
        raise ValueError(f"above must lie within 0 and 1, but got {above}")
    given = np.asarray(p, dtype=np.float64)
    given = given[~np.isnan(given)]
    return float(min(given.size, (1.0 + np.count_nonzero(given > above)) / (1.0 - above)))


def adjusted_p(p: ArrayLike, method: str) -> FloatArray:
    """Adjust p-values for their number; nan stays nan and is not counted.

    Parameters
    ----------
    p : array_like of float, shape (m,)
        0 to 1, or nan.
    method : {"fdr_bh", "holm"}
        Benjamini and Hochberg (1995), Controlling the false discovery rate, J. R. Statist. Soc. B
        57, 289-300, or Holm (1979), A simple sequentially rejective multiple test procedure,
        Scand. J. Statist. 6, 65-70; as statsmodels' ``multipletests`` has them.

    Returns
    -------
    ndarray of float, shape (m,), read-only

    Raises
    ------
    ValueError
        A p lies outside 0 to 1, or the method is unknown.
    """
    from statsmodels.stats.multitest import multipletests

    if method not in ("fdr_bh", "holm"):
        raise ValueError(f"method must be fdr_bh or holm, but got {method!r}")
    given = np.asarray(p, dtype=np.float64)
    there = ~np.isnan(given)
    outside = there & ~((given >= 0.0) & (given <= 1.0))
    if outside.any():
        raise ValueError(f"p must be from 0 to 1, but got {given[outside][0]}")
    adjusted = np.full(given.shape, np.nan)
    if there.any():
        adjusted[there] = multipletests(given[there], method=method)[1]
    return read_only(adjusted)
