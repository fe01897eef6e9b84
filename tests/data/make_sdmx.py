"""Example files in SDMX: CSV 1.0 and 2.x, XML 2.1."""

from tests.data.make_csv import comma
from tests.data.truth import (
    ISO_MONTHS,
    ISO_QUARTERS,
    ISO_YEARS,
    MONEY,
    NAN,
    OUTPUT,
    POLICY,
    PRICES,
    WAGES,
    Example,
    annual,
    monthly,
    quarterly,
)

# Item, label, unit, label of the unit, multiplier, adjustment, values.
ITEMS = [
    ("CPI", "Consumer prices", "IX", "Index, 2015 = 100", "0", "N", PRICES),
    ("M3", "Broad money", "UND", "Undrels", "6", "Y", MONEY),
]
STATUS = {2: "B", 27: "E", 28: "P", 29: "P"}  # of the first item, by place
FLAGS = ["break in Sep 2021", "estimated in Oct 2023", "provisional in Nov 2023 (and 1 more"]
LABELLED = [
    monthly("Consumer prices", PRICES, kind="index", unit="Index, 2015 = 100", adjustment="no"),
    monthly("Broad money", MONEY, kind="level", unit="million undrels", adjustment="yes"),
]
CODED = [
    monthly("CPI", PRICES, kind="index", unit="index", adjustment="no"),
    monthly("M3", MONEY, kind="level", unit="million UND", adjustment="yes"),
]
FLOW = "ULD:DF_PRICES(1.0)"


def flag(item: str, place: int) -> str:
    """Status of an observation."""
    return STATUS.get(place, "A") if item == "CPI" else "A"


def _csv(header: str, rows: list[list[str]], separator: str = ",") -> bytes:
    quote = [[f'"{cell}"' if separator in cell else cell for cell in row] for row in rows]
    return "".join(separator.join(row) + "\n" for row in [header.split(separator), *quote]).encode()


def _observations():
    for item in ITEMS:
        for place, (period, value) in enumerate(zip(ISO_MONTHS, item[6], strict=True)):
            yield item, place, period, value


def csv_examples() -> dict[str, Example]:
    """SDMX-CSV: file name to example."""
    ids = [
        [FLOW, "M", "ULD", item[0], period, str(value), flag(item[0], place), *item[2:6:2]]
        for item, place, period, value in _observations()
    ]
    ids = [
        [*row[:7], item[2], item[4], item[5]]
        for row, (item, *_) in zip(ids, _observations(), strict=True)
    ]
    both = [
        [
            f"{FLOW}: Prix: base",
            "M: Mensuel",
            "ULD: Uldrevay",
            f"{item[0]}: {item[1]}",
            period,
            comma([value])[0],
            f"{flag(item[0], place)}: x",
            f"{item[2]}: {item[3]}",
            f"{item[4]}: Unités" if item[4] == "0" else f"{item[4]}: Millions",
            f"{item[5]}: x",
        ]
        for item, place, period, value in _observations()
    ]
    head = "DATAFLOW,FREQ,REF_AREA,ITEM,TIME_PERIOD,OBS_VALUE,OBS_STATUS,UNIT_MEASURE,UNIT_MULT"
    head += ",ADJUSTMENT"
    french = (
        "DATAFLOW;FREQ: Fréquence;REF_AREA: Pays;ITEM: Poste;TIME_PERIOD: Période;OBS_VALUE: Valeur"
        ";OBS_STATUS: Statut;UNIT_MEASURE: Unité;UNIT_MULT: Multiplicateur;ADJUSTMENT: Correction"
    )
    second = head.replace("DATAFLOW", "STRUCTURE,STRUCTURE_ID,ACTION")
    named = "STRUCTURE,STRUCTURE_ID,STRUCTURE_NAME,ACTION,FREQ,Frequency,ITEM,Item,TIME_PERIOD"
    named += ",Time period,OBS_VALUE,Observation value,UNIT_MEASURE,Unit of measure,UNIT_MULT"
    named += ",Multiplier,ADJUSTMENT,Adjustment"
    names = [
        [
            "dataflow",
            FLOW,
            "Prices of Uldrevay",
            "I",
            "M",
            "Monthly",
            item[0],
            item[1],
            period,
            period,
            str(value),
            "",
            item[2],
            item[3],
            item[4],
            "Millions",
            item[5],
            "Adjusted",
        ]
        for item, _, period, value in _observations()
    ]
    shuffled = [["dataflow", FLOW, r[5], r[6], r[7], r[8], r[9], r[3], r[4], r[1]] for r in ids]
    missing = [
        ["dataflow", FLOW, "R", "M", "CPI", period, {3: "NaN", 5: ""}.get(place, str(value)), "A"]
        for place, (period, value) in enumerate(zip(ISO_MONTHS, PRICES, strict=True))
    ]
    missing[7][6:] = ["#N/A", "M"]
    missing += [["dataflow", FLOW, "D", "M", "CPI", "2024-01", "-", ""]]
    holes = [NAN if place in (3, 5, 7) else value for place, value in enumerate(PRICES)]
    calendars = [
        ["dataflow", FLOW, "I", code, "GDP", period, str(value)]
        for code, periods, values in (
            ("Q", ISO_QUARTERS, OUTPUT),
            ("A", [f"{year}-A1" for year in ISO_YEARS], WAGES),
            ("M", [f"{text[:5]}M{text[5:]}" for text in ISO_MONTHS], PRICES),
        )
        for period, value in zip(periods, values, strict=True)
    ]
    calendars += [["dataflow", FLOW, "I", "W", "GDP", "2024-W05", "1"]]
    short = "STRUCTURE,STRUCTURE_ID,ACTION,FREQ,ITEM,TIME_PERIOD,OBS_VALUE"
    return {
        "sdmx_csv_1.csv": Example(_csv(head, ids), CODED, FLAGS),
        "sdmx_csv_1_labels.csv": Example(_csv(french, both, ";"), LABELLED, FLAGS),
        "sdmx_csv_2.csv": Example(
            _csv(second, [["dataflow", FLOW, "I", *row[1:]] for row in ids]), CODED, FLAGS
        ),
        "sdmx_csv_2_names.csv": Example(_csv(named, names), LABELLED),
        "sdmx_csv_2_any_order.csv": Example(
            _csv(
                "STRUCTURE[;],STRUCTURE_ID,OBS_VALUE,OBS_STATUS[],UNIT_MEASURE,UNIT_MULT"
                ",ADJUSTMENT,ITEM,TIME_PERIOD,FREQ",
                shuffled,
            ),
            CODED,
            FLAGS,
        ),
        "sdmx_csv_2_missing.csv": Example(
            _csv(short + ",OBS_STATUS", missing),
            [monthly("CPI", holes, kind="index")],
            ["a row that deletes was not read", "missing on purpose in Feb 2022"],
        ),
        "sdmx_csv_2_calendars.csv": Example(
            _csv(short, calendars),
            [quarterly("GDP, Q", OUTPUT), annual("GDP, A", WAGES), monthly("GDP, M", PRICES)],
            ["the frequency must be monthly, quarterly or annual, but FREQ is 'W'"],
        ),
    }


