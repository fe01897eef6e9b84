"""Alert rules of a workspace: the usual ones, those added, less those taken away.

Each change is one row of its own, so two tabs never undo each other's.
"""

from app.reading.alerts import DEFAULT_RULES, AlertError, Rule, read_rule
from app.store import Store, now

MOST = 60  # a page and a morning hold no more


def rule_lines(store: Store) -> tuple[str, ...]:
    """Return the rules in force, as they are written: usual ones first, then as they came."""
    with store.look() as db:
        rows = db.execute("SELECT rule, kept FROM rules ORDER BY rowid").fetchall()
    said = {row["rule"]: bool(row["kept"]) for row in rows}
    usual = tuple(line for line in DEFAULT_RULES if said.get(line, True))
    return usual + tuple(line for line, kept in said.items() if kept and line not in DEFAULT_RULES)


def rules_in_force(store: Store) -> tuple[tuple[Rule, ...], tuple[str, ...]]:
    """Return the rules in force, and a sentence on each line that cannot be read."""
    rules, refused = [], []
    for line in rule_lines(store):
        try:
            rules.append(read_rule(line))
        except AlertError as error:  # from an import
            refused.append(f"A kept alert rule is left out: {error}.")
    return tuple(rules), tuple(refused)


def keep_rule(store: Store, text: str) -> str:
    """Keep a rule from now on; return it as it is written.

    Raises
    ------
    ValueError
        It is no rule, or there are too many already.
    """
    line = read_rule(text).text
    if len(rule_lines(store)) >= MOST and line not in rule_lines(store):
        raise AlertError(f"there must be at most {MOST} alert rules; take one away first")
    _say(store, line, kept=True)
    return line


def drop_rule(store: Store, text: str) -> None:
    """Take a rule away, one of the usual ones too.

    Raises
    ------
    ValueError
        There is no such rule.
    """
    lines, line = rule_lines(store), " ".join(text.split())
    if line not in lines:
        raise AlertError(f"an alert rule must be one that is kept, but there is no {line[:60]!r}")
    _say(store, line, kept=False)


def _say(store: Store, line: str, *, kept: bool) -> None:
    with store.change() as db:
        db.execute(
            "INSERT INTO rules (rule, kept, at) VALUES (?, ?, ?) ON CONFLICT (rule)"
            " DO UPDATE SET kept = excluded.kept, at = excluded.at",
            (line, int(kept), now()),
        )
