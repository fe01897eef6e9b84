"""Scripts and styles: kept by the browser for good, compressed, and the same when unpacked."""

import gzip
import re

import pytest

from app.server import build_app
from tests.app.economies import planted, workspace


@pytest.fixture(scope="module")
def client():
    return build_app(workspace(*planted(60))).server.test_client()


def fetched(client, address, encoding="gzip"):
    """Headers and bytes of an answer, closed."""
    with client.get(address, headers={"Accept-Encoding": encoding}) as reply:
        reply.get_data()
    return reply


@pytest.fixture(scope="module")
def files(client):
    page = client.get("/lag").get_data(as_text=True)
    found = re.findall(r'(?:src|href)="(/(?:assets|_dash-component-suites)/[^"]+)"', page)
    assert len(found) > 20
    return found


def test_every_file_of_the_page_is_kept_for_good_and_compressed(client, files):
    for address in files:
        reply = fetched(client, address)
        assert reply.headers["Cache-Control"] == "public, max-age=31536000, immutable", address
        assert reply.headers["Vary"] == "Accept-Encoding"
        assert reply.headers["Content-Encoding"] == "gzip", address
        assert int(reply.headers["Content-Length"]) == len(reply.data)
        assert gzip.decompress(reply.data) == fetched(client, address, "").data


def test_files_of_the_page_weigh_less_than_a_megabyte(client, files):
    weight = sum(len(fetched(client, address).data) for address in files)
    assert weight < 1_000_000


def test_a_new_stamp_is_not_answered_with_the_old_bytes(client, files):
    address = next(a for a in files if "/assets/pages.js" in a)
    packed = fetched(client, address).data
    again = fetched(client, address.split("?")[0] + "?m=1")
    assert gzip.decompress(again.data) == gzip.decompress(packed)


def test_an_address_without_a_stamp_is_asked_for_again(client):
    reply = fetched(client, "/assets/tokens.css")
    assert "immutable" not in reply.headers["Cache-Control"]
    assert "Content-Encoding" not in reply.headers


def test_pages_and_numbers_are_never_kept_for_good(client):
    for address in (
        "/lag",
        "/export/lag/overlay.csv?driver=Money&response=Prices&window=3&shift=0",
    ):
        reply = fetched(client, address)
        assert reply.status_code == 200
        assert "immutable" not in reply.headers.get("Cache-Control", "")


def test_who_does_not_take_gzip_gets_plain_bytes(client, files):
    reply = fetched(client, files[0], "identity")
    assert "Content-Encoding" not in reply.headers
    assert reply.status_code == 200


def test_a_file_that_is_not_there_is_not_kept(client):
    reply = fetched(client, "/assets/nothing.js?m=1")
    assert "immutable" not in reply.headers.get("Cache-Control", "")
    assert reply.data != b""
