"""SDMX-ML: the layouts of 2.1, groups and levels of attributes; and what is refused."""

import pytest

from app.intake.reading import IntakeError, Release, read_release


def generic(*inside: str, at: str = "TIME_PERIOD", root: str = "GenericData") -> bytes:
    header = f'<m:Header><m:Structure structureID="S" dimensionAtObservation="{at}"/></m:Header>'
    body = "\n".join(inside)
    return (
        f'<?xml version="1.0"?>\n<m:{root} xmlns:m="m" xmlns:g="x/data/generic">{header}'
        f'<m:DataSet action="Replace">{body}</m:DataSet></m:{root}>'
    ).encode()


def specific(*inside: str, data: str = "", root: str = "StructureSpecificData") -> bytes:
    body = "\n".join(inside)
    return (
        f'<m:{root} xmlns:m="m" xmlns:ss="s"><m:DataSet ss:dataScope="DataStructure" {data}>'
        f"{body}</m:DataSet></m:{root}>"
    ).encode()


def values(tag: str, **pairs: str) -> str:
    inside = "".join(f'<g:Value id="{name}" value="{text}"/>' for name, text in pairs.items())
    return f"<g:{tag}>{inside}</g:{tag}>"


def read(content: bytes) -> Release:
    return read_release("a.xml", content)


def shown(release: Release) -> list[tuple[str, str, list[float]]]:
    return [(one.name, str(one.first), one.values.tolist()) for one in release.series]


# Layouts -------------------------------------------------------------------------------------


def test_any_dimension_may_stand_at_the_observation() -> None:
    cross = [
        f"<g:Series>{values('SeriesKey', FREQ='M', TIME_PERIOD=period)}"
        f'<g:Obs><g:ObsDimension value="CPI"/><g:ObsValue value="{place}"/></g:Obs>'
        f'<g:Obs><g:ObsDimension value="PPI"/><g:ObsValue value="{place + 10}"/></g:Obs></g:Series>'
        for place, period in enumerate(("2024-01", "2024-02"), 1)
    ]
    assert shown(read(generic(*cross, at="ITEM"))) == [
        ("CPI", "2024-01", [1.0, 2.0]),
        ("PPI", "2024-01", [11.0, 12.0]),
    ]
    across = [
        f'<Series FREQ="M" TIME_PERIOD="{period}"><Obs ITEM="CPI" OBS_VALUE="{place}"/>'
        f'<Obs ITEM="PPI" OBS_VALUE="{place + 10}"/></Series>'
        for place, period in enumerate(("2024-01", "2024-02"), 1)
    ]
    assert shown(read(specific(*across))) == shown(read(generic(*cross, at="ITEM")))


def test_the_layout_of_version_2_0_is_read_too() -> None:
    old = (
        '<g:Series><g:SeriesKey><g:Value concept="ITEM" value="CPI"/></g:SeriesKey>'
        '<g:Obs><g:Time>2024-01</g:Time><g:ObsValue value="1.5"/></g:Obs></g:Series>'
    )
    assert shown(read(generic(old))) == [("CPI", "2024-01", [1.5])]
    compact = specific('<Series ITEM="CPI"><Obs TIME_PERIOD="2024" OBS_VALUE="1"/></Series>')
    compact = compact.replace(b"StructureSpecificData", b"CompactData")
    assert shown(read(compact)) == [("CPI", "2024", [1.0])]


def test_parts_of_one_series_in_two_data_sets_are_joined() -> None:
    part = '<Series ITEM="CPI"><Obs TIME_PERIOD="2024-0{0}" OBS_VALUE="{0}"/></Series>'
    content = specific(part.format(1), "</m:DataSet><m:DataSet>", part.format(2))
    assert shown(read(content)) == [("CPI", "2024-01", [1.0, 2.0])]


def test_series_that_differ_in_unit_alone_are_told_apart() -> None:
    part = '<Series ITEM="CPI" UNIT_MEASURE="{}"><Obs TIME_PERIOD="2024" OBS_VALUE="1"/></Series>'
    release = read(specific(part.format("IX"), part.format("PC")))
    assert [(one.name, one.kind) for one in release.series] == [
        ("CPI, index", "index"),
        ("CPI, percent", "rate"),
    ]


# Attributes ----------------------------------------------------------------------------------


def group(power: str, **key: str) -> str:
    """A group that gives its series a multiplier."""
    noted = values("Attributes", UNIT_MULT=power)
    return f"<g:Group>{values('GroupKey', **key)}{noted}</g:Group>"


POINT = '<g:Obs><g:ObsDimension value="2024-01"/><g:ObsValue value="1.5"/></g:Obs>'
SERIES = f"<g:Series>{values('SeriesKey', FREQ='M', AREA='U', ITEM='MON')}{POINT}</g:Series>"


@pytest.mark.parametrize(
    "content",
    [
        generic(SERIES.replace(POINT, values("Attributes", UNIT_MULT="6") + POINT)),
        generic(values("Attributes", UNIT_MULT="6"), SERIES),
        generic(
            group("6", AREA="U"),
            SERIES,
        ),
        generic(
            SERIES,
            group("6", ITEM="MON") + group("3", ITEM="X"),
        ),
        specific(
            '<Series FREQ="M" ITEM="MON"><Obs TIME_PERIOD="2024-01" OBS_VALUE="1.5"/></Series>',
            data='UNIT_MULT="6"',
        ),
        specific(
            '<Group ITEM="MON" UNIT_MULT="6"/><Group ITEM="X" UNIT_MULT="3"/>'
            '<Series FREQ="M" ITEM="MON"><Obs TIME_PERIOD="2024-01" OBS_VALUE="1.5"/></Series>'
        ),
        specific('<Obs FREQ="M" ITEM="MON" UNIT_MULT="6" TIME_PERIOD="2024-01" OBS_VALUE="1.5"/>'),
    ],
)
def test_attributes_at_every_level(content: bytes) -> None:
    (series,) = read(content).series
    assert series.unit == "millions"


