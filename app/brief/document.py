"""The brief as one HTML file that holds everything it needs and asks no host for anything."""

import base64
import hashlib
import json
from collections.abc import Iterable, Sequence
from functools import lru_cache
from pathlib import Path
from typing import Any

from app.brief.assembled import CAUTION, Brief, Section
from app.brief.charts import CHART_OPTIONS, in_column
from app.brief.markup import markdown, safe, still
from app.brief.recipe import Change, Comparison
from app.brief.series_used import Provenance
from app.pages.as_of import day_words
from app.places import bundled, software_version

_HERE = Path(__file__).resolve().parent
MOST_ROWS = 3  # key figures that changed, on one page
LESS = 34  # pixels of every chart, on one page
MANY = 8  # series of one file and kind that are listed one by one


def document(
    brief: Brief,
    day: str,
    since: Comparison | None = None,
    pictures: str = "",
    paper: str = "",
) -> str:
    """Return the brief as HTML.

    Parameters
    ----------
    brief : Brief
        What to show.
    day : str
        Date of the brief.
    since : Comparison, optional
        What changed since the last one.
    pictures : str
        Folder of picture files beside it, for readers without scripts; empty for none.
    paper : str
        Size that it is printed on; empty leaves it to whoever prints.
    """
    charts: dict[str, Any] = {}
    small = brief.draft.form == "one-page"
    body = (_one_page if small else _full)(brief.sections, charts)
    changes = _changes(since, small)
    if small and changes:  # to leave it room on the page
        for each in charts.values():
            each["figure"]["layout"]["height"] -= LESS
    data = json.dumps(charts, separators=(",", ":"), allow_nan=False).replace("<", "\\u003c")
    style, library, script = _style(), _library(), _read("document.js")
    where = f" Their pictures lie in the folder {safe(pictures)}." if pictures else ""
    return f"""<!DOCTYPE html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="{policy()}">
<meta http-equiv="x-dns-prefetch-control" content="off">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="referrer" content="no-referrer">
<meta name="generator" content="Pricewake {safe(software_version())}">
<title>{safe(brief.title)}</title>
<style>{style}{f"@page {{ size: {paper}; }}" if paper else ""}</style>
</head>
<body class="{brief.draft.form}">
<main>
<header>
<h1><bdi>{safe(brief.title)}</bdi></h1>
<p class="dateline">{safe(day_words(day))} · made with Pricewake {safe(software_version())}</p>
</header>
<noscript><p class="refused">The charts need JavaScript, which is off here.{where}</p></noscript>
{changes}
{body}
<section class="caution">
<p>{safe(CAUTION)}</p>
</section>
{_provenance(brief.series, small)}
</main>
<script type="application/json" id="charts">{data}</script>
<script>{library}</script>
<script>{script}</script>
</body>
</html>
"""


@lru_cache
def policy(frame: str = "") -> str:
    """Return the content security policy of a brief: its own two scripts, and nothing else.

    `frame` is who may show it in a frame, for the header of the preview.
    """
    hashes = " ".join(
        f"'sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}'"
        for text in (_library(), _read("document.js"))
    )
    kept = (
        f"default-src 'none'; script-src {hashes}; style-src 'unsafe-inline';"
        " img-src data: blob:; base-uri 'none'; form-action 'none'"
    )
    return f"{kept}; frame-ancestors {frame}" if frame else kept


@lru_cache
def _library() -> str:
    text = (bundled("assets") / "plotly-cartesian.min.js").read_text(encoding="utf-8")
    text = text.replace("\r\n", "\n").replace("\r", "\n")  # as a browser hashes it
    if "</script" in text.lower():
        raise ValueError("the chart library must not hold the end of a script, but does")
    return text


@lru_cache
def _style() -> str:
    tokens = (bundled("assets") / "tokens.css").read_text(encoding="utf-8")
    return f"{tokens}\n{_read('document.css')}"


@lru_cache
def _read(name: str) -> str:
    return (_HERE / name).read_text(encoding="utf-8").replace("\r\n", "\n")


# The parts ------------------------------------------------------------------------------------


def _full(sections: Iterable[Section], charts: dict[str, Any]) -> str:
    found = []
    for section in sections:
        if section.part.kind == "words":
            found.append(_words(section))
        elif section.part.kind == "verdict":
            found.append(_verdict(section))
        else:
            found.append(_view(section, charts, small=False))
    return "\n".join(found)


def _one_page(sections: Sequence[Section], charts: dict[str, Any]) -> str:
    """Return a row a verdict, the first view after it beside it; other views take a row each."""
    found, waiting = [], ""
    for section in sections:
        if section.part.kind == "view":
            chart = _view(section, charts, small=True)
            alone = "" if waiting else " alone"
            found.append(f'<section class="row{alone}">{waiting}{chart}</section>')
            waiting = ""
            continue
        if waiting:
            found.append(f'<section class="row alone">{waiting}</section>')
            waiting = ""
        if section.part.kind == "words":
            found.append(_words(section))
        else:
            waiting = f"<div>{_headline(section)}</div>"
    if waiting:
        found.append(f'<section class="row alone">{waiting}</section>')
    return "\n".join(found)


def _words(section: Section) -> str:
    return f'<section class="words" dir="auto">\n{markdown(section.part.words)}</section>'


