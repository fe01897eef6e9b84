"""What a brief consists of: parts in order, each a verdict, a view or words of the writer."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from app.state import StateError, ViewState

FORMS = {"full": "in full", "one-page": "on one page"}
PAPERS = {"a4": "A4", "letter": "letter"}  # as a style sheet calls them
KINDS = ("verdict", "view", "words")
MOST_PARTS, MOST_LETTERS, LONGEST_TITLE = 100, 20_000, 200


@dataclass(frozen=True, kw_only=True)
class Part:
    """One part of a brief.

    Attributes
    ----------
    kind : {"verdict", "view", "words"}
        Headline and verdict of a page; one of its views; or Markdown.
    page, view : str
        Names as in the address of a CSV file; a verdict has no view, words have neither.
    state : ViewState
        What is looked at.
    words : str
        Markdown; empty unless the kind is words.
    """

    kind: str
    page: str = ""
    view: str = ""
    state: ViewState = field(default_factory=ViewState)
    words: str = ""


@dataclass(frozen=True, kw_only=True)
class Draft:
    """A brief as it was asked for. An empty `title` takes the usual one."""

    title: str = ""
    form: str = "full"
    parts: tuple[Part, ...] = ()


def read_draft(sent: Any) -> Draft:
    """Read a draft as the page sends it and a recipe holds it; states are queries of addresses.

    Raises
    ------
    StateError
        It is no draft, or a value in it is refused.
    """
    if not isinstance(sent, Mapping) or not isinstance(sent.get("parts"), list):
        raise StateError("a brief must have a list of parts, but there is none")
    title, form = sent.get("title", ""), sent.get("form", "full")
    if not isinstance(title, str) or len(title) > LONGEST_TITLE:
        raise StateError(f"the title must be text of at most {LONGEST_TITLE} letters")
    if form not in FORMS:
        raise StateError(f"the form must be one of {', '.join(FORMS)}, but got {str(form)[:40]!r}")
    if len(sent["parts"]) > MOST_PARTS:
        raise StateError(
            f"a brief must have at most {MOST_PARTS} parts, but this one has {len(sent['parts'])}"
        )
    return Draft(
        title=" ".join(title.split()),
        form=form,
        parts=tuple(_read_part(each) for each in sent["parts"]),
    )


def sent_draft(draft: Draft) -> dict[str, Any]:
    """Return a draft as `read_draft` takes it."""
    return {
        "title": draft.title,
        "form": draft.form,
        "parts": [
            {"kind": "words", "words": part.words}
            if part.kind == "words"
            else {
                "kind": part.kind,
                "page": part.page,
                **({"view": part.view} if part.kind == "view" else {}),
                "state": part.state.to_query(),
            }
            for part in draft.parts
        ],
    }


def _read_part(sent: Any) -> Part:
    if not isinstance(sent, Mapping) or sent.get("kind") not in KINDS:
        raise StateError(f"a part of a brief must be one of {', '.join(KINDS)}")
    texts = {name: sent.get(name, "") for name in ("page", "view", "state", "words")}
    wrong = [name for name, text in texts.items() if not isinstance(text, str)]
    if wrong:
        raise StateError(f"the {wrong[0]} of a part of a brief must be text")
    if sent["kind"] == "words":
        if len(texts["words"]) > MOST_LETTERS:
            raise StateError(
                f"words between views must be at most {MOST_LETTERS} letters, but these are"
                f" {len(texts['words'])}"
            )
        return Part(kind="words", words=texts["words"])
    return Part(
        kind=sent["kind"],
        page=texts["page"],
        view=texts["view"] if sent["kind"] == "view" else "",
        state=ViewState.from_query(texts["state"]),
    )
