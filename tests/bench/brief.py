"""How long a brief takes: the browser's start, twelve charts as PNG and SVG, the whole of it.

Run ``python -m tests.bench.brief``; it prints a table. Without a Chromium or kaleido it says so.
"""

import time

from app.brief.assembled import prefilled
from app.brief.building import Building
from app.brief.charts import as_picture
from app.brief.pictures import Pictures, missing
from app.compute import Bridge
from app.demo import demo_releases
from app.workspace import Workspace

CHARTS, LIMIT = 12, 15.0


def main() -> None:
    """Measure and print."""
    lacking = missing()
    if lacking:
        raise SystemExit(lacking)
    bridge = Bridge(Workspace((), demo_releases()))
    rows: list[tuple[str, float, str]] = []
    building = Building(prefilled(bridge), bridge, Pictures(), images=False)
    begun = time.perf_counter()
    building.finish()
    rows.append(("page, numbers and recipe, nothing known before", time.perf_counter() - begun, ""))
    assert building.brief is not None
    sections = [each for each in building.brief.sections if each.chart is not None][:CHARTS]
    pictures = Pictures()
    begun = time.perf_counter()
    pictures.start()
    rows.append(("start of the browser", time.perf_counter() - begun, ""))
    begun = time.perf_counter()
    for section in sections:
        assert section.shown is not None and section.chart is not None
        figure = as_picture(
            section.chart,
            section.name,
            section.shown.sentence,
            section.heading,
            section.shown.source,
        )
        for kind in ("png", "svg"):
            pictures.drawn(figure, kind)
    rows.append(
        (f"{len(sections)} charts, PNG and SVG", time.perf_counter() - begun, f"{LIMIT:g} s")
    )
    pictures.close()
    begun = time.perf_counter()
    building._print()
    rows.append(("PDF, its own browser started", time.perf_counter() - begun, ""))
    for words, seconds, limit in rows:
        print(f"{words:<50} {seconds:6.1f} s   {limit}")


if __name__ == "__main__":
    main()
