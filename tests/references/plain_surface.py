"""Plain, slow twins of analytics.surface and analytics.cell: the definitions, one cell at a time.

Sums, squares and products are whole numbers over a common power of two, so they carry no
rounding at all; only the last step, the root or the ratio, is taken in floating point.
"""

import math
from dataclasses import dataclass
from fractions import Fraction


@dataclass(frozen=True)
class PlainCell:
    driver: list[Fraction]
    response: list[Fraction]
    months: list[int]
    sxx: Fraction
    syy: Fraction
    sxy: Fraction

    @property
    def pairs(self):
        return len(self.months)

    @property
    def correlation(self):
        return float(self.sxy) / math.sqrt(self.sxx * self.syy) if self.varies else math.nan

    @property
    def slope(self):
        return float(self.sxy / self.sxx) if self.varies else math.nan

    @property
    def intercept(self):
        mean_x = sum(self.driver) / self.pairs
        mean_y = sum(self.response) / self.pairs
        return float(mean_y - self.sxy / self.sxx * mean_x)

    @property
    def varies(self):
        return self.sxx > 0 and self.syy > 0


def _whole_numbers(values):
    """The values as whole numbers, and the power of two that they are to be divided by."""
    ratios = [float(value).as_integer_ratio() for value in values]
    divisor = max(denominator for _, denominator in ratios)
    return [numerator * (divisor // denominator) for numerator, denominator in ratios], divisor


def has_means(length, window, shift, t):
    """Whether month t has both the driver's mean and the response's."""
    return t - window + 1 >= 0 and t + shift - window + 1 >= 0 and t < length and t + shift < length


def plain_cell(driver, response, window, shift, *, only=None):
    """The cell by its definition; `only` restricts it to those months t."""
    x, x_divisor = _whole_numbers(driver)
    y, y_divisor = _whole_numbers(response)
    months = [t for t in range(len(x)) if has_means(len(x), window, shift, t)]
    if only is not None:
        months = [t for t in months if t in only]
    xs = [sum(x[t - window + 1 : t + 1]) for t in months]
    ys = [sum(y[t + shift - window + 1 : t + shift + 1]) for t in months]
    n, a, b = max(1, len(months)), window * x_divisor, window * y_divisor
    return PlainCell(
        driver=[Fraction(v, a) for v in xs],
        response=[Fraction(v, b) for v in ys],
        months=months,
        sxx=Fraction(n * sum(v * v for v in xs) - sum(xs) ** 2, n * a * a),
        syy=Fraction(n * sum(v * v for v in ys) - sum(ys) ** 2, n * b * b),
        sxy=Fraction(
            n * sum(v * w for v, w in zip(xs, ys, strict=True)) - sum(xs) * sum(ys), n * a * b
        ),
    )


def months_of_every_cell(length, windows, shifts):
    """The months t that every cell of the grid has."""
    return {
        t
        for t in range(length)
        if all(has_means(length, window, shift, t) for window in windows for shift in shifts)
    }


def plain_slices(along, across, slices):
    """Mean of `across` and count in equal slices of `along`, by the slice rule."""
    low, high = min(along), max(along)
    held = [[] for _ in range(slices)]
    for a, b in zip(along, across, strict=True):
        held[min(slices - 1, math.floor((a - low) / (high - low) * slices))].append(b)
    return [math.fsum(h) / len(h) if h else math.nan for h in held], [len(h) for h in held]


def plain_effective_months(driver, response, window, shift):
    """Effective months of a cell, with every sum a loop over the months it runs over."""
    smoothed = []
    for series in (driver, response):
        means = [
            math.fsum(series[t - window + 1 : t + 1]) / window
            for t in range(window - 1, len(series))
        ]
        level = math.fsum(means) / len(means)
        smoothed.append([mean - level for mean in means])
    size = len(smoothed[0])
    n = size - abs(shift)

    def autocorrelation(values, k):
        return math.fsum(values[t] * values[t + k] for t in range(size - k)) / math.fsum(
            value * value for value in values
        )

    inflation = 1.0 + 2.0 * math.fsum(
        (1.0 - k / n) * autocorrelation(smoothed[0], k) * autocorrelation(smoothed[1], k)
        for k in range(1, min(size // 3, n - 1) + 1)
    )
    return max(3.1, n / max(1.0, inflation))


def plain_without_season(series, periods_per_year):
    """The series less the mean of its month of the year, plus the mean of all."""
    level = math.fsum(series) / len(series)
    means = [
        math.fsum(series[place::periods_per_year]) / len(series[place::periods_per_year])
        for place in range(periods_per_year)
    ]
    return [value - means[t % periods_per_year] + level for t, value in enumerate(series)]


def plain_hac_se(driver, response, bandwidth):
    """Bartlett-kernel standard error of the slope, lag by lag (Newey and West 1987)."""
    n = len(driver)
    mean_x, mean_y = math.fsum(driver) / n, math.fsum(response) / n
    dx, dy = [v - mean_x for v in driver], [v - mean_y for v in response]
    sxx = math.fsum(v * v for v in dx)
    slope = math.fsum(v * w for v, w in zip(dx, dy, strict=True)) / sxx
    scores = [v * (w - slope * v) for v, w in zip(dx, dy, strict=True)]
    total = math.fsum(v * v for v in scores)
    for lag in range(1, bandwidth):
        products = math.fsum(scores[t] * scores[t + lag] for t in range(n - lag))
        total += 2.0 * (1.0 - lag / bandwidth) * products
    return math.sqrt(total) / sxx
