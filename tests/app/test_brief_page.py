"""The Brief page and its requests, without a browser."""

import io
import zipfile

import pytest

from app.brief.parts import sent_draft
from app.pages import brief as page
from app.server import build_app
from app.state import ViewState
from tests.app.briefs import desk, quick, write_files

HOST = {"Host": "127.0.0.1"}


@pytest.fixture(scope="module")
def bridge(tmp_path_factory):
    return desk(write_files(tmp_path_factory.mktemp("desk")))


@pytest.fixture(scope="module")
def client(bridge):
    found = build_app(bridge.workspace).server.test_client()
    found.environ_base["HTTP_HOST"] = "127.0.0.1"
    found.environ_base["HTTP_SEC_FETCH_SITE"] = "same-origin"
    return found


DRAFT = {
    "title": "Test",
    "form": "full",
    "parts": [
        {"kind": "verdict", "page": "reading", "state": "draws=99"},
        {"kind": "view", "page": "reading", "view": "rank", "state": "draws=99"},
        {"kind": "words", "words": "**So**"},
    ],
}


def finished(client, **sent):
    """Take a draft through its steps; gives the token and every answer."""
    begun = client.post("/brief/draft", json={"draft": DRAFT, **sent})
    assert begun.status_code == 200, begun.json
    token, answers = begun.json["token"], []
    while not answers or answers[-1]["coming"]:
        answer = client.post(f"/brief/step/{token}")
        assert answer.status_code == 200, answer.json
        answers.append(answer.json)
    return token, answers


def test_the_page_offers_every_view_and_the_usual_drafts(bridge):
    found = page.offer(bridge)
    assert found["message"] == ""
    assert {"reading", "breadth", "lag"} <= found["pages"].keys()
    assert all(each["views"] for each in found["pages"].values())
    for form in ("full", "one-page"):
        assert found["usual"][form]["form"] == form
        assert found["usual"][form]["parts"]
    assert page.layout("", bridge).className == "brief-page"


def test_the_page_keeps_to_the_date_that_is_asked_for(bridge):
    found = page.offer(bridge, "2030-01-01")
    assert all("as_of=2030-01-01" in each["state"] for each in found["pages"].values())
    assert all("as_of=2030-01-01" in part["state"] for part in found["usual"]["full"]["parts"])


def test_with_nothing_loaded_that_fits_the_page_says_so(tmp_path):
    path = tmp_path / "flat.csv"
    path.write_text("period,Only\n2020-01,1\n2020-02,1\n2020-04,1\n")
    found = page.offer(desk([path]))
    assert found["message"] or found["usual"]["full"]["parts"]


def test_steps_lead_to_a_preview_with_its_own_policy(client):
    token, answers = finished(client)
    assert [each["done"] for each in answers] == list(range(1, len(answers) + 1))
    assert answers[-1]["done"] == answers[-1]["total"]
    assert answers[-1]["title"] == "Test"
    shown = client.get(f"/brief/preview/{token}.html")
    assert shown.status_code == 200
    policy = shown.headers["Content-Security-Policy"]
    assert "frame-ancestors 'self'" in policy
    assert "connect-src" not in policy
    assert "default-src 'none'" in policy
    assert b"<strong>So</strong>" in shown.data
    assert client.get("/brief").headers["Content-Security-Policy"].count("frame-src 'self'") == 1
    client.post(f"/brief/drop/{token}")
    assert client.get(f"/brief/preview/{token}.html").status_code == 404


def test_the_archive_holds_all_files(client, monkeypatch):
    monkeypatch.setenv("BROWSER_PATH", "nowhere")
    token, answers = finished(client, files=True)
    assert any("no Chromium" in said for said in answers[-1]["said"])
    answer = client.get(f"/brief/files/{token}.zip?name=../../Prices, June")
    assert answer.headers["Content-Disposition"] == 'attachment; filename="prices-june.zip"'
    with zipfile.ZipFile(io.BytesIO(answer.data)) as archive:
        assert sorted(archive.namelist()) == [
            "brief.html",
            "recipe.toml",
            "views/01-reading-rank.csv",
        ]
        recipe = archive.read("recipe.toml").decode()
    assert client.get(f"/brief/files/{token}.html").data.startswith(b"<!DOCTYPE html>")
    assert client.get(f"/brief/files/{token}.exe").status_code == 404
    back = client.post("/brief/recipe", data=recipe.encode())
    assert back.json["message"] == ""
    assert [part["kind"] for part in back.json["draft"]["parts"]] == ["verdict", "view", "words"]
    again, _ = finished(client, recipe=recipe)
    assert b"since last time" not in client.get(f"/brief/preview/{again}.html").data


@pytest.mark.parametrize(
    ("sent", "said"),
    [
        (None, "must send a brief"),
        ([], "must send a brief"),
        ({}, "list of parts"),
        ({"draft": DRAFT, "paper": "silk"}, "paper must be one of"),
        ({"draft": DRAFT, "recipe": "format = 99"}, "newer Pricewake"),
        (
            {"draft": {"parts": [{"kind": "view", "page": "x", "state": ""}]}},
            "a page must be one of",
        ),
    ],
)
def test_a_draft_that_cannot_be_made_is_refused_in_a_sentence(client, sent, said):
    answer = client.post("/brief/draft", json=sent)
    assert answer.status_code == 422
    assert said in answer.json["message"]


def test_another_site_cannot_set_it_to_work(client):
    answer = client.post(
        "/brief/draft", json={"draft": DRAFT}, headers={"Sec-Fetch-Site": "cross-site"}
    )
    assert answer.status_code == 403


def test_what_is_no_longer_held_is_told(client):
    for path in ("/brief/step/none", "/brief/drop/none"):
        answer = client.post(path)
        assert answer.status_code in (200, 404)
    assert "made again" in client.post("/brief/step/none").json["message"]
    assert client.get("/brief/files/none.zip").status_code == 404


def test_a_recipe_that_needs_other_series_is_opened_and_they_are_named(client):
    lines = ["format = 1", "[[part]]", 'kind = "words"', 'words = "x"', "[[series]]"]
    known = {"name": "Tin", "kind": "index", "first": "2020", "last": "2021", "fingerprint": "0"}
    known |= dict.fromkeys(("unit", "source", "file", "day"), "")
    recipe = "\n".join([*lines, *(f'{key} = "{value}"' for key, value in known.items())])
    answer = client.post("/brief/recipe", data=recipe.encode())
    assert answer.json["message"] == "The recipe needs series that are not loaded: Tin."
    assert answer.json["draft"]["parts"] == [{"kind": "words", "words": "x"}]
    assert client.post("/brief/recipe", data=b"\xff").status_code == 422


def test_states_that_go_into_a_draft_come_out_of_it(bridge):
    from app.brief.parts import read_draft

    state = quick(ViewState(window=3))
    sent = {
        "parts": [{"kind": "view", "page": "lag", "view": "scatter", "state": state.to_query()}]
    }
    assert sent_draft(read_draft(sent))["parts"] == sent["parts"]
