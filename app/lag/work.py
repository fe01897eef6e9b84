"""The long work of the Lag page by its name in addresses: what may be asked for in chunks."""

from collections.abc import Callable

from app.compute import Bridge
from app.jobs import Work
from app.lag.evidence import (
    directions_work,
    opinions_work,
    search_work,
    shift_set_work,
    stability_work,
)
from app.lag.tools import responses_work
from app.state import ViewState

WORK: dict[str, Callable[[ViewState, Bridge], Work]] = {
    "search": search_work,
    "shift_set": shift_set_work,
    "directions": directions_work,
    "opinions": opinions_work,
    "stability": stability_work,
    "responses": responses_work,
}
