"""Alert rules: one line of text each, held against the quantities of a print.

A rule reads ``QUANTITY above|below LIMIT``, for example ``rate_12m above 5`` or
``rate_3m_annualised above rate_12m + 2``. The limit is a number, another quantity, or a quantity
plus or minus a number. Or it reads ``rate_12m outside outlook_80``: outside the interval that a
saved statement gave for the print.
"""

import math
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from app.words import plain

QUANTITIES = {  # name in a rule and in the JSON answer -> words, unit
    "rate_1m": ("the rate over one period", "percent"),
    "rate_3m_annualised": ("the 3-month rate, annualised,", "percent"),
    "rate_6m_annualised": ("the 6-month rate, annualised,", "percent"),
    "rate_12m": ("the 12-month rate", "percent"),
    "annual_average": ("the rate of annual averages", "percent"),
    "rank_percent": ("the percentile rank", ""),
    "change_12m": ("the change in the 12-month rate", "points"),
    "change_36m": ("the cumulative change over 36 months", "percent"),
}
OUTLOOK = {f"outlook_{level}": f"{level} %" for level in (50, 80, 95)}  # name -> its level
STATED = ("rate_1m", "rate_12m")  # what a statement gives intervals of
DEFAULT_RULES = (
    "rate_12m above 5",
    "rank_percent above 95",
    "rate_3m_annualised above rate_12m + 2",
    "change_36m above 80",
    "rate_12m outside outlook_80",
)
_NUMBER = r"[+-]?(?:[0-9]{1,9}(?:\.[0-9]{1,9})?|\.[0-9]{1,9})"
_RULE = re.compile(
    rf"(?P<quantity>\w+)\s+(?P<side>above|below)\s+"
    rf"(?:(?P<number>{_NUMBER})|(?P<other>[a-z]\w*)(?:\s*(?P<sign>[+-])\s*(?P<margin>{_NUMBER}))?)"
)
_OUTSIDE = re.compile(r"(\w+)\s+outside\s+(\w+)")


class AlertError(ValueError):
    """A rule that cannot be read; the text is one sentence for the user."""


@dataclass(frozen=True)
class Rule:
    """One rule; `other` is the quantity that the limit is counted from, or empty for zero."""

    quantity: str
    side: str
    limit: float
    other: str = ""

    @property
    def text(self) -> str:
        """The rule as it is written."""
        if self.side == "outside":
            return f"{self.quantity} outside {self.other}"
        if not self.other:
            return f"{self.quantity} {self.side} {self.limit:g}"
        margin = f" {'+' if self.limit > 0 else '-'} {abs(self.limit):g}" if self.limit else ""
        return f"{self.quantity} {self.side} {self.other}{margin}"


@dataclass(frozen=True)
class Alert:
    """A rule that the print has set off.

    Attributes
    ----------
    rule : str
        As it is written.
    value, limit : float
        The quantity, and what it is above or below.
    sentence : str
        The same in words.
    """

    rule: str
    value: float
    limit: float
    sentence: str


def read_rule(text: str) -> Rule:
    """Read a rule from its text.

    Raises
    ------
    AlertError
        It has another shape, or names a quantity that there is not.
    """
    line = " ".join(text.split())
    if outside := _OUTSIDE.fullmatch(line):
        quantity, interval = outside.groups()
        if quantity not in STATED or interval not in OUTLOOK:
            raise AlertError(
                f"an alert must be of {' or '.join(STATED)} outside {', '.join(OUTLOOK)}, but got"
                f" {line[:60]!r}"
            )
        return Rule(quantity, "outside", 0.0, interval)
    found = _RULE.fullmatch(line)
    if not found:
        raise AlertError(
            "an alert must read like 'rate_12m above 5' or 'rate_3m_annualised above rate_12m + 2',"
            f" but got {text[:60]!r}"
        )
    for name in ("quantity", "other"):
        if found[name] and found[name] not in QUANTITIES:
            raise AlertError(
                f"an alert must be of one of {', '.join(QUANTITIES)}, but got {found[name][:60]!r}"
            )
    limit = float(found["number"] or found["margin"] or 0.0)
    if found["sign"] == "-":
        limit = -limit
    return Rule(found["quantity"], found["side"], limit, found["other"] or "")


def read_rules(lines: Iterable[str]) -> tuple[Rule, ...]:
    """Read rules, one a line; empty lines and lines that begin with ``#`` are left out."""
    kept = (line.strip() for line in lines)
    return tuple(read_rule(line) for line in kept if line and not line.startswith("#"))


def alerts(rules: Iterable[Rule], quantities: Mapping[str, float]) -> tuple[Alert, ...]:
    """Return the rules that the print sets off; a quantity that is missing sets off nothing."""
    found = []
    for rule in rules:
        value = quantities.get(rule.quantity, math.nan)
        if rule.side == "outside":
            found += _outside(rule, value, quantities)
            continue
        base = quantities.get(rule.other, math.nan) if rule.other else 0.0
        limit = base + rule.limit
        off = value > limit if rule.side == "above" else value < limit
        if off:  # never where one of them is nan
            found.append(Alert(rule.text, value, limit, _sentence(rule, value, limit)))
    return tuple(found)


def bound_name(quantity: str, interval: str, side: str) -> str:
    """Return the name under which `alerts` looks for an end of a stated interval."""
    return f"{quantity}_{interval}_{side}"


def _outside(rule: Rule, value: float, quantities: Mapping[str, float]) -> list[Alert]:
    low, high = (
        quantities.get(bound_name(rule.quantity, rule.other, side), math.nan)
        for side in ("low", "high")
    )
    if not (value < low or value > high):  # nor where one of them is nan
        return []
    words = QUANTITIES[rule.quantity][0]
    said = (
        f"{words[0].upper()}{words[1:]} is {plain(value, 2)} percent, outside {plain(low, 2)} to"
        f" {plain(high, 2)} percent, the {OUTLOOK[rule.other]} interval stated for it."
    )
    return [Alert(rule.text, value, low if value < low else high, said)]


def _sentence(rule: Rule, value: float, limit: float) -> str:
    words, unit = QUANTITIES[rule.quantity]
    unit = f" {unit}" if unit else ""
    against = f"{plain(limit, 2)}{unit}"
    if rule.other:
        other = QUANTITIES[rule.other][0].rstrip(",")
        margin = f" {'plus' if rule.limit > 0 else 'less'} {abs(rule.limit):g}"
        against += f" ({other}{margin if rule.limit else ''})"
    first = words[0].upper() + words[1:]
    return f"{first} is {plain(value, 2)}{unit}, {rule.side} {against}."
