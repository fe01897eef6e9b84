"""The tables of a workspace, as numbered migrations: each runs once, in order, and never changes.

A new need gets a new entry at the end; the number of entries is the version that a file carries.
"""

import sqlite3

APPLICATION_ID = 0x50774B65  # tells a workspace from other SQLite files

MIGRATIONS: tuple[str, ...] = (
    """
    -- One row a file taken in. `day` is the date from which it stands, which the user may set for
    -- releases of the past; `at` is when it was taken in, in UTC. `hidden` is the day on which it
    -- was taken out of view.
    CREATE TABLE loads (
        id INTEGER PRIMARY KEY,
        at TEXT NOT NULL,
        day TEXT NOT NULL CHECK (length(day) = 10),
        file TEXT NOT NULL,
        hidden TEXT
    );
    CREATE INDEX loads_of_day ON loads (day, id);

    -- Values of a series as read, each content once. `kind` is a part of the fingerprint;
    -- `first` is a period such as 2024-03; `content` holds little-endian 64-bit floats.
    CREATE TABLE vintages (
        id INTEGER PRIMARY KEY,
        series TEXT NOT NULL,
        fingerprint TEXT NOT NULL,
        frequency TEXT NOT NULL CHECK (frequency IN ('monthly', 'quarterly', 'annual')),
        kind TEXT NOT NULL CHECK (kind IN ('index', 'level', 'rate')),
        first TEXT NOT NULL,
        content BLOB NOT NULL,
        UNIQUE (series, fingerprint)
    );

    -- Which vintages a load brought, in the order of the file, and what the file said of them.
    CREATE TABLE members (
        load INTEGER NOT NULL REFERENCES loads (id),
        place INTEGER NOT NULL,
        vintage INTEGER NOT NULL REFERENCES vintages (id),
        unit TEXT NOT NULL,
        adjustment TEXT NOT NULL CHECK (adjustment IN ('yes', 'no', 'unknown')),
        source TEXT NOT NULL,
        PRIMARY KEY (load, place)
    );
    CREATE INDEX members_of_vintage ON members (vintage);

    CREATE TABLE problems (
        load INTEGER NOT NULL REFERENCES loads (id),
        place INTEGER NOT NULL,
        severity TEXT NOT NULL CHECK (severity IN ('error', 'warning', 'note')),
        file TEXT NOT NULL,
        line INTEGER,
        series TEXT,
        message TEXT NOT NULL,
        PRIMARY KEY (load, place)
    );

    -- What the user knows better than the file, kept for every later load of the series.
    CREATE TABLE corrections (
        series TEXT NOT NULL,
        field TEXT NOT NULL CHECK (field IN ('kind', 'unit', 'adjustment')),
        value TEXT NOT NULL,
        at TEXT NOT NULL,
        PRIMARY KEY (series, field)
    );

    -- Breaks marked by the user, and how each is treated.
    CREATE TABLE marks (
        id INTEGER PRIMARY KEY,
        series TEXT NOT NULL,
        period TEXT NOT NULL,
        treatment TEXT NOT NULL,
        note TEXT NOT NULL DEFAULT '',
        at TEXT NOT NULL,
        UNIQUE (series, period)
    );

    -- What was said, with the state it was said from; added to, never changed.
    CREATE TABLE statements (
        id INTEGER PRIMARY KEY,
        at TEXT NOT NULL,
        day TEXT NOT NULL,
        subject TEXT NOT NULL,
        state TEXT NOT NULL,
        content TEXT NOT NULL
    );
    CREATE TRIGGER statements_keep BEFORE UPDATE ON statements
        BEGIN SELECT RAISE(ABORT, 'a statement is never changed'); END;
    CREATE TRIGGER statements_stay BEFORE DELETE ON statements
        BEGIN SELECT RAISE(ABORT, 'a statement is never deleted'); END;
    CREATE TRIGGER statements_once BEFORE INSERT ON statements
        WHEN EXISTS (SELECT 1 FROM statements WHERE id = NEW.id)
        BEGIN SELECT RAISE(ABORT, 'a statement is never replaced'); END;
    """,
    """
    -- What the user has said of alert rules: `kept` is 1 for a rule of the user's own, 0 for one
    -- taken away. The usual rules count where nothing is said of them.
    CREATE TABLE rules (
        rule TEXT NOT NULL PRIMARY KEY,
        kept INTEGER NOT NULL CHECK (kept IN (0, 1)),
        at TEXT NOT NULL
    );
    """,
)

VERSION = len(MIGRATIONS)
TABLES = ("loads", "vintages", "members", "problems", "corrections", "marks", "statements", "rules")


def migrate(connection: sqlite3.Connection) -> None:
    """Run what a file has not had yet; the caller has begun the transaction."""
    done = connection.execute("PRAGMA user_version").fetchone()[0]
    for migration in MIGRATIONS[done:]:
        for statement in _statements(migration):
            connection.execute(statement)
    connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
    connection.execute(f"PRAGMA user_version = {VERSION}")


def _statements(script: str) -> list[str]:
    """Split a script; ``executescript`` would end the transaction."""
    found, part = [], ""
    for line in script.splitlines():
        part += line + "\n"
        if sqlite3.complete_statement(part):
            found.append(part)
            part = ""
    assert not part.strip(), part
    return found
