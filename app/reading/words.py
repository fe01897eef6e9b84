"""A print in words: headline, verdict, and the quantities that alert rules are held against."""

import math
from collections.abc import Mapping

from analytics.families import FAMILIES
from analytics.goodness import laplace_bracket
from analytics.series import period_label
from analytics.tail import Tail
from app.reading.alerts import Alert, Rule, alerts
from app.reading.result import Reading
from app.words import counted, p_words, plain, signed

CAUTION = (
    "Ranks and distributions describe past readings of this series; they do not say what comes"
    " next, and nothing here is investment or policy advice. Official statistics and your desk's"
    " own qualified judgement come first."
)
SPANS = {"3m": 3, "6m": 6, "12m": 12}


def quantities(known: Reading) -> dict[str, float]:
    """Return what alert rules may name, unrounded; nan where it is not known."""
    nan = math.nan
    rates = known.rates.get(known.state.formula)
    own = known.print_value if known.series.kind == "rate" else nan
    return {
        "rate_1m": rates.one if rates else own,
        "rate_3m_annualised": rates.quarter_annualised if rates else nan,
        "rate_6m_annualised": rates.half_annualised if rates else nan,
        "rate_12m": rates.year if rates else nan,
        "annual_average": rates.annual_average if rates else nan,
        "rank_percent": known.standing.rank if known.standing else nan,
        "change_12m": float(known.base.change[-1]) if known.base else nan,
        "change_36m": float(known.three_years.values[-1]) if known.three_years else nan,
    }


def set_off(
    known: Reading, rules: tuple[Rule, ...], stated: Mapping[str, float] | None = None
) -> tuple[Alert, ...]:
    """Return the alerts that the print sets off; `stated` are ends of intervals stated for it."""
    return alerts(rules, {**quantities(known), **(stated or {})})


def sentence(known: Reading) -> str:
    """Say the print in one sentence: what it was and where it stands among earlier ones."""
    when = period_label(known.series.last)
    name = known.series.name
    if known.measured is None:
        return f"{name} was read in {when}."
    value = known.print_value
    if known.series.kind == "rate":
        said = f"{name} stood at {plain(value)} in {when}"
    else:
        digits = 2 if known.state.measure == "1m" else 1
        size = f"{plain(abs(value), digits)} percent"
        verb = "rose" if value > 0 else "fell"
        flat = round(abs(value), digits) == 0
        if known.state.measure == "1m":
            said = f"{name} did not change" if flat else f"{name} {verb} {size}"
            said += f" in {when}"
        else:
            over = f"over the {SPANS[known.state.measure]} months to {when}"
            annual = "" if known.state.measure == "12m" else "at an annual rate of "
            said = f"{name} did not change" if flat else f"{name} {verb} {annual}{size}"
            said += f" {over}"
    made = f" ({known.made_here})" if known.made_here else ""
    return said + made + _standing_words(known) + "."


def _standing_words(known: Reading) -> str:
    if known.earlier is None:
        return ""
    below, n, noun = known.earlier.below, known.earlier.n, known.noun
    if known.earlier.equal == n:
        return f", the same as in all {n} earlier {noun}s"
    if below == n:
        return f", higher than all {n} earlier {noun}s"
    if below == 0:
        return f", higher than none of {counted(n, f'earlier {noun}')}"
    if n < 100:
        return f", higher than {below} of {n} earlier {noun}s"
    share = min(99, max(1, round(100 * below / n)))
    return f", higher than {share} of every 100 earlier {noun}s"


def verdict(known: Reading) -> list[str]:
    """Say in a few sentences what moved the yearly rate and what is carried over."""
    said = []
    if known.base is not None and not math.isnan(known.base.change[-1]):
        base = known.base
        change, new, dropped = (float(part[-1]) for part in (base.change, base.new, base.base))
        moved = f"{'up' if change > 0 else 'down'} {plain(abs(change))} points"
        moved = "unchanged" if round(abs(change), 2) == 0 else moved
        said.append(
            f"The {year_words(known)} rate is {plain(float(base.yearly[-1]), 1)} percent, {moved}:"
            f" the new {known.noun} brought {_points(new)}, the one that dropped out"
            f" {_points(dropped)}."
        )
    if known.carried is not None and not math.isnan(known.carried.next_year):
        carried = known.carried
        this = ""
        if not math.isnan(carried.this_year):
            this = f"{carried.year} would average {signed(carried.this_year, 1)} percent, and "
        said.append(
            f"Were the level to stay where it is, {this}{carried.year + 1}"
            f"{' would average' if not this else ''} {signed(carried.next_year, 1)} percent"
            " (carry-over)."
        )
    return said


