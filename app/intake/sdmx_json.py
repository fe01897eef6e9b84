"""SDMX-JSON data messages, versions 1.0 and 2.x, and the draft that came before them.

The rules are those of the SDMX-JSON field guides of the SDMX technical working group: dimensions
and attributes are given as places in lists of values that stand in the structure.
"""

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from analytics.series import Series
from app.intake.csv_files import FORMATS, MAX_CELLS, MAX_COLUMNS
from app.intake.problems import IntakeError, Problem, counted, plain_text, quoted, refusal
from app.intake.sdmx import MAX_COMPONENTS, STATUS, TIME, Message, Observation, labels_of
from app.intake.sdmx_series import read_message
from app.intake.sheets import Metadata

_MAX_OPENED = 4_000_000
_MAX_GROUPS = 20  # kinds of group, by the dimensions that they fix
_LEVELS = ("dataSet", "series", "observation")


_Groups = list[tuple[tuple[str, ...], dict[tuple[str, ...], dict[str, str]]]]


@dataclass(frozen=True, eq=False)
class _Component:
    """A dimension or an attribute: its id, the codes of its values and the place in the key."""

    name: str
    codes: list[str]
    order: int | None


def read_sdmx_json(
    file: str, text: str, metadata: Metadata | None = None
) -> tuple[list[Series], list[Problem]]:
    """Read the series of an SDMX-JSON data message.

    Raises
    ------
    IntakeError
        It is no JSON, no such message, or its places point nowhere.
    """
    if text.count("{") + text.count("[") > _MAX_OPENED or text.count(",") > MAX_CELLS:
        raise refusal(file, f"JSON must not hold more than {MAX_CELLS:,} values, but this does")
    try:
        root = json.loads(text, parse_float=str, parse_int=str, parse_constant=str)
    except json.JSONDecodeError as error:
        message = f"must be well-formed JSON, but is not ({error.msg})"
        raise refusal(file, message, row=error.lineno) from None
    except RecursionError:
        raise refusal(file, "JSON must not nest deeply, but this does") from None
    found = Message(file, lines=False)
    try:
        _collect(root, found)
    except IntakeError:
        raise
    except (LookupError, TypeError, AttributeError, ValueError, RecursionError) as error:
        shown = plain_text(str(error), 80)
        raise refusal(
            file, f"must be a whole SDMX-JSON data message, but a part of it does not fit ({shown})"
        ) from None
    if not found.series:
        raise refusal(file, "must hold observations, but holds none")
    return read_message(found, metadata)


def _collect(root: Any, message: Message) -> None:
    """Take the observations out of a message that was parsed."""
    data = root.get("data", root)
    sets = data.get("dataSets") if isinstance(data, dict) else None
    structures = data.get("structures") if isinstance(data, dict) else None
    if structures is None and isinstance(data, dict) and "structure" in data:
        structures = [data["structure"]]
    if not isinstance(sets, list) or not isinstance(structures, list) or not structures:
        raise refusal(message.file, f"must be {FORMATS}, but this is JSON of another kind")
    labels: dict[tuple[str, str], str] = {}
    read = [_Structure(one, labels) for one in structures[:100]]
    message.title = read[0].title
    deleted = 0
    for one in sets:
        structure = read[int(one.get("structure", "0"))]
        if str(one.get("action", "")).lower() in ("delete", "d"):
            deleted += 1
            continue
        structure.collect(one, message)
    if deleted:
        text = counted("a data set to delete was not read", deleted - 1, "such")
        message.problems.append(Problem("warning", message.file, None, None, text))
    message.labels = labels_of(labels)


