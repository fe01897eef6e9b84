"""Clock, time zone and the user's number format change no number that a command gives."""

import json
import locale
import os
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
COMMANDS = (
    ["reading", "--draws", "99"],
    ["breadth"],
    ["lag", "--surrogates", "19", "--windows", "6:12", "--shifts", "12:24"],
    ["inspect"],
)
PROGRAM = """
import datetime, json, locale, os, sys, time
import app.workspace
ahead = float(os.environ.get("TEST_SECONDS_AHEAD", "0"))
if ahead:  # the two places where the program asks what day it is, and what libraries ask
    real = time.time
    time.time = lambda: real() + ahead
    app.workspace.today = lambda: datetime.date.fromtimestamp(real() + ahead).isoformat()
if os.environ.get("TEST_LOCALE"):
    locale.setlocale(locale.LC_ALL, os.environ["TEST_LOCALE"])
from click.testing import CliRunner
from app.cli import pricewake
found = []
for words in json.loads(sys.argv[1]):
    path = os.path.join(sys.argv[2], "table.csv")
    done = CliRunner().invoke(pricewake, [*words, "--json", "--csv", path], standalone_mode=False)
    assert done.exception is None, done.exception
    found.append([json.loads(done.stdout), open(path, newline="", encoding="utf-8").read()])
day = app.workspace.today()
print(json.dumps([found, locale.localeconv()["decimal_point"], time.tzname, day]))
"""


def comma_locale():
    """A locale of this machine that writes decimals with a comma, or None."""
    kept = locale.setlocale(locale.LC_NUMERIC)
    try:
        for name in ("de_DE.UTF-8", "fr_FR.UTF-8", "de_DE", "fr_FR", "pl_PL.UTF-8", "ru_RU.UTF-8"):
            try:
                locale.setlocale(locale.LC_NUMERIC, name)
            except locale.Error:
                continue
            if locale.localeconv()["decimal_point"] == ",":
                return name
    finally:
        locale.setlocale(locale.LC_NUMERIC, kept)
    return None


def given(folder, **changes):
    done = subprocess.run(
        [sys.executable, "-c", PROGRAM, json.dumps(COMMANDS), str(folder)],
        cwd=ROOT,
        env={**os.environ, "TZ": "UTC", **changes},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr[-800:]
    return json.loads(done.stdout)


@pytest.fixture(scope="module")
def usual(tmp_path_factory):
    return given(tmp_path_factory.mktemp("usual"))


@pytest.fixture(scope="module")
def changed(tmp_path_factory):
    """The same in another time zone, years later, with comma decimals where there are any."""
    changes = {"TZ": "Pacific/Kiritimati", "TEST_SECONDS_AHEAD": str(12.3 * 365.25 * 86400)}
    if name := comma_locale():
        changes |= {"TEST_LOCALE": name, "LC_ALL": name}
    return given(tmp_path_factory.mktemp("changed"), **changes)


def test_another_time_zone_and_a_clock_years_ahead_change_no_number(usual, changed):
    assert int(changed[3][:4]) >= int(usual[3][:4]) + 12  # the change did happen
    assert changed[2] != usual[2]
    assert changed[0] == usual[0]


def test_decimals_with_a_comma_change_no_number_and_no_word(usual, changed):
    if comma_locale() is None:
        pytest.skip("no locale with comma decimals is installed on this machine")
    assert changed[1] == ","
    assert changed[0] == usual[0]
