"""Numbers of Pricewake: series, growth rates and the lag between a driver and a response.

In a notebook ``import analytics`` gives the names below; each module is loaded when one of its
names is first used.

>>> import analytics
>>> analytics.growth_rate.__module__
'analytics.rates'
"""

from importlib import import_module
from typing import Any

_NAMES = {
    "series": "Series Pair align series_from_periods",
    "tables": "series_from_pandas contribution_frame",
    "rates": "growth_rate trailing_mean",
    "print_rates": "rates_of_print=print_rates average_rate factor_since doubling_time",
    "base_effect": "base_effects drop_outs",
    "carry_over": "annual_carry_over=carry_over path_if",
    "standing": "percentile_rank=standing rank_through_time",
    "distribution": "distribution_fit kernel_fit",
    "goodness": "goodness_of_fit",
    "tail": "observed_tail fitted_tail",
    "high_inflation": "runs_beyond three_year_change cagan_episodes",
    "weights": "WeightTable chained_basket effective_weights",
    "breadth": "contributions diffusion_index total_without",
    "core_measures": "weighted_median trimmed_mean",
    "surface": "lag_surface",
    "cell": "lag_cell",
    "robust": "cell_inference surface_inference",
    "search": "lag_search",
    "shiftset": "shift_set",
    "influence": "episodes cell_without",
    "opinions": "second_opinions",
    "stability": "rolling_stability",
    "outlook": "implied_path relation_gap",
    "direct": "direct_forecasts",
    "backtest": "past_forecasts=backtest",
    "panel": "panel_scan",
    "seasonal": "seasonal_adjustment at_frequency",
    "linking": "linked break_treated rereferenced",
    "revisions": "revisions_of=revisions bias_test",
    "simulate": "planted_pair levels_from_growth",
}
_HOME = {
    known.partition("=")[0]: (module, known.rpartition("=")[2])
    for module, names in _NAMES.items()
    for known in names.split()
}  # name here -> module, name there: a function called like its module has another name here

__all__ = sorted(_HOME)


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module 'analytics' has no attribute {name!r}")
    module, there = _HOME[name]
    return getattr(import_module(f"analytics.{module}"), there)


def __dir__() -> list[str]:
    return __all__
