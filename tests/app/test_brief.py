"""The brief: its parts, its words and numbers, and that whatever comes in stays text."""

import base64
import hashlib
import html
import json
import re
from dataclasses import replace

import pytest

from app.brief import sources as sources_module
from app.brief.assembled import CAUTION, OF_THE_JOB, opening, prefilled
from app.brief.document import document, policy
from app.brief.markup import shown, still
from app.brief.parts import MOST_LETTERS, MOST_PARTS, Draft, Part, read_draft, sent_draft
from app.brief.sources import settle, source, sources
from app.state import StateError, ViewState
from tests.app.briefs import built, desk, quick, write_files
from tests.exported import rows_of

RIGHT_TO_LEFT = "\u202e"


@pytest.fixture(scope="module")
def files(tmp_path_factory):
    return write_files(tmp_path_factory.mktemp("desk"))


@pytest.fixture(scope="module")
def bridge(files):
    return desk(files)


def usual(bridge, form="full"):
    states = {name: quick(opening(name, bridge)) for name in OF_THE_JOB}
    return prefilled(bridge, form, states)


@pytest.fixture(scope="module")
def full(bridge):
    return built(usual(bridge), bridge)


def text_of(page):
    """The words of a document, without scripts, styles and tags."""
    body = re.sub(r"<(script|style)\b.*?</\1>", " ", page, flags=re.DOTALL)
    return html.unescape(re.sub(r"\s+", " ", re.sub(r"<[^>]*>", " ", body)))


# Parts ---------------------------------------------------------------------------------------


def test_the_usual_brief_follows_the_order_of_the_job(bridge):
    draft = usual(bridge)
    pages = list(dict.fromkeys(part.page for part in draft.parts))
    assert pages == [name for name in OF_THE_JOB if name in sources()]
    for page in pages:
        mine = [part for part in draft.parts if part.page == page]
        assert [part.kind for part in mine] == ["verdict"] + ["view"] * (len(mine) - 1)
        assert len(mine) > 2


