"""Components of a page and Markdown of a writer as still HTML; whatever comes in stays text."""

import re
from collections.abc import Mapping
from html import escape
from typing import Any

from dash.development.base_component import Component
from markdown_it import MarkdownIt
from markdown_it.renderer import RendererHTML

_KEPT = {
    "A": "span",
    "Dd": "dd",
    "Details": "div",
    "Div": "div",
    "Dl": "dl",
    "Dt": "dt",
    "H2": "h4",
    "Li": "li",
    "Link": "span",
    "Ol": "ol",
    "P": "p",
    "Span": "span",
    "Strong": "strong",
    "Summary": "p",
    "Table": "table",
    "Tbody": "tbody",
    "Td": "td",
    "Th": "th",
    "Thead": "thead",
    "Tr": "tr",
    "Ul": "ul",
    "B": "b",
    "Em": "em",
}
_CLASSES = re.compile(r"[\w -]*")
_STYLE = re.compile(r"var\(--[\w-]+\)|#[0-9A-Fa-f]{6}|-?[0-9.]+(%|px|rem|em)?|inline-block|block")
# What to do on a page: nothing can be done on paper.
_ASIDE = re.compile(r"; choose others[^.]*(?=\.)")
_DOING = re.compile(r" *(?<![^.] )[^.]*\b(?:[Cc]hoose|can be taken out here)\b[^.]*\.")
_TURNING = re.compile("[\u061c\u200e\u200f\u202a-\u202e\u2066-\u2069]")


def shown(text: str) -> str:
    """Return text without the marks that turn the direction of what follows.

    Such a mark in a name would show the digits of the rest of the sentence in another order.
    """
    return _TURNING.sub("", text)


def safe(text: str) -> str:
    """Return text as HTML that shows it letter by letter."""
    return escape(shown(text))


def still(part: Any) -> str:
    """Return components as HTML that does nothing: no controls, nor what to do with them."""
    if part is None or isinstance(part, bool):
        return ""
    if isinstance(part, list | tuple):
        return "".join(still(each) for each in part)
    if not isinstance(part, Component):
        return safe(_DOING.sub("", _ASIDE.sub("", str(part))))
    if getattr(part, "hidden", False):
        return ""
    kind, inside = part._type, getattr(part, "children", None)
    if kind == "Br":
        return "<br>"
    if kind == "Button":
        return still(inside) if _says_something(part) else ""
    if kind not in _KEPT:
        return ""
    tag, text = _KEPT[kind], still(inside)
    sign = "sign" in str(getattr(part, "className", "")).split()
    if not text and not sign and tag in ("p", "div", "ul", "ol", "li", "dl", "h4", "span"):
        return ""
    return f"<{tag}{_attributes(part)}>{text}</{tag}>"


def _says_something(button: Component) -> bool:
    """Whether a button is a heading to sort by, a term, a name to choose, or a choice made."""
    said = button.to_plotly_json()["props"]
    if said.get("className") in ("sorter", "term") or "data-without" in said:
        return True
    return bool(said.get("aria-pressed") == "true")


def _attributes(part: Component) -> str:
    words = []
    classes = getattr(part, "className", None) or ""
    if part._type == "Summary":
        classes = "fold-head"
    if classes and _CLASSES.fullmatch(classes):
        words.append(f'class="{classes}"')
    if getattr(part, "scope", None) in ("col", "row"):
        words.append(f'scope="{part.scope}"')
    for name in ("colSpan", "rowSpan"):
        if str(getattr(part, name, None) or "").isdigit():
            words.append(f'{name.lower()}="{getattr(part, name)}"')
    style = getattr(part, "style", None)
    if isinstance(style, Mapping):
        kept = {k: str(v) for k, v in style.items() if _STYLE.fullmatch(str(v))}
        if kept:
            written = ";".join(f"{_dashed(k)}:{v}" for k, v in kept.items())
            words.append(f'style="{escape(written)}"')
    if part.to_plotly_json()["props"].get("aria-hidden") == "true":
        words.append('aria-hidden="true"')
    return "".join(f" {word}" for word in words)


def _dashed(name: str) -> str:
    return re.sub(r"[^a-z-]", "", re.sub("([A-Z])", r"-\1", name).lower())


class _Still(RendererHTML):
    """Headings below those of the brief; links that tell nobody where they were followed."""

    def heading_open(self, tokens: Any, idx: int, options: Any, env: Any) -> str:
        return f"<{_lowered(tokens[idx].tag)}>"

    def heading_close(self, tokens: Any, idx: int, options: Any, env: Any) -> str:
        return f"</{_lowered(tokens[idx].tag)}>\n"

    def link_open(self, tokens: Any, idx: int, options: Any, env: Any) -> str:
        address = escape(str(tokens[idx].attrGet("href") or ""))
        return f'<a href="{address}" rel="noopener noreferrer nofollow">'

    def image(self, tokens: Any, idx: int, options: Any, env: Any) -> str:
        return f"[{safe(tokens[idx].content) or 'picture'}]"  # it would have to be fetched


def _lowered(tag: str) -> str:
    return f"h{min(6, int(tag[1:]) + 2)}"


def _allowed(address: str) -> bool:
    return re.match(r"(https?:|mailto:|#)", address.strip(), re.IGNORECASE) is not None


def markdown(words: str) -> str:
    """Return Markdown as HTML: CommonMark and tables, no HTML of the writer's, no pictures."""
    reader = MarkdownIt("commonmark", {"html": False}, renderer_cls=_Still)
    reader.enable("table").disable(["html_block", "html_inline"])
    reader.validateLink = _allowed  # type: ignore[method-assign]
    return str(reader.render(shown(words)))