_NAMESPACES = (
    'xmlns:message="http://www.sdmx.org/resources/sdmxml/schemas/v2_1/message"'
    ' xmlns:generic="http://www.sdmx.org/resources/sdmxml/schemas/v2_1/data/generic"'
    ' xmlns:common="http://www.sdmx.org/resources/sdmxml/schemas/v2_1/common"'
    ' xmlns:ss="http://www.sdmx.org/resources/sdmxml/schemas/v2_1/data/structurespecific"'
    ' xmlns:ns1="urn:sdmx:org.sdmx.infomodel.datastructure.DataStructure=ULD:DSD_PRICES(1.0):'
    'ObsLevelDim:TIME_PERIOD" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance"'
)


def _message(root: str, data: list[str], at: str = "TIME_PERIOD", declared: str = "UTF-8") -> str:
    """Wrap the data sets of an SDMX-ML 2.1 message in root and header."""
    extra = ' namespace="urn:x"' if root.startswith("Structure") else ""
    lines = [
        f'<?xml version="1.0" encoding="{declared}"?>',
        f"<message:{root} {_NAMESPACES}>",
        "  <message:Header>",
        "    <message:ID>ULD1</message:ID>",
        "    <message:Test>true</message:Test>",
        "    <message:Prepared>2024-01-15T09:00:00</message:Prepared>",
        '    <message:Sender id="ULD"/>',
        f'    <message:Structure structureID="S1"{extra} dimensionAtObservation="{at}">',
        '      <common:Structure><Ref id="DSD_PRICES" version="1.0" agencyID="ULD"/>'
        "</common:Structure>",
        "    </message:Structure>",
        "  </message:Header>",
        *data,
        f"</message:{root}>",
    ]
    return "\n".join(lines) + "\n"


def _values(tag: str, pairs: dict[str, str]) -> str:
    inside = "".join(f'<generic:Value id="{key}" value="{text}"/>' for key, text in pairs.items())
    return f"<generic:{tag}>{inside}</generic:{tag}>"


def _generic(item: tuple, *, attributes: bool = True) -> list[str]:
    """Write a series of generic data."""
    noted = {"UNIT_MEASURE": item[2], "UNIT_MULT": item[4], "ADJUSTMENT": item[5]}
    lines = ["    <generic:Series>"]
    lines += ["      " + _values("SeriesKey", {"FREQ": "M", "REF_AREA": "ULD", "ITEM": item[0]})]
    if attributes:
        lines += ["      " + _values("Attributes", noted)]
    for place, (period, value) in enumerate(zip(ISO_MONTHS, item[6], strict=True)):
        status = _values("Attributes", {"OBS_STATUS": flag(item[0], place)})
        lines.append(
            f'      <generic:Obs><generic:ObsDimension value="{period}"/>'
            f'<generic:ObsValue value="{value}"/>{status}</generic:Obs>'
        )
    return [*lines, "    </generic:Series>"]


