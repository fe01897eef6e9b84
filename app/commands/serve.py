"""The command that serves the dashboard: where, for whom, until it is ended."""

import errno
import signal
import socket
import threading
import webbrowser
from importlib import import_module
from pathlib import Path
from typing import TYPE_CHECKING

import click

from app.commands import parts as cli_parts
from app.commands.parts import workspace_of

if TYPE_CHECKING:
    from app.guard import Door

DEFAULT_PORT = 8391
# Seconds. The browser has the empty page by then, and reads scripts until it asks for its content:
FIRST_PAGE_AFTER = 0.3
# The first page is shown by then, and nobody has asked for HAC errors:
COMPILE_AFTER = 10.0


@click.command()
@cli_parts.files
@click.option(
    "--port",
    type=click.IntRange(1, 65535),
    default=DEFAULT_PORT,
    show_default=True,
    help="Port to serve on; where it is taken, the next one that is free.",
)
@click.option(
    "--host",
    default="127.0.0.1",
    show_default=True,
    help="Name or address of this machine to serve under; beyond loopback the address printed holds"
    " a token that every visitor needs.",
)
@click.option("--no-browser", is_flag=True, help="Do not open the browser.")
@cli_parts.desk
def serve(
    files: tuple[Path, ...], port: int, host: str, no_browser: bool, kept_in: str | None
) -> None:
    """Serve the dashboard on this machine and open the browser (the command when none is named)."""
    door = _door(host)
    free = free_port(port, host)
    if free != port:
        click.echo(f"Port {port} is taken; using {free}.")
    from waitress.server import create_server

    from app.server import build_app, first_page_made
    from app.store import default_path

    desk = workspace_of(files, kept_in or str(default_path()), at_desk=True)
    app = build_app(desk, door)
    server = create_server(app.server, host=host, port=free, threads=8, ident=None)
    address = f"http://{f'[{host}]' if ':' in host else host}:{free}/lag"
    if door.token:
        address += f"?token={door.token}"
        click.echo(
            "Other machines can reach this one. The address is the key: keep it to yourself."
        )
    click.echo(f"Pricewake is at {address}  (Ctrl-C ends it)")
    if not no_browser:
        threading.Thread(target=webbrowser.open, args=(address,), daemon=True).start()
    for seconds, act, given in (
        (FIRST_PAGE_AFTER, first_page_made, app.server),
        (COMPILE_AFTER, import_module, "analytics.hac_loop"),
    ):
        later = threading.Timer(seconds, act, (given,))
        later.daemon = True
        later.start()
    signal.signal(signal.SIGTERM, signal.default_int_handler)
    try:
        server.run()
    except KeyboardInterrupt:
        pass
    finally:
        server.close()
        desk.close()
        click.echo("Pricewake has ended.")


def _door(host: str) -> "Door":
    """Return who is let in: everybody on loopback, elsewhere whoever has the token."""
    from app.guard import LOOPBACK, Door, new_token

    if host in LOOPBACK:
        return Door()
    if not host.strip() or host in ("0.0.0.0", "::", "*"):
        raise click.UsageError(
            f"host must be one name or address of this machine, but got {host!r}"
        )
    return Door(frozenset({host.lower()}), new_token())


def free_port(port: int, host: str) -> int:
    """Return the first port from `port` on that nothing listens on."""
    for candidate in range(port, min(port + 100, 65536)):
        try:
            family, *_, place = socket.getaddrinfo(host, candidate, type=socket.SOCK_STREAM)[0]
        except OSError as error:
            raise click.UsageError(
                f"host must be a name or address of this machine, but got {host!r}"
            ) from error
        with socket.socket(family, socket.SOCK_STREAM) as probe:
            probe.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
            try:
                probe.bind(place)
            except OSError as error:
                if error.errno == errno.EADDRNOTAVAIL:
                    raise click.UsageError(
                        f"host must be a name or address of this machine, but got {host!r}"
                    ) from error
                continue
            return candidate
    raise click.UsageError(f"port must be free, but {port} and the 99 after it are taken")
