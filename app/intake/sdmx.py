"""What all forms of SDMX data share: observations under the values of their dimensions."""

import re
from collections.abc import Callable, Hashable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

from app.intake.csv_files import MAX_COLUMNS, MAX_ROWS
from app.intake.problems import MAX_NAME, Problem, plain_text, refusal

TIME = "TIME_PERIOD"
VALUE = "OBS_VALUE"
STATUS = ("OBS_STATUS", "OBS_FLAG")
FREQUENCY = ("FREQ", "FREQUENCY")
UNIT = ("UNIT_MEASURE", "UNIT")
MULTIPLIER = ("UNIT_MULT", "UNIT_MULTIPLIER", "SCALE")
ADJUSTMENT = ("ADJUSTMENT", "SEASONAL_ADJUST", "SEASONAL_ADJUSTMENT", "SEASONAL_ADJ", "S_ADJ")
BASE = ("BASE_PER", "BASE_PERIOD")
YEAR_START = "REPORTING_YEAR_START_DAY"

# Ids that the cross-domain concepts of SDMX use for attributes (from memory); used only where a
# message does not say which of its components are dimensions.
_ATTRIBUTES = frozenset(
    """DECIMALS COLLECTION TIME_FORMAT COMPILING_ORG COVERAGE AVAILABILITY DISS_ORG PUBL_PUBLIC
    PUBL_MU PUBL_ECB NAT_TITLE SERIESKEY SERIES_KEY OBS_KEY UPDATED LAST_UPDATE PREPARED EMBARGO
    EMBARGO_TIME VALUATION DOM_SER_IDS""".split()  # noqa: SIM905
) | {*STATUS, *UNIT, *MULTIPLIER, *ADJUSTMENT, *BASE, YEAR_START, "LAST UPDATE"}
_ATTRIBUTE_START = re.compile(r"OBS_|CONF_|COMMENT|PRE_BREAK|TITLE|SOURCE|NOTE|METHOD", re.ASCII)
TELLING = frozenset((*UNIT, *MULTIPLIER, *ADJUSTMENT, *BASE, "TITLE", "TITLE_COMPL"))

_MAX_PARTS = 20
MAX_COMPONENTS = 200


class Observation(NamedTuple):
    """One value as the file writes it, and the line or the place on which it stands."""

    period: str
    value: str
    status: str
    line: int


@dataclass(eq=False)
class KeyedSeries:
    """Observations that share the values of all dimensions but time."""

    key: dict[str, str]
    attributes: dict[str, str]
    observations: list[Observation] = field(default_factory=list)

    def first(self, components: Sequence[str]) -> str:
        """Return the code of the first of some components that is there, "" if none is."""
        found = (self.key.get(name) or self.attributes.get(name) for name in components)
        return next(filter(None, found), "")


@dataclass(eq=False)
class Message:
    """What a reader took out of one file.

    Attributes
    ----------
    file : str
        Display name.
    series : list of KeyedSeries
        In the order of the file.
    labels : dict
        (component, code) to the words for the code.
    title : str
        What the file calls its data.
    separator : str
        Of SDMX-CSV, where numbers may carry a decimal comma; empty where they may not.
    lines : bool
        Whether `Observation.line` is a line of the file.
    problems : list of Problem
        What the reader found.
    count : int
        Observations so far.
    """

    file: str
    series: list[KeyedSeries] = field(default_factory=list)
    labels: dict[tuple[str, str], str] = field(default_factory=dict)
    title: str = ""
    separator: str = ""
    lines: bool = True
    problems: list[Problem] = field(default_factory=list)

    count: int = 0
    _found: dict[Hashable, list[KeyedSeries]] = field(default_factory=dict)
    _last: dict[Hashable, tuple[Mapping[str, str], KeyedSeries]] = field(default_factory=dict)
    _dimensions: set[str] = field(default_factory=set)

    def label(self, component: str, code: str) -> str:
        """Return the words for a code, or the code."""
        return self.labels.get((component, code)) or code

    def add(
        self,
        sign: Hashable,
        key: Callable[[], dict[str, str]],
        attributes: Mapping[str, str],
        observation: Observation,
    ) -> None:
        """Add an observation to the series of a `sign`, whose `key` is asked for if it is new.

        A unit, multiplier or adjustment other than before begins a series of its own. Where the
        same object of attributes comes again for a sign, nothing needs to be compared.
        """
        self.count += 1
        if self.count > MAX_ROWS:
            message = f"a file must not have more than {MAX_ROWS:,} observations, but this one has"
            raise refusal(self.file, message)
        last = self._last.get(sign)
        if last is not None and last[0] is attributes:
            last[1].observations.append(observation)
            return
        parts = self._found.setdefault(sign, [])
        for part in parts:
            held = part.attributes
            if all(
                held.get(name, code) == code for name, code in attributes.items() if name in TELLING
            ):
                for name, code in attributes.items():
                    held.setdefault(name, code)
                part.observations.append(observation)
                self._last[sign] = (attributes, part)
                return
        if len(parts) >= _MAX_PARTS or len(self.series) >= MAX_COLUMNS:
            most = f"{_MAX_PARTS} units" if len(parts) >= _MAX_PARTS else f"{MAX_COLUMNS:,} series"
            raise refusal(self.file, f"a file must not have more than {most}, but this one has")
        one = KeyedSeries(key(), dict(attributes), [observation])
        self._dimensions.update(one.key)
        if len(self._dimensions) > MAX_COMPONENTS:
            most = f"{MAX_COMPONENTS} dimensions"
            raise refusal(self.file, f"a file must not have more than {most}, but this one has")
        self._last[sign] = (attributes, one)
        parts.append(one)
        self.series.append(one)


def is_attribute(component: str) -> bool:
    """Tell whether a component is, by its id, an attribute and no dimension."""
    name = component.upper()
    return name in _ATTRIBUTES or bool(_ATTRIBUTE_START.match(name))


def labels_of(pairs: Mapping[tuple[str, str], str]) -> dict[tuple[str, str], str]:
    """Clean the words for codes: visible signs only, capped, none that repeats its code."""
    cleaned = {item: plain_text(words, MAX_NAME) for item, words in pairs.items()}
    return {item: words for item, words in cleaned.items() if words and words != item[1]}
