"""From two loaded series to the two that are paired: season taken out, one frequency."""

from dataclasses import dataclass
from typing import Any

from analytics.seasonal import HERE, SeasonalAdjustment, at_frequency
from analytics.series import PERIOD_NOUN, PERIODS_PER_YEAR, Series
from app.memory import Memory
from app.seasons import may_be_adjusted, season_of
from app.state import ViewState


@dataclass(frozen=True, eq=False)
class Prepared:
    """Driver and response of one frequency, and a sentence on each thing done on the way.

    `seasons` holds each series whose season was taken out, and that season.
    """

    driver: Series
    response: Series
    said: tuple[str, ...] = ()
    seasons: tuple[tuple[Series, SeasonalAdjustment], ...] = ()


def prepared(driver: Series, response: Series, state: ViewState, memory: Memory) -> Prepared:
    """Adjust what is said to be unadjusted, if asked; bring both to the lower frequency.

    Raises
    ------
    ValueError
        A series cannot be adjusted or has no whole period; one sentence.
    """
    sides, said, seasons = [driver, response], [], []
    if state.season == "stl":
        for place, series in enumerate(sides):
            if may_be_adjusted(series):
                found = season_of(series, memory)
                seasons.append((series, found))
                sides[place] = found.adjusted
                said.append(f"{series.name}: {HERE}")
            elif series.adjustment == "unknown":
                said.append(
                    f"{series.name}: left as read, since its file does not say whether it is"
                    " adjusted; the Data page can"
                )
    if driver.frequency != response.frequency:
        low = min((driver, response), key=lambda s: PERIODS_PER_YEAR[s.frequency]).frequency
        by: Any = state.meet
        how = {"average": "the average", "last": "the last value"}[state.meet]
        for place, series in enumerate(sides):
            if series.frequency != low:
                sides[place] = at_frequency(series, low, by)
                said.append(
                    f"{series.name}: {series.frequency} values meet {low} ones by {how} of each"
                    f" {PERIOD_NOUN[low]}; nothing is interpolated"
                )
    return Prepared(sides[0], sides[1], tuple(said), tuple(seasons))
