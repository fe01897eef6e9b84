"""From a draft to its files, step by step: the page asks for one after another, the command loops.

The steps: each page and state is worked out, the brief is put together, each chart is drawn as a
picture, the PDF is printed.
"""

import io
import tempfile
import zipfile
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from pathlib import Path

from app.brief import chromium
from app.brief.assembled import (
    Brief,
    Question,
    Section,
    assembled,
    numbers_of,
    questions,
    settled,
)
from app.brief.charts import as_picture
from app.brief.document import document
from app.brief.folder import RECIPE
from app.brief.parts import PAPERS, Draft
from app.brief.pictures import Pictures, missing, png_with, svg_with
from app.brief.recipe import Comparison, Recipe, compared, recipe_text
from app.brief.sources import Shown, source
from app.compute import Bridge
from app.places import software_version
from app.workspace import today

PAGE, PDF, VIEWS = "brief.html", "brief.pdf", "views"
_ZIP_DATE = (1980, 1, 1, 0, 0, 0)


@dataclass
class Building:
    """A brief that is being made.

    Attributes
    ----------
    draft, bridge, pictures, before : Draft, Bridge, Pictures, Recipe or None
        What to make, from what, with which browser, and what it is held against.
    numbers, images : bool
        Whether CSV files, and pictures and PDF, are made; a preview needs neither.
    paper : str
        A key of `PAPERS`.
    steps : list
        What is left to do: words and an act.
    files, csv : dict
        The files so far, and the text of those that hold numbers.
    said : list of str
        Sentences on what could not be done.
    """

    draft: Draft
    bridge: Bridge
    pictures: Pictures
    before: Recipe | None = None
    numbers: bool = True
    images: bool = True
    paper: str = "a4"
    steps: list[tuple[str, Callable[[], None]]] = field(default_factory=list)
    done: int = 0
    known: dict[Question, Shown | str] = field(default_factory=dict)
    brief: Brief | None = None
    since: Comparison | None = None
    files: dict[str, bytes] = field(default_factory=dict)
    csv: dict[str, str] = field(default_factory=dict)
    said: list[str] = field(default_factory=list)

    def __post_init__(self) -> None:
        for question, views in questions(self.draft).items():
            title = source(question[0]).title
            self.steps.append((f"Working out {title}", self._work(question, views)))
        self.steps.append(("Putting it together", self._assemble))

    @property
    def total(self) -> int:
        """Steps done and left, as far as they are known."""
        return self.done + len(self.steps)

    def step(self) -> str:
        """Do the next step and return what comes after it, in words; empty at the end."""
        if self.steps:
            _, act = self.steps.pop(0)
            act()
            self.done += 1
        return self.steps[0][0] if self.steps else ""

    def finish(self) -> None:
        """Do all the steps that are left."""
        while self.steps:
            self.step()

    def _work(self, question: Question, views: tuple[str, ...]) -> Callable[[], None]:
        def act() -> None:
            self.known[question] = settled(*question, self.bridge, views)

        return act

    def _assemble(self) -> None:
        brief = self.brief = assembled(self.draft, self.bridge, self.known)
        self.said += brief.refusals
        views = [each for each in brief.sections if each.stem and each.shown is not None]
        if self.numbers:
            self.steps += [(f"Numbers of {each.heading}", self._count(each)) for each in views]
        lacking = missing() if self.images else ""
        if lacking:
            self.said.append(lacking)
        elif self.images:
            self.steps += [
                (f"Drawing {each.heading}", self._draw(each))
                for each in views
                if each.chart is not None
            ]
        self.steps.append(("Writing the page", self._write))
        if self.images:
            self.steps.append(("Printing the PDF", self._print))
        if self.numbers:
            self.steps.append(("Writing the recipe", self._close))

    def _count(self, section: Section) -> Callable[[], None]:
        def act() -> None:
            try:
                self.csv[f"{VIEWS}/{section.stem}.csv"] = numbers_of(section, self.bridge)
            except ValueError as error:
                self.said.append(f"{section.page}, {section.heading}, has no numbers: {error}")

        return act

    def _draw(self, section: Section) -> Callable[[], None]:
        def act() -> None:
            shown, chart = section.shown, section.chart
            assert shown is not None and chart is not None and self.brief is not None
            if not self.images:
                return
            title, view = shown.sentence, section.part.view
            figure = as_picture(
                chart,
                section.name,
                title,
                shown.subtitles.get(view) or section.heading,
                shown.source,
            )
            notes = picture_notes(section, self.brief)
            try:
                png = self.pictures.drawn(figure, "png")
                svg = self.pictures.drawn(figure, "svg")
            except chromium.NoChromiumError as error:
                self.said.append(str(error))
                self.images = False  # the others would fail as well
                return
            self.files[f"{VIEWS}/{section.stem}.png"] = png_with(png, {"Title": title, **notes})
            self.files[f"{VIEWS}/{section.stem}.svg"] = svg_with(svg, title, notes)

        return act

    def _write(self) -> None:
        assert self.brief is not None
        self.files |= {name: text.encode() for name, text in self.csv.items()}
        if self.before is not None:
            self.since = compared(self.before, self.brief, self.csv)
        self.files[PAGE] = self._page().encode()

    def _page(self, paper: str = "") -> str:
        assert self.brief is not None
        pictured = any(name.endswith(".png") for name in self.files)
        return document(self.brief, today(), self.since, VIEWS if pictured else "", paper)

    def _print(self) -> None:
        with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as folder:
            page = Path(folder) / PAGE
            page.write_text(self._page(PAPERS[self.paper]), encoding="utf-8")
            try:
                self.files[PDF] = chromium.printed(page)
            except chromium.NoChromiumError as error:
                self.said.append(str(error))

    def _close(self) -> None:
        assert self.brief is not None
        names = [PAGE, *sorted(self.files.keys() - {PAGE})]
        text = recipe_text(self.brief, self.csv, names)
        self.files = {PAGE: self.files[PAGE], RECIPE: text.encode(), **self.files}


def picture_notes(section: Section, brief: Brief) -> Mapping[str, str]:
    """Return what a picture carries: series, fingerprints, state, seed and version."""
    page = source(section.part.page)
    used = section.used
    return {
        "Software": f"Pricewake {software_version()}",
        "View": f"{section.page}: {section.heading}",
        "Series": "; ".join(
            f"{one.name} ({one.source}, {one.first} to {one.last}, fingerprint {one.fingerprint})"
            for one in used
        ),
        "State": f"{page.path}?{section.part.state.to_query()}",
        "Seed": str(section.part.state.seed),
        "Note": "past data; an association is not a cause, and nothing here is advice",
    }


def zipped(files: Mapping[str, bytes]) -> bytes:
    """Return files as a zip archive; the same files give the same bytes."""
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in files.items():
            packed = not name.endswith((".png", ".pdf"))
            how = zipfile.ZIP_DEFLATED if packed else zipfile.ZIP_STORED
            archive.writestr(zipfile.ZipInfo(name, _ZIP_DATE), content, compress_type=how)
    return out.getvalue()
