"""What several commands share: arguments and flags, files to a workspace, output."""

import contextlib
import json
import math
from collections.abc import Callable, Sequence
from dataclasses import asdict, fields
from pathlib import Path
from typing import Any

import click

from app.state import StateError, ViewState, kind_of


def state_options(names: tuple[str, ...]) -> Callable[[Callable[..., Any]], Callable[..., Any]]:
    """Give a command one flag a field of ViewState, from the table of the fields."""

    def decorate(command: Callable[..., Any]) -> Callable[..., Any]:
        for item in reversed([f for f in fields(ViewState) if f.name in names]):
            words = f"--{item.name.replace('_', '-')}"
            flag = click.option(words, metavar="TEXT", help=kind_of(item).help)
            command = flag(command)
        return command

    return decorate


SHEET = "sheet of workbooks"  # where a command's context keeps it


def _keep_sheet(context: click.Context, _option: click.Parameter, name: str | None) -> None:
    context.meta[SHEET] = name


def files(command: Callable[..., Any]) -> Callable[..., Any]:
    """Give a command FILES, and the sheet of those that are workbooks, for `workspace_of`."""
    sheet = click.option(
        "--sheet",
        metavar="NAME",
        expose_value=False,
        callback=_keep_sheet,
        help="Sheet of the workbooks among FILES; without it the first that holds a table.",
    )
    return click.argument("files", nargs=-1, type=click.Path(path_type=Path))(sheet(command))


as_json = click.option(
    "--json", "as_json", is_flag=True, help="Print one JSON object and nothing else."
)
csv_path = click.option(
    "--csv", "csv_path", type=click.Path(path_type=Path), help="Write a CSV file."
)


def view(names: Sequence[str], usual: str) -> Callable[[Callable[..., Any]], Callable[..., Any]]:
    """Give a command the choice of the view that its CSV file holds."""
    return click.option(
        "--view",
        type=click.Choice(names),
        default=usual,
        show_default=True,
        help="Which view --csv writes.",
    )


kept_in = click.option(
    "--workspace",
    "kept_in",
    metavar="PATH",
    help="Workspace file whose series are used, and in which FILES are kept. Without it FILES alone"
    " count.",
)
desk = click.option(
    "--workspace",
    "kept_in",
    metavar="PATH",
    help="Workspace file; the usual one lies in your data folder, and :memory: keeps nothing.",
)
as_of = click.option(
    "--as-of",
    "newest",
    metavar="TEXT",
    help="Period such as 2024-03 that is read as the print, or a date such as 2024-03-12 whose"
    " vintages are used.",
)


def workspace_of(
    files: tuple[Path, ...], kept_in: str | None = None, *, at_desk: bool = False
) -> Any:
    """Read the files, into the workspace named if one is; the invented economy if there are none.

    Without a workspace the answer depends on the files alone. Only the dashboard, which is
    `at_desk`, makes an empty workspace, and shows the invented economy while it is empty.
    """
    from app.demo import demo_releases
    from app.intake.reading import looks_like_archive, read_path
    from app.store import MEMORY
    from app.workspace import Workspace

    context = click.get_current_context(silent=True)
    sheet = context.meta.get(SHEET) if context is not None else None
    books = [path for path in files if sheet is not None and looks_like_archive(path)]
    if sheet is not None and not books:
        raise click.UsageError(f"--sheet must be of a workbook among FILES, but got {sheet!r}")
    releases = tuple(read_path(path, sheet=sheet if path in books else None) for path in files)
    names = [release.name for release in releases]
    for name in names:
        if names.count(name) > 1:
            raise click.UsageError(f"files must have different names, but {name!r} stands twice")
    if kept_in and not (files or at_desk or kept_in == MEMORY or Path(kept_in).exists()):
        raise click.UsageError(f"there is no workspace at {kept_in!r} yet")
    placeholder = demo_releases() if not releases and (at_desk or not kept_in) else ()
    return Workspace(releases, placeholder, kept_in or MEMORY)


def state_of(opening: ViewState, flags: dict[str, str | None]) -> ViewState:
    """Return the opening state with the flags that were given."""
    kinds = {item.name: kind_of(item) for item in fields(ViewState)}
    given = {name: kinds[name].read(text) for name, text in flags.items() if text is not None}
    try:
        return ViewState(**{**asdict(opening), **given})
    except StateError as error:
        raise click.UsageError(str(error)) from error


def errors(desk: Any) -> list[Any]:
    """Return the problems of the files that left something out."""
    return [problem for problem in desk.problems if problem.severity == "error"]


def print_json(answer: dict[str, Any]) -> None:
    """Print one JSON object on one line."""
    click.echo(json.dumps(finite(answer), allow_nan=False))  # ASCII: fits every console


def finite(value: Any) -> Any:
    """Replace what JSON cannot hold: nan and infinities become null."""
    if isinstance(value, dict):
        return {key: finite(each) for key, each in value.items()}
    if isinstance(value, (list, tuple)):
        return [finite(each) for each in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value


def write(path: Path, text: str) -> None:
    """Write a file whole or not at all."""
    try:
        if path.is_dir():
            raise IsADirectoryError(0, "that is a folder")
        part = path.with_name(f"{path.name}.part")
        try:
            part.write_text(text, encoding="utf-8", newline="")
            part.replace(path)
        except OSError:
            with contextlib.suppress(OSError):
                part.unlink()
            raise
    except OSError as error:
        raise click.UsageError(
            f"--csv must be a file that may be written, but got {str(path)!r}: {error.strerror}"
        ) from error
