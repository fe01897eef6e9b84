"""The evidence on the Lag page: before, during and after the search, and where it is refused."""

import json
from dataclasses import asdict, replace

import numpy as np
import pytest

from app.figures import evidence as figures
from app.lag.cells import episode_code, influence
from app.lag.evidence import (
    completed,
    directions_work,
    opinions_work,
    search_work,
    shift_set_work,
    stability_work,
)
from app.lag.verdict import fragility, verdict
from app.lag.work import WORK
from app.pages.lag_evidence import FOLDS, answer
from app.pages.lag_words import MOST_EPISODES
from app.server import build_app
from app.words import p_words, percent, shift_words
from tests.app import evidence_cases as cases
from tests.app.components import nodes, words
from tests.app.economies import LAG, planted, workspace
from tests.app.evidence_cases import case, fresh, noise, rates

SHOWN = ("profile", "plane", "episodes")  # folds that are open
SMALL = replace(cases.SMALL, surrogates=300)  # two chunks


def taken(state, bridge, opened=()):
    """The answer by name: strip, verdict, each fold's words, data."""
    strip, said, *folds, data = answer(state, bridge, opened)
    assert len(folds) == len(FOLDS)
    json.dumps(data, allow_nan=False)
    return {"strip": strip, "verdict": said, **dict(zip(FOLDS, folds, strict=True)), "data": data}


def strip_values(found):
    """Name and value of each figure of the strip."""

    def first(part):
        inner = part.children[0] if isinstance(part.children, list) else part.children
        return inner if isinstance(inner, str) else inner.children

    return [
        tuple(first(part) for part in nodes(item) if type(part).__name__ in ("Dt", "Dd"))
        for item in found["strip"]
    ]


# Before, during, after -----------------------------------------------------------------------


def test_before_the_search_the_page_asks_for_it():
    bridge = fresh()
    found = taken(SMALL, bridge)
    data = found["data"]
    assert data["jobs"] == ["search"]
    assert (data["support"], data["set"]) == ([], [])
    assert data["figures"] == {}, "no fold is open"
    assert set(taken(SMALL, bridge, SHOWN)["data"]["figures"]) == {"plane", "episodes"}
    assert data["state"] == asdict(SMALL)
    assert found["verdict"].startswith("Not searched yet")
    assert ("search-adjusted p", "not searched") in strip_values(found)
    assert "once the search is done" in words(found["profile"])


def test_while_the_search_runs_nothing_is_said_of_it():
    bridge = fresh()
    before = taken(SMALL, bridge)
    assert bridge.jobs.step(search_work(SMALL, bridge)).result is None
    during = taken(SMALL, bridge)
    assert during["verdict"] == before["verdict"]
    assert during["data"] == before["data"]


def test_after_the_search_the_set_is_asked_for_where_it_holds():
    bridge = fresh()
    bridge.jobs.complete(search_work(SMALL, bridge))
    found = taken(SMALL, bridge, SHOWN)
    assert found["data"]["jobs"] == ["shift_set"]
    assert found["data"]["set"] == []
    assert "profile" not in found["data"]["figures"]
    assert len(found["data"]["support"]) == 2
    assert words(found["profile"]) == "Being worked out."
    bridge.jobs.complete(shift_set_work(SMALL, bridge))
    found = taken(SMALL, bridge, SHOWN)
    assert found["data"]["jobs"] == []
    assert "profile" in found["data"]["figures"]


def test_when_all_is_done_the_page_shows_what_python_completes():
    bridge = fresh()
    known, pair = completed(SMALL, bridge), bridge.pair(SMALL)
    found = taken(SMALL, bridge, SHOWN)
    data, search = found["data"], known.search
    assert data["jobs"] == []
    assert found["verdict"] == " ".join(verdict(known, pair, SMALL))
    assert data["set"] == known.shift_set.shifts.tolist()
    assert set(data["figures"]) == {"profile", "plane", "episodes"}
    assert data["support"] == [
        json.loads(trace.to_json()) for trace in figures.support_traces(search)
    ]
    assert data["figures"]["profile"] == json.loads(
        figures.shift_profile(known.shift_set, pair).to_json()
    )
    values = strip_values(found)
    assert values[:3] == [
        ("naive p", p_words(known.naive_p)),
        ("per-cell p", p_words(known.inference.p)),
        ("search-adjusted p", p_words(search.p)),
    ]
    worth = round(known.inference.effective_months)
    said = f"{known.inference.n} months behave like {worth} independent ones"
    assert values[3] == ("effective months", said)
    assert f"One-sided {p_words(search.p_one_sided)}." in words(found["strip"])
    moved = f"{search.p_error:.3f}".lstrip("0")
    assert f"Another seed moves p by about {moved}." in words(found["strip"])


