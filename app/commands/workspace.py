"""`pricewake workspace`: out to a folder of plain files and back, alert rules, breaks."""

from pathlib import Path
from typing import Any

import click

from app.commands.marks import mark, marks, unmark
from app.commands.workspace_file import path_of, place

_folder = click.argument("folder", type=click.Path(path_type=Path), metavar="DIR")


@click.group()
def workspace() -> None:
    """Write a workspace to a folder or fill one from it; keep its alert rules and breaks."""


@workspace.command("export")
@_folder
@place
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
@place
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
@place
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
    from app.store import Store

    return Store(path_of(kept_in, there=there))


def _counted(count: int) -> str:
    return f"{count} vintage{'' if count == 1 else 's'}"


for each in (mark, unmark, marks):
    workspace.add_command(each)
