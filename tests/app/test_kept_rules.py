"""Alert rules in a workspace: kept, taken away, remembered, carried out and back."""

import json
import sqlite3
from functools import partial

import pytest

from app.kept_rules import MOST, drop_rule, keep_rule, rule_lines, rules_in_force
from app.migrations import APPLICATION_ID, MIGRATIONS
from app.reading.alerts import DEFAULT_RULES
from app.server import build_app
from app.store import Store
from app.workspace import Workspace
from app.workspace_folder import export_folder, import_folder
from tests.app.threads import at_once

OWN = "rate_12m above 3"


def test_a_workspace_has_the_usual_rules_until_something_is_said_of_them():
    store = Store()
    assert rule_lines(store) == DEFAULT_RULES
    keep_rule(store, "  rate_12m   above  3.0 ")
    assert rule_lines(store) == (*DEFAULT_RULES, OWN)
    drop_rule(store, DEFAULT_RULES[0])
    assert rule_lines(store) == (*DEFAULT_RULES[1:], OWN)
    drop_rule(store, OWN)
    keep_rule(store, DEFAULT_RULES[0])
    assert rule_lines(store) == DEFAULT_RULES


def test_all_rules_can_be_taken_away():
    store = Store()
    for line in DEFAULT_RULES:
        drop_rule(store, line)
    assert rule_lines(store) == ()
    assert rules_in_force(store) == ((), ())


def test_what_is_no_rule_or_not_there_is_refused():
    store = Store()
    with pytest.raises(ValueError, match="must read like"):
        keep_rule(store, "wages up 3")
    with pytest.raises(ValueError, match="must be one that is kept"):
        drop_rule(store, OWN)
    for limit in range(MOST - len(DEFAULT_RULES)):
        keep_rule(store, f"rate_12m above {limit + 10}")
    with pytest.raises(ValueError, match=f"at most {MOST} alert rules"):
        keep_rule(store, OWN)
    assert keep_rule(store, "rate_12m above 10") == "rate_12m above 10"  # there already


def test_rules_are_still_there_when_the_file_is_opened_again(tmp_path):
    store = Store(tmp_path / "w.sqlite")
    keep_rule(store, OWN)
    store.close()
    again = Store(tmp_path / "w.sqlite")
    assert rule_lines(again)[-1] == OWN
    again.close()


def test_a_workspace_from_before_there_were_rules_is_brought_up_to_date(tmp_path):
    path = tmp_path / "old.sqlite"
    old = sqlite3.connect(path)
    old.executescript(MIGRATIONS[0])
    old.execute("INSERT INTO statements VALUES (1, 'at', '2024-03-12', 's', '', 'prices rise')")
    old.execute(f"PRAGMA application_id = {APPLICATION_ID}")
    old.execute("PRAGMA user_version = 1")
    old.commit()
    old.close()
    store = Store(path)
    assert rule_lines(store) == DEFAULT_RULES
    keep_rule(store, OWN)
    with store.look() as db:
        assert db.execute("SELECT content FROM statements").fetchone()[0] == "prices rise"
    store.close()


def test_two_tabs_that_change_rules_at_once_lose_nothing(tmp_path):
    path = tmp_path / "w.sqlite"
    tabs = [Store(path), Store(path)]

    def fill(store, start):
        for limit in range(start, start + 12):
            keep_rule(store, f"rate_12m above {limit}")
            if limit % 3 == 0:
                drop_rule(store, f"rate_12m above {limit}")

    starts = (20, 120)
    done = at_once(*(partial(fill, *each) for each in zip(tabs, starts, strict=True)))
    assert done == [None, None]
    wanted = {
        f"rate_12m above {limit}"
        for start in starts
        for limit in range(start, start + 12)
        if limit % 3
    }
    assert set(rule_lines(tabs[0])) - set(DEFAULT_RULES) == wanted
    for store in tabs:
        store.close()


def test_rules_make_the_round_trip_through_a_folder(tmp_path):
    here, there = Store(), Store()
    keep_rule(here, OWN)
    drop_rule(here, DEFAULT_RULES[1])
    export_folder(here, tmp_path / "out")
    import_folder(tmp_path / "out", there)
    assert rule_lines(there) == rule_lines(here)


def test_an_imported_line_that_is_no_rule_is_named_and_left_out(tmp_path):
    store = Store()
    with store.change() as db:
        db.execute("INSERT INTO rules VALUES ('wages above 3', 1, 'now')")
    rules, refused = rules_in_force(store)
    assert [rule.text for rule in rules] == list(DEFAULT_RULES)
    assert len(refused) == 1
    assert "wages" in refused[0]


def test_the_page_keeps_rules_by_a_request():
    desk = Workspace()
    client = build_app(desk).server.test_client()

    def post(act, **body):
        return client.post(f"/keep/{act}", json=body, headers={"Sec-Fetch-Site": "same-origin"})

    answer = post("keep-rule", rule="rate_12m above 3")
    assert (answer.status_code, answer.json["message"]) == (200, "Kept: rate_12m above 3.")
    assert rule_lines(desk.store)[-1] == OWN
    assert post("keep-rule", rule="soon").status_code == 422
    assert post("keep-rule").status_code == 422
    assert post("keep-nothing", rule="x").status_code == 404
    assert post("drop-rule", rule=OWN).status_code == 200
    assert rule_lines(desk.store) == DEFAULT_RULES


def test_the_command_lists_adds_and_removes_rules_and_reading_uses_them(tmp_path, run):
    file = tmp_path / "prices.csv"
    values = [100 * 1.004**i for i in range(48)]
    rows = [f"{2020 + i // 12}-{i % 12 + 1:02d},{v!r}" for i, v in enumerate(values)]
    file.write_text("\n".join(["period,Prices", *rows]) + "\n")
    kept = str(tmp_path / "w.sqlite")
    code, out, err = run("workspace", "alerts", "--workspace", kept)
    assert code == 2
    assert "there is no workspace at" in err
    code, out, err = run("workspace", "alerts", "--add", OWN, "--workspace", kept)
    assert (code, out.splitlines()) == (0, [*DEFAULT_RULES, OWN])
    arguments = ["reading", str(file), "--series", "Prices", "--json"]
    code, out, err = run(*arguments, "--workspace", kept)  # 4.9 percent over 12 months
    assert code == 1
    assert [alert["rule"] for alert in json.loads(out)["alerts"]] == [OWN]
    assert run(*arguments)[0] == 0
    assert run(*arguments, "--workspace", kept, "--alert", "rate_12m above 6")[0] == 0
    assert run("workspace", "alerts", "--remove", OWN, "--workspace", kept)[0] == 0
    assert run(*arguments, "--workspace", kept)[0] == 0
    code, out, err = run("workspace", "alerts", "--remove", OWN, "--workspace", kept)
    assert code == 2
