"""Requests of the Data page: files kept or discarded, corrections, what is refused and how."""

import pytest

from app.demo import demo_releases
from app.desk import pending
from app.server import build_app
from app.workspace import Workspace
from tests.app.asking import GOOD, opened


@pytest.fixture
def own():
    here = Workspace(placeholder=demo_releases())
    return build_app(here).server.test_client(), here


def post(client, address, body):
    return client.post(address, json=body)


def test_a_previewed_file_is_kept_only_when_asked(own):
    client, here = own
    sent = client.post("/intake?preview=1&name=release.csv", data=GOOD)
    assert sent.status_code == 200
    assert sent.json["series"] == ["Money", "Prices"]
    assert here.as_of().placeholder
    kept = post(client, "/intake/keep", {"tokens": [sent.json["token"]], "day": "2024-03-12"})
    assert (kept.status_code, kept.json["kept"][0]["file"]) == (200, "release.csv")
    assert list(here.series) == ["Money", "Prices"]
    assert here.as_of().files[0].day == "2024-03-12"
    again = post(client, "/intake/keep", {"tokens": [sent.json["token"]]})
    assert again.status_code == 422
    assert "no longer held for a look; open it again" in again.json["message"]
    assert len(here.releases) == 1


def test_files_that_gave_way_are_counted_and_the_others_kept(own, monkeypatch):
    monkeypatch.setattr(pending, "MOST_FILES", 2)
    client, here = own
    tokens = [
        client.post(f"/intake?preview=1&name={k}.csv", data=GOOD).json["token"] for k in range(4)
    ]
    kept = post(client, "/intake/keep", {"tokens": tokens})
    assert (kept.status_code, kept.json["left"]) == (422, [])
    assert kept.json["message"] == "2 files are no longer held for a look; open them again"
    assert [each.name for each in here.releases] == ["2.csv", "3.csv"]


def test_a_discarded_file_is_gone(own):
    client, here = own
    token = client.post("/intake?preview=1&name=a.csv", data=GOOD).json["token"]
    assert post(client, "/intake/discard", {"tokens": [token]}).status_code == 200
    assert post(client, "/intake/keep", {"tokens": [token]}).status_code == 422
    assert here.as_of().placeholder


def test_several_files_are_kept_in_their_order(own):
    client, here = own
    tokens = [
        client.post(f"/intake?preview=1&name={name}.csv", data=GOOD).json["token"] for name in "ab"
    ]
    kept = post(client, "/intake/keep", {"tokens": tokens, "day": ""})
    assert [each["file"] for each in kept.json["kept"]] == ["a.csv", "b.csv"]
    assert [each.name for each in here.releases] == ["a.csv", "b.csv"]


@pytest.mark.parametrize("body", [None, [], {}, {"tokens": "x"}, {"tokens": [1]}, {"tokens": None}])
def test_keep_without_files_is_refused(own, body):
    client, here = own
    answer = post(client, "/intake/keep", body)
    assert (answer.status_code, here.as_of().placeholder) == (422, True)
    assert len(answer.json["message"]) > 10


@pytest.mark.parametrize("day", ["2024-02-30", "today", "'; --", "9" * 5000])
def test_a_day_that_is_none_keeps_nothing_and_the_file_stays_held(own, day):
    client, here = own
    token = client.post("/intake?preview=1&name=a.csv", data=GOOD).json["token"]
    answer = post(client, "/intake/keep", {"tokens": [token], "day": day})
    assert answer.status_code == 422
    assert "must be a date" in answer.json["message"]
    assert here.as_of().placeholder
    assert post(client, "/intake/keep", {"tokens": [token]}).status_code == 200


def test_corrections_and_files_out_of_view_over_the_wire(own):
    client, here = own
    client.post("/intake?name=release.csv", data=GOOD)
    sent = {"series": "Prices", "field": "kind", "value": "index"}
    assert post(client, "/workspace/correct", sent).status_code == 200
    assert here.named("Prices").kind == "index"
    assert post(client, "/workspace/hide", {"file": "release.csv"}).status_code == 200
    assert here.series == {}
    assert post(client, "/workspace/show", {"file": "release.csv"}).status_code == 200
    assert here.named("Prices").kind == "index"


@pytest.mark.parametrize(
    ("act", "body", "status", "said"),
    [
        ("correct", {"series": "Nope", "field": "unit", "value": "x"}, 422, "no loaded series"),
        ("correct", {"series": "Nope", "field": "unit"}, 422, "the page must say what"),
        ("correct", {"series": ["x"], "field": "unit", "value": "x"}, 422, "the page must say"),
        ("hide", {"file": "nope.csv"}, 422, "no file in view is named 'nope.csv'"),
        ("show", {}, 422, "the page must say what"),
        ("close", {}, 404, "there is nothing named 'close' to do"),
        ("__init__", {}, 404, "there is nothing named"),
    ],
)
def test_what_cannot_be_changed_is_refused_in_a_sentence(own, act, body, status, said):
    client, _ = own
    answer = post(client, f"/workspace/{act}", body)
    assert answer.status_code == status
    assert said in answer.json["message"]
    headers = {"Sec-Fetch-Site": "cross-site"}
    assert client.post(f"/workspace/{act}", json=body, headers=headers).status_code == 403


def test_a_workspace_that_cannot_be_read_is_told_on_the_page(own):
    client, here = own
    client.post("/intake?name=release.csv", data=GOOD)
    with here.store.change() as db:
        db.execute("UPDATE vintages SET content = x'0102'")
    said = "the vintage of 'Money' in the workspace is damaged"
    for path in ("/lag", "/data"):
        answer = opened(client, path)
        assert answer.status_code == 200
        assert path == "/data" or said in answer.get_data(as_text=True)
    table = client.get("/export/data/series.csv")
    assert (table.status_code, said in table.get_data(as_text=True)) == (400, True)
