"""The server: who is answered, with which headers, and that no body holds a traceback."""

import base64
import csv
import hashlib
import io
import json
import re
from dataclasses import asdict
from pathlib import Path

import pytest
from flask.testing import FlaskClient
from hypothesis import given, settings
from hypothesis import strategies as st

from app import server as server_module
from app.demo import demo_releases
from app.places import bundled, software_version
from app.server import PAGES, build_app
from app.state import ViewState
from app.workspace import Workspace
from tests.app.economies import planted, workspace

PAGE = {
    "output": "..page.children...page-title.children..",
    "outputs": [
        {"id": "page", "property": "children"},
        {"id": "page-title", "property": "children"},
    ],
}


@pytest.fixture(scope="module")
def client():
    return build_app(Workspace(placeholder=demo_releases())).server.test_client()


@pytest.fixture
def own():
    """A server of this test alone, with a workspace that may be changed."""
    here = workspace(*planted())
    return build_app(here).server.test_client(), here


@pytest.fixture(autouse=True)
def no_traceback(monkeypatch):
    """Every answer given in this file is looked at."""
    real = FlaskClient.open

    def watched(self, *args, **kwargs):
        answer = real(self, *args, buffered=True, **kwargs)
        assert b"Traceback" not in answer.data
        assert b'File "' not in answer.data
        assert b"werkzeug" not in answer.data.lower()
        assert "Content-Security-Policy" in answer.headers
        return answer

    monkeypatch.setattr(FlaskClient, "open", watched)


def opened(client, path, query=""):
    """The page for an address, as the browser asks for it."""
    return client.post(
        "/_dash-update-component",
        json={
            **PAGE,
            "inputs": [
                {"id": "address", "property": "pathname", "value": path},
                {"id": "address", "property": "search", "value": query},
            ],
            "changedPropIds": ["address.pathname", "address.search"],
        },
    )


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


def stored(answer, name):
    """What a dcc.Store of an opened page holds."""
    found = []

    def walk(node):
        if isinstance(node, dict):
            if node.get("id") == name:
                found.append(node["data"])
            for child in node.values():
                walk(child)
        elif isinstance(node, list):
            for child in node:
                walk(child)

    walk(answer.json)
    return found[0]


# Who is answered -----------------------------------------------------------------------------


@pytest.mark.parametrize(
    "host", ["localhost", "127.0.0.1", "127.0.0.1:8391", "localhost:1", "[::1]", "[::1]:8391"]
)
def test_this_machine_is_answered(client, host):
    assert client.get("/lag", headers={"Host": host}).status_code == 200


@pytest.mark.parametrize(
    "host",
    [
        "evil.example",
        "localhost.evil.example",
        "127.0.0.1.evil.example",
        "localhost@evil.example",
        "192.168.0.7",
        "0.0.0.0",
        "[::1",
        "[::2]",
        "::1",
        "",
        "x" * 5000,
        "127.0.0.1:8391@evil.example",
        "2130706433",
    ],
)
@pytest.mark.parametrize("path", ["/lag", "/export/lag/surface.csv", "/assets/tokens.css"])
def test_another_host_is_refused(client, host, path):
    answer = client.get(path, headers={"Host": host})
    assert answer.status_code in (400, 421)
    assert b"Broad" not in answer.data


def test_a_strange_name_of_this_machine_is_refused_with_421(client):
    assert client.get("/lag", headers={"Host": "evil.example"}).status_code == 421
    assert client.post("/intake", headers={"Host": "evil.example"}).status_code == 421


@pytest.mark.parametrize("path", ["/intake?name=a.csv", "/_dash-update-component"])
@pytest.mark.parametrize(
    "headers",
    [
        {"Sec-Fetch-Site": "cross-site"},
        {"Sec-Fetch-Site": "same-site"},
        {"Sec-Fetch-Site": "none"},
        {"Origin": "http://evil.example"},
        {"Origin": "http://localhost.evil.example"},
        {"Origin": "http://localhost:9"},  # another program of this machine
        {"Origin": "null"},
        {"Origin": "http://localhost", "Sec-Fetch-Site": "cross-site"},
    ],
)
def test_a_request_from_another_site_changes_nothing(own, path, headers):
    client, here = own
    before = here.releases
    answer = client.post(path, data=b"month,X\n2020-01,1\n", headers=headers)
    assert answer.status_code == 403
    assert here.releases == before


@pytest.mark.parametrize("method", ["put", "delete", "patch"])
def test_other_methods_from_another_site_are_refused_too(client, method):
    answer = getattr(client, method)("/intake", headers={"Sec-Fetch-Site": "cross-site"})
    assert answer.status_code == 403
    assert getattr(client, method)("/intake").status_code == 405


@pytest.mark.parametrize("path", ["/lag/work/search", "/export/lag/surface.csv", "/lag"])
@pytest.mark.parametrize("site", ["cross-site", "same-site"])
def test_another_site_may_link_here_but_not_fetch(client, path, site):
    for mode in ("no-cors", "cors", "same-origin"):
        headers = {"Sec-Fetch-Site": site, "Sec-Fetch-Mode": mode}
        assert client.get(path, headers=headers).status_code == 403
    headers = {"Sec-Fetch-Site": site, "Sec-Fetch-Mode": "navigate"}
    assert client.get("/lag?window=7", headers=headers).status_code == 200


