"""What SDMX attributes say of a series: kind, unit, adjustment, and the status of its values."""

import re
from collections import defaultdict
from collections.abc import Sequence
from functools import lru_cache

from analytics.series import period_label
from app.intake.kinds import inferred_adjustment, kind_in_words
from app.intake.periods import ReadPeriod, read_period
from app.intake.problems import MAX_NAME, Problem, counted, plain_text, quoted
from app.intake.sdmx import ADJUSTMENT, BASE, MULTIPLIER, UNIT, KeyedSeries, Message, Observation

_UNIT_WORDS = {
    **dict.fromkeys(("PC", "PT", "PCT", "PERCENT", "PA", "PCPA"), "percent"),
    **dict.fromkeys(("IX", "INDEX", "IDX"), "index"),
}
_MULTIPLIER_WORDS = {
    "1": "ten",
    "2": "hundred",
    "3": "thousand",
    "6": "million",
    "9": "billion",
    "12": "trillion",
}
_ADJUSTED = {
    **dict.fromkeys(("S", "Y", "T", "SA", "SCA", "SWDA", "TC"), "yes"),
    **dict.fromkeys(("N", "W", "NSA", "CA", "WDA"), "no"),
}
# Codes of the cross-domain code list for the observation status; B and Q are those of its
# guideline of 2019, the others are from memory.
_STATUS_WORDS = {
    "E": ("note", "estimated"),
    "I": ("note", "imputed"),
    "P": ("note", "provisional"),
    "F": ("warning", "forecast, not observed,"),
    "U": ("note", "of low reliability"),
    "D": ("note", "of another definition"),
    **dict.fromkeys("MLOQ", ("note", "missing on purpose")),
}
_MAX_BREAKS = 12


def code_words(message: Message, component: str, code: str) -> str:
    """Return the words for a code in a name: its label, else what it means, else the code."""
    label = message.label(component, code)
    if label != code:
        return label
    if component in MULTIPLIER and code in _MULTIPLIER_WORDS:
        return f"{_MULTIPLIER_WORDS[code]}s"
    return _UNIT_WORDS.get(code.upper(), code) if component in UNIT else code


def stated_of(
    message: Message, one: KeyedSeries, name: str, constant: Sequence[str]
) -> dict[str, str]:
    """Return kind, unit and adjustment as far as the message states them."""
    unit = _unit(message, one)
    texts = (unit, name, ", ".join(constant))
    kind = next((kind for text in texts if (kind := kind_in_words(text))), "")
    code = one.first(ADJUSTMENT)
    label = next((words for part in ADJUSTMENT if (words := message.labels.get((part, code)))), "")
    adjustment = _ADJUSTED.get(code.upper()) or (inferred_adjustment(label) if label else "")
    if adjustment in ("", "unknown"):
        adjustment = ""
    return {
        field: text
        for field, text in (("kind", kind), ("unit", unit), ("adjustment", adjustment))
        if text
    }


def _unit(message: Message, one: KeyedSeries) -> str:
    """Fold multiplier, unit and base period into words such as "million crowns"."""
    code, power = one.first(UNIT), one.first(MULTIPLIER)
    words = next((text for part in UNIT if (text := message.labels.get((part, code)))), "")
    words = plain_text(words or _UNIT_WORDS.get(code.upper(), code), MAX_NAME // 2)
    times = _MULTIPLIER_WORDS.get(power.strip())
    if times is None and power.strip() not in ("", "0"):
        label = next(
            (text for part in MULTIPLIER if (text := message.labels.get((part, power)))), ""
        )
        times = plain_text(label, 40).lower() or f"10^{plain_text(power, 10)}"
    if times:
        second = words[1:2]
        lower = words[:1].lower() + words[1:] if second.islower() or second == " " else words
        return f"{times} {lower}" if words else f"{times}s"
    base = one.first(BASE)
    if re.fullmatch(r"[12]\d{3}", base, re.ASCII) and base not in words:
        return f"{base} = 100"
    return words


def flags_of(
    file: str, name: str, observations: Sequence[Observation], periods: Sequence[str]
) -> list[Problem]:
    """Tell of breaks, and of values that are estimated, provisional, forecast or missing."""
    problems: list[Problem] = []
    found: dict[str, list[int]] = defaultdict(list)
    for place, observation in enumerate(observations):
        for code in _codes(observation.status[:40]):
            found[code].append(place)

    def when(place: int) -> str:
        period = read_period(periods[place])
        if isinstance(period, ReadPeriod):
            return period_label(period.period)
        return quoted(periods[place])

    breaks = found.pop("B", [])
    for number, place in enumerate(breaks[:_MAX_BREAKS], start=1):
        others = len(breaks) - _MAX_BREAKS if number == _MAX_BREAKS else 0
        message = counted(f"break in {when(place)}", others, "break")
        problems.append(Problem("warning", file, observations[place].line, name, message))
    grouped: dict[tuple[str, str], list[int]] = defaultdict(list)
    for code, places in found.items():
        if code in _STATUS_WORDS:
            grouped[_STATUS_WORDS[code]] += places
    for (severity, words), places in grouped.items():
        place = min(places)
        message = counted(f"{words} in {when(place)}", len(set(places)) - 1, "period")
        line = observations[place].line
        problems.append(Problem(severity, file, line, name, message))  # type: ignore[arg-type]
    return problems


@lru_cache(maxsize=1024)
def _codes(status: str) -> frozenset[str]:
    """Return the codes of a status; small letters in a row are several, as in "bp"."""
    codes: set[str] = set()
    for part in re.split(r"[,;|+\s]+", status.strip()):
        codes |= set(part.upper()) if part.islower() and part.isalpha() else {part.upper()}
    return frozenset(codes)