def _points(value: float) -> str:
    return signed(round(value, 2) + 0.0)  # no minus before nothing


def year_words(known: Reading) -> str:
    """Return what the yearly rate is called: 12-month, four-quarter or yearly."""
    return {"month": "12-month", "quarter": "four-quarter", "year": "yearly"}[known.noun]


def tail_words(tail: Tail, known: Reading, source: str) -> str:
    """Say how often a reading at least as high comes."""
    if tail.probability <= 0:
        return f"{source}: none as high."
    low, high = span_words(tail.return_low, known), span_words(tail.return_high, known)
    return (
        f"{source}: in {of_hundred(tail.probability)} of 100 {known.noun}s, once in"
        f" {span_words(tail.return_period, known)}"
        f" ({100 * tail.level:.0f} % interval {low} to {high})."
    )


def of_hundred(share: float) -> str:
    """Return how many of a hundred a share is, to two digits: ``100``, ``44``, ``0.031``.

    Examples
    --------
    >>> of_hundred(1.0), of_hundred(0.437), of_hundred(0.000312), of_hundred(1e-9)
    ('100', '44', '0.031', 'fewer than 0.001')
    """
    if 0 < 100 * share < 0.001:
        return "fewer than 0.001"
    return f"{100 * share:.0f}" if share >= 0.095 else f"{100 * share:.2g}"


def span_words(periods: float, known: Reading) -> str:
    """Return a length of time in its own unit below two years, in years above."""
    if math.isinf(periods):
        return "never"
    if known.year > 1 and periods >= 2 * known.year:
        years = periods / known.year
        if years >= 10000:
            return "over 10,000 years"
        return f"{years:,.0f} years" if years >= 10 else f"{years:.1f} years"
    if periods < 10:
        return f"{periods:.1f} {known.noun}s"
    return f"{periods:,.0f} {known.noun}s"


def fit_words(known: Reading) -> str:
    """Say what the test of the chosen family's fit found, or that it is being worked out."""
    if not known.fits:
        return f"{known.refused.get('distribution', 'There is no rate to fit')}."
    label, goodness = FAMILIES[known.state.family].label, known.goodness
    if "test" in known.refused:
        return f"The fit cannot be tested: {known.refused['test']}."
    if goodness is None:
        return f"The {label} fit is being tested."
    found = (
        goodness.p_anderson_darling,
        goodness.p_cramer_von_mises,
        goodness.p_kolmogorov,
    )
    if min(found) > 0.05:
        judged = f"Nothing here speaks clearly against the {label} distribution"
    elif max(found) <= 0.05:
        judged = f"The {label} distribution does not fit"
    else:
        judged = f"The fit of the {label} distribution is in doubt"
    text = (
        f"{judged}: Anderson-Darling p {p_words(goodness.p_anderson_darling)}, Cramér-von Mises"
        f" p {p_words(goodness.p_cramer_von_mises)}, Kolmogorov p {p_words(goodness.p_kolmogorov)}."
        f" Fitted parameters are paid for, and dependence by an autoregression of order"
        f" {goodness.order}; {goodness.draws} draws, seed {goodness.seed}."
    )
    if goodness.anderson_darling and known.state.family == "laplace":
        bracket = laplace_bracket(
            goodness.anderson_darling, goodness.fit.n, name="anderson_darling"
        )
        if bracket and goodness.order:
            low, high = bracket
            where = (
                f"between {p_words(low)} and {p_words(high)}" if low else f"below {p_words(high)}"
            )
            where = f"above {p_words(low)}" if high == 1.0 else where
            text += f" Taken as independent, the months would give p {where} (published table)."
    if goodness.ties > 0.05 and min(found) <= 0.05:
        text += (
            f" {100 * goodness.ties:.0f} % of the readings occur more than once: rounding at the"
            " source alone can make a fit fail."
        )
    return text
