"""The program that damages files: it finds what it looks for, and a short run finds nothing."""

import time
from collections import Counter

import pytest

from app.intake.reading import IntakeError, Problem, Release
from tests.bench import fuzz


def test_a_short_run_gives_releases_and_sentences_alone() -> None:
    counts = Counter((kind, fuzz.outcome(data)) for kind, data in fuzz.files(640, seed=3))
    assert {what for _, what in counts} <= set(fuzz.GOOD)
    for kind in fuzz.seeds():  # files are damaged, and not all beyond reading
        assert counts[kind, "refused"] >= 5
        assert counts[kind, "read"] + counts[kind, "read, with errors"] >= 5


@pytest.mark.parametrize(
    ("answer", "what"),
    [
        (KeyError("x"), "another exception"),
        (MemoryError(), "another exception"),
        (IntakeError(Problem("error", "fuzz", None, None, "a\nb")), "no sentence"),
        (IntakeError(Problem("error", "other", None, None, "a")), "no sentence"),
        (IntakeError(Problem("error", "fuzz", None, None, "a")), "refused"),
        (Release("fuzz", (), ()), "nothing read and nothing said"),
    ],
)
def test_every_fault_would_be_seen(
    monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str], answer: object, what: str
) -> None:
    def read(*_: object) -> object:
        if isinstance(answer, BaseException):
            raise answer
        return answer

    monkeypatch.setattr(fuzz, "read_release", read)
    assert fuzz.outcome(b"") == what
    capfd.readouterr()


def test_a_hang_would_be_seen(monkeypatch: pytest.MonkeyPatch) -> None:
    def slow(*_: object) -> None:
        try:
            while True:
                time.process_time()
        except Exception:
            raise AssertionError("taken for damage") from None

    monkeypatch.setattr(fuzz, "read_release", slow)
    monkeypatch.setattr(fuzz, "HANG", 0.05)
    before = fuzz.signal.signal(fuzz.signal.SIGPROF, fuzz._hang)
    try:
        assert fuzz.outcome(b"") == "hang"
    finally:
        fuzz.signal.signal(fuzz.signal.SIGPROF, before)


def test_the_same_seed_makes_the_same_files() -> None:
    first, second = (list(fuzz.files(60, seed=5)) for _ in range(2))
    texts = [place for place, (kind, _) in enumerate(first) if kind not in ("workbook", "zip")]
    assert [first[place] for place in texts] == [second[place] for place in texts]
