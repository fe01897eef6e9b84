"""`pricewake scan`: every economy, driver and response in the files."""

import sys
from pathlib import Path
from typing import Any

import click

from app.commands import parts as cli_parts
from app.commands.parts import errors, print_json, state_of, workspace_of, write
from app.scan.fields import SCAN_FIELDS, SCAN_VIEWS
from app.state import ViewState


@click.command()
@cli_parts.files
@click.option(
    "--driver",
    "drivers",
    multiple=True,
    metavar="NAME",
    help="Series within an economy, such as 'Broad money'; may be given again. Usual: all money.",
)
@click.option(
    "--response",
    "responses",
    multiple=True,
    metavar="NAME",
    help="Series within an economy, such as 'Consumer prices'; may be given again. Usual: all"
    " prices.",
)
@cli_parts.state_options(SCAN_FIELDS)
@click.option(
    "--out",
    "result",
    type=click.Path(path_type=Path),
    metavar="RESULT.csv",
    help="Put every pair down as soon as it is done, and go on from what is there already.",
)
@click.option(
    "--processes",
    type=click.IntRange(1, 1024),
    help="Processes on this machine, one thread each. Usual: one a processor.",
)
@click.option(
    "--cluster",
    metavar="ADDRESS",
    help="Search on the workers of the Dask scheduler at this address, such as"
    " tcp://192.0.2.7:8786.",
)
@cli_parts.as_json
@cli_parts.csv_path
@click.option(
    "--view",
    type=click.Choice(SCAN_VIEWS),
    default="pairs",
    show_default=True,
    help="Which view --csv writes.",
)
@cli_parts.kept_in
def scan(
    files: tuple[Path, ...],
    drivers: tuple[str, ...],
    responses: tuple[str, ...],
    result: Path | None,
    processes: int | None,
    cluster: str | None,
    as_json: bool,
    csv_path: Path | None,
    view: str,
    kept_in: str | None,
    **flags: str | None,
) -> int:
    """Search every economy's drivers and responses, and pay for the number of pairs.

    A series named 'Economy: Broad money' belongs to the economy before the colon, as do the rows of
    a file with an economy column. Each driver is paired with each response of its own economy.
    """
    from app.compute import Bridge
    from app.scan.answer import scan_answer
    from app.scan.bridge import scan as scan_of
    from app.scan.exports import view_text
    from app.scan.run import completed_panel
    from app.scan.words import CAUTION, average_words, notes, sentence, verdict

    if cluster and processes:
        raise click.UsageError("--processes and --cluster must not both be given")
    desk = workspace_of(files, kept_in)
    named = {"drivers": "|".join(drivers) or None, "responses": "|".join(responses) or None}
    state = state_of(ViewState(), {**flags, **named})
    bridge = Bridge(desk)
    panel = completed_panel(
        state, bridge, result=result, processes=processes, cluster=cluster, told=_progress()
    )
    known = scan_of(state, bridge, panel)
    if csv_path:
        write(csv_path, view_text(view, known, every=True))
    if as_json:
        print_json(scan_answer(known))
    else:
        for line in (
            f"{sentence(known.question)}.",
            verdict(known),
            *notes(known),
            f"Long averages. {average_words(known)}",
            CAUTION,
        ):
            click.echo(line)
    for problem in errors(desk):
        click.echo(f"pricewake: {problem}", err=True)
    return int(bool(errors(desk)))


def _progress() -> Any:
    """Return what is told after each pair: a line on a terminal, nothing elsewhere."""
    if not sys.stderr.isatty():
        return lambda _done, _total: None

    def told(done: int, total: int) -> None:
        click.echo(
            f"\r{done} of {total} pairs{chr(10) if done == total else ''}", err=True, nl=False
        )

    return told
