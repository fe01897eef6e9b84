"""The command `pricewake`: serve the dashboard, or answer without a browser."""

import io
import json
import math
import signal
import socket
import sys
import threading
import webbrowser
from collections.abc import Callable
from dataclasses import asdict, fields
from pathlib import Path
from typing import Any, NoReturn

import click

from app.cli_workspace import workspace
from app.places import software_version
from app.reading_fields import READING_FIELDS, READING_VIEWS
from app.state import StateError, ViewState, kind_of

DEFAULT_PORT = 8391
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
    "windows",
    "shifts",
    "surrogates",
    "seed",
    "without",
    "as_of",
)


class _ServeUnlessNamed(click.Group):
    """A group whose first word may be a file: then the dashboard is served."""

    def parse_args(self, ctx: click.Context, args: list[str]) -> list[str]:
        if not args or (args[0] not in self.commands and args[0] not in ("--help", "--version")):
            args = ["serve", *args]
        return super().parse_args(ctx, args)


def _state_options(names: tuple[str, ...]) -> Callable[[Callable[..., Any]], Callable[..., Any]]:
    """Give a command one flag a field of ViewState, from the table of the fields."""

    def decorate(command: Callable[..., Any]) -> Callable[..., Any]:
        for item in reversed([f for f in fields(ViewState) if f.name in names]):
            words = f"--{item.name.replace('_', '-')}"
            flag = click.option(words, metavar="TEXT", help=kind_of(item).help)
            command = flag(command)
        return command

    return decorate


_files = click.argument("files", nargs=-1, type=click.Path(path_type=Path))
_as_json = click.option(
    "--json", "as_json", is_flag=True, help="Print one JSON object and nothing else."
)
_csv = click.option("--csv", "csv_path", type=click.Path(path_type=Path), help="Write a CSV file.")
_kept_in = click.option(
    "--workspace",
    "kept_in",
    metavar="PATH",
    help="Workspace file whose series are used, and in which FILES are kept. Without it FILES alone"
    " count.",
)
_desk = click.option(
    "--workspace",
    "kept_in",
    metavar="PATH",
    help="Workspace file; the usual one lies in your data folder, and :memory: keeps nothing.",
)


@click.group(cls=_ServeUnlessNamed)
@click.version_option(software_version(), prog_name="pricewake")
def pricewake() -> None:
    """Read a price release: is it unusual, does money lead it, and how surely.

    With FILES and no command, the dashboard opens on them; with nothing at all, on an invented
    economy.
    """


@pricewake.command()
@_files
@click.option(
    "--port",
    type=click.IntRange(1, 65535),
    default=DEFAULT_PORT,
    show_default=True,
    help="Port to serve on; where it is taken, the next one that is free.",
)
@click.option("--no-browser", is_flag=True, help="Do not open the browser.")
@_desk
def serve(files: tuple[Path, ...], port: int, no_browser: bool, kept_in: str | None) -> None:
    """Serve the dashboard on this machine and open the browser (the command when none is named)."""
    free = _free_port(port)
    if free != port:
        click.echo(f"Port {port} is taken; using {free}.")
    from waitress.server import create_server

    from app.server import build_app
    from app.store import default_path

    desk = _workspace(files, kept_in or str(default_path()), at_desk=True)
    app = build_app(desk)
    server = create_server(app.server, host="127.0.0.1", port=free, threads=8, ident=None)
    address = f"http://127.0.0.1:{free}/lag"
    click.echo(f"Pricewake is at {address}  (Ctrl-C ends it)")
    if not no_browser:
        threading.Thread(target=webbrowser.open, args=(address,), daemon=True).start()
    signal.signal(signal.SIGTERM, signal.default_int_handler)
    try:
        server.run()
    except KeyboardInterrupt:
        pass
    finally:
        server.close()
        desk.close()
        click.echo("Pricewake has ended.")


@pricewake.command()
@_files
@_as_json
@_csv
@_kept_in
def inspect(
    files: tuple[Path, ...], as_json: bool, csv_path: Path | None, kept_in: str | None
) -> int:
    """Say what was understood in the files and what is wrong with them."""
    from app.intake.reading import inspection

    desk = _workspace(files, kept_in)
    report = inspection(desk.releases)
    if csv_path:
        rows = [list(report["series"][0])] if report["series"] else []
        rows += [[_flat(v) for v in series.values()] for series in report["series"]]
        _write(csv_path, _csv_text("what was understood in the files", rows))
    if as_json:
        _print_json(report)
    else:
        for series in report["series"]:
            click.echo(
                f"{series['name']}: {series['frequency']} {series['kind']}, {series['first']} to"
                f" {series['last']}, {series['n']} values, {len(series['gaps'])} missing"
            )
        for problem in desk.problems:
            click.echo(f"{problem.severity}: {problem}")
    return int(bool(_errors(desk)))


