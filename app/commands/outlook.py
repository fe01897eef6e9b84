"""`pricewake outlook`: what is implied for the months ahead, and how such paths did before."""

import re
import sys
from pathlib import Path

import click

from app.commands import parts as cli_parts
from app.commands.parts import errors, print_json, state_of, workspace_of, write
from app.outlook.fields import OUTLOOK_FIELDS, OUTLOOK_VIEWS


@click.command()
@cli_parts.files
@cli_parts.state_options(OUTLOOK_FIELDS)
@click.option(
    "--as-of",
    "newest",
    metavar="TEXT",
    help="Period such as 2024-03 that both series are cut at, or a date such as 2024-03-12 whose"
    " vintages are used.",
)
@click.option(
    "--say",
    "words",
    metavar="WORDS",
    help="Keep the outlook with these words as a statement in the workspace.",
)
@click.option(
    "--supersedes",
    metavar="NUMBER",
    default="",
    help="Number of the kept statement that the new one takes the place of.",
)
@cli_parts.as_json
@cli_parts.csv_path
@cli_parts.view(OUTLOOK_VIEWS, "fan")
@cli_parts.kept_in
def outlook(
    files: tuple[Path, ...],
    newest: str | None,
    words: str | None,
    supersedes: str,
    as_json: bool,
    csv_path: Path | None,
    view: str,
    kept_in: str | None,
    **flags: str | None,
) -> int:
    """Say what the driver's observed months imply, and how such paths turned out before."""
    from app.compute import Bridge
    from app.outlook.answer import outlook_answer
    from app.outlook.bridge import completed_outlook, fans
    from app.outlook.exports import view_text
    from app.outlook.report import report
    from app.outlook.saying import say

    if words is not None and not kept_in:
        raise click.UsageError("--say keeps a statement in a workspace; name one with --workspace")
    if supersedes and words is None:
        raise click.UsageError("--supersedes goes with --say: what is to be said instead")
    desk = workspace_of(files, kept_in)
    given = {**flags, **_as_of(newest)}
    state = state_of(desk.as_of(given.get("as_of") or "").opening_state(), given)
    bridge = Bridge(desk)
    if words is not None:
        say(state, words, supersedes, bridge)
    asked = {name for name, text in given.items() if text}
    known = completed_outlook(state, bridge, asked, _told if sys.stderr.isatty() else None)
    every = {}
    if known.path is not None and "intervals" not in known.refused:
        every = fans(known.found)
    if csv_path:
        write(csv_path, view_text(view, known))
    if as_json:
        print_json(outlook_answer(known, every))
    else:
        for line in report(known):
            click.echo(line)
    for problem in errors(desk):
        click.echo(f"pricewake: {problem}", err=True)
    return int(bool(errors(desk)))


def _as_of(text: str | None) -> dict[str, str]:
    """Tell a period that both series are cut at from a date whose vintages are used."""
    if not text:
        return {}
    day = re.fullmatch(r"[0-9]{4}-[0-9]{2}-[0-9]{2}", text.strip())
    return {"as_of" if day else "last": text}


def _told(done: int, total: int) -> None:
    click.echo(f"\rgoing through the past: {done} of {total} ", nl=done == total, err=True)
