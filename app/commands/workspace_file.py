"""What the parts of `pricewake workspace` share: which file is meant, and how it is opened."""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import click

place = click.option(
    "--workspace",
    "kept_in",
    metavar="PATH",
    help="Workspace file; without it the usual one in your data folder.",
)


def path_of(kept_in: str | None, *, there: bool = True) -> str | Path:
    """Return where the workspace lies; one that must be `there` and is not is refused."""
    from app.store import WorkspaceError, default_path

    path = Path(kept_in) if kept_in else default_path()
    if there and not path.exists():
        raise WorkspaceError(f"there is no workspace at {str(path)!r} yet")
    return kept_in or path


@contextmanager
def opened(kept_in: str | None) -> Iterator[Any]:
    """Open the workspace that is there, and close it afterwards."""
    from app.workspace import Workspace

    desk = Workspace(path=path_of(kept_in))
    try:
        yield desk
    finally:
        desk.close()
