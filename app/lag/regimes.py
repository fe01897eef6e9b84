"""Whether the two series of a pair change how much they cling to their past."""

from analytics.level_shifts import level_shifts
from analytics.persistence import PersistenceShift, persistence_shift
from app.compute import Bridge
from app.state import ViewState


def regimes(state: ViewState, bridge: Bridge) -> tuple[PersistenceShift, PersistenceShift] | None:
    """Shifts of persistence of driver and response, where both have a strong one."""

    def make() -> tuple[PersistenceShift, ...]:
        pair = bridge.pair(state)
        try:
            driver, response = (
                persistence_shift(level_shifts(side.values, trend=True).residual)
                for side in (pair.driver, pair.response)
            )
        except ValueError:  # too short, or flat in a part: nothing to warn of
            return ()
        return (driver, response) if driver.strong and response.strong else ()

    found = bridge.memory.once("regimes:" + bridge.key(state.question()), make)
    return (found[0], found[1]) if found else None
