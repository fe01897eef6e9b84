"""What the server answers: pages, questions, long work, exports; a traceback never."""

import csv
import io
from dataclasses import asdict

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app import server as server_module
from app.demo import demo_releases
from app.faults import SENTENCES
from app.server import PAGES, build_app
from app.state import ViewState
from app.workspace import Workspace
from tests.app.asking import opened, stored
from tests.app.economies import planted, workspace

pytestmark = pytest.mark.usefixtures("no_traceback")


def asked(client, state):
    """The answer to a question of the Lag page."""
    return client.post(
        "/_dash-update-component",
        json={
            "output": "lag-data.data",
            "outputs": {"id": "lag-data", "property": "data"},
            "inputs": [{"id": "lag-question", "property": "data", "value": "any"}],
            "state": [{"id": "lag-state", "property": "data", "value": state}],
            "changedPropIds": ["lag-question.data"],
        },
    )


def data_of(answer):
    assert answer.status_code == 200
    return answer.json["response"]["lag-data"]["data"]


# Pages ---------------------------------------------------------------------------------------


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.TITLE)
def test_each_page_answers(client, page):
    assert client.get(page.PATH).status_code == 200
    answer = opened(client, page.PATH)
    assert answer.status_code == 200
    assert answer.json["response"]["page-title"]["children"] == page.TITLE


def test_the_bare_address_opens_the_lag_page(client):
    assert opened(client, "/").json["response"]["page-title"]["children"] == "Lag"
    assert opened(client, None, None).json["response"]["page-title"]["children"] == "Lag"


@pytest.mark.parametrize("path", ["/nothing", "/lag/more", "/LAG", "/../etc/passwd", "/lag%00"])
def test_an_unknown_page_says_so_and_leads_back(client, path):
    answer = opened(client, path)
    assert answer.status_code == 200
    assert answer.json["response"]["page-title"]["children"] == "No such page"
    assert "'href': '/lag'" in str(answer.json)


@pytest.mark.parametrize(("path", "status"), [("/", 200), ("/lag", 200), ("/nowhere", 404)])
def test_an_address_without_a_page_says_so_in_its_status_too(client, path, status):
    answer = client.get(path)
    assert answer.status_code == status
    assert b"_dash-config" in answer.data


def test_the_lag_page_opens_on_the_address(client):
    answer = opened(client, "/lag", "?window=7&shift=-3&growth=percent&quantity=slope")
    data = stored(answer, "lag-data")
    expected = ViewState(window=7, shift=-3, growth="percent", quantity="slope")
    assert data["state"] == asdict(expected)
    assert stored(answer, "lag-state") == asdict(expected)
    assert data["notes"] == []


@pytest.mark.parametrize(
    ("query", "said"),
    [
        ("?window=abc", "Window must be a whole number from 1 to 60, but got 'abc'"),
        ("?growth=<script>", "Growth formula must be one of log, percent"),
        ("?first=1", "From must be a period such as"),
        ("?driver=%00", "Driver must be the name of a loaded series"),
        ("?" + "window=1&" * 3000 + "shift=abc", "Shift must be a whole number"),
    ],
)
def test_a_refused_part_of_the_address_is_named_on_the_page(client, query, said):
    data = stored(opened(client, "/lag", query), "lag-data")
    assert any(note.startswith(said) for note in data["notes"])


@settings(max_examples=25)
@given(st.text(max_size=300))
def test_no_address_breaks_the_lag_page(client, query):
    assert opened(client, "/lag", query).status_code == 200


# Questions -----------------------------------------------------------------------------------


def test_a_question_is_answered_with_numbers(client):
    state = asdict(ViewState(window=6, shift=12))
    data = data_of(asked(client, state))
    assert data["state"] == state
    assert len(data["driver"]["values"]) == len(data["response"]["values"]) == 801
    assert set(data["figures"]) == {"surface", "scatter", "overlay"}


USUAL = asdict(ViewState())


@pytest.mark.parametrize(
    "state",
    [
        None,
        [],
        "text",
        5,
        {"nonsense": 1},
        {**USUAL, "nonsense": 1},
        {**USUAL, "window": "12"},
        {**USUAL, "window": None},
        {**USUAL, "window": 10**400},
        {**USUAL, "growth": []},
        {**USUAL, "growth": {"a": 1}},
        {**USUAL, "driver": "Nope"},
        {**USUAL, "driver": "\ud800"},
        {**USUAL, "driver": ["Broad money"]},
        {**USUAL, "driver": "x" * 10_000},
        {**USUAL, "driver": "Consumer prices"},
        {**USUAL, "first": "2026-09"},
        {**USUAL, "windows": "50:40"},
    ],
)
def test_a_question_that_cannot_be_answered_gets_a_sentence(client, state):
    error = data_of(asked(client, state))["error"]
    assert 10 < len(error) < 300
    assert error.isprintable()
    for word in ("__init__", "NoneType", "unhashable", "argument", "Error"):
        assert word not in error


@pytest.mark.parametrize(
    "body",
    [
        *(b"", b"{", b"[]", b"null", b"5", b"{}", b'{"output":["lag-data.data"]}'),
        b'{"output":"nope.children","outputs":[],"inputs":[]}',
        b'{"output":"lag-data.data","outputs":[]}',
        b'{"output":"lag-data.data","outputs":[],"inputs":5}',
        b'{"output":"lag-data.data","outputs":[],"inputs":[],"state":[7]}',
    ],
)
def test_a_question_that_no_page_asks_is_refused(client, body):
    answer = client.post("/_dash-update-component", data=body, content_type="application/json")
    assert (answer.status_code, list(answer.json)) == (400, ["message"])
    assert answer.json["message"] == SENTENCES[400]