def test_a_request_from_the_page_itself_is_answered(own):
    client, here = own
    headers = {"Origin": "http://localhost", "Sec-Fetch-Site": "same-origin"}
    answer = client.post("/intake?name=a.csv", data=b"month,X\n2020-01,1\n", headers=headers)
    assert answer.status_code == 200
    assert "X" in here.series


def test_a_form_of_another_site_cannot_call_a_callback(client):
    # What a form can send without asking first: text/plain.
    answer = client.post(
        "/_dash-update-component", data=json.dumps(PAGE), content_type="text/plain"
    )
    assert answer.status_code == 415


# Headers -------------------------------------------------------------------------------------


def directives(answer):
    policy = answer.headers["Content-Security-Policy"]
    return {part.split()[0]: part.split()[1:] for part in policy.split(";") if part.strip()}


@pytest.mark.parametrize(
    "path", ["/lag", "/data", "/", "/nothing", "/assets/page.css", "/export/lag/nope.csv"]
)
def test_every_answer_carries_the_policy(client, path):
    answer = client.get(path)
    policy = directives(answer)
    text = answer.headers["Content-Security-Policy"]
    assert policy["default-src"] == ["'none'"]
    assert policy["connect-src"] == ["'self'"]
    assert policy["frame-ancestors"] == ["'none'"]
    assert policy["form-action"] == ["'none'"]
    assert policy["base-uri"] == ["'none'"]
    assert "unsafe-eval" not in text
    assert "http" not in text
    assert "*" not in text
    assert "'unsafe-inline'" not in policy["script-src"]
    assert all(
        source == "'self'" or source.startswith("'sha256-") for source in policy["script-src"]
    )
    assert answer.headers["X-Content-Type-Options"] == "nosniff"
    assert answer.headers["Referrer-Policy"] == "no-referrer"
    assert answer.headers["X-Pricewake"] == software_version()
    assert "Access-Control-Allow-Origin" not in answer.headers


def test_every_script_of_the_page_is_allowed_by_the_policy(client):
    answer = client.get("/lag")
    allowed = directives(answer)["script-src"]
    page = answer.data.decode()
    inline = re.findall(r"<script(?![^>]*\bsrc=)([^>]*)>(.*?)</script>", page, re.DOTALL)
    run = [body for attributes, body in inline if "application/json" not in attributes]
    assert run
    for body in run:
        digest = base64.b64encode(hashlib.sha256(body.encode()).digest()).decode()
        assert f"'sha256-{digest}'" in allowed
    sources = re.findall(r'<script[^>]*\bsrc="([^"]+)"', page)
    assert sources
    assert all(source.startswith("/") and not source.startswith("//") for source in sources)
    for source in sources:
        assert client.get(source).status_code == 200


def test_pages_load_nothing_from_elsewhere(client):
    page = client.get("/lag").data.decode()
    assert re.findall(r'(?:src|href)="(?:https?:)?//', page) == []


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
    [b"", b"{", b"[]", b"null", b"5", b'{"output":"nope.children","outputs":[],"inputs":[]}'],
)
def test_a_broken_callback_request_is_no_disaster(client, body):
    answer = client.post("/_dash-update-component", data=body, content_type="application/json")
    assert answer.status_code in (200, 204, 400, 500)
    assert len(answer.data) < 1000


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
    assert answer.mimetype == "text/plain" or b"<b>" not in answer.data


def test_an_address_with_raw_bytes_is_refused_and_not_an_accident(client):
    answer = client.get(
        "/export/lag/surface.csv", environ_overrides={"QUERY_STRING": "driver=\xff\xfe"}
    )
    assert answer.status_code == 400
    assert answer.get_data(as_text=True).count("\n") == 1
    assert "codec" not in answer.get_data(as_text=True)


# Intake --------------------------------------------------------------------------------------

GOOD = b"month,Money,Prices\n" + b"".join(
    b"%d-%02d,%d,%d\n" % (2000 + i // 12, i % 12 + 1, 100 + i, 200 + i * i) for i in range(60)
)


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


# Several apps and the files ------------------------------------------------------------------


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


@pytest.mark.parametrize(
    "path",
    [
        "/assets/../pyproject.toml",
        "/assets/%2e%2e/pyproject.toml",
        "/assets/..%2fpyproject.toml",
        "/assets/..%5cpyproject.toml",
        "/assets/....//pyproject.toml",
        "/assets//etc/passwd",
        "/assets/%2fetc/passwd",
        "/assets/../app/server.py",
        "/_dash-component-suites/dash/../../app/server.py",
        "/export/lag/..%2f..%2fpyproject.toml.csv",
    ],
)
def test_no_file_outside_the_assets_is_given(client, path):
    answer = client.get(path)
    assert b"build-system" not in answer.data
    assert b"root:" not in answer.data
    assert b"def build_app" not in answer.data


def test_the_assets_are_given(client):
    for file in bundled("assets").rglob("*"):
        if file.is_file():
            path = file.relative_to(bundled("assets")).as_posix()
            answer = client.get(f"/assets/{path}")
            assert (answer.status_code, answer.data) == (200, file.read_bytes())
    assert client.get("/assets/nope.css").status_code == 404


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
