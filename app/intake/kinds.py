"""What a series is, told from its name and its values."""

import re

import numpy as np

from analytics.series import Adjustment, FloatArray, Kind

_LEVEL = re.compile(r"\b(?:exchange rates?|rate index)\b", re.IGNORECASE)
_RATE = re.compile(
    r"%|\b(?:rates?|per ?cent|percentage|pct|growth|yields?|inflation|interest|changes?)\b",
    re.IGNORECASE,
)
_INDEX = re.compile(
    r"\b(?:index|indices|prices?|cpi|hicp|ppi|deflator)\b|\b[12]\d{3}\s*=\s*1(?:00)?\b",
    re.IGNORECASE,
)
_NOT_ADJUSTED = re.compile(
    r"\b(?:not (?:seasonally )?adjusted|neither seasonally|unadjusted|nsa|n\.s\.a\b)", re.IGNORECASE
)
_ADJUSTED = re.compile(r"\b(?:seasonally adjusted|adjusted|sa|swda|s\.a\b)", re.IGNORECASE)
_UNIT = re.compile(r"[(\[]([^()\[\]]*[^\W\d_][^()\[\]]*|[^()\[\]]*[%=][^()\[\]]*)[)\]]\s*$")
_REFERENCE = re.compile(r"[12]\d{3}\s*=\s*1(?:00)?\b")


def inferred_kind(name: str, values: FloatArray, *, percent: bool = False) -> Kind:
    """Tell index, level and rate apart.

    1. Numbers with a percent sign, or a name with rate, percent, %, growth, yield, inflation,
       interest or change: a rate (an exchange rate is a level).
    2. A name with index, price, CPI, HICP, PPI, deflator or a reference such as 2015 = 100: an
       index.
    3. A value below zero and a median below 30 without its sign: a rate, as neither an index
       nor a level that can grow lies around zero.
    4. Only positive values, one of them within half a point of 100: an index.
    5. Otherwise a level.

    Index and level are treated alike by every later step; only a rate is used as it is.

    Examples
    --------
    >>> inferred_kind("Policy rate", np.array([100.0])), inferred_kind("Money", np.array([7.0]))
    ('rate', 'level')
    """
    known = values[~np.isnan(values)]
    said = "rate" if percent else kind_in_words(name)
    if said is not None:
        return said
    if (known < 0).any() and float(np.median(np.abs(known))) < 30:
        return "rate"
    if (known > 0).all() and (np.abs(known - 100.0) <= 0.5).any():
        return "index"
    return "level"


def kind_in_words(text: str) -> Kind | None:
    """Tell the kind from a name or a unit by rules 1 and 2 of `inferred_kind`; None if silent."""
    if _RATE.search(text) and not _LEVEL.search(text):
        return "rate"
    return "index" if _INDEX.search(text) else None


def inferred_unit(name: str, kind: Kind) -> str:
    """Read the unit off a name: what its last brackets hold, or a reference such as 2015 = 100."""
    bracket = _UNIT.search(name)
    if bracket and not (_ADJUSTED.search(bracket[1]) or _NOT_ADJUSTED.search(bracket[1])):
        return bracket[1].strip()
    reference = _REFERENCE.search(name)
    if reference:
        return reference[0]
    return "percent" if kind == "rate" else ""


def inferred_adjustment(name: str) -> Adjustment:
    """Read off a name whether the seasonal pattern was removed; unknown where it is silent."""
    if _NOT_ADJUSTED.search(name):
        return "no"
    return "yes" if _ADJUSTED.search(name) else "unknown"
