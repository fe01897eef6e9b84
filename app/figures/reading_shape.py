"""Charts of how the print stands among other readings: rank, distribution, quantiles."""

from collections.abc import Mapping
from html import escape

import numpy as np
import plotly.graph_objects as go

from analytics.distribution import Fit, KernelFit
from analytics.families import FAMILIES
from analytics.standing import Standing
from app.figures.reading import above, ring
from app.figures.theme import colour, dress

FAMILY_LINES = {  # colour and dash of each family, so that hue alone tells nothing apart
    "laplace": ("fit", "solid"),
    "asymmetric_laplace": ("other", "dash"),
    "normal": ("driver", "dot"),
    "student_t": ("response", "dashdot"),
    "kernel": ("ink", "5px,2px"),
}


def standing_steps(found: Standing, unit: str) -> go.Figure:
    """Draw the cumulative distribution of what the print is compared with, the print marked."""
    share = 100.0 * np.arange(1, found.n + 1) / found.n
    figure = go.Figure(
        [
            go.Scatter(
                x=found.values,
                y=share,
                mode="lines",
                line={"color": colour("ink"), "width": 1.5, "shape": "hv"},
                hovertemplate="%{y:.0f} of 100 are at or below %{x:.2f}<extra></extra>",
                name="share at or below",
            ),
            go.Scatter(
                x=[found.value, found.value, float(found.values[0])],
                y=[0.0, found.rank, found.rank],
                mode="lines",
                line={"color": colour("mark"), "width": 1, "dash": "dot"},
                hoverinfo="skip",
                showlegend=False,
                name="the print",
            ),
            go.Scatter(
                x=[found.value],
                y=[found.rank],
                mode="markers+text",
                text=[f"the print, rank {found.rank:.0f}"],
                textposition=_beside(found.rank),
                cliponaxis=False,
                marker={"size": 11, "color": colour("mark"), "line": ring()},
                hovertemplate="%{x:.3f}: rank %{y:.1f}<extra>the print</extra>",
                name="the print",
            ),
        ]
    )
    dress(
        figure,
        margin={"l": 56, "r": 16, "t": 14, "b": 48},
        xaxis={"title": {"text": escape(unit, False)}},
        yaxis={"title": {"text": "of 100 readings, at or below"}, "range": [0, 104]},
    )
    return figure


def density_curves(
    values: np.ndarray,
    fits: Mapping[str, Fit],
    kernel: KernelFit | None,
    chosen: str,
    value: float,
    unit: str,
) -> go.Figure:
    """Draw the histogram of the readings under the fitted densities, the print marked."""
    ordered = np.sort(values[~np.isnan(values)])
    low, high = np.quantile(ordered, [0.002, 0.998])
    low, high = min(low, value), max(high, value)
    pad = 0.06 * (high - low)
    grid = np.linspace(low - pad, high + pad, 401)
    step = _bin_width(ordered)
    figure = go.Figure(
        go.Histogram(
            x=ordered,
            xbins={"start": float(np.floor((low - pad) / step) * step), "size": step},
            histnorm="probability density",
            marker={"color": colour("few-2"), "line": {"color": colour("paper"), "width": 1}},
            hovertemplate="%{x}: density %{y:.3f}<extra>readings</extra>",
            name="readings",
        )
    )
    top = 0.0
    for name, fit in fits.items():
        tone, dash = FAMILY_LINES[name]
        density = fit.density(grid)
        top = max(top, float(density.max()))
        figure.add_trace(
            go.Scatter(
                x=grid,
                y=density,
                mode="lines",
                line={"color": colour(tone), "dash": dash, "width": 2.4 if name == chosen else 1.1},
                hoverinfo="skip",
                name=FAMILIES[name].label,
            )
        )
    if kernel is not None:
        tone, dash = FAMILY_LINES["kernel"]
        figure.add_trace(
            go.Scatter(
                x=grid,
                y=kernel.density(grid),
                mode="lines",
                line={"color": colour(tone), "dash": dash, "width": 1},
                hoverinfo="skip",
                name="kernel",
            )
        )
    figure.add_vline(x=value, line={"color": colour("mark"), "width": 2})
    before = value < float(np.median(ordered)) or value > low + 0.75 * (high - low)
    figure.add_annotation(
        x=value,
        y=1,
        yref="paper",
        text="the print",
        showarrow=False,
        xanchor="right" if before else "left",
        xshift=-4 if before else 4,
    )
    dress(
        figure,
        margin={"l": 56, "r": 16, "t": 44, "b": 48},
        showlegend=True,
        legend=above(),
        xaxis={"title": {"text": escape(unit, False)}, "range": [low - pad, high + pad]},
        yaxis={"title": {"text": "density"}, "rangemode": "tozero"},
    )
    return figure


def quantile_points(found: Standing, fit: Fit, unit: str) -> go.Figure:
    """Draw observed readings against the fitted quantiles; on the line the fit is exact."""
    label = FAMILIES[fit.family].label
    share = (np.arange(found.n) + 0.5) / found.n
    fitted = fit.quantile(share)
    ends = [float(min(fitted[0], found.values[0])), float(max(fitted[-1], found.values[-1]))]
    figure = go.Figure(
        [
            go.Scatter(
                x=ends,
                y=ends,
                mode="lines",
                line={"color": colour("quiet"), "width": 1, "dash": "dot"},
                hoverinfo="skip",
                name="exact fit",
            ),
            go.Scatter(
                x=fitted,
                y=found.values,
                customdata=100 * share,
                mode="markers",
                marker={"size": 4, "color": colour("fit"), "opacity": 0.7},
                hovertemplate="%{customdata:.1f} of 100 below: fitted %{x:.2f}, observed %{y:.2f}"
                "<extra></extra>",
                name="readings",
            ),
        ]
    )
    dress(
        figure,
        margin={"l": 56, "r": 16, "t": 14, "b": 48},
        xaxis={"title": {"text": f"{label[0].upper()}{label[1:]} quantile"}},
        yaxis={"title": {"text": f"observed, {escape(unit, False)}"}},
    )
    return figure


def _bin_width(ordered: np.ndarray) -> float:
    """Freedman and Diaconis (1981), kept to at most 60 bins over the bulk of the readings."""
    low, high = np.quantile(ordered, [0.25, 0.75])
    bulk = float(np.quantile(ordered, 0.998) - np.quantile(ordered, 0.002))
    width = 2.0 * float(high - low) * ordered.size ** (-1 / 3)
    return max(width, bulk / 60.0) or 1.0


def _beside(rank: float) -> str:
    """Return where the words of the print stand clear of the curve."""
    if rank > 85:
        return "bottom left"
    return "top left" if rank > 60 else "bottom right"
