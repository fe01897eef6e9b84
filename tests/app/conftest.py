"""Fixtures that several checks of the app share."""

import pytest
from flask.testing import FlaskClient

from app.cli import main
from app.demo import demo_releases
from app.server import build_app
from app.workspace import Workspace
from tests.app.economies import planted, workspace


@pytest.fixture
def run(capsys, tmp_path, monkeypatch):
    """Run the command in an empty folder; gives status, standard output and standard error."""
    monkeypatch.chdir(tmp_path)

    def call(*words):
        with pytest.raises(SystemExit) as ended:
            main([str(word) for word in words])
        out, err = capsys.readouterr()
        return ended.value.code, out, err

    return call


@pytest.fixture
def no_traceback(monkeypatch):
    """Look at every answer of a server: none shows its inside, all carry the policy."""
    real = FlaskClient.open

    def watched(self, *args, **kwargs):
        answer = real(self, *args, buffered=True, **kwargs)
        assert b"Traceback" not in answer.data
        assert b'File "' not in answer.data
        assert b"werkzeug" not in answer.data.lower()
        assert "Content-Security-Policy" in answer.headers
        return answer

    monkeypatch.setattr(FlaskClient, "open", watched)


@pytest.fixture(scope="module")
def client():
    """A server that shows the invented economy."""
    return build_app(Workspace(placeholder=demo_releases())).server.test_client()


@pytest.fixture
def own():
    """A server of this test alone, with a workspace that may be changed."""
    here = workspace(*planted())
    return build_app(here).server.test_client(), here
