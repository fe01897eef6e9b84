"""What a scan says: the same words on the page, in files and from the command."""

import math

import numpy as np

from analytics.long_averages import LongAverages
from analytics.panel import LEVEL, PairScan, PanelPair, PanelScan, unrelated_pairs
from app.places import software_version
from app.scan.bridge import Question, Scan
from app.words import counted, p_words, plain, shift_words, signed

CAUTION = (
    "A scan finds association in past data, many times over. None of it is a cause, and none is"
    " investment or policy advice; official statistics and your desk's own qualified judgement"
    " come first."
)
CORRECTIONS = {"bh": "Benjamini-Hochberg", "holm": "Holm"}
NAMED = 10  # economies or pairs named in a sentence
ENOUGH = 20  # pairs from which their p-values say how many are related


def pair_words(scan: PairScan | PanelPair, asked: Question) -> str:
    """Name a pair as shortly as it stays clear: by its economy where that has no other pair."""
    both = f"{scan.driver} → {scan.response}"
    if not scan.economy:
        return both
    return scan.economy if asked.pairs_of[scan.economy] == 1 else f"{scan.economy}, {both}"


def sentence(asked: Question) -> str:
    """Say what is scanned: pairs, economies, sides, grid."""
    roles, state = asked.roles, asked.state
    economies = f"{roles.economies} economies" if roles.economies > 1 else "one economy"
    stood = f", as it stood on {state.as_of}" if state.as_of else ""
    if asked.opened is not None:
        stood = f", opened from {asked.opened.name}"
    return (
        f"{_listed(roles.drivers)} against {_listed(roles.responses)}:"
        f" {counted(len(roles.pairs), 'pair')} of {economies}{_grid(asked)}{stood}."
    )


def verdict(known: Scan) -> str:
    """Say how many pairs hold once all are paid for, and which."""
    asked, panel = known.question, known.panel
    if panel is None and not asked.pairs:
        return "No pair of a driver and a response is long enough to be searched."
    if panel is None:
        return (
            f"{counted(len(asked.pairs), 'pair')} to be searched, each over its whole map against"
            f" {asked.state.surrogates:,} unrelated drivers."
        )
    judged = int(np.isfinite(panel.p_scan).sum())
    refused = len(panel.pairs) - judged
    if not judged:
        if refused == 1:
            return "The one pair could not be searched; the table says why."
        return f"None of {counted(refused, 'pair')} could be searched; the table says why."
    found, other = found_pairs(panel, asked.state.correction), _other(asked.state.correction)
    by = CORRECTIONS[asked.state.correction]
    holding = f"{len(found) or 'None'} of {judged} pairs {'holds' if len(found) == 1 else 'hold'}"
    if judged == 1:
        holding = "The one pair holds" if found else "The one pair does not hold"
    positive = ", positive relations only" if asked.state.sign == "positive" else ""
    said = [
        f"{holding} at 5 % once all of them are paid for"
        f" ({by}{positive})" + (f": {_named(found, asked)}." if found else "."),
        f"{CORRECTIONS[other]} leaves {len(found_pairs(panel, other)) or 'none'}.",
    ]
    if refused:
        said.append(f"{counted(refused, 'pair')} could not be searched; the table says why.")
    return " ".join(said)


def notes(known: Scan) -> list[str]:
    """Say what a reader has to know before believing the table."""
    asked, said = known.question, opened_words(known)
    lacking = [economy or "series without an economy" for economy in asked.roles.lacking]
    if lacking:
        said.append(
            f"Left out, lacking a driver or a response: {', '.join(lacking[:NAMED])}"
            f"{f' and {len(lacking) - NAMED} more' if len(lacking) > NAMED else ''}."
        )
    count, draws = len(asked.pairs), asked.state.surrogates
    if known.panel is not None:
        count = int(np.isfinite(known.panel.p_scan).sum())
        said += [*missed_words(known.panel, asked), *near_words(known.panel, asked)]
    if count / (draws + 1) > LEVEL:
        said.append(
            f"With {draws:,} surrogates the smallest p a pair can have is"
            f" {p_words(1 / (draws + 1))}; held against {count} pairs, Holm can find none, and"
            f" Benjamini-Hochberg none that stands alone. From {enough_draws(count):,} surrogates"
            " on both can."
        )
    return said


