"""The Outlook page without a browser: places, charts, words, statements, requests."""

import base64
import json
from dataclasses import replace

import numpy as np
import pytest

from app.compute import Bridge
from app.intake.reading import Release
from app.outlook.bridge import completed_outlook, outlook
from app.outlook.exports import VIEWS
from app.outlook.saying import say
from app.pages import outlook as page
from app.server import build_app
from app.state import ViewState
from tests.app.components import nodes, words
from tests.app.outlooks import QUICK, release, released

QUERY = f"driver=Money&response=Prices&{QUICK}"
STATE = ViewState.from_query(QUERY)


@pytest.fixture(scope="module")
def bridge():
    made = Bridge(released(150))
    completed_outlook(STATE, made)
    return made


@pytest.fixture(scope="module")
def answer(bridge):
    return page.answer(STATE, bridge)


def drawn(chart):
    return json.loads(chart) if isinstance(chart, str) else json.loads(chart.to_json())


def values(trace, axis="y"):
    """Numbers of a trace, which travel as base 64 or as a list."""
    found = trace[axis]
    if isinstance(found, dict):
        return np.frombuffer(base64.b64decode(found["bdata"]), dtype=found["dtype"])
    return np.array(found, dtype=float)


def test_the_page_has_a_place_for_every_view_and_every_word(bridge):
    parts = nodes(page.layout(f"?{QUERY}", bridge))
    ids = {getattr(part, "id", None) for part in parts}
    assert {f"outlook-{place}" for place in page.PLACES} <= ids
    assert {f"outlook-{view}" for view in VIEWS} <= ids
    assert {getattr(part, "data-saves", None) for part in parts} >= set(VIEWS)


def test_everything_is_drawn_once_the_past_has_been_gone_through(answer):
    assert set(answer.charts) == set(VIEWS) - {"drivers", "statements"}
    assert set(answer.words) == set(page.PLACES)
    assert not answer.jobs
    fresh = Bridge(released(150))
    early = page.answer(STATE, fresh)
    assert set(early.charts) == {"fan", "gap", "direct"}
    assert early.jobs == {"backtest": "Going through the past, date by date"}
    assert "Not backtested yet" in early.verdict


def test_the_charts_hold_the_numbers_of_the_results(bridge, answer):
    known = outlook(STATE, bridge)
    fan = {trace.get("name"): trace for trace in drawn(answer.charts["fan"])["data"]}
    np.testing.assert_allclose(values(fan["implied"])[1:], known.fan.centre)
    low, high = known.fan.band(0.95)
    band = next(trace for name, trace in fan.items() if name.startswith("95 %"))
    assert values(band)[1:7] == pytest.approx(high)
    assert values(band)[7:13] == pytest.approx(low[::-1])
    ratios = drawn(answer.charts["backtest"])["data"]
    np.testing.assert_allclose(values(ratios[0]), known.scores.ratio[0])
    np.testing.assert_allclose(values(drawn(answer.charts["through"])["data"][0]), known.gain[1])
    shares = drawn(answer.charts["coverage"])["data"]
    np.testing.assert_allclose(values(shares[1]), 100 * known.scores.share[1])


def test_the_words_have_the_numbers_of_the_results(bridge, answer):
    known = outlook(STATE, bridge)
    table = words(answer.words["backtest-words"])
    for h in (3, 6, 12, 24, 36):
        assert f"{known.scores.rmse[h - 1]:.2f}" in table
        assert f"{known.scores.mae[h - 1]:.2f}" in table
    assert "the scores flatter" in table
    assert f"{known.direct.with_driver[11]:.2f}" in words(answer.words["direct-words"])
    assert f"{known.gap.observed[-1]:.2f}" in words(answer.words["gap-words"])
    coverage = words(answer.words["coverage-words"])
    assert f"{known.scores.coverage[1][11].n}" in coverage


def test_nothing_has_been_kept_yet_and_the_page_says_what_that_is_for(answer):
    said = words(answer.words["statements-words"])
    assert said.startswith("No statement has been kept yet.")
    assert "none: it stands beside them" in words(answer.words["supersedes"])


def test_without_a_path_the_rest_of_the_page_stands(bridge):
    query = QUERY.replace("shift=6", "shift=0").replace("1%3A12", "-9%3A12")
    shown = page.answer(ViewState.from_query(query), bridge)
    assert set(shown.charts) == {"gap"}
    assert not shown.jobs
    assert "shift must be 1 or more" in shown.verdict
    for place in ("fan-words", "backtest-words", "direct-words"):
        assert "shift must be 1 or more" in words(shown.words[place])