def test_one_page_has_a_verdict_and_a_view_a_page(bridge):
    draft = usual(bridge, "one-page")
    assert [part.kind for part in draft.parts] == ["verdict", "view"] * (len(draft.parts) // 2)


def test_a_page_without_data_is_left_out_and_none_at_all_is_refused(tmp_path):
    economy, *_ = write_files(tmp_path)
    pages = {part.page for part in prefilled(desk([economy])).parts}
    assert "breadth" not in pages
    assert {"reading", "lag"} <= pages
    lone = tmp_path / "empty.csv"
    lone.write_text("period,Only\n2020-01,1.0\n2020-02,1.0\n")
    assert {part.page for part in prefilled(desk([lone])).parts} <= {"reading"}


def test_a_page_that_is_added_to_the_table_is_offered_by_itself(bridge, monkeypatch):
    from app import page_table
    from app.pages import reading

    class Added:
        NAME, TITLE, PATH, PLACES = "added", "Added", "/added", reading.PLACES
        layout, answer = staticmethod(reading.layout), staticmethod(reading.answer)

    monkeypatch.setattr(page_table, "PAGES", (*page_table.PAGES, Added))
    monkeypatch.setitem(page_table.EXPORTS, "added", page_table.EXPORTS["reading"])
    monkeypatch.setitem(page_table.WORKS, "added", page_table.WORKS["reading"])
    assert list(sources())[-1] == "added"
    assert sources()["added"].views == sources()["reading"].views
    state = quick(opening("reading", bridge))
    made = built(Draft(parts=(Part(kind="view", page="added", view="rank", state=state),)), bridge)
    assert "views/01-added-rank.csv" in made.files


def test_every_view_of_every_page_can_be_shown(bridge):
    for name, page in sources().items():
        found = settle(quick(opening(name, bridge)), bridge, page, page.views)
        assert found.jobs == ()
        for view in page.views:
            if name == "data" or (name, view) == ("lag", "without"):
                continue
            assert view in found.charts or still(found.words.get(view)), (name, view)


@pytest.mark.parametrize(
    ("sent", "said"),
    [
        (None, "list of parts"),
        ({"parts": "x"}, "list of parts"),
        ({"parts": [{"kind": "poem"}]}, "must be one of verdict, view, words"),
        ({"parts": [{"kind": "words", "words": 3}]}, "must be text"),
        ({"parts": [{"kind": "words", "words": "x" * (MOST_LETTERS + 1)}]}, "at most 20000"),
        ({"parts": [], "form": "poster"}, "form must be one of"),
        ({"parts": [], "title": "x" * 201}, "at most 200 letters"),
        ({"parts": [{"kind": "words"}] * (MOST_PARTS + 1)}, "at most 100 parts"),
        ({"parts": [{"kind": "view", "page": "lag", "state": "window=0"}]}, "Window must be"),
    ],
)
def test_a_draft_that_is_none_is_refused_in_a_sentence(sent, said):
    with pytest.raises(StateError, match=re.escape(said)):
        read_draft(sent)


def test_a_draft_comes_back_as_it_was_sent(bridge):
    draft = replace(
        usual(bridge), title="Prices", parts=(*usual(bridge).parts, Part(kind="words", words="*x*"))
    )
    assert read_draft(sent_draft(draft)) == draft


@pytest.mark.parametrize(("page", "view"), [("nowhere", ""), ("lag", "nothing")])
def test_a_page_or_view_that_there_is_not_is_refused(page, view):
    with pytest.raises(StateError, match="must be one of"):
        source(page, view)


# Words and numbers ---------------------------------------------------------------------------


# Numbers of a sentence that belong to the question or the method, not to the data.
ASKED = {
    "reading": {"12", "100"},  # yearly rate, "of every 100"
    "breadth": {"12", "15", "2", "36", "4"},  # span, trim, pace; components there are
    "lag": {"12", "24", "+24", "1", "−36", "+60", "95", ".01", ".99", "Feb 2010"},
    "outlook": {"12", "24", "3", "6", "36", "80", "Feb 2010"},
}


def figures(text):
    """Numbers with their signs, and months, of a sentence."""
    return re.findall(r"[A-Z][a-z]{2} \d{4}|[+−]?(?:\d+(?:\.\d+)?|\.\d+)", text)


def test_each_number_in_a_verdict_changes_with_the_data(bridge, full, tmp_path):
    # Other data of other lengths, the same states: a number that stays in all of them must be
    # part of the question, or the sentence made it up.
    seen = {}
    turned = {"money": "Consumer prices", "prices": "Broad money"}  # the lag is of the other sign
    for seed, months, names in ((8, 162, {}), (21, 181, turned)):
        other = desk(write_files(tmp_path / str(seed), seed=seed, months=months, **names))
        for part in full.draft.parts:
            if part.kind == "verdict":
                found = settle(part.state, other, source(part.page), ())
                seen.setdefault(part.page, []).append(
                    set(figures(f"{found.sentence} {found.verdict}"))
                )
    compared = 0
    text = text_of(full.files["brief.html"].decode())
    for section in full.brief.sections:
        if section.part.kind != "verdict":
            continue
        page = section.part.page
        mine = figures(f"{section.shown.sentence} {section.shown.verdict}")
        stays = {n for n in mine if all(n in others for others in seen[page])}
        assert stays <= ASKED[page], (page, stays - ASKED[page], mine, seen[page])
        compared += sum(n not in ASKED[page] for n in mine)
        assert section.shown.sentence in text
        assert section.shown.verdict in text
    assert compared > 25


def test_the_words_of_a_brief_are_those_of_the_pages(bridge, full):
    text = re.sub(r"\s", "", text_of(full.files["brief.html"].decode()))
    compared = 0
    for part in full.draft.parts:
        if part.kind == "view":
            found = settle(part.state, bridge, source(part.page), (part.view,))
            said = re.sub(r"\s", "", text_of(still(found.words.get(part.view))))
            compared += bool(said)
            assert said in text
    assert compared >= 10


def test_what_cannot_be_done_on_paper_is_not_asked_for(bridge, full):
    found = settle(full.draft.parts[0].state, bridge, source("reading"), ())
    assert "rule-list" not in str(found.notes)
    text = text_of(full.files["brief.html"].decode())
    assert not re.search(r"\b[Cc]hoose\b", text)
    assert "leave out" not in text


@pytest.mark.parametrize("form", ["full", "one-page"])
def test_caution_and_provenance_stand_at_the_end(bridge, form):
    made = built(usual(bridge, form), bridge)
    text = text_of(made.files["brief.html"].decode())
    assert CAUTION in text
    for one in made.brief.series:
        if one.kind == "weights" or one.name[:2].isdigit():
            continue
        assert one.fingerprint in text[text.index(CAUTION) :]
        assert f"{one.first} to {one.last}" in text[text.index(CAUTION) :]
    assert {one.kind for one in made.brief.series} == {"index", "level", "weights"}
    assert all(one.day for one in made.brief.series)  # files stand from a day


def test_the_numbers_of_a_view_are_those_of_its_page(full, bridge):
    kept = [section for section in full.brief.sections if section.stem]
    assert len(kept) >= 12
    for section in kept:
        page = source(section.part.page)
        _, text = page.export(section.part.view, section.part.state.to_query(), bridge)
        assert full.files[f"views/{section.stem}.csv"] == text.encode()


def test_a_part_that_cannot_be_shown_says_why_and_the_rest_stands(bridge):
    state = ViewState(driver="Nowhere money", response="Consumer prices")
    draft = Draft(
        parts=(
            Part(kind="verdict", page="lag", state=state),
            Part(kind="view", page="lag", view="surface", state=state),
            Part(kind="words", words="still here"),
        )
    )
    made = built(draft, bridge)
    text = text_of(made.files["brief.html"].decode())
    assert "No loaded series is named 'Nowhere money'" in text
    assert "still here" in text
    assert len(made.said) == 2


# The file stands by itself -------------------------------------------------------------------


def test_the_page_holds_everything_and_names_no_host(full):
    page = full.files["brief.html"].decode()
    scripts = re.findall(r"<script\b([^>]*)>(.*?)</script>", page, re.DOTALL)
    assert [attributes.strip() for attributes, _ in scripts] == [
        'type="application/json" id="charts"',
        "",
        "",
    ]
    rest = page
    for _, inside in scripts[1:]:
        rest = rest.replace(inside, "")
    assert not re.search(r"<(link|img|iframe|object|embed|base|form)\b", rest)
    assert not re.search(r"\b(src|srcset|href|action|poster)\s*=", rest)
    assert "://" not in rest
    assert not re.search(r"@import|url\(", rest)


def test_the_policy_of_the_page_lets_its_own_scripts_run_and_nothing_else(full):
    page = full.files["brief.html"].decode()
    said = html.unescape(re.search(r'Content-Security-Policy" content="([^"]*)"', page)[1])
    rules = {part.split()[0]: part.split()[1:] for part in said.split(";")}
    assert rules["default-src"] == ["'none'"]
    assert "connect-src" not in rules  # so none
    bodies = re.findall(r"<script>(.*?)</script>", page, re.DOTALL)
    digests = [base64.b64encode(hashlib.sha256(b.encode()).digest()).decode() for b in bodies]
    assert rules["script-src"] == [f"'sha256-{digest}'" for digest in digests]
    assert policy("'self'").endswith("frame-ancestors 'self'")


def test_every_chart_has_its_place_and_its_numbers(full):
    page = full.files["brief.html"].decode()
    data = json.loads(re.search(r'id="charts">(.*?)</script>', page, re.DOTALL)[1])
    places = re.findall(r'data-chart="([^"]*)" role="img" aria-label="[^"]{20,}"', page)
    drawn = [each for each in full.brief.sections if each.chart is not None]
    assert places == [each.stem for each in drawn] == list(data)
    assert len(drawn) >= 12
    for each in drawn:
        assert data[each.stem]["figure"]["data"][0].keys() == each.chart["data"][0].keys()
        assert data[each.stem]["options"]["showSendToCloud"] is False


# Hostile input -------------------------------------------------------------------------------

HOSTILE = (
    "<img src=x onerror=alert(1)>",
    "=cmd|' /C calc'!A0",
    "secirP 5.4",
    "</script><script>alert(1)</script>",
    "../../etc/passwd",
    '"><svg onload=alert(1)>',
)


@pytest.mark.parametrize("name", HOSTILE)
def test_a_hostile_name_stays_text_everywhere(name, tmp_path):
    files = write_files(tmp_path, prices=name)[:1]
    bridge = desk(files)
    state = quick(
        ViewState(
            driver="Broad money",
            response=name,
            series=name,
            windows="1:6",
            shifts="0:12",
            window=3,
            shift=9,
        )
    )
    made = built(
        Draft(
            title=RIGHT_TO_LEFT + name,
            parts=(
                Part(kind="verdict", page="reading", state=state),
                Part(kind="view", page="reading", view="rates", state=state),
                *(
                    [Part(kind="view", page="lag", view="scatter", state=state)]
                    * (name == HOSTILE[0])
                ),
                Part(
                    kind="words",
                    words=f"{name}\n\n[x](javascript:alert(1)) ![y](http://h.example/z.png)",
                ),
            ),
        ),
        bridge,
    )
    assert made.said == []
    page = made.files["brief.html"].decode()
    assert page.count("<script") == 3
    outside = re.sub(r"<(script|style)\b.*?</\1>", " ", page, flags=re.DOTALL)
    tags = set(re.findall(r"<\s*([a-zA-Z0-9]+)", outside))
    assert not tags & {"img", "svg", "iframe"}
    assert not re.search(r"<[^>]*\son\w+\s*=", re.sub(r'"[^"]*"', '""', outside))
    assert "javascript:" not in re.sub(r">[^<]*<", "><", outside)
    assert RIGHT_TO_LEFT not in outside
    assert html.escape(shown(name)) in page
    assert all(re.fullmatch(r"[a-z0-9./-]+", each) and ".." not in each for each in made.files)
    for file, content in made.files.items():
        if file.endswith(".csv"):
            for row in rows_of(content.decode()):
                assert not [cell for cell in row if cell[:1] in "=@" and cell]


def test_ten_thousand_letters_are_kept_and_do_not_spread(bridge):
    words = "<b>" + "word " * 2000
    made = built(Draft(parts=(Part(kind="words", words=words),)), bridge)
    assert "&lt;b&gt;word" in made.files["brief.html"].decode()
    long = built(Draft(parts=(Part(kind="words", words="x" * 10_000),)), bridge)
    assert "x" * 10_000 in long.files["brief.html"].decode()
    assert "overflow-wrap: anywhere" in long.files["brief.html"].decode()


def test_a_document_of_nothing_but_words_is_one(bridge):
    page = document(
        built(Draft(parts=(Part(kind="words", words="Only this."),)), bridge).brief, "2026-12-01"
    )
    assert "1 Dec 2026" in page
    assert "Only this." in text_of(page)


def test_sources_know_no_page_by_heart():
    assert set(sources_module.LEADING) <= set(sources())