def _headline(section: Section) -> str:
    if section.shown is None:
        return f"<h2>{safe(section.page)}</h2>\n{_refused(section)}"
    return (
        f"<h2>{safe(section.page)}</h2>\n"
        f'<p class="headline">{safe(section.shown.sentence)}</p>\n'
        f'<p class="verdict">{safe(section.shown.verdict)}</p>'
    )


def _verdict(section: Section) -> str:
    notes = still(list(section.shown.notes)) if section.shown else ""
    beside = f'\n<div class="scroll">{notes}</div>' if notes else ""
    return f'<section class="verdict-part">\n{_headline(section)}{beside}\n</section>'


def _view(section: Section, charts: dict[str, Any], *, small: bool) -> str:
    chart, head = section.chart, safe(section.heading)
    about = safe(f"{section.page}: {section.heading}. {_sentence(section)}")
    said = ""
    if section.shown is not None and not small:
        words = still(section.shown.words.get(section.part.view))
        said = f'\n<div class="beside scroll">{words}</div>' if words else ""
    drawn = ""
    if chart is not None:
        charts[section.stem] = {
            "figure": in_column(chart, section.name, small=small),
            "options": CHART_OPTIONS,
        }
        drawn = (
            f'\n<div class="chart" data-chart="{section.stem}" role="img" aria-label="{about}">'
            "</div>"
        )
    foot = f"\n{_refused(section)}" if section.refusal else ""
    caption = f"<figcaption>{head}</figcaption>" if small else f"<h3>{head}</h3>"
    long = ' class="long"' if "<table" in said else ""  # may be parted from its chart
    return f"<figure{long}>\n{caption}{said}{drawn}{foot}\n</figure>"


def _sentence(section: Section) -> str:
    return section.shown.sentence if section.shown else ""


def _refused(section: Section) -> str:
    text = section.refusal
    return f'<p class="refused">{safe(text[:1].upper() + text[1:])}.</p>' if text else ""


# Tables ---------------------------------------------------------------------------------------


def _changes(since: Comparison | None, small: bool) -> str:
    if since is None or not (since.data or since.figures):
        return ""
    rows = [change for change in since.figures if not small or change.before != change.now]
    head = "".join(
        f'<th scope="col"{" class=numeric" if i > 1 else ""}>{text}</th>'
        for i, text in enumerate(("Page", "Figure", "Last time", "Now", "Change"))
    )
    body = "".join(_change_row(change) for change in (rows[:MOST_ROWS] if small else rows))
    table = f"<table><thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>" if body else ""
    told = [line.partition("; ")[0] for line in since.data[:2]] if small else since.data
    data = "".join(f"<li>{safe(line)}</li>" for line in told)
    left = len(since.data) - len(told) + (max(0, len(rows) - MOST_ROWS) if small else 0)
    if left:
        data += f"<li>and {left} more, which the full form lists</li>"
    return f"""<section class="verdict-part changes">
<h2>What changed since last time</h2>
<div class="scroll">{table}</div>
<ul class="notes">{data}</ul>
</section>"""


def _change_row(change: Change) -> str:
    cells = [f"<td>{safe(change.page)}</td>", f'<th scope="row">{safe(change.label)}</th>']
    cells += [
        f'<td class="numeric">{safe(text)}</td>'
        for text in (change.before, change.now, change.difference)
    ]
    return f"<tr{' class=changed' if change.before != change.now else ''}>{''.join(cells)}</tr>"


def _provenance(series: Sequence[Provenance], small: bool) -> str:
    if not series:
        return ""
    groups: dict[tuple[str, str, str], list[Provenance]] = {}
    for one in series:
        groups.setdefault((one.file, one.kind, one.source), []).append(one)
    rows = []
    for (file, kind, source), members in groups.items():
        many = 2 if small else MANY
        if len(members) > many or (kind == "weights" and len(members) > 1):
            marks = hashlib.sha256("\n".join(m.fingerprint for m in members).encode())
            span = f"{min(m.first for m in members)} to {max(m.last for m in members)}"
            name = f"{len(members)} series: {members[0].name} to {members[-1].name}"
            rows.append(
                (name, kind, source, file, span, f"{marks.hexdigest()[:16]} (all)", members[0].day)
            )
        else:
            rows += [
                (m.name, m.kind, source, file, f"{m.first} to {m.last}", m.fingerprint, m.day)
                for m in members
            ]
    if small:
        said = "; ".join(
            f"{safe(name)} ({safe(kind)}, {safe(file)}, {safe(span)},"
            f' <span class="mark">{safe(mark)}</span>, {_dated(day)})'
            for name, kind, source, file, span, mark, day in rows
        )
        return f'<p class="provenance">Numbers from: {said}.</p>'
    body = "".join(
        f'<tr><th scope="row"><bdi>{safe(name)}</bdi></th><td>{safe(kind)}</td>'
        f"<td>{safe(source if file in source else f'{source}; {file}')}</td>"
        f'<td class="span">{safe(span)}</td><td class="mark">{safe(mark)}</td>'
        f"<td>{_dated(day)}</td></tr>"
        for name, kind, source, file, span, mark, day in rows
    )
    titles = ("Series", "Kind", "Source and file", "Span", "Fingerprint", "Vintage of")
    head = "".join(f'<th scope="col">{text}</th>' for text in titles)
    return f"""<section class="provenance">
<h2>Where the numbers come from</h2>
<div class="scroll"><table><thead><tr>{head}</tr></thead><tbody>{body}</tbody></table></div>
</section>"""


def _dated(day: str) -> str:
    return safe(day_words(day) or "not dated")