@pricewake.command()
@_files
@_state_options(LAG_FIELDS)
@_as_json
@_csv
@click.option(
    "--view",
    type=click.Choice(VIEW_NAMES),
    default="surface",
    show_default=True,
    help="Which view --csv writes.",
)
@_kept_in
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
    from app.evidence import completed
    from app.lag_answer import answer as lag_answer
    from app.pages import lag as page
    from app.verdict import effective_words
    from app.words import p_words, plain, signed

    desk = _workspace(files, kept_in)
    bridge = Bridge(desk)
    state = _state(desk.as_of(flags["as_of"] or "").opening_state(), flags)
    shown = page.view(state, bridge, asked={name for name, text in flags.items() if text})
    if csv_path:
        _write(csv_path, exports.view_text(view, shown, bridge))
    known = completed(shown.state, bridge)
    answer = lag_answer(shown, known)
    if as_json:
        _print_json(answer)
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
    for problem in _errors(desk):
        click.echo(f"pricewake: {problem}", err=True)
    return int(bool(_errors(desk)))


@pricewake.command()
@_files
@_state_options(READING_FIELDS)
@click.option(
    "--as-of",
    "newest",
    metavar="TEXT",
    help="Period such as 2024-03 that is read as the print, or a date such as 2024-03-12 whose"
    " vintages are used.",
)
@click.option(
    "--alert",
    "rules",
    multiple=True,
    metavar="RULE",
    help="Rule such as 'rate_12m above 5', in place of the usual ones; may be given again.",
)
@_as_json
@_csv
@click.option(
    "--view",
    type=click.Choice(READING_VIEWS),
    default="rates",
    show_default=True,
    help="Which view --csv writes.",
)
@_kept_in
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
    from app.cli_reading import as_of_fields, report, rules_of
    from app.compute import Bridge
    from app.reading_exports import view_text

    asked = rules_of(rules)
    desk = _workspace(files, kept_in)
    state = _state(ViewState(), {**flags, **as_of_fields(newest)})
    known, answer, lines = report(state, Bridge(desk), asked)
    if csv_path:
        _write(csv_path, view_text(view, known))
    if as_json:
        _print_json(answer)
    else:
        for line in lines:
            click.echo(line)
    for problem in _errors(desk):
        click.echo(f"pricewake: {problem}", err=True)
    return int(bool(_errors(desk) or answer["alerts"]))


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


def _workspace(
    files: tuple[Path, ...], kept_in: str | None = None, *, at_desk: bool = False
) -> Any:
    """Read the files, into the workspace named if one is; the invented economy if there are none.

    Without a workspace the answer depends on the files alone. Only the dashboard, which is
    `at_desk`, makes an empty workspace, and shows the invented economy while it is empty.
    """
    from app.demo import demo_releases
    from app.intake.reading import read_path
    from app.store import MEMORY
    from app.workspace import Workspace

    releases = tuple(read_path(path) for path in files)
    names = [release.name for release in releases]
    for name in names:
        if names.count(name) > 1:
            raise click.UsageError(f"files must have different names, but {name!r} stands twice")
    if kept_in and not (files or at_desk or kept_in == MEMORY or Path(kept_in).exists()):
        raise click.UsageError(f"there is no workspace at {kept_in!r} yet")
    placeholder = demo_releases() if not releases and (at_desk or not kept_in) else ()
    return Workspace(releases, placeholder, kept_in or MEMORY)


def _state(opening: ViewState, flags: dict[str, str | None]) -> ViewState:
    kinds = {item.name: kind_of(item) for item in fields(ViewState)}
    given = {name: kinds[name].read(text) for name, text in flags.items() if text is not None}
    try:
        return ViewState(**{**asdict(opening), **given})
    except StateError as error:
        raise click.UsageError(str(error)) from error


def _errors(desk: Any) -> list[Any]:
    return [problem for problem in desk.problems if problem.severity == "error"]


def _free_port(port: int) -> int:
    """Return the first port from `port` on that nothing listens on."""
    for candidate in range(port, min(port + 100, 65536)):
        with socket.socket(socket.AF_INET, socket.SOCK_STREAM) as probe:
            probe.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
            try:
                probe.bind(("127.0.0.1", candidate))
            except OSError:
                continue
            return candidate
    raise click.UsageError(f"port must be free, but {port} and the 99 after it are taken")


def _print_json(answer: dict[str, Any]) -> None:
    click.echo(json.dumps(_finite(answer), allow_nan=False))  # ASCII: fits every console


def _finite(value: Any) -> Any:
    """Replace what JSON cannot hold: nan and infinities become null."""
    if isinstance(value, dict):
        return {key: _finite(each) for key, each in value.items()}
    if isinstance(value, (list, tuple)):
        return [_finite(each) for each in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value


def _flat(value: Any) -> Any:
    return " ".join(str(each) for each in value) if isinstance(value, (list, tuple)) else value


def _csv_text(view: str, rows: list[list[Any]]) -> str:
    from app.exports import csv_text

    return csv_text([("Pricewake", software_version()), ("view", view)], rows)


def _write(path: Path, text: str) -> None:
    """Write a file whole or not at all."""
    try:
        if path.is_dir():
            raise IsADirectoryError(0, "that is a folder")
        part = path.with_name(f"{path.name}.part")
        part.write_text(text, encoding="utf-8", newline="")
        part.replace(path)
    except OSError as error:
        raise click.UsageError(
            f"--csv must be a file that may be written, but got {str(path)!r}: {error.strerror}"
        ) from error