def test_statements_are_listed_with_what_came_of_them():
    desk = released(140)
    bridge = Bridge(desk)
    completed_outlook(STATE, bridge)
    first = say(STATE, "Prices <b>ease</b>.", "", bridge)
    shown = page.answer(STATE, bridge)
    assert "No outcome yet." in words(shown.words["statements-words"])
    assert "statements" in shown.charts
    desk.add(release(143), "2020-02-15")
    second = say(STATE, "They do not.", str(first), bridge)
    desk.add(release(145), "2020-03-15")
    known = outlook(STATE, bridge)
    assert [one.score.known for one in known.judged] == [5, 2]
    assert known.running["Prices"].n.tolist() == [2, 2, 2]  # the superseded one does not count
    shown = page.answer(STATE, bridge)
    said = words(shown.words["statements-words"])
    assert "Prices <b>ease</b>." in said
    assert f"Superseded by statement {second}." in said
    assert f"Supersedes statement {first}." in said
    assert "2 outcomes so far" in said
    score = known.judged[0].score
    newest = "above" if score.error[4] > 0 else "below"
    assert f"{abs(score.error[4]):.2f} {newest} the path, rank {score.rank[4]:.0f} of 100" in said
    choices = words(shown.words["supersedes"])
    assert f"{second}, of" in choices
    assert f"{first}, of" not in choices
    traces = {t.get("name"): t for t in drawn(shown.charts["statements"])["data"]}
    stated = desk.statement_store
    assert stated is desk.store
    np.testing.assert_allclose(
        values(traces[f"statement {first}"]), known.judged[0].said.paths["yearly"].centre
    )


def test_earlier_statements_fold_away():
    desk = released(140)
    bridge = Bridge(desk)
    for number in range(8):
        say(STATE, f"View {number}.", "", bridge)
    listed = page.answer(STATE, bridge).words["statements-words"]
    fold = listed[-1]
    assert words(fold).startswith("2 earlier statements")
    assert "View 0." in words(fold)
    assert "View 2." not in words(fold)


def test_a_statement_whose_series_are_gone_is_shown_and_not_scored():
    desk = released(140)
    say(STATE, "Prices ease.", "", Bridge(desk))
    desk.hide("release.csv")
    desk.add(release(145, name="other.csv"), "2020-02-15")
    bridge = Bridge(desk)
    (one,) = outlook(STATE, bridge).judged
    assert one.score.known == 5
    money, prices = desk.releases[0].series
    desk.add(Release("other.csv", (money, replace(prices, name="Costs")), ()), "2020-03-15")
    state = ViewState.from_query(QUERY.replace("Prices", "Costs"))
    shown = page.answer(state, Bridge(desk))
    assert "Not scored: no loaded series is named 'Prices'" in words(
        shown.words["statements-words"]
    )


def test_as_of_a_past_date_only_statements_of_that_date_are_shown():
    desk = released(140)
    bridge = Bridge(desk)
    say(STATE, "Prices ease.", "", bridge)  # today, long after 2020
    past = ViewState.from_query(f"{QUERY}&as_of=2020-01-20")
    assert outlook(past, bridge).judged == ()


def test_a_statement_is_kept_by_a_request_and_refused_in_a_sentence():
    desk = released(140)
    client = build_app(desk).server.test_client()

    def post(**body):
        return client.post("/keep/say", json=body, headers={"Sec-Fetch-Site": "same-origin"})

    done = post(query=f"?{QUERY}", words="Prices ease.", supersedes="")
    assert (done.status_code, done.json["message"]) == (200, "Kept as statement 1.")
    for body, why in (
        ({"words": " "}, "must have words"),
        ({"words": "x", "supersedes": "9"}, "there is no number 9"),
        ({"words": "x", "query": f"?{QUERY}&last=2018-01"}, "must start from the newest print"),
        ({"words": "x", "query": f"?{QUERY.replace('shift=6', 'shift=0')}"}, "shift must be 1"),
        ({"words": "x", "query": "?driver=Nobody"}, "no loaded series"),
    ):
        refused = post(**{"query": f"?{QUERY}", "supersedes": "", **body})
        assert refused.status_code == 422
        assert why in refused.json["message"]
    with desk.store.look() as db:
        assert db.execute("SELECT COUNT(*) FROM statements").fetchone()[0] == 1


def test_the_long_work_is_asked_for_by_the_page(bridge):
    client = build_app(released(150)).server.test_client()
    done = client.get(f"/outlook/work/backtest?{QUERY}").json
    assert done["done"] == 1
    assert done["total"] > 5
    refused = client.get(f"/outlook/work/backtest?{QUERY.replace('shift=6', 'shift=0')}")
    assert refused.status_code == 422
    assert "shift must be 1 or more" in refused.json["message"]
    assert client.get(f"/outlook/work/nothing?{QUERY}").status_code == 404
