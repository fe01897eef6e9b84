"""From a view and the user's words to a statement that is kept."""

from dataclasses import replace

from analytics.intervals import LEVELS
from analytics.series import period_code, period_label
from app.compute import Bridge
from app.outlook.bridge import fans
from app.outlook.inputs import inputs
from app.outlook.statements import Statement, StatementError, keep_statement
from app.places import software_version
from app.state import ViewState
from app.workspace import today

METHOD = "Student's t around the line, scaled by the past errors of the same rule at each horizon"


def say(state: ViewState, words: str, supersedes: str, bridge: Bridge) -> int:
    """Keep the outlook of a state as a statement; return its number.

    Raises
    ------
    ValueError
        There is no path or interval, the view is one of the past, or the words are none.
    """
    newest = bridge.rates(replace(state, as_of="", last=""))[1].last
    found = inputs(state, bridge)
    if state.as_of or found.pair.origin != newest:
        raise StatementError(
            f"a statement must start from the newest print, {period_label(newest)}, since what came"
            " after an earlier one is known already; clear the date and the end of the sample"
        )
    if supersedes and not supersedes.isdecimal():
        raise StatementError(
            f"a statement must supersede one by its number, but got {supersedes[:20]!r}"
        )
    pair = found.pair
    return keep_statement(
        bridge.workspace.statement_store,
        Statement(
            driver=(state.driver,),
            response=state.response,
            frequency=pair.response.frequency,
            window=state.window,
            shift=state.shift,
            compounding=found.compounding,
            origin=period_code(pair.origin),
            levels=LEVELS,
            paths=fans(found),
            words=words,
            sources=tuple(
                (one.name, one.fingerprint, period_code(one.last)) for one in found.loaded
            ),
            state=state.to_query(),
            method=METHOD,
            version=software_version(),
            supersedes=int(supersedes) if supersedes else None,
        ),
        today(),
    )
