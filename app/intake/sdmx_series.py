"""From the observations of an SDMX message to named series."""

import re
from collections import Counter, defaultdict
from collections.abc import Sequence
from dataclasses import replace

from analytics.series import Series
from app.intake.numerals import MISSING, Mark
from app.intake.periods import Calendar, ReadPeriod, read_period
from app.intake.problems import MAX_NAME, IntakeError, Problem, plain_text, quoted
from app.intake.sdmx import (
    ADJUSTMENT,
    FREQUENCY,
    MULTIPLIER,
    TELLING,
    UNIT,
    YEAR_START,
    KeyedSeries,
    Message,
)
from app.intake.sdmx_attributes import code_words, flags_of, stated_of
from app.intake.sheets import Metadata, decimal_marks, read_blocks
from app.intake.tables import Block

_CALENDAR: dict[str, Calendar] = {"M": "M", "Q": "Q", "A": "Y"}
_QUIET = frozenset((*FREQUENCY, *ADJUSTMENT, *UNIT, *MULTIPLIER))
_ZONE = re.compile(r"(\d{4}-.*?)(?:Z|[-+]\d{2}:\d{2})", re.ASCII)
_NUMBER = re.compile(r"[-+]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][-+]?[0-9]{1,4})?|[-+]?INF")


def read_message(
    message: Message, metadata: Metadata | None = None
) -> tuple[list[Series], list[Problem]]:
    """Turn the observations of a message into series.

    Raises
    ------
    IntakeError
        The only series has no calendar of months, quarters or years.
    """
    try:
        series, problems = _read(message, metadata or {})
    except IntakeError as error:
        if message.lines:
            raise
        raise IntakeError(replace(error.problem, row=None)) from None
    if not message.lines:
        problems = [replace(problem, row=None) for problem in problems]
    return series, [*message.problems, *problems]


def _read(message: Message, metadata: Metadata) -> tuple[list[Series], list[Problem]]:
    problems: list[Problem] = []
    keyed = _merged(message.series)
    names = _names(message, keyed)
    blocks: list[Block] = []
    stated: dict[str, dict[str, str]] = {}
    flags: list[Problem] = []
    for name, one in zip(names, keyed, strict=True):
        trouble = _trouble(message, one)
        if trouble is not None:
            line, text = trouble
            problems.append(Problem("error", message.file, line, name, text))
            continue
        periods = [_period_text(observation.period) for observation in one.observations]
        values = [observation.value for observation in one.observations]
        lines = [observation.line for observation in one.observations]
        code = one.first(FREQUENCY)
        blocks.append(Block(lines, periods, [(name, values)], (), _CALENDAR.get(code)))
        constant = [message.label(*item) for item in one.key.items() if item[0] not in FREQUENCY]
        given = metadata.get(name) or metadata.get(name.partition(": ")[2], {})
        stated[name] = {**stated_of(message, one, name, constant), **given}
        flags += flags_of(message.file, name, one.observations, periods)
    marks: list[Mark] = ["."] * len(blocks)
    if message.separator:
        columns = [block.columns[0] for block in blocks]
        marks, found = decimal_marks(message.file, columns, message.separator, quotes=True)
        problems += found
    series, found = read_blocks(message.file, blocks, marks, stated)
    there = {one.name for one in series}
    return series, [*problems, *found, *(flag for flag in flags if flag.column in there)]


def _merged(series: Sequence[KeyedSeries]) -> list[KeyedSeries]:
    """Join what shares a key; where such parts differ in unit or adjustment, that joins the key."""
    groups: dict[tuple[tuple[str, str], ...], list[KeyedSeries]] = defaultdict(list)
    for one in series:
        groups[tuple(sorted(one.key.items()))].append(one)
    telling = {
        name
        for parts in groups.values()
        if len(parts) > 1
        for name in TELLING
        if len({found for part in parts if (found := part.attributes.get(name))}) > 1
    }
    if telling:
        for one in series:
            moved = {name: one.attributes[name] for name in sorted(telling & set(one.attributes))}
            one.key = {**one.key, **moved}
        return _merged(series)
    joined: list[KeyedSeries] = []
    for parts in groups.values():
        first = parts[0]
        for part in parts[1:]:
            first.observations.extend(part.observations)
            first.attributes = {**part.attributes, **first.attributes}
        joined.append(first)
    return [one for one in joined if one.observations]


def _names(message: Message, series: Sequence[KeyedSeries]) -> list[str]:
    """Name each series by the labels of the dimensions that vary, told apart by their codes."""
    dimensions = list(dict.fromkeys(name for one in series for name in one.key))
    loud = [name for name in dimensions if name not in _QUIET]
    vary = [name for name in dimensions if len({one.key.get(name, "") for one in series}) > 1]
    if not set(vary) & set(loud):
        vary = [*loud, *vary]
    names = []
    for one in series:
        words = [code_words(message, name, one.key[name]) for name in vary if one.key.get(name)]
        name = plain_text(", ".join(words), MAX_NAME)
        names.append(name or plain_text(message.title, MAX_NAME) or "Series")
    counts = Counter(names)
    taken: set[str] = set()
    for place, one in enumerate(series):
        name = base = names[place]
        if counts[base] > 1:
            codes = ".".join(one.key.get(part, "") for part in vary)
            name = base = plain_text(f"{base[: MAX_NAME // 2]} ({codes})", MAX_NAME - 8)
        number = 1
        while name in taken:
            number += 1
            name = f"{base} ({number})"
        taken.add(name)
        names[place] = name
    return names


def _trouble(message: Message, one: KeyedSeries) -> tuple[int, str] | None:
    """Say why a series is left out: for its frequency, its reporting year or a value."""
    line = one.observations[0].line
    code = one.first(FREQUENCY)
    if code and code not in _CALENDAR:
        label = next(
            (words for name in FREQUENCY if (words := message.labels.get((name, code)))), ""
        )
        shown = f"{quoted(code)} ({label.lower()})" if label else quoted(code)
        return line, f"the frequency must be monthly, quarterly or annual, but FREQ is {shown}"
    start = one.attributes.get(YEAR_START, "--01-01")
    if not start.startswith("--01-01"):
        return line, f"the reporting year must start on 1 January, but starts on {quoted(start)}"
    if not message.separator:
        for observation in one.observations:
            text = observation.value.strip()
            if not _NUMBER.fullmatch(text) and text.lower() not in MISSING:
                return observation.line, f"must be a number, but got {quoted(observation.value)}"
    return None


def _period_text(text: str) -> str:
    """Drop a time zone, which shifts no month."""
    if isinstance(read_period(text), ReadPeriod):
        return text
    zoned = _ZONE.fullmatch(text.strip())
    return zoned[1] if zoned else text