def _flat_generic() -> list[str]:
    return [
        "    <generic:Obs>"
        + _values("ObsKey", {"FREQ": "M", "ITEM": item[0], "TIME_PERIOD": period})
        + f'<generic:ObsValue value="{value}"/>'
        + _values("Attributes", {"OBS_STATUS": flag(item[0], place), "UNIT_MULT": item[4]})
        + "</generic:Obs>"
        for item, place, period, value in _observations()
    ]


def _specific(item: tuple, periods: list[str], frequency: str = "M") -> list[str]:
    """Write a series of structure-specific data."""
    lines = [
        f'    <Series FREQ="{frequency}" REF_AREA="ULD" ITEM="{item[0]}" UNIT_MEASURE="{item[2]}"'
        f' UNIT_MULT="{item[4]}" ADJUSTMENT="{item[5]}">'
    ]
    for place, (period, value) in enumerate(zip(periods, item[6], strict=True)):
        shown = "NaN" if value != value else value
        lines.append(
            f'      <Obs TIME_PERIOD="{period}" OBS_VALUE="{shown}"'
            f' OBS_STATUS="{flag(item[0], place)}"/>'
        )
    return [*lines, "    </Series>"]


def _data(lines: list[str], kind: str = "generic") -> list[str]:
    extra = ' ss:dataScope="DataStructure" xsi:type="ns1:DataSetType"' if kind == "ss" else ""
    name = "ss:structureRef" if kind == "ss" else "structureRef"
    action = "ss:action" if kind == "ss" else "action"
    return [
        f'  <message:DataSet {action}="Replace" {name}="S1"{extra}>',
        *lines,
        "  </message:DataSet>",
    ]


def xml_examples() -> dict[str, Example]:
    """SDMX-ML: file name to example."""
    generic = [line for item in ITEMS for line in _generic(item)]
    bare = [line for item in ITEMS for line in _generic(item, attributes=False)]
    groups = [
        '    <generic:Group type="Sibling">'
        + _values("GroupKey", {"REF_AREA": "ULD", "ITEM": item[0]})
        + _values(
            "Attributes", {"UNIT_MEASURE": item[2], "UNIT_MULT": item[4], "ADJUSTMENT": item[5]}
        )
        + "</generic:Group>"
        for item in ITEMS
    ]
    specific = [line for item in ITEMS for line in _specific(item, ISO_MONTHS)]
    flat = [
        f'    <Obs FREQ="M" ITEM="{item[0]}" TIME_PERIOD="{period}" OBS_VALUE="{value}"'
        f' OBS_STATUS="{flag(item[0], place)}" UNIT_MEASURE="{item[2]}" UNIT_MULT="{item[4]}"'
        f' ADJUSTMENT="{item[5]}"/>'
        for item, place, period, value in _observations()
    ]
    spans = [f"{text}-01/P1M" for text in ISO_MONTHS]
    zoned = [f"{text[:4]}-Q{text[-1]}+01:00" for text in ISO_QUARTERS]
    quarters = _specific(("GDP", "", "UND", "", "3", "Y", OUTPUT), zoned, "Q")
    shares = [*POLICY[:4], NAN, *POLICY[5:]]
    root = "StructureSpecificData"
    return {
        "sdmx_generic.xml": Example(_message("GenericData", _data(generic)).encode(), CODED, FLAGS),
        "sdmx_generic_flat.xml": Example(
            _message("GenericData", _data(_flat_generic()), "AllDimensions").encode(),
            [monthly("CPI", PRICES, kind="index"), monthly("M3", MONEY, unit="millions")],
            FLAGS,
        ),
        "sdmx_generic_groups.xml": Example(
            _message("GenericTimeSeriesData", _data([*groups, *bare])).encode(), CODED, FLAGS
        ),
        "sdmx_specific.xml": Example(_message(root, _data(specific, "ss")).encode(), CODED, FLAGS),
        "sdmx_specific_flat.xml": Example(
            _message(root, _data(flat, "ss"), "AllDimensions").encode(), CODED, FLAGS
        ),
        "sdmx_specific_utf16.xml": Example(
            b"\xff\xfe"
            + _message(root, _data(specific, "ss"), declared="UTF-16").encode("utf-16-le"),
            CODED,
            FLAGS,
        ),
        "sdmx_specific_spans.xml": Example(
            _message(
                root, _data(_specific(("RATE", "", "PC", "", "0", "N", shares), spans), "ss")
            ).encode(),
            [monthly("ULD, RATE", shares, kind="rate", unit="percent")],
            ["every month must have a value, but Nov 2021 has none"],
        ),
        "sdmx_specific_quarters.xml": Example(
            _message(root, _data(quarters, "ss")).encode(),
            [quarterly("ULD, GDP", OUTPUT, kind="level", unit="thousand UND")],
        ),
    }
