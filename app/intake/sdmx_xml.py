"""SDMX-ML data messages of version 2.1 (generic and structure-specific), and what is close to them.

The elements are told by their names without the name space; the parser is the one of the standard
library, after `refuse_entities`, and it keeps nothing but the observations.
"""

from xml.parsers import expat

from analytics.series import Series
from app.intake.csv_files import FORMATS, MAX_COLUMNS
from app.intake.problems import IntakeError, Problem, counted, plain_text, quoted, refusal
from app.intake.sdmx import (
    MAX_COMPONENTS,
    STATUS,
    TIME,
    VALUE,
    Message,
    Observation,
    is_attribute,
)
from app.intake.sdmx_series import read_message
from app.intake.sheets import Metadata
from app.intake.xml_guard import refuse_entities

_GENERIC = frozenset(("GenericData", "GenericTimeSeriesData"))
_SPECIFIC = frozenset(("StructureSpecificData", "StructureSpecificTimeSeriesData", "CompactData"))
_MAX_DEPTH = 64
_MAX_GROUPS = 20  # kinds of group, by the dimensions that they fix


def read_sdmx_xml(
    file: str, content: bytes, text: str, metadata: Metadata | None = None
) -> tuple[list[Series], list[Problem]]:
    """Read the series of an SDMX-ML data message.

    Parameters
    ----------
    file : str
        Display name of the file.
    content : bytes
        The file, which the parser decodes as its declaration says.
    text : str
        The file as text, to tell what it is.
    metadata : mapping of str to mapping, optional
        As in `app.intake.reading.read_release`.

    Raises
    ------
    IntakeError
        It is no such message, declares a document type or entities, or holds no observation.
    """
    head = text.lstrip()[:200].lower()
    if head.startswith(("<!doctype html", "<html")):
        raise refusal(file, f"must be {FORMATS}, but this looks like HTML")
    refuse_entities(file, content)
    reader = _Reader(file)
    try:
        reader.parser.Parse(content, True)
    except expat.ExpatError as error:
        message = f"must be well-formed XML, but is not ({expat.ErrorString(error.code)})"
        raise refusal(file, message, row=error.lineno) from None
    except (ValueError, LookupError) as error:
        if hasattr(error, "problem"):
            raise
        raise refusal(file, "must be XML in an encoding that is read, but is not") from None
    return read_message(reader.message(), metadata)


