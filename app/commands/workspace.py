"""`pricewake workspace`: a workspace out to a folder of plain files, and back."""

from pathlib import Path
from typing import Any

import click

_folder = click.argument("folder", type=click.Path(path_type=Path), metavar="DIR")
_path = click.option(
    "--workspace",
    "kept_in",
    metavar="PATH",
    help="Workspace file; without it the usual one in your data folder.",
)


@click.group()
def workspace() -> None:
    """Write a workspace to a folder of plain CSV and JSON, or fill one from such a folder."""


@workspace.command("export")
@_folder
@_path
def export(folder: Path, kept_in: str | None) -> None:
    """Write everything that a workspace holds to the new folder DIR, as CSV and JSON."""
    from app.workspace_folder import export_folder

    store = _store(kept_in, there=True)
    try:
        count = export_folder(store, folder)
    finally:
        store.close()
    click.echo(f"{_counted(count)} written to {folder}.")


@workspace.command("import")
@_folder
@_path
def take_in(folder: Path, kept_in: str | None) -> None:
    """Fill an empty workspace from the folder DIR that an export wrote."""
    from app.workspace_folder import import_folder

    store = _store(kept_in)
    try:
        count = import_folder(folder, store)
    finally:
        store.close()
    click.echo(f"{_counted(count)} read from {folder}.")


@workspace.command("alerts")
@click.option("--add", metavar="RULE", help="Keep this rule, such as 'rate_12m above 5'.")
@click.option("--remove", metavar="RULE", help="Take this rule away, as it is listed.")
@_path
def alerts(add: str | None, remove: str | None, kept_in: str | None) -> None:
    """List the alert rules that a workspace keeps, and change them."""
    from app.kept_rules import drop_rule, keep_rule, rule_lines

    store = _store(kept_in, there=add is None)
    try:
        if add is not None:
            keep_rule(store, add)
        if remove is not None:
            drop_rule(store, remove)
        for line in rule_lines(store):
            click.echo(line)
    finally:
        store.close()


def _store(kept_in: str | None, *, there: bool = False) -> Any:
    from app.store import Store, WorkspaceError, default_path

    path = Path(kept_in) if kept_in else default_path()
    if there and not path.exists():
        raise WorkspaceError(f"there is no workspace at {str(path)!r} yet")
    return Store(kept_in or path)


def _counted(count: int) -> str:
    return f"{count} vintage{'' if count == 1 else 's'}"
