"""The workspace file: who may open it, what a crash or another program does to it."""

import os
import sqlite3
import stat
import subprocess
import sys
import threading
from pathlib import Path

import pytest

from app import store as store_module
from app.migrations import APPLICATION_ID, MIGRATIONS, TABLES, VERSION
from app.store import Store, WorkspaceError, default_path

ROOT = Path(__file__).resolve().parents[2]
MARK = "INSERT INTO marks (series, period, treatment, at) VALUES (?, ?, ?, ?)"


def mode(path):
    return stat.S_IMODE(path.stat().st_mode)


def marks(store):
    with store.look() as db:
        return [tuple(row) for row in db.execute("SELECT series, period FROM marks")]


# Where it lies -------------------------------------------------------------------------------


@pytest.mark.skipif(sys.platform != "linux", reason="the rule of another platform")
@pytest.mark.parametrize(
    ("given", "expected"),
    [
        ("/else/where", "/else/where/pricewake/workspace.sqlite"),
        ("", "/home/desk/.local/share/pricewake/workspace.sqlite"),
        # "All paths set in these environment variables must be absolute. If an implementation
        # encounters a relative path [...] it should consider the path invalid and ignore it."
        # XDG Base Directory Specification, version 0.8 (quoted from memory).
        ("not/absolute", "/home/desk/.local/share/pricewake/workspace.sqlite"),
    ],
)
def test_the_usual_place_follows_the_platform(monkeypatch, given, expected):
    monkeypatch.setenv("HOME", "/home/desk")
    monkeypatch.setenv("XDG_DATA_HOME", given)
    assert default_path() == Path(expected)


def test_folder_and_files_are_for_the_user_alone(tmp_path):
    path = tmp_path / "deep" / "er" / "desk.sqlite"
    old = os.umask(0)
    try:
        here = Store(path)
        with here.change() as db:
            db.execute(MARK, ("One", "2024-01", "splice", "now"))
        assert mode(path.parent) == 0o700
        made = sorted(each.name for each in path.parent.iterdir())
        assert made == ["desk.sqlite", "desk.sqlite-shm", "desk.sqlite-wal"]
        assert {mode(each) for each in path.parent.iterdir()} == {0o600}
    finally:
        os.umask(old)
        here.close()
    assert [each.name for each in path.parent.iterdir()] == ["desk.sqlite"]


def test_it_keeps_a_log_and_keeps_to_its_keys(tmp_path):
    here = Store(tmp_path / "desk.sqlite")
    with here.look() as db:
        assert db.execute("PRAGMA journal_mode").fetchone()[0] == "wal"
        assert db.execute("PRAGMA foreign_keys").fetchone()[0] == 1
        assert db.execute("PRAGMA synchronous").fetchone()[0] == 2
    with pytest.raises(sqlite3.IntegrityError, match="FOREIGN KEY"), here.change() as db:
        db.execute("INSERT INTO members VALUES (7, 0, 7, '', 'no', '')")
    here.close()


# Migrations ----------------------------------------------------------------------------------


def test_a_new_file_has_every_table_and_the_version(tmp_path):
    here = Store(tmp_path / "desk.sqlite")
    with here.look() as db:
        names = {row[0] for row in db.execute("SELECT name FROM sqlite_master WHERE type='table'")}
        assert names == set(TABLES)
        assert db.execute("PRAGMA user_version").fetchone()[0] == VERSION == len(MIGRATIONS)
        assert db.execute("PRAGMA application_id").fetchone()[0] == APPLICATION_ID
    here.close()


def test_an_older_file_is_brought_up_and_keeps_what_it_holds(tmp_path, monkeypatch):
    path = tmp_path / "desk.sqlite"
    here = Store(path)
    with here.change() as db:
        db.execute(MARK, ("One", "2024-01", "splice", "now"))
    here.close()
    later = (*MIGRATIONS, "ALTER TABLE marks ADD COLUMN ratio REAL;\nCREATE TABLE more (a TEXT);")
    monkeypatch.setattr("app.migrations.MIGRATIONS", later)
    monkeypatch.setattr("app.migrations.VERSION", len(later))
    monkeypatch.setattr(store_module, "VERSION", len(later))
    again = Store(path)
    with again.look() as db:
        row = db.execute("SELECT series, ratio FROM marks").fetchone()
        assert tuple(row) == ("One", None)
        assert db.execute("PRAGMA user_version").fetchone()[0] == len(later)
    again.close()
    Store(path).close()  # and once is enough


def test_a_migration_that_fails_leaves_the_file_as_it_was(tmp_path, monkeypatch):
    path = tmp_path / "desk.sqlite"
    Store(path).close()
    monkeypatch.setattr("app.migrations.MIGRATIONS", (*MIGRATIONS, "CREATE TABLE a (b);\nNO SQL;"))
    monkeypatch.setattr(store_module, "VERSION", VERSION + 1)
    with pytest.raises(WorkspaceError, match="cannot be used"):
        Store(path)
    monkeypatch.undo()
    here = Store(path)
    with here.look() as db:
        assert not db.execute("SELECT 1 FROM sqlite_master WHERE name = 'a'").fetchone()
    here.close()