def test_an_unrelated_pair_shows_no_set_and_asks_for_none():
    state, bridge, known = case("unrelated")
    found = taken(state, bridge, SHOWN)
    assert found["data"]["jobs"] == []
    assert found["data"]["set"] == []
    assert len(found["data"]["support"]) == 2
    assert "profile" not in found["data"]["figures"]
    assert f"It does not here (p {p_words(known.search.p)}), so none is shown." in words(
        found["profile"]
    )


@pytest.mark.parametrize("name", ["short", "identical"])
def test_a_pair_that_cannot_be_searched_gets_the_sentence_and_no_work(name):
    state, bridge, known = case(name)
    found = taken(state, bridge)
    assert found["data"]["jobs"] == []
    assert found["data"]["support"] == []
    assert found["verdict"].startswith(f"There is no search here: {known.refusal}.")
    assert words(found["profile"]) == f"There is no search here: {known.refusal}."
    assert ("search-adjusted p", "not searched") in strip_values(found)
    assert "directions" not in taken(state, bridge, ("opinions",))["data"]["jobs"]


def test_a_refused_shift_set_is_not_asked_for_again():
    driver, _ = noise(seed=8)
    bridge = fresh(*rates(driver, np.roll(driver, LAG)))
    bridge.jobs.complete(search_work(SMALL, bridge))
    assert taken(SMALL, bridge)["data"]["jobs"] == ["shift_set"]
    with pytest.raises(ValueError, match="must not follow the driver exactly"):
        bridge.jobs.step(shift_set_work(SMALL, bridge))
    found = taken(SMALL, bridge)
    assert found["data"]["jobs"] == []
    assert "There is no set here: the response must not follow" in words(found["profile"])


# Folds ---------------------------------------------------------------------------------------


def test_an_opened_fold_asks_for_what_it_needs():
    bridge = fresh()
    completed(SMALL, bridge)
    assert taken(SMALL, bridge, ("profile", "plane", "episodes"))["data"]["jobs"] == []
    opened = ("opinions", "stability")
    found = taken(SMALL, bridge, opened)
    assert found["data"]["jobs"] == ["directions", "opinions", "stability"]
    assert words(found["opinions"]) == words(found["stability"]) == "Being worked out."
    for kind in found["data"]["jobs"]:
        bridge.jobs.complete(WORK[kind](SMALL, bridge))
    found = taken(SMALL, bridge, opened)
    assert found["data"]["jobs"] == []
    assert {"opinions", "stability"} <= set(found["data"]["figures"])
    closed = taken(SMALL, bridge)
    assert not {"opinions", "stability"} & set(closed["data"]["figures"])


def test_the_words_of_the_opinions_are_their_numbers():
    bridge = fresh()
    asked = bridge.jobs.complete(opinions_work(SMALL, bridge))
    both = bridge.jobs.complete(directions_work(SMALL, bridge))
    said = words(taken(SMALL, bridge, ("opinions",))["opinions"])
    for opinion in asked.opinions:
        assert f"{opinion.method} {shift_words(opinion.shift, 'month')}" in said
    assert f"driver first, search-adjusted p {p_words(both.forward.p)}" in said
    assert f"response first, p {p_words(both.backward.p)}" in said
    assert "over shifts 1 to 12:" in said


def test_the_words_of_stability_are_its_numbers():
    bridge = fresh()
    stable = bridge.jobs.complete(stability_work(SMALL, bridge))
    said = words(taken(SMALL, bridge, ("stability",))["stability"])
    assert f"a slope over {stable.span} months" in said
    assert said.endswith(f"probability {p_words(stable.rolling_slope.p_constant)}.")


def test_work_that_is_refused_is_said_and_not_asked_for_again():
    bridge, state = fresh(lag=-4), replace(SMALL, shift=-4, shifts="-12:0")
    completed(state, bridge)
    assert taken(state, bridge, ("opinions",))["data"]["jobs"] == ["directions", "opinions"]
    for kind in ("directions", "opinions"):
        with pytest.raises(ValueError, match="no shift above 0"):
            bridge.jobs.step(WORK[kind](state, bridge))
    found = taken(state, bridge, ("opinions",))
    assert found["data"]["jobs"] == []
    assert words(found["opinions"]).startswith("Other methods cannot be asked here: the map has no")


