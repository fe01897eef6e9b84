"""Which economy a series belongs to, and which pairs there are.

The rule: a series named ``Economy: series`` belongs to the economy before the first colon and
space, and is called by what follows. That is also how a long file with an economy column is read.
A series without a colon belongs to an economy without a name.
"""

from collections.abc import Iterable
from dataclasses import dataclass

from app.opening import sounds_like
from app.state import StateError


@dataclass(frozen=True)
class Roles:
    """The pairs of the files, and what has none.

    Attributes
    ----------
    pairs : tuple of (economy, driver, response)
        In the order of the files.
    drivers, responses : tuple of str
        Names within an economy that were taken for each side.
    economies : int
        How many economies have a pair.
    lacking : tuple of str
        Economies that lack a driver or a response.
    """

    pairs: tuple[tuple[str, str, str], ...]
    drivers: tuple[str, ...]
    responses: tuple[str, ...]
    economies: int
    lacking: tuple[str, ...]


def economy_of(name: str) -> tuple[str, str]:
    """Part a series' name into economy and name within it; the economy may be empty.

    Examples
    --------
    >>> economy_of("Abrisund: Broad money"), economy_of("Broad money")
    (('Abrisund', 'Broad money'), ('', 'Broad money'))
    """
    economy, parted, within = name.partition(": ")
    if parted and economy.strip() and within.strip():
        return economy, within
    return "", name


def series_name(economy: str, within: str) -> str:
    """Put the two together again."""
    return f"{economy}: {within}" if economy else within


def roles(names: Iterable[str], drivers: str = "", responses: str = "") -> Roles:
    """Pair every driver with every response of its own economy.

    `drivers` and `responses` are names within an economy, parted by ``|``; where they are empty,
    those that sound like money and those that sound like prices are taken.

    Raises
    ------
    StateError
        A name is that of no series, or there is no pair at all.
    """
    held: dict[str, list[str]] = {}
    for name in names:
        economy, within = economy_of(name)
        held.setdefault(economy, []).append(within)
    present = list(dict.fromkeys(within for series in held.values() for within in series))
    money = _chosen(drivers, "Drivers", present, "money")
    prices = _chosen(responses, "Responses", present, "prices")
    pairs, lacking = [], []
    for economy, series in held.items():
        own = [
            (economy, driver, response)
            for driver in series
            for response in series
            if driver in money and response in prices and driver != response
        ]
        pairs += own
        if not own:
            lacking.append(economy)
    if not pairs:
        raise StateError(
            "no economy in the files has both a driver and a response; name a driver and a"
            " response, or name series 'Economy: Broad money' and 'Economy: Consumer prices'"
        )
    if lacking == [""]:  # series of no economy beside a panel
        lacking = []
    return Roles(
        tuple(pairs), money, prices, len({economy for economy, _, _ in pairs}), tuple(lacking)
    )


def _chosen(asked: str, label: str, present: list[str], kind: str) -> tuple[str, ...]:
    if not asked:
        return tuple(name for name in present if sounds_like(name) == kind)
    found: list[str] = []
    for asked_name in (part.strip() for part in asked.split("|") if part.strip()):
        same = [name for name in present if name.casefold() == asked_name.casefold()]
        if not same:
            known = ", ".join(repr(each) for each in present[:6])
            raise StateError(
                f"{label} must be names of series within an economy, but got {asked_name!r};"
                f" there is {known}{' and more' if len(present) > 6 else ''}"
            )
        found += same
    return tuple(dict.fromkeys(found))
