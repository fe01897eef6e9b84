"""Attacks on the door: strange names, other sites, missing and wrong tokens, too much, debug."""

import click
import pytest
from click.testing import CliRunner

from app import guard
from app.cli import pricewake
from app.faults import SENTENCES
from app.guard import LOOPBACK, MAX_WORDS, Door, new_token
from app.server import build_app
from tests.app.economies import planted, workspace

TOKEN = new_token()
AFAR = "192.0.2.7"  # an address for documentation, RFC 5737
AT = {"base_url": f"http://{AFAR}:8391"}
PERSON = {"Accept": "text/html,*/*"}
INSIDE = (b"Traceback", b'File "', b"werkzeug", b"/app/", b".py")


@pytest.fixture(scope="module")
def near():
    return build_app(workspace(*planted())).server


@pytest.fixture(scope="module")
def far():
    return build_app(workspace(*planted()), Door(frozenset({AFAR}), TOKEN)).server


# The token ------------------------------------------------------------------------------------


def test_beyond_loopback_a_door_needs_a_long_token():
    with pytest.raises(ValueError, match="token must be given when other machines are let in"):
        Door(frozenset({AFAR}))
    with pytest.raises(ValueError, match="token must have at least 43 letters, but got 5"):
        Door(frozenset({AFAR}), "short")
    assert Door().hosts == LOOPBACK


def test_tokens_are_long_and_never_the_same():
    made = {new_token() for _ in range(200)}
    assert len(made) == 200
    assert min(map(len, made)) >= 43


@pytest.mark.parametrize(
    "path", ["/", "/lag", "/alive", "/assets/page.css", "/_dash-layout", "/export/lag/surface.csv"]
)
@pytest.mark.parametrize(
    "query",
    ["", "?token=", "?token=wrong", f"?token={TOKEN[:-1]}"],
    ids=["none", "empty", "wrong", "short"],
)
def test_nothing_is_given_without_the_token(far, path, query):
    answer = far.test_client().get(path + query, headers=PERSON, **AT)
    assert answer.status_code == 401
    assert b"open the address that Pricewake printed" in answer.data
    assert TOKEN.encode() not in answer.data


@pytest.mark.parametrize("path", ["/_dash-update-component", "/intake", "/workspace/correct"])
def test_the_token_of_an_address_does_not_let_a_change_in(far, path):
    assert far.test_client().post(f"{path}?token={TOKEN}", json={}, **AT).status_code == 401


def test_the_token_moves_from_the_address_into_a_cookie(far):
    client = far.test_client()
    first = client.get(f"/lag?window=6&token={TOKEN}&shift=3", **AT)
    assert first.status_code == 303
    assert first.headers["Location"] == "/lag?window=6&shift=3"
    assert first.headers["Cache-Control"] == "no-store"
    cookie = first.headers["Set-Cookie"]
    assert "HttpOnly" in cookie
    assert "SameSite=Strict" in cookie
    assert client.get("/lag", **AT).status_code == 200
    assert client.post("/intake?name=a.csv", data=b"x", **AT).status_code == 422
    other_port = {"base_url": f"http://{AFAR}:9000"}
    assert client.get("/lag", **other_port).status_code == 401


@pytest.mark.parametrize("path", ["//evil.example/x", "/\\evil.example", "///evil.example"])
def test_the_way_to_the_cookie_never_leads_to_another_host(far, path):
    answer = far.test_client().get(f"{path}?token={TOKEN}", **AT)
    location = answer.headers.get("Location", "/")
    assert location.startswith("/")
    assert not location.startswith(("//", "/\\"))


def test_tokens_are_compared_in_constant_time(far, monkeypatch):
    seen = []
    real = guard.hmac.compare_digest
    monkeypatch.setattr(
        guard.hmac, "compare_digest", lambda a, b: seen.append((a, b)) or real(a, b)
    )
    far.test_client().get("/lag?token=gu%C3%A9ss", **AT)
    assert (b"gu\xc3\xa9ss", TOKEN.encode()) in seen


def test_loopback_needs_no_token_and_sets_no_cookie(near):
    answer = near.test_client().get("/lag")
    assert answer.status_code == 200
    assert "Set-Cookie" not in answer.headers


# The command ----------------------------------------------------------------------------------


class _Ended:
    def run(self):
        raise KeyboardInterrupt

    def close(self):
        pass


