"""Files that are sent to the server: taken in, refused in a sentence, made harmless."""

import io
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app import server as server_module
from app.demo import demo_releases
from app.server import build_app
from app.workspace import Workspace
from tests.app.asking import GOOD, opened, stored
from tests.app.economies import planted, workspace

pytestmark = pytest.mark.usefixtures("no_traceback")


def test_a_good_file_is_taken_in(own):
    client, here = own
    answer = client.post("/intake?name=release.csv", data=GOOD)
    assert answer.status_code == 200
    assert answer.json["file"] == "release.csv"
    assert answer.json["series"] == ["Money", "Prices"]
    assert here.named("Prices").values[0] == 200
    data = stored(opened(client, "/lag", "?driver=Money&response=Prices&window=1"), "lag-data")
    assert data["span"] == "Feb 2000 to Dec 2004"


def test_a_file_stands_in_for_the_invented_economy():
    here = Workspace(placeholder=demo_releases())
    client = build_app(here).server.test_client()
    client.post("/intake?name=release.csv", data=GOOD)
    assert list(here.series) == ["Money", "Prices"]
    assert stored(opened(client, "/lag"), "lag-state")["driver"] == "Money"


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"", "the file is empty"),
        (b"\x89PNG\r\n\x1a\n" + bytes(range(256)), "this is a PNG picture"),
        (bytes(1000), "zero bytes"),
        (b"PK\x03\x04xl/", "whole zip archive"),
        (b"<html><body>no</body></html>", "looks like HTML"),
        (b"month\n2020-01\n", "got one column"),
        (b"month,X\n2020-01,abc\n", "must be a number, but got 'abc'"),
        (b"a,b\nc,d\n", "bad.csv"),
    ],
)
def test_a_bad_file_is_refused_in_one_sentence_and_changes_nothing(own, content, said):
    client, here = own
    before = here.releases
    answer = client.post("/intake?name=bad.csv", data=content)
    assert answer.status_code == 422
    assert said in answer.json["message"]
    assert "\n" not in answer.json["message"]
    assert here.releases == before


def test_a_file_larger_than_allowed_is_refused_before_it_is_read(own):
    client, here = own
    before = here.releases
    limit = server_module.MAX_BYTES
    answer = client.post(
        "/intake?name=big.csv",
        input_stream=io.BytesIO(b"month,X\n"),
        environ_overrides={"CONTENT_LENGTH": str(limit + 1)},
    )
    assert answer.status_code == 413
    assert answer.json == {
        "message": f"a file must be at most {limit // 2**20} MB, but this one is larger"
    }
    assert here.releases == before


def test_a_body_longer_than_the_limit_is_refused():
    app = build_app(workspace(*planted()))
    app.server.config["MAX_CONTENT_LENGTH"] = 1000
    client = app.server.test_client()
    assert client.post("/intake?name=a.csv", data=GOOD[:500]).status_code == 200
    answer = client.post("/intake?name=a.csv", data=GOOD + b"\n" * 1000)
    assert answer.status_code == 413
    assert "message" in answer.json


@pytest.mark.parametrize(
    "name",
    [
        "../../etc/passwd",
        "C:\\x\\a.csv",
        "\x00",
        "a" * 9999,
        "\u202egpj.csv",
        "<img src=x>.csv",
        "",
    ],
)
def test_a_hostile_file_name_is_made_harmless(own, name):
    client, here = own
    answer = client.post("/intake", query_string={"name": name}, data=GOOD)
    assert answer.status_code == 200
    kept = here.releases[-1].name
    assert kept == answer.json["file"]
    assert kept.isprintable()
    assert not set(kept) & set("/\\")
    assert 0 < len(kept) <= 80
    assert opened(client, "/data").status_code == 200


@given(st.binary(max_size=400))
def test_no_bytes_break_intake(client, content):
    answer = client.post("/intake?name=any.csv", data=content)
    assert answer.status_code in (200, 422)
    if answer.status_code == 422:
        assert 10 < len(answer.json["message"]) < 1000


def test_intake_is_posted_to_and_nothing_else(client):
    assert client.get("/intake?name=a.csv").status_code in (404, 405)
    assert b"series" not in client.get("/intake?name=a.csv").data


def test_another_sheet_is_read_by_its_route(own):
    client, here = own
    book = (Path(__file__).resolve().parents[1] / "data" / "xlsx_second_sheet.xlsx").read_bytes()
    token = client.post("/intake?preview=1&name=b.xlsx", data=book).json["token"]
    other = client.post("/intake/sheet", json={"token": token, "sheet": "Quarterly"})
    assert (other.status_code, other.json["file"]) == (200, "b.xlsx, Quarterly")
    refused = client.post("/intake/sheet", json={"token": token, "sheet": "Contents"})
    assert refused.status_code == 422
    assert "the period must be a month, a quarter or a year" in refused.json["message"]
    for sent in ({"token": token}, {"token": 1, "sheet": "Data"}, {"token": "no", "sheet": "Data"}):
        assert client.post("/intake/sheet", json=sent).status_code == 422
    assert client.post("/intake/keep", json={"tokens": [token]}).json["kept"][0]["file"] == (
        "b.xlsx, Quarterly"
    )
    assert "b.xlsx, Quarterly" in [release.name for release in here.releases]
