"""The season of a series said to be unadjusted, as the Data page shows it."""

from dataclasses import dataclass

from analytics.seasonal import SeasonalAdjustment
from analytics.series import Series
from app.compute import Bridge
from app.intake.weights import is_weight
from app.seasons import may_be_adjusted, season_of
from app.state import ViewState


@dataclass(frozen=True, eq=False)
class ChosenSeason:
    """The season of one series, or the sentence that says why there is none to show.

    Attributes
    ----------
    series : Series
        As it is used, its breaks treated.
    names : tuple of str
        Every series that could be chosen.
    result : SeasonalAdjustment or None
        None where `refusal` says why.
    """

    series: Series
    names: tuple[str, ...]
    result: SeasonalAdjustment | None = None
    refusal: str = ""


def chosen(state: ViewState, bridge: Bridge) -> ChosenSeason | None:
    """Return the season of the series chosen, else of the first that could be; None for none."""
    in_view = bridge.in_view(state)
    there = {
        name: series
        for name, series in in_view.series.items()
        if may_be_adjusted(series) and not is_weight(series)
    }
    if not there:
        return None
    names = tuple(there)
    series = there.get(state.unadjusted) or there[names[0]]
    try:
        return ChosenSeason(series, names, season_of(series, bridge.memory))
    except ValueError as error:
        return ChosenSeason(series, names, refusal=str(error))
