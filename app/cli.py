"""The command `pricewake`: serve the dashboard, or answer without a browser."""

import io
import sys
from pathlib import Path
from typing import Any, NoReturn

import click

from app.commands import parts as cli_parts
from app.commands.breadth import breadth
from app.commands.brief import brief
from app.commands.outlook import outlook
from app.commands.parts import errors, print_json, state_of, workspace_of, write
from app.commands.scan import scan
from app.commands.serve import serve
from app.commands.workspace import workspace
from app.places import software_version
from app.reading.fields import READING_FIELDS, READING_VIEWS
from app.state import ViewState

VIEW_NAMES = (
    "surface",
    "scatter",
    "overlay",
    "profile",
    "plane",
    "episodes",
    "without",
    "opinions",
    "stability",
    "season",
    "peaks",
    "compare",
    "responses",
)
LAG_FIELDS = (
    "driver",
    "response",
    "window",
    "shift",
    "growth",
    "first",
    "last",
    "months",
    "season",
    "meet",
    "windows",
    "shifts",
    "surrogates",
    "seed",
    "left_out",
    "pinned",
    "points",
    "band",
    "band_place",
    "band_width",
    "peaks",
    "other_responses",
    "without",
    "as_of",
)


class _ServeUnlessNamed(click.Group):
    """A group whose first word may be a file: then the dashboard is served."""

    def parse_args(self, ctx: click.Context, args: list[str]) -> list[str]:
        if not args or (args[0] not in self.commands and args[0] not in ("--help", "--version")):
            args = ["serve", *args]
        return super().parse_args(ctx, args)


@click.group(cls=_ServeUnlessNamed)
@click.version_option(software_version(), prog_name="pricewake")
def pricewake() -> None:
    """Read a price release: is it unusual, does money lead it, and how surely.

    With FILES and no command, the dashboard opens on them; with nothing at all, on an invented
    economy.
    """


@pricewake.command()
@cli_parts.files
@cli_parts.as_json
@cli_parts.csv_path
@cli_parts.kept_in
def inspect(
    files: tuple[Path, ...], as_json: bool, csv_path: Path | None, kept_in: str | None
) -> int:
    """Say what was understood in the files and what is wrong with them."""
    from app.desk.findings import found_in
    from app.intake.reading import inspection

    desk = workspace_of(files, kept_in)
    report = inspection(desk.releases)
    checks = [each.problem for each in found_in(desk.as_of(), desk)]
    report["problems"] += [vars(problem).copy() for problem in checks]
    if csv_path:
        rows = [list(report["series"][0])] if report["series"] else []
        rows += [[_flat(v) for v in series.values()] for series in report["series"]]
        write(csv_path, _csv_text("what was understood in the files", rows))
    if as_json:
        print_json(report)
    else:
        for series in report["series"]:
            click.echo(
                f"{series['name']}: {series['frequency']} {series['kind']}, {series['first']} to"
                f" {series['last']}, {series['n']} values, {len(series['gaps'])} missing"
            )
        for problem in (*desk.problems, *checks):
            click.echo(f"{problem.severity}: {problem}")
    return int(bool(errors(desk)))