# Refusals ------------------------------------------------------------------------------------


def test_a_file_of_a_newer_version_is_refused(tmp_path):
    path = tmp_path / "desk.sqlite"
    Store(path).close()
    raw = sqlite3.connect(path)
    raw.execute(f"PRAGMA user_version = {VERSION + 3}")
    raw.close()
    before = path.read_bytes()
    with pytest.raises(WorkspaceError) as caught:
        Store(path)
    said = str(caught.value)
    assert f"was written by a newer Pricewake (workspace version {VERSION + 3}; this one" in said
    assert path.read_bytes() == before
    assert [each.name for each in tmp_path.iterdir()] == ["desk.sqlite"]


@pytest.mark.parametrize(
    "content",
    [b"month,Prices\n2024-01,1\n", b"\x00" * 4096, b"x", b"SQLite format 3", b"%PDF-1.7\n"],
)
def test_a_file_that_is_no_workspace_is_refused_and_left_alone(tmp_path, content):
    path = tmp_path / "notes.txt"
    path.write_bytes(content)
    with pytest.raises(WorkspaceError, match=r"is of another kind; nothing was changed in it$"):
        Store(path)
    assert path.read_bytes() == content
    assert [each.name for each in tmp_path.iterdir()] == ["notes.txt"]


def test_a_database_of_another_program_is_refused_and_left_alone(tmp_path):
    path = tmp_path / "other.sqlite"
    raw = sqlite3.connect(path)
    raw.execute("CREATE TABLE theirs (a)")
    raw.commit()
    raw.close()
    before = path.read_bytes()
    with pytest.raises(WorkspaceError, match="a database of another program"):
        Store(path)
    assert path.read_bytes() == before
    assert [each.name for each in tmp_path.iterdir()] == ["other.sqlite"]


def test_a_damaged_file_gets_a_sentence(tmp_path):
    path = tmp_path / "desk.sqlite"
    Store(path).close()
    whole = path.read_bytes()
    path.write_bytes(whole[:100] + b"\xa5" * (len(whole) - 100))
    with pytest.raises(WorkspaceError, match="is damaged and cannot be read"):
        Store(path)
    path.write_bytes(b"SQLite format 3\x00" + b"\xff" * 5000)
    with pytest.raises(WorkspaceError, match="is damaged and cannot be read"):
        Store(path)


def test_a_folder_or_a_path_that_cannot_be_gets_a_sentence(tmp_path):
    with pytest.raises(WorkspaceError, match="is a folder or device"):
        Store(tmp_path)
    (tmp_path / "file").write_text("x")
    with pytest.raises(WorkspaceError, match="must be a file that may be opened"):
        Store(tmp_path / "file" / "desk.sqlite")
    with pytest.raises(WorkspaceError, match="must be a file that may be opened"):
        Store("a\x00b")


def test_a_full_disk_changes_nothing_and_is_told(tmp_path):
    here = Store(tmp_path / "desk.sqlite")
    with here.look() as db:
        pages = db.execute("PRAGMA page_count").fetchone()[0]
    here._connection.execute(f"PRAGMA max_page_count = {pages + 1}")
    with (
        pytest.raises(WorkspaceError, match=r"^the disk is full; nothing was"),
        here.change() as db,
    ):
        db.execute(MARK, ("One", "2024-01", "splice", "now"))
        db.execute(MARK, ("x" * 100_000, "2024-01", "splice", "now"))
    assert marks(here) == []
    here.close()


# Changes -------------------------------------------------------------------------------------


def test_a_change_is_whole_or_not_at_all():
    here = Store()
    with pytest.raises(RuntimeError), here.change() as db:
        db.execute(MARK, ("One", "2024-01", "splice", "now"))
        raise RuntimeError
    assert marks(here) == []
    with here.change() as db:
        db.execute(MARK, ("Two", "2024-01", "splice", "now"))
    assert marks(here) == [("Two", "2024-01")]


def test_the_version_grows_with_every_change_of_anyone(tmp_path):
    one, two = Store(tmp_path / "desk.sqlite"), Store(tmp_path / "desk.sqlite")
    seen = [one.version()]
    for writer in (one, two, two, one):
        with writer.change() as db:
            db.execute(MARK, (f"S{len(seen)}", "2024-01", "splice", "now"))
        seen.append(one.version())
    assert len(set(seen)) == len(seen)
    assert one.version() == seen[-1]
    one.close()
    two.close()


