"""Pictures of a brief: what stands in them of where they came from, and a brief without them."""

import asyncio
import os
import zlib
from typing import ClassVar

import pytest

from app.brief import chromium, pictures
from app.brief.charts import as_picture
from app.brief.parts import Draft, Part
from app.brief.pictures import png_with, svg_with
from app.state import ViewState
from tests.app.briefs import built, desk, quick, write_files


@pytest.fixture(scope="module")
def bridge(tmp_path_factory):
    return desk(write_files(tmp_path_factory.mktemp("desk"))[:1])


@pytest.fixture
def short():
    state = quick(ViewState(series="Consumer prices"))
    return Draft(
        parts=(
            Part(kind="verdict", page="reading", state=state),
            Part(kind="view", page="reading", view="rank", state=state),
        )
    )


# Without what draws them ----------------------------------------------------------------------


def test_without_a_chromium_the_brief_still_comes(short, bridge, monkeypatch):
    monkeypatch.setenv("BROWSER_PATH", "nowhere/chromium")
    found = built(short, bridge, images=True)
    assert sorted({name.rpartition(".")[2] for name in found.files}) == ["csv", "html", "toml"]
    assert found.said == [
        "no PNG and SVG were made: no Chromium was found on this machine",
        "no PDF was made: no Chromium was found on this machine",
    ]


def test_without_the_extra_the_brief_still_comes(short, bridge, monkeypatch):
    monkeypatch.setattr(pictures.importlib.util, "find_spec", lambda name: None)
    monkeypatch.setattr(chromium, "chromium", lambda: None)
    found = built(short, bridge, images=True)
    assert "pip install 'pricewake[images]'" in found.said[0]


def test_a_chromium_that_hangs_is_ended(tmp_path, monkeypatch):
    slow = tmp_path / "slow"
    mark = tmp_path / "pid"
    slow.write_text(f"#!/bin/sh\necho $$ > {mark}\nsleep 60 & wait\n")
    slow.chmod(0o755)
    monkeypatch.setenv("BROWSER_PATH", str(slow))
    monkeypatch.setattr(chromium, "PATIENCE", 0.5)
    page = tmp_path / "page.html"
    page.write_text("x")
    with pytest.raises(chromium.NoChromiumError, match="took longer than"):
        chromium.printed(page)
    with pytest.raises(ProcessLookupError):
        os.kill(int(mark.read_text()), 0)


# Where they came from -------------------------------------------------------------------------


class _Browser:
    """Stands for kaleido's browser: the first `hanging` of them never open."""

    hanging = 0
    started: ClassVar[list["_Browser"]] = []

    def __init__(self, **_):
        self.open_now = False
        self.started.append(self)

    async def open(self):
        await asyncio.sleep(60 if len(self.started) <= self.hanging else 0)
        self.open_now = True

    async def close(self):
        self.open_now = None


@pytest.mark.parametrize("hanging", [0, 1, 2])
def test_a_drawing_browser_that_hangs_is_started_once_more(monkeypatch, hanging):
    kaleido = pytest.importorskip("kaleido")
    monkeypatch.setattr(kaleido, "Kaleido", _Browser)
    monkeypatch.setattr(pictures, "missing", lambda: "")
    monkeypatch.setattr(pictures, "START", 0.2)
    monkeypatch.setattr(_Browser, "hanging", hanging)
    monkeypatch.setattr(_Browser, "started", [])
    drawing = pictures.Pictures()
    try:
        if hanging == 2:
            with pytest.raises(chromium.NoChromiumError, match="did not start"):
                drawing.start()
        else:
            drawing.start()
        states = [each.open_now for each in _Browser.started]
        assert states == {0: [True], 1: [None, True], 2: [None, None]}[hanging]
    finally:
        drawing.close()


def _png():
    def chunk(kind, body):
        return (
            len(body).to_bytes(4, "big") + kind + body + zlib.crc32(kind + body).to_bytes(4, "big")
        )

    head = (1).to_bytes(4, "big") * 2 + bytes([8, 0, 0, 0, 0])
    return (
        b"\x89PNG\r\n\x1a\n"
        + chunk(b"IHDR", head)
        + chunk(b"IDAT", zlib.compress(b"\0\0"))
        + chunk(b"IEND", b"")
    )


def test_notes_in_a_png_are_chunks_of_their_own():
    found = png_with(_png(), {"Title": "Prices – «up»", "Seed": "1"})
    place, kinds, notes = 8, [], {}
    while place < len(found):
        size = int.from_bytes(found[place : place + 4], "big")
        kind, body = found[place + 4 : place + 8], found[place + 8 : place + 8 + size]
        assert zlib.crc32(kind + body) == int.from_bytes(found[place + 8 + size :][:4], "big")
        kinds.append(kind)
        if kind == b"iTXt":
            key, rest = body.split(b"\0", 1)
            assert rest[:4] == b"\0\0\0\0"
            notes[key.decode()] = rest[4:].decode()
        place += 12 + size
    assert kinds == [b"IHDR", b"iTXt", b"iTXt", b"IDAT", b"IEND"]
    assert notes == {"Title": "Prices – «up»", "Seed": "1"}
    with pytest.raises(ValueError, match="must be a PNG"):
        png_with(b"GIF89a", {})


def test_notes_in_an_svg_are_escaped():
    found = svg_with(b'<svg xmlns="x" width="3"><g/></svg>', "a < b\x01", {"Series": "<b>&"})
    assert found == (
        b'<svg xmlns="x" width="3"><title>a &lt; b</title>'
        b"<desc>Series: &lt;b&gt;&amp;</desc><g/></svg>"
    )
    with pytest.raises(ValueError, match="must be an SVG"):
        svg_with(b"nothing", "", {})


@pytest.mark.parametrize(
    ("names", "rows"),
    [
        ([], 1),
        (["a", "b"], 1),
        (["months", "least squares", "ellipse", "mean response in slices of the driver"], 2),
        (["x" * 60] * 3, 3),
    ],
)
def test_every_row_of_a_legend_has_its_room(names, rows):
    chart = {"data": [{"name": name} for name in names], "layout": {"showlegend": True}}
    bare = {"data": chart["data"], "layout": {}}
    high, low = (as_picture(each, "lag scatter", "a", "b", "c") for each in (chart, bare))
    room = high["layout"]["margin"]["t"] - low["layout"]["margin"]["t"]
    assert room == 7 + 19 * rows
    assert high["layout"]["height"] == low["layout"]["height"]