# Long work -----------------------------------------------------------------------------------


def test_long_work_comes_in_steps_until_it_is_done(own):
    client, _ = own
    query = "driver=Money&response=Prices&windows=1:3&shifts=-3:9&surrogates=39"
    seen = []
    while not seen or seen[-1]["done"] < seen[-1]["total"]:
        answer = client.get(f"/lag/work/search?{query}")
        assert answer.status_code == 200
        seen.append(answer.json)
        assert len(seen) < 100
    assert [step["done"] for step in seen] == sorted(step["done"] for step in seen)
    assert client.get(f"/lag/work/search?{query}").json["done"] == 1  # kept: nothing is left to do


@pytest.mark.parametrize(
    ("address", "status", "said"),
    [
        ("nope", 404, "there is no work named 'nope'"),
        ("search?window=abc", 422, "Window must be a whole number"),
        ("search?driver=Nope", 422, "no loaded series is named 'Nope'"),
        ("search?driver=%ff", 422, "no loaded series is named"),
        ("search?driver=Consumer+prices", 422, "must be two series"),
    ],
)
def test_work_that_cannot_be_done_is_refused_in_one_sentence(client, address, status, said):
    answer = client.get(f"/lag/work/{address}")
    assert answer.status_code == status
    assert said in answer.json["message"]
    assert "\n" not in answer.json["message"]


# Exports -------------------------------------------------------------------------------------


@pytest.mark.parametrize("view", ["surface", "scatter", "overlay"])
def test_an_export_is_a_file_to_keep(client, view):
    answer = client.get(f"/export/lag/{view}.csv?window=6&shift=-3&surrogates=39")
    assert answer.status_code == 200
    assert answer.mimetype == "text/csv"
    assert answer.content_type == "text/csv; charset=utf-8"
    name = f"{view}-broad-money-consumer-prices-window-6-shift-minus-3.csv"
    assert answer.headers["Content-Disposition"] == f'attachment; filename="{name}"'
    text = answer.get_data(as_text=True)
    assert "following Consumer prices by 3 months" in text
    body = text[text.index("\r\n", text.index("# note")) + 2 :]
    assert len({len(row) for row in csv.reader(io.StringIO(body, newline=""))}) == 1


@pytest.mark.parametrize(
    ("address", "said"),
    [
        ("nope.csv", "view must be one of surface, scatter, overlay, "),
        ("surface.csv?window=abc", "Window must be a whole number from 1 to 60, but got 'abc'"),
        ("surface.csv?driver=Nope", "no loaded series is named 'Nope'"),
        ("surface.csv?driver=%ff%fe", "no loaded series is named"),
        ("surface.csv?driver=x%0d%0aSet-Cookie:%20a=b", "Driver must be the name"),
        ("scatter.csv?driver=Consumer+prices", "driver and response must be two series"),
        ("scatter.csv?first=2050", "no value in the sample chosen"),
        ("<script>.csv", "view must be one of"),
    ],
)
def test_an_export_that_cannot_be_made_is_refused_in_one_sentence(client, address, said):
    answer = client.get(f"/export/lag/{address}")
    assert answer.status_code == 400
    assert answer.mimetype == "text/plain"
    text = answer.get_data(as_text=True)
    assert said in text
    assert text.count("\n") == 1
    assert "Set-Cookie" not in answer.headers


@pytest.mark.parametrize("page", ["nope", "..", "<b>"])
def test_a_page_without_exports_is_not_found(client, page):
    answer = client.get(f"/export/{page}/surface.csv")
    assert answer.status_code == 404
    assert answer.mimetype == "text/plain"


def test_an_address_with_raw_bytes_is_refused_and_not_an_accident(client):
    answer = client.get(
        "/export/lag/surface.csv", environ_overrides={"QUERY_STRING": "driver=\xff\xfe"}
    )
    assert answer.status_code == 400
    assert answer.get_data(as_text=True).count("\n") == 1
    assert "codec" not in answer.get_data(as_text=True)


# Several apps, and accidents -----------------------------------------------------------------


def test_two_apps_in_one_process_both_answer_from_their_own_data():
    first = build_app(workspace(*planted(100))).server.test_client()
    second = build_app(Workspace(demo_releases())).server.test_client()
    for _ in range(2):
        mine = stored(opened(first, "/lag"), "lag-data")
        other = stored(opened(second, "/lag"), "lag-data")
        assert (mine["state"]["driver"], len(mine["driver"]["values"])) == ("Money", 100)
        assert (other["state"]["driver"], len(other["driver"]["values"])) == ("Broad money", 801)
        assert first.get("/export/lag/scatter.csv?driver=Money&response=Prices").status_code == 200
        assert second.get("/export/lag/scatter.csv?driver=Money&response=Prices").status_code == 400


def test_an_accident_inside_is_told_without_its_inside(own, monkeypatch, caplog):
    client, _ = own

    def broken(*_args):
        raise KeyError("secret inside")

    monkeypatch.setitem(server_module.EXPORTS, "lag", broken)
    answer = client.get("/export/lag/surface.csv")
    assert answer.status_code == 500
    assert b"secret" not in answer.data
    assert answer.json["message"].startswith("something went wrong inside the program")
    assert "secret inside" in caplog.text  # the log has it
