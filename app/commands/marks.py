"""`pricewake workspace mark`, `unmark` and `marks`: breaks, as the Data page marks them."""

from typing import Any

import click

from app.commands.parts import print_json
from app.commands.workspace_file import opened, place

GROWTHS = {"mean": "exclude", "before": "before", "after": "after"}
series = click.argument("series", metavar="SERIES")
period = click.argument("period", metavar="PERIOD")


@click.command("mark")
@series
@period
@click.option(
    "--growth",
    type=click.Choice(list(GROWTHS)),
    help="Whose growth the break takes: the period before, the one after, or the mean of both (what"
    " is taken without this).",
)
@click.option("--overlap", metavar="NAME", help="Series that overlaps: splice by its growth.")
@click.option("--year", is_flag=True, help="With --overlap: by the means of a year on each side.")
@click.option("--note", default="", metavar="TEXT", help="What is to be remembered of the break.")
@place
def mark(
    series: str,
    period: str,
    growth: str | None,
    overlap: str | None,
    year: bool,
    note: str,
    kept_in: str | None,
) -> None:
    """Mark a break of SERIES at PERIOD, the first of the new definition, such as 1987-07."""
    if overlap is None and year:
        raise click.UsageError("--year must come with --overlap, but did not")
    if overlap is not None and growth is not None:
        raise click.UsageError("a break must have --growth or --overlap, but got both")
    treatment = GROWTHS[growth or "mean"]
    if overlap is not None:
        treatment = f"overlap{'-mean' if year else ''}:{overlap}"
    with opened(kept_in) as desk:
        desk.mark(series, period, treatment, note)
        for line in _lines(desk, series):
            click.echo(line)


@click.command("unmark")
@series
@period
@place
def unmark(series: str, period: str, kept_in: str | None) -> None:
    """Take the mark of SERIES at PERIOD away."""
    with opened(kept_in) as desk:
        desk.unmark(series, period)
        click.echo(f"The break of {series} at {period} is no longer marked.")


@click.command("marks")
@click.option("--json", "as_json", is_flag=True, help="Print one JSON object and nothing else.")
@place
def marks(as_json: bool, kept_in: str | None) -> None:
    """List the breaks that are marked, and how each is treated."""
    with opened(kept_in) as desk:
        if as_json:
            print_json({"marks": [vars(each) for each in desk.as_of().marks]})
            return
        lines = _lines(desk)
        for line in lines or ["No break is marked."]:
            click.echo(line)


def _lines(desk: Any, series: str | None = None) -> list[str]:
    from app.marks import mark_words

    in_view = desk.as_of()
    chosen = [each for each in in_view.marks if series in (None, each.series)]
    return [
        f"{each.series}: {mark_words(each, in_view)}{f' ({each.note})' if each.note else ''}"
        for each in chosen
    ]