def test_lines_of_the_file_are_named() -> None:
    rows = "\n".join(
        f'<Obs TIME_PERIOD="2024-0{n}" OBS_VALUE="{v}" OBS_STATUS="{f}"/>'
        for n, v, f in ((1, "1", "A"), (2, "x", "A"))
    )
    good = '<Obs TIME_PERIOD="2024-01" OBS_VALUE="2" OBS_STATUS="B"/>'
    release = read(specific('<Series ITEM="A">', rows, '</Series><Series ITEM="B">', good,
                            "</Series>"))  # fmt: skip
    assert [str(problem) for problem in release.problems] == [
        "a.xml, row 3, column 'A': must be a number, but got 'x'",
        "a.xml, row 5, column 'B': break in Jan 2024",
    ]


@pytest.mark.parametrize("value", ["1,234", "1 234", "1.5%", "INF", "-INF", "0x1", "１"])
def test_numbers_are_those_of_xml(value: str) -> None:
    point = f'<Series ITEM="A"><Obs TIME_PERIOD="2024-01" OBS_VALUE="{value}"/></Series>'
    release = read(specific(point))
    assert release.series == () and "must be a number" in str(release.problems[0])


def test_data_to_delete_are_not_read() -> None:
    point = '<Series ITEM="{}"><Obs TIME_PERIOD="2024-01" OBS_VALUE="1"/></Series>'
    content = specific(point.format("A"), '</m:DataSet><m:DataSet ss:action="Delete">',
                       point.format("B"))  # fmt: skip
    release = read(content)
    assert [one.name for one in release.series] == ["A"]
    assert "an observation to delete was not read" in str(release.problems[0])


# Refused -------------------------------------------------------------------------------------

LAUGHS = (
    b'<?xml version="1.0"?><!DOCTYPE l [<!ENTITY a "ha"><!ENTITY b "&a;&a;&a;&a;&a;&a;">]>'
    b"<GenericData>&b;</GenericData>"
)
REFUSED = {
    "entities": (LAUGHS, "XML must not declare a document type or entities, but this does"),
    "entities, UTF-16": (LAUGHS.decode().encode("utf-16"), "XML must not declare a document type"),
    "fetching": (
        b'<!DOCTYPE a [<!ENTITY x SYSTEM "file:///etc/passwd">]><GenericData>&x;</GenericData>',
        "XML must not declare a document type",
    ),
    "outside document type": (b'<!DOCTYPE a SYSTEM "http://a.invalid/"><a/>', "must not declare"),
    "encoding that hides": (
        b'<?xml version="1.0" encoding="utf-7"?>+ADwAIQ-DOCTYPE a>',
        "XML must be written in UTF-8, but this declares another encoding",
    ),
    "unknown entity": (b"<GenericData>&x;</GenericData>", "must be well-formed XML, but is not"),
    "cut": (generic(SERIES)[:-30], "must be well-formed XML, but is not "),
    "structures": (b'<m:Structure xmlns:m="m"/>', "generic or structure-specific, but this is"),
    "picture": (b"<svg/>", "must be an SDMX data message, generic or structure-specific"),
    "page": (b"<html><body>x</body></html>", "but this looks like HTML"),
    "no observation": (generic(), "must hold observations, but holds none"),
    "series without observation": (specific('<Series ITEM="A"/>'), "must hold observations"),
    "no period": (
        specific('<Series ITEM="A"><Obs OBS_VALUE="1"/></Series>'),
        "the period must be a month, a quarter or a year, but got ''",
    ),
    "weeks": (
        specific('<Series ITEM="A"><Obs TIME_PERIOD="2024-W01" OBS_VALUE="1"/></Series>'),
        "but got '2024-W01', a week",
    ),
    "deep": (b"<GenericData>" + b"<a>" * 100, "XML must not nest more than 64 deep"),
    "many attributes": (
        specific("<Series " + " ".join(f'A{n}="1"' for n in range(300)) + "/>"),
        "must not have more than 200 values",
    ),
    "many dimensions": (
        specific(
            *(
                f'<Series A{n}="1"><Obs TIME_PERIOD="2024" OBS_VALUE="1"/></Series>'
                for n in range(300)
            )
        ),
        "must not have more than 200 dimensions",
    ),
    "many kinds of group": (
        specific(
            "<Series " + " ".join(f'A{n}="1"' for n in range(30)) + ">"
            '<Obs TIME_PERIOD="2024" OBS_VALUE="1"/></Series>',
            *(f'<Group A{n}="1" UNIT_MULT="6"/>' for n in range(30)),
        ),
        "groups must be of fewer kinds",
    ),
}


@pytest.mark.parametrize("case", REFUSED)
def test_refused_in_one_sentence(case: str) -> None:
    content, sentence = REFUSED[case]
    with pytest.raises(IntakeError) as caught:
        read(content)
    assert sentence in str(caught.value)
    assert str(caught.value).startswith("a.xml") and "\n" not in str(caught.value)
