"""The door of the server: who is answered, with which headers, and which files are given."""

import base64
import hashlib
import json
import re

import pytest

from app.places import bundled, software_version
from tests.app.asking import PAGE

pytestmark = pytest.mark.usefixtures("no_traceback")


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
    "path",
    [
        *("/lag", "/data", "/", "/nothing", "/assets/page.css", "/export/lag/nope.csv"),
        *("/intake", "/_dash-layout", "/alive"),
    ],
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
    assert answer.headers["X-Frame-Options"] == "DENY"
    assert answer.headers["Cross-Origin-Resource-Policy"] == "same-origin"
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


# Files ---------------------------------------------------------------------------------------


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