class _Structure:
    """Dimensions and attributes of one structure, by the level at which a message gives them."""

    def __init__(self, structure: Mapping[str, Any], labels: dict[tuple[str, str], str]) -> None:
        self.title = _words(structure)
        given = structure["dimensions"]
        self.dimensions = {
            level: [_component(one, labels) for one in given.get(level) or ()] for level in _LEVELS
        }
        told = structure.get("attributes") or {}
        self.attributes = {
            level: [_component(one, labels) for one in told.get(level) or ()]
            for level in (*_LEVELS, "dimensionGroup")
        }
        measures = (structure.get("measures") or {}).get("observation") or ()
        self.measures = [_component(one, labels) for one in measures]
        self.ordered = [one for level in _LEVELS for one in self.dimensions[level]]
        if max(len(self.ordered), *map(len, self.attributes.values())) > MAX_COMPONENTS:
            raise IndexError(f"more than {MAX_COMPONENTS} dimensions or attributes")
        if all(one.order is not None for one in self.ordered):
            self.ordered.sort(key=lambda one: one.order or 0)

    def collect(self, one: Mapping[str, Any], message: Message) -> None:
        """Add the observations of one data set."""
        base = {part.name: part.codes[0] for part in self.dimensions["dataSet"] if part.codes}
        held = _attributes(self.attributes["dataSet"], one.get("attributes") or ())
        groups = self._groups(one.get("dimensionGroupAttributes") or {}, message)
        for place, series in (one.get("series") or {}).items():
            key = {**base, **_keyed(self.dimensions["series"], place)}
            noted = _attributes(self.attributes["series"], series.get("attributes") or ())
            self._observe(key, {**held, **noted}, series.get("observations") or {}, groups, message)
        self._observe(base, held, one.get("observations") or {}, groups, message)

    def _observe(
        self,
        base: Mapping[str, str],
        held: Mapping[str, str],
        observations: Mapping[str, Sequence[Any]],
        groups: _Groups,
        message: Message,
    ) -> None:
        measures = max(1, len(self.measures))
        for place, entry in observations.items():
            if not isinstance(entry, list):
                raise TypeError("an observation is no list")
            found = {**base, **_keyed(self.dimensions["observation"], place)}
            period = found.pop(TIME, "")
            noted = {**held, **_attributes(self.attributes["observation"], entry[measures:])}
            for names, known in groups:
                shared = known.get(tuple(found.get(name, "") for name in names), {})
                noted = {**shared, **noted}
            status = next((flag for name in STATUS if (flag := noted.pop(name, ""))), "")
            value = _value(self.measures[0] if self.measures else None, entry)
            key = {one.name: found[one.name] for one in self.ordered if one.name in found}
            message.add(
                tuple(key.items()),
                lambda key=key: key,  # type: ignore[misc]
                noted,
                Observation(period, value, status, message.count + 1),
            )

    def _groups(self, given: Mapping[str, Sequence[Any]], message: Message) -> _Groups:
        """Read attributes of groups, under keys such as ":0::" with a slot a dimension.

        The slots stand in the order of the key; dimensions of the data set may have one or not.
        """
        constant = {one.name for one in self.dimensions["dataSet"]}
        kinds: dict[tuple[str, ...], dict[tuple[str, ...], dict[str, str]]] = {}
        for place, entry in given.items():
            slots = place.split(":")
            parts = self.ordered
            if len(slots) < len(parts):
                parts = [one for one in parts if one.name not in constant]
            fixed = [
                (part.name, _at(part, slot))
                for part, slot in zip(parts, slots, strict=False)
                if slot
            ]
            if any(name == TIME for name, _ in fixed):
                continue  # what holds for one period alone says nothing of the series
            if len(kinds) > _MAX_GROUPS or len(given) > MAX_COLUMNS:
                raise refusal(message.file, "groups must be fewer, but there are too many")
            known = kinds.setdefault(tuple(name for name, _ in fixed), {})
            noted = _attributes(self.attributes["dimensionGroup"], entry)
            known.setdefault(tuple(code for _, code in fixed), {}).update(noted)
        return list(kinds.items())


def _component(given: Mapping[str, Any], labels: dict[tuple[str, str], str]) -> _Component:
    """Read a component and remember the words for its codes."""
    name = _whole(str(given["id"]))
    codes = []
    for value in given.get("values") or ():
        inside = value if isinstance(value, dict) else {"id": value}
        words = _words(inside)
        plain = inside.get("id", inside.get("value", words))
        code = _whole(plain if isinstance(plain, str) else json.dumps(plain)[:200])
        codes.append(code)
        if words:
            labels.setdefault((name, code), words)
    order = given.get("keyPosition")
    return _Component(name, codes, None if order is None else int(order))


def _whole(text: str) -> str:
    """Replace halves of signs, which JSON may hold and no file or screen can."""
    return text.encode("utf-8", "replace").decode("utf-8")


def _words(given: Mapping[str, Any]) -> str:
    """Return the name of something: plain, in English, or in the first language there is."""
    name, names = given.get("name"), given.get("names")
    if isinstance(name, str):
        return name
    choices = names if isinstance(names, dict) else name if isinstance(name, dict) else {}
    found = choices.get("en") or next(iter(choices.values()), "")
    return found if isinstance(found, str) else ""


def _keyed(parts: Sequence[_Component], place: str) -> dict[str, str]:
    """Turn a key such as "0:2:1" into the codes of its dimensions."""
    slots = place.split(":") if parts else []
    if len(slots) != len(parts):
        raise IndexError(f"the key {place[:40]} has {len(slots)} parts for {len(parts)} dimensions")
    return {part.name: _at(part, slot) for part, slot in zip(parts, slots, strict=True)}


def _at(part: _Component, slot: str) -> str:
    """Return the code at a place that must be one from 0 on."""
    if not (slot.isascii() and slot.isdigit()) or len(slot) > 9 or int(slot) >= len(part.codes):
        raise IndexError(f"{part.name} has no value number {slot[:20]}")
    return part.codes[int(slot)]


def _attributes(parts: Sequence[_Component], given: Sequence[Any]) -> dict[str, str]:
    """Read attributes: places in their lists of values, or values as they are; none if null."""
    if not isinstance(given, list | tuple):
        raise TypeError("attributes are no list")
    found = {}
    for part, entry in zip(parts, given, strict=False):
        if entry is None or isinstance(entry, dict):
            continue
        text = ",".join(map(str, entry[:20])) if isinstance(entry, list) else str(entry)
        if part.codes and text.isascii() and text.isdigit():
            text = _at(part, text)
        if text and text not in ("NaN", "#N/A"):
            found[part.name] = _whole(text)
    return found


def _value(measure: _Component | None, entry: Sequence[Any]) -> str:
    """Return the first measure of an observation as text."""
    value = entry[0] if entry else None
    if value is None or isinstance(value, bool):
        return "" if value is None else str(value)
    text = value if isinstance(value, str) else quoted(json.dumps(value)[:60])
    return _at(measure, text) if measure and measure.codes else _whole(text)
