"""`pricewake scan`: every economy, driver and response in the files."""

import sys
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from app.commands import parts as cli_parts
from app.commands.parts import errors, print_json, state_of, workspace_of, write
from app.scan.fields import SCAN_FIELDS, SCAN_VIEWS
from app.state import ViewState

if TYPE_CHECKING:
    from app.scan.opened import Opened


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
@click.option(
    "--from",
    "opened",
    type=click.Path(path_type=Path),
    metavar="RESULT.csv",
    help="Search nothing and show this result of an earlier scan, checked row by row.",
)
@cli_parts.as_json
@cli_parts.csv_path
@cli_parts.view(SCAN_VIEWS, "pairs")
@cli_parts.kept_in
def scan(
    files: tuple[Path, ...],
    drivers: tuple[str, ...],
    responses: tuple[str, ...],
    result: Path | None,
    processes: int | None,
    cluster: str | None,
    opened: Path | None,
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
    named = {"drivers": "|".join(drivers) or None, "responses": "|".join(responses) or None}
    given = {**flags, **named}
    if opened:
        where = {"--out": result, "--processes": processes, "--cluster": cluster}
        _refuse_beside(given, [name for name, value in where.items() if value])
    desk = workspace_of(files, kept_in)
    state = state_of(ViewState(), given)
    bridge, panel = Bridge(desk), None
    if opened:
        state = replace(state, result=bridge.results.hold(_read(opened)))
    else:
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


def _refuse_beside(given: dict[str, str | None], where: list[str]) -> None:
    """Refuse what a result file settles by itself."""
    free = ("as_of", "axes")
    one_each = {"drivers": "driver", "responses": "response"}
    asked = [name for name, text in given.items() if text is not None and name not in free]
    settled = [f"--{one_each.get(name, name).replace('_', '-')}" for name in asked] + where
    if settled:
        raise click.UsageError(
            f"a result holds what was searched, so {settled[0]} cannot go with --from"
        )


def _read(path: Path) -> "Opened":
    """Read a result file.

    Raises
    ------
    UsageError
        It cannot be read, or is no result; one sentence.
    """
    from app.scan.opened import MOST_BYTES, read_result

    try:
        with path.open("rb") as file:
            content = file.read(MOST_BYTES + 1)
    except OSError as error:
        raise click.UsageError(
            f"--from must be a file that can be read, but got {str(path)!r}: {error.strerror}"
        ) from error
    return read_result(path.name, content)


def _progress() -> Any:
    """Return what is told after each pair: a line on a terminal, nothing elsewhere."""
    if not sys.stderr.isatty():
        return lambda _done, _total: None

    def told(done: int, total: int) -> None:
        click.echo(
            f"\r{done} of {total} pairs{chr(10) if done == total else ''}", err=True, nl=False
        )

    return told
