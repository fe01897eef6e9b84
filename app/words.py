"""Numbers as people read them: the same rules on screen, in verdicts and in the command."""

import math
import re
import unicodedata

MINUS = "\N{MINUS SIGN}"


def signed(value: float, digits: int = 2) -> str:
    """Return a number with its sign shown: ``+0.80``, ``−0.15``; ``+0.00`` once it rounds to 0."""
    return f"{value:+z.{digits}f}".replace("-", MINUS)


def plain(value: float, digits: int = 2) -> str:
    """Return a number with a sign only below zero, once rounded."""
    return f"{value:z.{digits}f}".replace("-", MINUS)


def p_words(p: float | None) -> str:
    """Return a p-value in words: ``below .001``, ``.03``, ``.31``, ``above .99``.

    A p above .05 is given as many digits as it takes to be seen above it: ``.052``.
    """
    if p is None or math.isnan(p):
        return "undefined"
    if p < 0.001:
        return "below .001"
    if p > 0.99:
        return "above .99"
    digits = 3 if p < 0.0095 else 2
    while (float(text := f"{p:.{digits}f}") > 0.05) != (p > 0.05):
        digits += 1
    return text.lstrip("0")


def percent(share: float) -> str:
    """Return a share of one as a whole percentage with its sign."""
    return f"{100 * share:+z.0f} %".replace("-", MINUS)


def counted(n: int, noun: str) -> str:
    """Return a number with its noun: ``1 month``, ``12 months``."""
    return f"{n} {noun}{'' if n == 1 else 's'}".replace("-", MINUS)


def shift_words(shift: int, noun: str) -> str:
    """Return a shift with its sign and noun: ``+24 months``, ``0 months``."""
    return f"{runs_words([shift])} {noun}{'' if abs(shift) == 1 else 's'}"


def runs_words(numbers: list[int]) -> str:
    """Return whole numbers as runs: ``+20 to +24`` or ``−3, +20 to +24``."""
    runs: list[list[int]] = []
    for number in numbers:
        if runs and number == runs[-1][-1] + 1:
            runs[-1].append(number)
        else:
            runs.append([number])
    parts = [f"{r[0]:+d}" if len(r) == 1 else f"{r[0]:+d} to {r[-1]:+d}" for r in runs]
    return ", ".join(parts).replace("-", MINUS).replace("+0", "0")


def as_sentence(words: str) -> str:
    """Return an error's words as they stand on a page: a capital first, a full stop last.

    Examples
    --------
    >>> as_sentence("nothing is loaded yet")
    'Nothing is loaded yet.'
    """
    return words[:1].upper() + words[1:] + ("" if words.endswith((".", "?")) else ".")


def slug(text: str, longest: int = 60) -> str:
    """Return a name in plain letters for the name of a file: ``consumer-prices``, or nothing."""
    letters = unicodedata.normalize("NFKD", text).encode("ascii", "ignore").decode().lower()
    return re.sub(r"[^a-z0-9]+", "-", letters).strip("-")[:longest].strip("-")
