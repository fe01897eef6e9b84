"""The backtest written as it is defined: one date, one horizon, one regression at a time."""

import numpy as np
import statsmodels.api as sm


def plain_mean(values, window, end):
    """Mean of the `window` values that end at place `end`."""
    return float(np.mean([values[end - k] for k in range(window)]))


def plain_yearly(response, origin, ahead, months, span=12):
    """Log yearly rate ending `ahead` after `origin`; `months[k]` is the rate k + 1 ahead."""
    total = 0.0
    for end in range(origin + ahead - span + 1, origin + ahead + 1):
        total += response[end] if end <= origin else months[end - origin - 1]
    return total


def plain_relation(driver, response, window, shift, horizon, span=12):
    """Yearly rate by the cell's line, fitted by statsmodels to the pairs known."""
    n = len(response)
    xs, ys = [], []
    for t in range(window - 1, n - shift):
        xs.append(plain_mean(driver, window, t))
        ys.append(plain_mean(response, window, t + shift))
    intercept, slope = sm.OLS(ys, sm.add_constant(np.array(xs))).fit().params
    months = []
    for h in range(1, horizon + 1):
        place = n - 1 + h - shift
        x = driver[place] if place < len(driver) else np.mean(xs)
        months.append(intercept + slope * x)
    return [plain_yearly(response, n - 1, h, months, span) for h in range(1, horizon + 1)]


def plain_direct(driver, response, window, shift, own_lags, horizon, *, with_driver, span=12):
    """Yearly rate by one regression a horizon, in full, by statsmodels."""
    n, lead = len(response), len(driver) - len(response)
    found = []
    for h in range(1, horizon + 1):
        k = min(h, span)
        reach = min(h - shift, lead)

        def regressors(t, reach=reach):
            row = [1.0] + [response[t - lag] for lag in range(own_lags)]
            return [*row, plain_mean(driver, window, t + reach)] if with_driver else row

        first = max(own_lags - 1, 0, window - 1 - reach)
        rows = range(first, n - h)
        wanted = [np.mean(response[t + h - k + 1 : t + h + 1]) for t in rows]
        fit = sm.OLS(wanted, np.array([regressors(t) for t in rows])).fit()
        mean = float(np.dot(fit.params, regressors(n - 1)))
        known = response[n - span + k :] if k < span else []
        found.append(float(np.sum(known) + k * mean))
    return found


def plain_no_change(response, horizon, span=12):
    """The last yearly rate, repeated."""
    return [float(np.sum(response[-span:]))] * horizon


def plain_past_mean(response, horizon):
    """Mean of all months for each month ahead."""
    months = [float(np.mean(response))] * horizon
    return [plain_yearly(response, len(response) - 1, h, months) for h in range(1, horizon + 1)]


def plain_autoregression(response, coefficients, horizon):
    """Iterate given coefficients around the mean, month by month."""
    mean = float(np.mean(response))
    values = list(response)
    for _ in range(horizon):
        values.append(
            mean + sum(c * (values[-1 - lag] - mean) for lag, c in enumerate(coefficients))
        )
    months = values[len(response) :]
    return [plain_yearly(response, len(response) - 1, h, months) for h in range(1, horizon + 1)]
