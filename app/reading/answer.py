"""The answer of `pricewake reading`: one object, every number unrounded."""

from typing import Any

from analytics.high_inflation import Run
from analytics.print_rates import PrintRates, doubling_time
from analytics.series import period_code
from analytics.tail import Tail
from app.reading.alerts import Alert
from app.reading.result import Reading
from app.reading.words import quantities, sentence, verdict

_NAMES = {
    "one": "rate_1m",
    "quarter_annualised": "rate_3m_annualised",
    "half_annualised": "rate_6m_annualised",
    "year": "rate_12m",
    "annual_average": "annual_average",
}


def reading_answer(known: Reading, found: tuple[Alert, ...]) -> dict[str, Any]:
    """Return what is known about a print; a part that is missing is null and named in `refused`."""
    values, state = quantities(known), known.state
    laplace = known.fits.get("laplace")
    return {
        "series": known.series.name,
        "kind": known.series.kind,
        "frequency": known.series.frequency,
        "period": period_code(known.series.last),
        "formula": state.formula,
        "adjusted_here": known.short.source if known.short is not None else None,
        **{name: values[name] for name in _NAMES.values()},
        "rates": {formula: _rates(rates) for formula, rates in known.rates.items()},
        "cumulative": _cumulative(known),
        "measure": state.measure,
        "measured": known.print_value,
        "rank_percent": values["rank_percent"],
        "rank_kind": state.rank_kind,
        "rank_among": state.among,
        "n": known.standing.n if known.standing else None,
        "ranks": dict(known.ranks),
        "laplace": dict(laplace.parameters) if laplace else None,
        "fits": [
            {
                "family": fit.family,
                "loglik": fit.loglik,
                "aic": fit.aic,
                "bic": fit.bic,
                "parameters": fit.parameters,
            }
            for fit in known.fits.values()
        ],
        "kernel": (
            {"bandwidth": known.kernel.bandwidth, "loglik_leave_one_out": known.kernel.loglik}
            if known.kernel
            else None
        ),
        "goodness": _goodness(known),
        "tail": {"fitted": _tail(known.fitted), "observed": _tail(known.observed)},
        "sub_samples": [
            {
                "first": period_code(part.first),
                "last": period_code(part.last),
                "n": part.fits["laplace"].n,
                "mean": part.mean,
                "observed_tail": _tail(part.tail),
                "fits": {name: fit.parameters for name, fit in part.fits.items()},
            }
            for part in known.parts
        ],
        "base_effect": _base_effect(known),
        "carry_over": vars(known.carried) if known.carried else None,
        "what_if": (
            {
                "rate": known.path.rate,
                "path": [
                    {"period": period_code(period), "rate_12m": float(rate)}
                    for period, rate in zip(known.path.periods, known.path.yearly, strict=True)
                ],
            }
            if known.path
            else None
        ),
        "episodes": {
            "above": known.mark,
            "runs": [_run(run) for run in known.runs],
            "falling_prices": [_run(run) for run in known.falling],
            "cagan": [_run(run) for run in known.cagan],
            "change_36m": values["change_36m"],
        },
        "alerts": [vars(alert) for alert in found],
        "notes": list(known.notes),
        "refused": dict(known.refused),
        "sentence": sentence(known),
        "verdict": verdict(known),
    }


def _rates(rates: PrintRates) -> dict[str, float]:
    return {name: getattr(rates, field) for field, name in _NAMES.items()}


def _cumulative(known: Reading) -> dict[str, Any] | None:
    if known.factor is None:
        return None
    factor = float(known.factor.values[-1])
    rates = known.rates["percent"]
    return {
        "since": period_code(known.factor.first),
        "factor": factor,
        "change_percent": 100.0 * (factor - 1.0),
        "doubling_periods_at_rate_1m": float(doubling_time(rates.one)),
        "doubling_years_at_rate_12m": float(doubling_time(rates.year)),
    }


def _goodness(known: Reading) -> dict[str, Any] | None:
    found = known.goodness
    if found is None:
        return None
    return {
        "family": found.fit.family,
        "anderson_darling": found.anderson_darling,
        "cramer_von_mises": found.cramer_von_mises,
        "kolmogorov": found.kolmogorov,
        "p_anderson_darling": found.p_anderson_darling,
        "p_cramer_von_mises": found.p_cramer_von_mises,
        "p_kolmogorov": found.p_kolmogorov,
        "dependence_order": found.order,
        "draws": found.draws,
        "seed": found.seed,
        "ties": found.ties,
    }


def _tail(tail: Tail | None) -> dict[str, float] | None:
    if tail is None:
        return None
    return {
        "probability": tail.probability,
        "low": tail.low,
        "high": tail.high,
        "level": tail.level,
        "return_periods": tail.return_period,
    }


def _base_effect(known: Reading) -> dict[str, Any] | None:
    base, drops = known.base, known.drops
    if base is None:
        return None
    rows = [
        {
            "period": period_code(period),
            "change": float(base.change[i]),
            "new": float(base.new[i]),
            "base": float(base.base[i]),
            "rate_new": float(base.rate_new[i]),
            "rate_dropped": float(base.rate_dropped[i]),
        }
        for i, period in enumerate(base.periods)
    ]
    coming = (
        []
        if drops is None
        else [
            {
                "period": period_code(period),
                "rate_dropping": float(drops.rate[i]),
                "usual": float(drops.usual[i]),
                "pull": float(drops.pull[i]),
            }
            for i, period in enumerate(drops.periods)
        ]
    )
    return {**rows[-1], "history": rows, "coming": coming}


def _run(run: Run) -> dict[str, Any]:
    return {
        "first": period_code(run.first),
        "last": period_code(run.last),
        "length": run.length,
        "peak": run.peak,
        "peak_period": period_code(run.peak_period),
        "mean": run.mean,
        "open": run.open,
    }
