"""The scan against the truth of the thirty invented economies, and what it says of its misses."""

import numpy as np
import pytest

from analytics.panel import PairScan, panel_result
from app.compute import Bridge
from app.scan.bridge import question
from app.scan.words import missed_words, near_pairs, near_words
from app.state import ViewState
from tests.app.panels import SMALL, panel_workspace
from tests.bench import scan as bench

ASKED = question(ViewState(**SMALL), Bridge(panel_workspace({"Ardenquay": 1.0})))


def judged(p, errors=None):
    """A panel of as many pairs as p-values."""
    errors = [0.0] * len(p) if errors is None else errors
    return panel_result(
        [
            PairScan(
                economy=f"Land {i}",
                driver="M2",
                response="CPI",
                p_search=each,
                p_one_sided=each,
                p_error=error,
            )
            for i, (each, error) in enumerate(zip(p, errors, strict=True))
        ]
    )


def test_misses_and_false_alarms_are_named():
    found = judged([0.001, 0.6, 0.001, 0.9])
    named = bench.hits(found, {"Land 0", "Land 1"})
    assert named["Benjamini-Hochberg"] == named["Holm"] == (["Land 1"], ["Land 2"])
    assert len(bench.truth()) == 18
    assert bench.truth() == {plan.economy for plan in bench.PLANS if plan.slope}


def test_the_words_say_how_many_to_miss():
    p = [*[0.0005] * 10, *[0.2] * 4, *np.linspace(0.05, 1.0, 10)]
    (said,) = missed_words(judged(p), ASKED)
    # Of 24, five lie above a half: (1 + 5) / .5 = 12 unrelated, 12 related, 10 of them found.
    assert "about 12 of 24 pairs are related" in said
    assert "expect to miss about 2; of those that hold, 1 in 20 or fewer" in said
    (said,) = missed_words(judged([0.0005] * 24), ASKED)  # all found but for the cautious 1
    assert "no sign of related pairs beyond those that hold, which excludes none" in said
    assert missed_words(judged([0.0005] * 10), ASKED) == []  # too few to say


def test_pairs_that_another_seed_may_decide_otherwise_are_named_with_the_error_of_their_p():
    found = judged([0.001, 0.03, 0.2], [0.001, 0.004, 0.01])
    ((pair, p, error),) = near_pairs(found, "bh")
    assert (pair.economy, p) == ("Land 1", pytest.approx(0.045))
    assert error == pytest.approx(0.006)  # times 3 / 2, as p was
    (said,) = near_words(found, ASKED)
    assert "Land 1, M2 → CPI (p .045 ± .006)" in said
    assert near_words(judged([0.001, 0.02, 0.9], [0.001, 0.004, 0.01]), ASKED) == []


@pytest.mark.long
def test_the_bundled_panel_is_named_but_for_the_two_weakest():
    found = bench.panel_of(bench.bundled_panel(), {}, 2000)
    missed, false = bench.hits(found, bench.truth())["Benjamini-Hochberg"]
    assert (missed, false) == (["Gastrelune", "Ulmaverne"], [])
    assert [scan.economy for scan, _, _ in near_pairs(found, "bh")] == ["Belquoy", "Gastrelune"]