@pricewake.command()
@cli_parts.files
@cli_parts.state_options(LAG_FIELDS)
@cli_parts.as_json
@cli_parts.csv_path
@cli_parts.view(VIEW_NAMES, "surface")
@cli_parts.kept_in
def lag(
    files: tuple[Path, ...],
    as_json: bool,
    csv_path: Path | None,
    view: str,
    kept_in: str | None,
    **flags: str | None,
) -> int:
    """Pair a driver with a response: one cell, the whole map, and what the search was worth."""
    from app import exports
    from app.compute import Bridge, noun
    from app.lag.answer import answer as lag_answer
    from app.lag.evidence import completed
    from app.lag.verdict import effective_words
    from app.pages import lag as page
    from app.words import p_words, plain, signed

    desk = workspace_of(files, kept_in)
    bridge = Bridge(desk)
    state = state_of(desk.as_of(flags["as_of"] or "").opening_state(), flags)
    shown = page.view(state, bridge, asked={name for name, text in flags.items() if text})
    if csv_path:
        write(csv_path, exports.view_text(view, shown, bridge))
    known = completed(shown.state, bridge)
    answer = lag_answer(shown, known)
    if as_json:
        print_json(answer)
    else:
        cell = answer["cell"]
        click.echo(shown.sentence)
        click.echo(" ".join(answer["verdict"]))
        click.echo(
            f"Chosen cell: correlation {signed(cell['correlation'])}, slope"
            f" {plain(cell['slope'], 3)}; naive p {p_words(cell['p_naive'])}, per-cell p"
            f" {p_words(cell['p_robust'])}."
            f" {effective_words(cell['n'], cell['effective_months'], noun(shown.pair))}."
        )
        click.echo(page.CAUTION)
    for problem in errors(desk):
        click.echo(f"pricewake: {problem}", err=True)
    return int(bool(errors(desk)))


@pricewake.command()
@cli_parts.files
@cli_parts.state_options(READING_FIELDS)
@cli_parts.as_of
@click.option(
    "--alert",
    "rules",
    multiple=True,
    metavar="RULE",
    help="Rule such as 'rate_12m above 5', in place of those kept; may be given again.",
)
@cli_parts.as_json
@cli_parts.csv_path
@cli_parts.view(READING_VIEWS, "rates")
@cli_parts.kept_in
def reading(
    files: tuple[Path, ...],
    newest: str | None,
    rules: tuple[str, ...],
    as_json: bool,
    csv_path: Path | None,
    view: str,
    kept_in: str | None,
    **flags: str | None,
) -> int:
    """Read the newest value of a series: rates, rank, distribution, base effects, alerts."""
    from app.commands.reading import as_of_fields, report, rules_of
    from app.compute import Bridge
    from app.reading.alerts import read_rules
    from app.reading.exports import view_text

    read_rules(rules)
    desk = workspace_of(files, kept_in)
    asked = rules_of(rules, desk.store)
    state = state_of(ViewState(), {**flags, **as_of_fields(newest)})
    known, answer, lines = report(state, Bridge(desk), asked)
    if csv_path:
        write(csv_path, view_text(view, known))
    if as_json:
        print_json(answer)
    else:
        for line in lines:
            click.echo(line)
    for problem in errors(desk):
        click.echo(f"pricewake: {problem}", err=True)
    return int(bool(errors(desk) or answer["alerts"]))


pricewake.add_command(serve)
pricewake.add_command(breadth)
pricewake.add_command(brief)
pricewake.add_command(outlook)
pricewake.add_command(scan)
pricewake.add_command(workspace)


def main(arguments: list[str] | None = None) -> NoReturn:
    """Run the command; wrong use and unreadable input give one sentence and exit status 2."""
    if isinstance(sys.stdout, io.TextIOWrapper):
        sys.stdout.reconfigure(errors="backslashreplace")  # a console need not know every letter
    try:
        outcome = pricewake.main(arguments, prog_name="pricewake", standalone_mode=False)
    except click.exceptions.Abort:
        sys.exit(130)
    except click.ClickException as error:
        _refuse(error.format_message())
    except (ValueError, OSError) as error:
        _refuse(str(error))
    sys.exit(outcome if isinstance(outcome, int) else 0)


def _refuse(sentence: str) -> NoReturn:
    click.echo(f"pricewake: {' '.join(sentence.split())}", err=True)
    sys.exit(2)


def _csv_text(view: str, rows: list[list[Any]]) -> str:
    from app.exports import csv_text

    return csv_text([("Pricewake", software_version()), ("view", view)], rows)


def _flat(value: Any) -> Any:
    return " ".join(str(each) for each in value) if isinstance(value, (list, tuple)) else value