def opened_words(known: Scan) -> list[str]:
    """Say which file a result comes from, what made it, and what of it can be drawn."""
    asked, opened = known.question, known.question.opened
    if opened is None:
        return []
    state, mine = asked.state, software_version()
    other = "" if opened.version == mine else f"; this is {mine}"
    said = [
        f"Opened from {opened.name}, written by Pricewake {opened.version}{other}: seed"
        f" {state.seed}, {state.surrogates:,} surrogates, content {opened.mark}. Drivers,"
        " sample, grid and draws are the file's; order and correction are yours."
    ]
    if opened.cut:
        said.append("The last line of the file is cut short and left out.")
    if not opened.finished:
        said.append(
            "That scan had not come to its end: p-values are held against the pairs in the file"
            " only, and rise when the others come."
        )
    there, rows = len(asked.pairs), len(opened.panel.pairs)
    if there == rows:
        said.append("Maps and averages are of the loaded series, just those that were searched.")
    elif there:
        said.append(
            f"A result file holds no series: maps and averages are of the {there} of"
            f" {counted(rows, 'pair')} whose series are loaded just as they were searched."
        )
    else:
        said.append(
            "A result file holds no series, so maps and averages are missing; they come once the"
            " files that were searched are loaded."
        )
    return said


def missed_words(panel: PanelScan, asked: Question) -> list[str]:
    """Say how many related pairs must be expected among those not named, where it can be said."""
    p = np.array([scan.p for scan in panel.pairs])
    judged = int(np.isfinite(p).sum())
    if judged < ENOUGH:
        return []
    related, found = judged - unrelated_pairs(p), len(found_pairs(panel, asked.state.correction))
    false = (
        "; of those that hold, 1 in 20 or fewer is expected to be false"
        if found and asked.state.correction == "bh"
        else ""
    )
    if related <= found:
        return [
            "The share of large p-values gives no sign of related pairs beyond those that hold,"
            f" which excludes none{false}."
        ]
    return [
        f"By the share of large p-values about {related:.0f} of {counted(judged, 'pair')} are"
        f" related (a rough estimate after Storey, Taylor and Siegmund 2004): expect to miss about"
        f" {related - found:.0f}{false}."
    ]


def near_pairs(panel: PanelScan, correction: str) -> list[tuple[PairScan, float, float]]:
    """Return the pairs that other draws may decide otherwise: pair, adjusted p, its error.

    The error is the Monte Carlo standard error of p times what the adjustment multiplied p by;
    near means within two of them of 5 %.
    """
    adjusted = panel.p_scan if correction == "bh" else panel.p_holm
    found = []
    for scan, p in zip(panel.pairs, adjusted.tolist(), strict=True):
        error = scan.p_error * p / scan.p
        if abs(p - LEVEL) <= 2.0 * error:
            found.append((scan, p, error))
    return found


def near_words(panel: PanelScan, asked: Question) -> list[str]:
    """Name the pairs that other draws may decide otherwise."""
    near = near_pairs(panel, asked.state.correction)
    if not near:
        return []
    named = [
        f"{pair_words(scan, asked)} (p {_thousandths(p)} ± {_thousandths(error)})"
        for scan, p, error in near[:NAMED]
    ]
    more = f" and {len(near) - NAMED} more" if len(near) > NAMED else ""
    return [
        f"Within two Monte Carlo standard errors of 5 %, so that another seed may decide otherwise:"
        f" {', '.join(named)}{more}. More surrogates make the error smaller."
    ]


def _thousandths(value: float) -> str:
    return f"{max(value, 0.001):.3f}".lstrip("0")


def enough_draws(pairs: int) -> int:
    """Return the fewest surrogates with which one pair alone can hold at 5 % among `pairs`."""
    return math.ceil(pairs / LEVEL) - 1


def found_pairs(panel: PanelScan, correction: str) -> list[PairScan]:
    """Return the pairs that hold at 5 % after a correction, in their order."""
    p = panel.p_scan if correction == "bh" else panel.p_holm
    return [scan for scan, each in zip(panel.pairs, p.tolist(), strict=True) if each <= LEVEL]


def average_words(known: Scan) -> str:
    """Say what the averages of the economies show, and how much hangs on one of them."""
    found = known.averages
    if found is None:
        return f"No line here: {known.no_averages}."
    spans = {(one.first, one.last) for one in known.question.averages}
    when = "{} to {}".format(*next(iter(spans))) if len(spans) == 1 else "each over the span it has"
    low, high = found.slope_interval
    what = "elasticity" if found.log else "slope"
    place = found.names.index(found.most_telling)
    gone = (
        f" Left out, having no logarithm: {', '.join(found.left_out[:NAMED])}."
        if found.left_out
        else ""
    )
    return (
        f"{len(found.names)} economies, {when}: {what} {plain(found.slope)} (95 % {plain(low)} to"
        f" {plain(high)}, as if economies were independent of each other), correlation"
        f" {signed(found.correlation)}. Without {found.most_telling or 'one'}, which tells most,"
        f" {plain(float(found.slope_without[place]))}; leaving out any other one, it stays from"
        f" {_rest_words(found, place)}.{gone}"
    )