@pytest.fixture
def serve(monkeypatch, tmp_path):
    """Run the command up to where it would listen; gives what it says and where it listens."""
    import waitress.server

    heard = {}

    def listen(app, **where):
        heard.update(where)
        return _Ended()

    monkeypatch.setattr(waitress.server, "create_server", listen)

    def run(*flags):
        said = CliRunner().invoke(
            pricewake,
            ["serve", "--no-browser", "--workspace", str(tmp_path / "w.sqlite"), *flags],
            standalone_mode=False,
        )
        return said, heard

    return run


def test_the_command_listens_on_loopback_without_a_token(serve):
    said, heard = serve("--port", "18391")
    assert heard["host"] == "127.0.0.1"
    assert "token" not in said.output


def test_the_command_listens_beyond_loopback_only_with_flag_and_token(serve):
    # 127.0.0.2 is this machine, and not one of the names that need no token.
    said, heard = serve("--port", "18391", "--host", "127.0.0.2")
    assert heard["host"] == "127.0.0.2"
    assert "http://127.0.0.2:18391/lag?token=" in said.output
    assert len(said.output.split("token=")[1].split()[0]) >= 43
    assert "The address is the key" in said.output


@pytest.mark.parametrize("host", ["0.0.0.0", "::", "*", " "])
def test_the_command_never_listens_on_every_address(serve, host):
    said, heard = serve("--host", host)
    assert isinstance(said.exception, click.UsageError)
    assert "must be one name or address of this machine" in said.exception.message
    assert heard == {}


def test_an_address_of_another_machine_is_refused(serve):
    said, heard = serve("--host", AFAR)
    assert "must be a name or address of this machine" in said.exception.message
    assert heard == {}


# What is shut --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    "path", ["/_reload-hash", "/console", "/_debug", "/mcp", "/_mcp", "/_dash-ws", "/%2e%2e/etc"]
)
def test_nothing_for_developers_is_open(near, path):
    assert near.test_client().get(path).status_code == 404
    assert near.test_client().post(path, json={}).status_code in (404, 405)


def test_the_environment_does_not_open_what_the_program_shuts(monkeypatch):
    plain = build_app(workspace(*planted())).server.url_map.iter_rules()
    for name in ("DASH_MCP_ENABLED", "DASH_DEBUG", "DASH_UI", "DASH_HOT_RELOAD", "FLASK_DEBUG"):
        monkeypatch.setenv(name, "1")
    app = build_app(workspace(*planted()))
    assert {str(rule) for rule in app.server.url_map.iter_rules()} == {str(r) for r in plain}
    assert not app.server.debug


def test_more_than_a_page_can_mean_is_refused_before_it_is_read(near):
    body = b'{"inputs": "' + b"x" * MAX_WORDS + b'"}'
    answer = near.test_client().post(
        "/_dash-update-component", data=body, content_type="application/json"
    )
    assert answer.status_code == 413
    assert answer.json["message"] == "a request must be at most 2 MB, but this one is larger"


# What is said when something is wrong ---------------------------------------------------------


def refusals(client):
    yield client.get("/lag", base_url="http://evil.example:8391", headers=PERSON)
    yield client.get(
        "/lag", headers={**PERSON, "Sec-Fetch-Site": "cross-site"} | {"Sec-Fetch-Mode": "cors"}
    )
    yield client.get("/assets/nothing.js", headers=PERSON)
    yield client.get("/workspace/correct/../../etc/passwd", headers=PERSON)
    yield client.get("/_dash-component-suites/x/../../secret", headers=PERSON)
    yield client.put("/intake", headers=PERSON)
    yield client.post("/_dash-update-component", data=b"not json", headers=PERSON)


def test_a_refusal_says_one_sentence_and_nothing_of_the_inside(near):
    for answer in refusals(near.test_client()):
        assert answer.status_code >= 400
        assert not any(word in answer.data for word in INSIDE), answer.data


def test_a_person_gets_a_page_and_a_script_gets_json(near):
    client = near.test_client()
    page = client.get("/lag", base_url="http://evil.example", headers=PERSON)
    assert page.status_code == 421
    assert page.mimetype == "text/html"
    assert b"Pricewake answers only under the name" in page.data
    told = client.get("/lag", base_url="http://evil.example")
    assert told.json == {"message": SENTENCES[421]}


def test_an_accident_on_a_page_is_a_page_without_its_inside(near, monkeypatch):
    import app.server as server

    def broken(_bridge):
        raise RuntimeError("secret /home/someone/keys")

    monkeypatch.setattr(server, "shows_invented", broken)
    answer = near.test_client().get("/alive", headers=PERSON)
    assert answer.status_code == 500
    assert b"secret" not in answer.data
    assert b"something went wrong" in answer.data.lower()
