"""Charts as PNG and SVG by a Chromium without a window, through kaleido (extra ``images``).

One browser is started for all of them. It is given the chart library that travels with the
program, no formula renderer, and a proxy that leads nowhere: nothing can leave the machine.
"""

import asyncio
import atexit
import contextlib
import importlib.util
import struct
import threading
import zlib
from collections.abc import Mapping
from html import escape
from typing import Any

from app.brief.chromium import NOWHERE, NoChromiumError, chromium
from app.places import bundled

SCALE = 2
PATIENCE = 40.0  # seconds for one picture
START = 20.0  # seconds for the browser to start; now and then one hangs, so there is a second try
IDLE = 60.0  # seconds after which a browser that nobody asks is closed
_PNG = b"\x89PNG\r\n\x1a\n"


def missing() -> str:
    """Say what is missing to make pictures; empty where nothing is."""
    if importlib.util.find_spec("kaleido") is None:
        return "no PNG and SVG were made: install the extra, pip install 'pricewake[images]'"
    if chromium() is None:
        return "no PNG and SVG were made: no Chromium was found on this machine"
    return ""


class Pictures:
    """One browser that draws charts; started with the first, closed when idle or at the end."""

    def __init__(self, proxy: str = NOWHERE) -> None:
        self._proxy = proxy
        self._lock = threading.RLock()
        self._loop: asyncio.AbstractEventLoop | None = None
        self._thread: threading.Thread | None = None
        self._browser: Any = None
        self._timer: threading.Timer | None = None
        atexit.register(self.close)

    def start(self) -> None:
        """Start the browser, unless it runs.

        Raises
        ------
        NoChromiumError
            Something is missing, or it does not start.
        """
        with self._lock:
            if self._browser is not None:
                return
            lacking = missing()
            if lacking:
                raise NoChromiumError(lacking)
            self._loop = asyncio.new_event_loop()
            self._thread = threading.Thread(target=self._loop.run_forever, daemon=True)
            self._thread.start()
            try:
                self._browser = self._wait(_opened(self._proxy), 2 * START + PATIENCE)
            except Exception as error:
                self.close()
                raise NoChromiumError(
                    f"no PNG and SVG were made: Chromium did not start ({type(error).__name__})"
                ) from error

    def drawn(self, figure: Mapping[str, Any], kind: str) -> bytes:
        """Return a figure with width and height in its layout as ``png`` or ``svg``.

        Raises
        ------
        NoChromiumError
            The browser is missing, or did not draw it in time.
        """
        with self._lock:
            self.start()
            layout = figure["layout"]
            options = {
                "format": kind,
                "width": layout["width"],
                "height": layout["height"],
                "scale": SCALE if kind == "png" else 1,
            }
            try:
                return bytes(self._wait(self._browser.calc_fig(dict(figure), options)))
            except Exception as error:
                self.close()
                raise NoChromiumError(
                    f"a {kind.upper()} was not made: Chromium did not draw it"
                    f" ({type(error).__name__})"
                ) from error
            finally:
                self._close_later()

    def close(self) -> None:
        """Close the browser; the next picture starts another."""
        with self._lock:
            if self._timer is not None:
                self._timer.cancel()
                self._timer = None
            browser, self._browser = self._browser, None
            loop, self._loop = self._loop, None
            if loop is None:
                return
            if browser is not None:
                with contextlib.suppress(Exception):  # it is going away either way
                    asyncio.run_coroutine_threadsafe(browser.close(), loop).result(10)
            loop.call_soon_threadsafe(loop.stop)
            if self._thread is not None:
                self._thread.join(5)
            if not loop.is_running():
                loop.close()

    def _wait(self, coroutine: Any, patience: float = PATIENCE) -> Any:
        assert self._loop is not None
        return asyncio.run_coroutine_threadsafe(coroutine, self._loop).result(patience)

    def _close_later(self) -> None:
        if self._timer is not None:
            self._timer.cancel()
        if self._browser is None:
            return
        self._timer = threading.Timer(IDLE, self.close)
        self._timer.daemon = True
        self._timer.start()


async def _opened(proxy: str) -> Any:
    try:
        return await _started(proxy)
    except TimeoutError:
        return await _started(proxy)


async def _started(proxy: str) -> Any:
    import kaleido

    browser = kaleido.Kaleido(
        n=1,
        timeout=PATIENCE,
        plotlyjs=(bundled("assets") / "plotly-cartesian.min.js").as_uri(),
        mathjax=False,  # else it is fetched from the net
        path=chromium(),
        proxy_server=proxy,
    )
    try:
        await asyncio.wait_for(browser.open(), START)
    except BaseException:
        with contextlib.suppress(Exception):  # it is given up either way
            await asyncio.wait_for(browser.close(), START / 4)
        raise
    return browser


def png_with(picture: bytes, notes: Mapping[str, str]) -> bytes:
    """Return a PNG that carries notes as text (``iTXt``, PNG specification 11.3.3.4).

    Raises
    ------
    ValueError
        It is no PNG.
    """
    head = len(_PNG) + 25  # signature and the chunk IHDR
    if not picture.startswith(_PNG) or picture[12:16] != b"IHDR":
        raise ValueError("a picture must be a PNG to carry notes, but this is none")
    chunks = b"".join(_text_chunk(key, value) for key, value in notes.items())
    return picture[:head] + chunks + picture[head:]


def _text_chunk(key: str, value: str) -> bytes:
    name = key.encode("latin-1", "replace")[:79]
    body = b"iTXt" + name + b"\0\0\0\0\0" + value.encode("utf-8", "replace")
    return struct.pack(">I", len(body) - 4) + body + struct.pack(">I", zlib.crc32(body))


def svg_with(picture: bytes, title: str, notes: Mapping[str, str]) -> bytes:
    """Return an SVG with a title and a description that carries notes.

    Raises
    ------
    ValueError
        It is no SVG.
    """
    text = picture.decode("utf-8")
    start = text.find("<svg")
    end = text.find(">", start)
    if start < 0 or end < 0:
        raise ValueError("a picture must be an SVG to carry notes, but this is none")
    said = "\n".join(f"{key}: {value}" for key, value in notes.items())
    inside = f"<title>{_xml(title)}</title><desc>{_xml(said)}</desc>"
    return (text[: end + 1] + inside + text[end + 1 :]).encode()


def _xml(text: str) -> str:
    """Escape text and leave out what XML 1.0 cannot hold."""
    kept = "".join(c for c in text if c in "\t\n" or " " <= c <= "\ud7ff" or c >= "\ue000")
    return escape(kept.replace("\ufffe", "").replace("\uffff", ""))
