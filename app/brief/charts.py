"""Charts as a brief shows them: in the column of the page, or as a picture with its own title."""

import textwrap
from collections.abc import Mapping
from copy import deepcopy
from typing import Any

from app.brief.markup import safe
from app.figures.theme import CONFIG

COLUMN = 672  # pixels: what A4 and Letter leave between their margins
HEIGHTS = {  # pixels in the column, by page and view
    "lag surface": 390,
    "lag scatter": 460,
    "lag overlay": 240,
    "lag opinions": 520,
    "lag plane": 400,
    "breadth strip": 420,
    "reading distribution": 320,
}
NARROW = 20  # letters beside a small chart
CLEAR = "rgba(0,0,0,0)"
USUAL, SMALL = 262, 126  # of other views, and of any view on one page
SMALL_HEIGHTS = {"breadth contributions": 150, "lag surface": 146, "outlook fan": 146}
SIZES = {"lag surface": (1100, 760), "lag scatter": (900, 860), "lag overlay": (1200, 560)}
PICTURE = (1000, 680)
CHART_OPTIONS = {**CONFIG, "responsive": False}  # drawn anew when the column changes


def in_column(chart: Mapping[str, Any], name: str, *, small: bool = False) -> dict[str, Any]:
    """Return a chart for the column of the brief; `name` is page and view."""
    figure = deepcopy(dict(chart))
    layout = figure["layout"]
    layout["height"] = SMALL_HEIGHTS.get(name, SMALL) if small else HEIGHTS.get(name, USUAL)
    layout["autosize"] = False
    layout.pop("width", None)
    layout.update(paper_bgcolor=CLEAR, plot_bgcolor=CLEAR)  # the page shows, white when printed
    keyed = bool((layout.get("meta") or {}).get("key"))
    if keyed:
        layout["showlegend"] = False  # the key stands in the words
    if layout.get("showlegend"):
        layout["legend"] = {**_legend(), **layout.get("legend", {})}
        margin = layout.setdefault("margin", {})
        margin["t"] = max(margin.get("t", 8), 64 if name == "lag scatter" else 44)
    if small:
        layout["font"] = {"size": 9}
        for key, axis in layout.items():
            if key.startswith("xaxis"):
                axis["tickangle"] = 0
            if key.startswith(("xaxis", "yaxis")) and axis.get("title"):
                axis["title"] = {**axis["title"], "font": {"size": 9}}
                if key.startswith("yaxis"):
                    axis["title"]["text"] = _parted(axis["title"]["text"])
        layout["showlegend"] = False
        margin = layout.setdefault("margin", {})
        margin["t"] = min(margin.get("t", 8), 8)
    return figure


def as_picture(
    chart: Mapping[str, Any], name: str, title: str, subtitle: str, foot: str
) -> dict[str, Any]:
    """Return a chart with its sentence on top and its sources below, for PNG and SVG."""
    figure = deepcopy(dict(chart))
    layout = figure["layout"]
    width, height = SIZES.get(name, PICTURE)
    above = textwrap.wrap(title, int(width / 9.5)) or [""]
    below = textwrap.wrap(foot, int(width / 6.5)) or [""]
    legend = bool(layout.get("showlegend") or (layout.get("meta") or {}).get("key"))
    margin = layout.get("margin") or {}
    layout["margin"] = {
        **margin,
        "t": 50 + 24 * len(above) + (7 + 19 * _legend_rows(figure, width - 160) if legend else 0),
        "b": 62 + 15 * len(below),
        "l": max(70, margin.get("l", 0)),
        **({"r": 90} if name == "lag scatter" else {}),
    }
    layout["title"] = {
        "text": f"{'<br>'.join(map(safe, above))}<br>"
        f'<span style="font-size:13px">{safe(subtitle)}</span>',
        "x": 0.01,
        "xanchor": "left",
        "y": 1 - 18 / height,
        "yanchor": "top",
        "yref": "container",
        "font": {"size": 18, "family": "Georgia, Liberation Serif, serif"},
    }
    layout["annotations"] = [
        *layout.get("annotations", []),
        {
            "text": "<br>".join(map(safe, below)),
            "showarrow": False,
            "xref": "paper",
            "yref": "paper",
            "x": 0,
            "y": 0,
            "xanchor": "left",
            "yanchor": "top",
            "yshift": -52,
            "align": "left",
            "font": {"size": 11},
        },
    ]
    if legend:
        layout["showlegend"] = True
        layout["legend"] = _legend()
    layout.update(width=width, height=height, autosize=False)
    return figure


def _legend_rows(figure: Mapping[str, Any], room: int) -> int:
    """Rows of a legend whose columns are as wide as the longest name: legendRows in saving.js."""
    names = [
        len(trace["name"])
        for trace in figure["data"]
        if trace.get("name")
        and trace.get("showlegend") is not False
        and trace.get("visible") is not False
    ]
    across = max(1, int(room / (6.5 * max(names, default=0) + 60)))
    return max(1, -(-len(names) // across))


def _parted(title: str) -> str:
    """Return an axis title on two lines where one is too long for a small chart."""
    if len(title) <= NARROW or "<" in title:
        return title
    return "<br>".join(textwrap.wrap(title, max(NARROW, len(title) // 2 + 2)))


def _legend() -> dict[str, Any]:
    return {"orientation": "h", "x": 0, "y": 1, "yanchor": "bottom", "font": {"size": 11}}