class _Reader:
    """Takes the observations of one message as the parser comes upon them."""

    def __init__(self, file: str) -> None:
        self.file = file
        self.parser = expat.ParserCreate(namespace_separator=" ")
        self.parser.StartElementHandler = self._start
        self.parser.EndElementHandler = self._end
        self.parser.CharacterDataHandler = self._text
        self.parser.StartDoctypeDeclHandler = self._doctype
        self.found = Message(file)
        self.path: list[str] = []
        self.generic = False
        self.at = TIME
        self.words = ""
        self.deleting = False
        self.deleted: list[int] = []
        self.dataset: dict[str, str] = {}
        self.series: dict[str, str] = {}
        self.held: dict[str, str] = {}
        self.shared: dict[str, str] | None = None  # of all observations without their own
        self.group: dict[str, str] = {}
        self.groups: list[tuple[dict[str, str], dict[str, str]]] = []
        self.observation: dict[str, str] = {}
        self.noted: dict[str, str] = {}

    def message(self) -> Message:
        """Return what was found, once all of the file was parsed."""
        if self.deleted:
            text = counted("an observation to delete was not read", len(self.deleted) - 1, "such")
            self.found.problems.append(Problem("warning", self.file, self.deleted[0], None, text))
        if not self.found.series:
            raise refusal(self.file, "must hold observations, but holds none")
        self._spread_groups()
        return self.found

    def _doctype(self, *_: object) -> None:
        raise refusal(self.file, "XML must not declare a document type or entities, but this does")

    def _start(self, tag: str, attributes: dict[str, str]) -> None:
        space, _, name = tag.rpartition(" ")
        if not self.path:
            self._root(name)
        self.generic |= space.endswith("/data/generic")  # whatever the root promised
        self.path.append(name)
        if len(self.path) > _MAX_DEPTH:
            raise refusal(
                self.file,
                f"XML must not nest more than {_MAX_DEPTH} deep, but this does",
                row=self.parser.CurrentLineNumber,
            )
        if len(attributes) > MAX_COMPONENTS:
            raise self._too_many()
        if "DataSet" not in self.path[:3]:
            if name == "Structure" and "dimensionAtObservation" in attributes:
                self.at = plain_text(attributes["dimensionAtObservation"], 80)
            return
        plain = {key: value for key, value in attributes.items() if " " not in key}
        if name == "DataSet":
            self._begin_data(attributes, plain)
        elif self.generic:
            self._start_generic(name, plain)
        else:
            self._start_specific(name, plain)

    def _too_many(self) -> IntakeError:
        message = f"an element must not have more than {MAX_COMPONENTS} values, but this one has"
        return refusal(self.file, message, row=self.parser.CurrentLineNumber)

    def _root(self, name: str) -> None:
        if name not in _GENERIC | _SPECIFIC:
            raise refusal(
                self.file,
                "XML must be an SDMX data message, generic or structure-specific, but this is"
                f" {quoted(name)}",
                row=self.parser.CurrentLineNumber,
            )
        self.generic = name in _GENERIC

    def _begin_data(self, attributes: dict[str, str], plain: dict[str, str]) -> None:
        action = next((v for k, v in attributes.items() if k.rpartition(" ")[2] == "action"), "")
        self.deleting = action.strip().lower() in ("delete", "d")
        self.series, self.held, self.shared = {}, {}, None
        self.dataset = {k: v for k, v in plain.items() if k.isupper() and not self.generic}

    def _start_generic(self, name: str, plain: dict[str, str]) -> None:
        inside = self.path[-2]
        if name == "Series":
            self.series, self.held, self.shared = {}, {}, None
        elif name == "Group":
            self.group, self.noted = {}, {}
        elif name == "Obs":
            self.observation, self.noted = {}, {}
        elif name == "ObsDimension":
            at = TIME if self.at == "AllDimensions" else self.at
            self.observation[plain.get("id", at)] = plain.get("value", "")
        elif name == "ObsValue":
            self.observation[VALUE] = plain.get("value", "")
        elif name == "Time":
            self.words = ""
        elif name == "Value":
            component = plain.get("id") or plain.get("concept", "")
            if inside == "SeriesKey":
                kept = self.series
            elif inside == "GroupKey":
                kept = self.group
            elif inside == "ObsKey":
                kept = self.observation
            elif "Obs" in self.path or "Group" in self.path:
                kept = self.noted
            else:
                kept, self.shared = self.held if "Series" in self.path else self.dataset, None
            kept[component] = plain.get("value", "")
            if len(kept) > MAX_COMPONENTS:
                raise self._too_many()

    def _start_specific(self, name: str, plain: dict[str, str]) -> None:
        if name == "Series":
            self.series = {k: v for k, v in plain.items() if not is_attribute(k)}
            self.held, self.shared = {k: v for k, v in plain.items() if is_attribute(k)}, None
        elif name == "Group":
            self.groups.append((plain, plain))
        elif name == "Obs":
            self.observation, self.noted = {}, {}
            dated = TIME in plain and "Series" in self.path
            for component, value in plain.items():
                inside = component in (TIME, VALUE) or not (dated or is_attribute(component))
                (self.observation if inside else self.noted)[component] = value

    def _end(self, _tag: str) -> None:
        name = self.path.pop()
        if name == "Obs" and "DataSet" in self.path:
            self._finish()
        elif name == "Series":
            self.series, self.held, self.shared = {}, {}, None
        elif name == "Time" and self.path and self.path[-1] == "Obs":
            self.observation[TIME] = self.words
        elif name == "Group" and self.generic:
            self.groups.append((self.group, self.noted))
        if len(self.groups) > MAX_COLUMNS:
            message = f"a file must not have more than {MAX_COLUMNS:,} groups, but this one has"
            raise refusal(self.file, message)

    def _text(self, data: str) -> None:
        if self.path[-1] == "Time" and len(self.words) < 100:
            self.words += data

    def _finish(self) -> None:
        """Hand over an observation that has ended."""
        line = self.parser.CurrentLineNumber
        if self.deleting:
            self.deleted.append(line)
            return
        noted = self.noted
        flags = (noted.pop(name, "") or self.held.get(name, "") for name in STATUS)
        status = next(filter(None, flags), "")
        held = self.shared
        if noted or held is None:
            held = {**self.dataset, **self.held, **noted}
            held = {name: text for name, text in held.items() if text and name not in STATUS}
            self.shared = None if noted else held
        key = {**self.series, **self.observation}
        period, value = key.pop(TIME, ""), key.pop(VALUE, "")
        self.found.add(
            tuple(sorted(key.items())),
            lambda: key,
            held,
            Observation(period, value, status, line),
        )

    def _spread_groups(self) -> None:
        """Give the attributes of groups to the series that they hold."""
        dimensions = {name for one in self.found.series for name in one.key}
        kinds: dict[tuple[str, ...], dict[tuple[str, ...], dict[str, str]]] = {}
        for fixed, noted in self.groups:
            names = tuple(sorted(dimensions & set(fixed)))
            if names not in kinds and len(kinds) >= _MAX_GROUPS:
                raise refusal(self.file, "groups must be of fewer kinds, but there are too many")
            values = tuple(fixed[name] for name in names)
            kinds.setdefault(names, {}).setdefault(values, {}).update(
                {name: text for name, text in noted.items() if name not in names and text}
            )
        for one in self.found.series:
            for names, known in kinds.items():
                noted = known.get(tuple(one.key.get(name, "") for name in names), {})
                one.attributes = {**noted, **one.attributes}