def shift_words_of(known: Scan) -> str:
    """Say where the best shifts lie."""
    panel = known.panel
    if panel is None:
        return "The best shifts come with the search."
    found = found_pairs(panel, known.question.state.correction)
    unit = known.question.noun
    if not found:
        return "No pair holds, so the best shifts say nothing."
    shifts = np.array([scan.shift for scan in found])
    low, high, middle = int(shifts.min()), int(shifts.max()), float(np.median(shifts))
    held = "holds" if len(found) == 1 else "hold"
    which = f"The best shift of the {counted(len(found), 'pair')} that {held}"
    if low == high:
        return f"{which} is {shift_words(low, unit)}; above 0 the driver leads."
    return (
        f"{which} lies from {signed(low, 0)} to {signed(high, 0)} {unit}s, with"
        f" {signed(middle, 0 if middle.is_integer() else 1)} in the middle; above 0 the driver"
        " leads."
    )


def map_words(known: Scan, drawn: int) -> str:
    """Say what the small maps show."""
    unit, total = known.question.noun, len(known.question.pairs)
    if not drawn and known.question.opened is None:
        return "No map here: no pair is long enough to be searched."
    if not drawn:
        return "No map here: the series behind the result are not loaded."
    which = "" if drawn == total else f" The first {drawn} of {total} in the order of the table."
    held = " A heavy name holds once all pairs are paid for." if known.panel is not None else ""
    return (
        f"Correlation, blue below 0 and orange above, by window (up) and shift (across, {unit}s;"
        f" the dotted line is 0, right of it the driver leads). The ring is the cell that stands"
        f" out most.{held} A click opens the pair on the Lag page.{which}"
    )


def map_label(scan: PairScan, p: float, known: Scan) -> str:
    """Return the few words under a small map."""
    shift = shift_words(scan.shift, known.question.noun)
    return f"{shift}, r {signed(scan.correlation)}, p {p_words(p)}"


def waiting_words(known: Scan) -> str:
    """Say why the table is empty."""
    if not known.question.pairs:
        return "No pair can be searched."
    return "The table comes once every pair is searched, since p has to pay for all of them."


def _rest_words(found: LongAverages, place: int) -> str:
    rest = np.delete(found.slope_without, place)
    return f"{plain(float(rest.min()))} to {plain(float(rest.max()))}"


def _other(correction: str) -> str:
    return "holm" if correction == "bh" else "bh"


def _named(found: list[PairScan], asked: Question) -> str:
    words = [f"{pair_words(scan, asked)} {signed(scan.shift, 0)}" for scan in found[:NAMED]]
    more = f" and {len(found) - NAMED} more" if len(found) > NAMED else ""
    return ", ".join(words) + more


def _listed(names: tuple[str, ...]) -> str:
    if len(names) > 3:
        return f"{', '.join(names[:2])} and {len(names) - 2} more"
    return " and ".join([", ".join(names[:-1]), names[-1]] if len(names) > 1 else list(names))


def _grid(asked: Question) -> str:
    if asked.opened is not None and len(asked.pairs) < len(asked.roles.pairs):
        grid = (("windows", asked.state.windows, plain), ("shifts", asked.state.shifts, signed))
        named = []
        for what, text, written in grid:
            low, _, high = text.partition(":")
            if text:
                named.append(f"{what} {plain(int(low), 0)} to {written(int(high), 0)}")
        return f", {' and '.join(named)} {asked.noun}s" if named else ""
    if not asked.pairs:
        return ""
    windows = {(one.windows[0], one.windows[-1]) for one in asked.pairs}
    shifts = {(one.shifts[0], one.shifts[-1]) for one in asked.pairs}
    if len(windows) > 1 or len(shifts) > 1:
        return ", each over the windows and shifts that its sample allows"
    (low, high), (back, ahead) = windows.pop(), shifts.pop()
    return (
        f", windows {low} to {high} and shifts {plain(back, 0)} to {signed(ahead, 0)} {asked.noun}s"
    )