@pytest.mark.parametrize(
    "change",
    [
        "UPDATE statements SET content = 'nicer'",
        "DELETE FROM statements",
        "INSERT OR REPLACE INTO statements VALUES (1, 'a', 'b', 'c', 'd', 'nicer')",
        "REPLACE INTO statements (id, at, day, subject, state, content)"
        " VALUES (1, '', '', '', '', '')",
    ],
)
def test_a_statement_once_made_stays(change):
    here = Store()
    with here.change() as db:
        db.execute("INSERT INTO statements VALUES (1, 'at', '2024-03-12', 's', '', 'prices rise')")
    with pytest.raises(sqlite3.IntegrityError, match=r"a statement is never"), here.change() as db:
        db.execute(change)
    with here.look() as db:
        assert [row["content"] for row in db.execute("SELECT * FROM statements")] == ["prices rise"]


WRITER = """
import sys
from app.store import Store
store = Store(sys.argv[1])
for k in range(int(sys.argv[3])):
    with store.change() as db:
        found = db.execute("SELECT treatment FROM marks WHERE series = 'count'").fetchone()
        db.execute("UPDATE marks SET treatment = ? WHERE series = 'count'", (int(found[0]) + 1,))
        db.execute("INSERT INTO marks (series, period, treatment, at) VALUES (?, ?, '', '')",
                   (sys.argv[2], str(k)))
store.close()
"""


def test_threads_and_other_programs_write_at_once_without_loss_or_lock(tmp_path):
    path, times = tmp_path / "desk.sqlite", 60
    one, two = Store(path), Store(path)
    with one.change() as db:
        db.execute("INSERT INTO marks (series, period, treatment, at) VALUES ('count','','0','')")
    failures = []

    def work(store, name):
        try:
            for k in range(times):
                with store.change() as db:
                    found = db.execute("SELECT treatment FROM marks WHERE series = 'count'")
                    count = int(found.fetchone()[0]) + 1
                    db.execute("UPDATE marks SET treatment = ? WHERE series = 'count'", (count,))
                    db.execute(MARK, (name, str(k), "", ""))
                assert len(marks(store)) >= k
        except Exception as error:
            failures.append(error)

    others = [
        subprocess.Popen(
            [sys.executable, "-c", WRITER, str(path), f"process {k}", str(times)],
            cwd=ROOT,
            stderr=subprocess.PIPE,
        )
        for k in range(2)
    ]
    # Two threads share a connection, a third has one of its own, as a second tab's server would.
    shares = [(one, "thread 0"), (one, "thread 1"), (two, "thread 2")]
    threads = [threading.Thread(target=work, args=share) for share in shares]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    for other in others:
        assert other.communicate(timeout=120)[1] == b""
        assert other.returncode == 0
    assert failures == []
    with one.look() as db:
        count = db.execute("SELECT treatment FROM marks WHERE series = 'count'").fetchone()[0]
        assert int(count) == 5 * times  # no update was lost
        assert db.execute("SELECT COUNT(*) FROM marks").fetchone()[0] == 5 * times + 1
        assert db.execute("PRAGMA integrity_check").fetchone()[0] == "ok"
    one.close()
    two.close()


def test_a_second_look_at_the_file_in_one_program_loses_no_change_of_the_first(tmp_path):
    path = tmp_path / "desk.sqlite"
    one = Store(path)
    with one.change() as db:
        db.execute("INSERT INTO marks (series, period, treatment, at) VALUES ('count','','0','')")
    two = Store(path)
    subprocess.run([sys.executable, "-c", WRITER, str(path), "process", "3"], cwd=ROOT, check=True)
    with one.change() as db:  # the other program has closed the file; its log must still be there
        db.execute(MARK, ("thread", "0", "", ""))
    assert path.with_name("desk.sqlite-wal").exists()
    subprocess.run([sys.executable, "-c", WRITER, str(path), "another", "2"], cwd=ROOT, check=True)
    assert len(marks(one)) == len(marks(two)) == 1 + 3 + 1 + 2
    one.close()
    two.close()


def test_many_programs_may_make_the_same_file_at_once(tmp_path):
    path = tmp_path / "new" / "desk.sqlite"
    program = "import sys; from app.store import Store; Store(sys.argv[1]).close()"
    started = [
        subprocess.Popen(
            [sys.executable, "-c", program, str(path)], cwd=ROOT, stderr=subprocess.PIPE
        )
        for _ in range(6)
    ]
    assert [each.communicate(timeout=120)[1] for each in started] == [b""] * 6
    here = Store(path)
    assert marks(here) == []
    here.close()


def test_waiting_too_long_is_told_in_a_sentence(tmp_path, monkeypatch):
    monkeypatch.setattr(store_module, "PATIENCE", 0.05)
    path = tmp_path / "desk.sqlite"
    one, two = Store(path), Store(path)
    with one.change() as db:
        db.execute(MARK, ("One", "2024-01", "splice", "now"))
        with pytest.raises(WorkspaceError) as caught, two.change():
            pass
        assert "another program has been writing" in str(caught.value)
        assert "locked" not in str(caught.value)
        assert marks(two) == []  # reading goes on meanwhile
    with two.change() as db:
        db.execute(MARK, ("Two", "2024-01", "splice", "now"))
    assert len(marks(one)) == 2
    one.close()
    two.close()