@pytest.mark.parametrize("months", ["own", "same"])
def test_the_episodes_are_listed_by_weight_and_can_be_chosen(months):
    state, bridge, known = case("one event", months=months)
    pair = bridge.pair(state)
    ranked = sorted(known.influence.episodes, key=lambda e: -max(abs(e.share), e.weight))
    assert len(ranked) > 2
    found = taken(state, bridge)
    said = words(found["episodes"])
    assert said.startswith(fragility(known, pair, state))
    buttons = [part for part in nodes(found["episodes"])
               if type(part).__name__ == "Button"]  # fmt: skip
    codes = [episode_code(e, pair, state) for e in ranked[:MOST_EPISODES]]
    assert [getattr(b, "data-without") for b in buttons] == codes
    assert {getattr(b, "aria-pressed") for b in buttons} == {"false"}
    for episode in ranked[:MOST_EPISODES]:
        change = "too few left" if episode.too_few_left else percent(episode.change)
        assert f"{percent(episode.share)} {change} {p_words(episode.p_without)}" in said

    chosen = replace(state, without=codes[1])
    found = taken(chosen, bridge, SHOWN)
    buttons = [part for part in nodes(found["episodes"])
               if type(part).__name__ == "Button"]  # fmt: skip
    assert [getattr(b, "aria-pressed") for b in buttons].count("true") == 1
    assert getattr(buttons[1], "aria-pressed") == "true"
    assert getattr(buttons[1], "data-without") == "", "pressed again it comes back"
    assert "without" in found["data"]["figures"]
    assert found["data"]["state"]["without"] == codes[1]


def test_an_episode_of_another_cell_is_said_and_the_page_stays():
    bridge = fresh()
    found = taken(replace(SMALL, without="1990-01:1991-01"), bridge)
    assert "Without must name an episode of this cell" in words(found["episodes"])
    assert "without" not in found["data"]["figures"]
    assert found["verdict"]


def test_the_fold_of_the_plane_names_its_interval():
    bridge = fresh()
    judged = completed(SMALL, bridge).inference
    low, high = judged.slope_interval
    said = words(taken(SMALL, bridge)["plane"])
    assert f"Slope {judged.slope:.3f}, 95 % interval {low:.3f} to {high:.3f}" in said
    assert "Seasonal means are taken out first." in said


# Over the wire -------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def client():
    return build_app(workspace(*planted(80))).server.test_client()


def judge(client, state, opened=()):
    """The callback of the page, as the browser calls it."""
    outputs = [
        {"id": "lag-strip", "property": "children"},
        {"id": "lag-verdict", "property": "children"},
        *[{"id": f"lag-{name}-words", "property": "children"} for name in FOLDS],
        {"id": "lag-evidence", "property": "data"},
    ]
    reply = client.post(
        "/_dash-update-component",
        json={
            "output": ".." + "...".join(f"{o['id']}.{o['property']}" for o in outputs) + "..",
            "outputs": outputs,
            "inputs": [
                {"id": "lag-state", "property": "data", "value": state},
                {"id": "lag-tick", "property": "data", "value": 0},
                {"id": "lag-open", "property": "data", "value": list(opened)},
            ],
            "changedPropIds": ["lag-state.data"],
        },
    )
    assert reply.status_code == 200
    return reply.json["response"]


def test_the_page_gets_the_answer(client):
    state = replace(SMALL, windows="1:3", shifts="0:12")
    found = judge(client, asdict(state))
    assert found["lag-evidence"]["data"]["jobs"] == ["search"]
    assert found["lag-verdict"]["children"].startswith("Not searched yet")
    for done in (1, 2):
        progress = client.get(f"/lag/work/search?{state.to_query()}").json
        assert progress == {"done": done, "total": 2}
    found = judge(client, asdict(state))
    assert found["lag-evidence"]["data"]["jobs"] == ["shift_set"]
    assert found["lag-verdict"]["children"].startswith("Money has led Prices")


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"windows": "1:50", "shifts": "0:30", "window": 40, "shift": 30}, "24 pairs"),
        ({"driver": "Nobody"}, "No loaded series is named 'Nobody'"),
        ({"window": 700}, "Window must be a whole number from 1 to 60"),
        ({"stranger": 1}, "The page must send the fields of a view"),
    ],
)
def test_a_state_that_cannot_be_judged_gets_a_sentence_and_empty_places(client, changes, said):
    state = asdict(SMALL) | changes
    found = judge(client, state)
    sentence = found["lag-verdict"]["children"]
    assert said in sentence
    assert sentence.endswith(".")
    data = found["lag-evidence"]["data"]
    assert data["state"] == state
    assert (data["jobs"], data["support"], data["set"], data["figures"]) == ([], [], [], {})


def test_a_page_with_nothing_to_show_is_not_judged(client):
    found = judge(client, None)
    assert found["lag-verdict"]["children"] == ""
    assert found["lag-evidence"]["data"] is None


def test_every_episode_of_the_table_is_one_that_the_state_can_name():
    bridge = fresh()
    for episode in influence(SMALL, bridge).episodes:
        code = episode_code(episode, bridge.pair(SMALL), SMALL)
        assert replace(SMALL, without=code).to_query().endswith(code.replace(":", "%3A"))
