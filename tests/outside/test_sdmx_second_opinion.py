"""SDMX read and written by another library, sdmx1, agrees with what we read.

sdmx1 reads SDMX-ML 2.1, SDMX-CSV 2.0 where it is given the structure, and the draft of SDMX-JSON;
it refuses SDMX-CSV 1.0 and SDMX-JSON 1.0 and 2.0, for which there is no second opinion here.
"""

import io
from pathlib import Path

import numpy as np
import pytest

from app.intake.reading import read_release
from tests.data.truth import ISO_MONTHS, MONEY, PRICES

try:
    import sdmx
    from sdmx.message import DataMessage, Header
    from sdmx.model import common, v21, v30
except ImportError as error:  # pragma: no cover - only where it does not install
    pytest.skip(f"sdmx1 is not installed here ({error})", allow_module_level=True)

pytestmark = pytest.mark.filterwarnings("ignore::DeprecationWarning:sdmx")
DATA = Path(__file__).parent.parent / "data"
DIMENSIONS = ("FREQ", "REF_AREA", "ITEM", "TIME_PERIOD")
ATTRIBUTES = ("OBS_STATUS", "UNIT_MEASURE", "UNIT_MULT", "ADJUSTMENT")


def structure(version):
    """The structure of the example files, as an object of sdmx1."""
    made = version.DataStructureDefinition(
        id="DSD_PRICES", version="1.0", maintainer=common.Agency(id="ULD")
    )
    for name in DIMENSIONS:
        made.dimensions.getdefault(id=name)
    for name in ATTRIBUTES:
        made.attributes.getdefault(id=name)
    made.measures.getdefault(id="OBS_VALUE")
    return made


def by_item(frame):
    """Item to its values in order of time, from what sdmx1 read."""
    table = frame.reset_index()
    table = table.sort_values("TIME_PERIOD", kind="stable")
    return {item: part["value"].to_numpy() for item, part in table.groupby("ITEM")}


def ours(content):
    """Item to its values, from what we read; the item ends the name of a series."""
    release = read_release("a", content)
    assert not [problem for problem in release.problems if problem.severity == "error"]
    return {series.name.split(", ")[-1]: series.values for series in release.series}


READ = [
    "sdmx_generic.xml",
    "sdmx_generic_flat.xml",
    "sdmx_generic_groups.xml",
    "sdmx_specific.xml",
    "sdmx_specific_flat.xml",
    "sdmx_specific_utf16.xml",
    "sdmx_specific_spans.xml",
    "sdmx_specific_quarters.xml",
    "sdmx_csv_2.csv",
    "sdmx_json_draft.json",
]


def theirs(name, content):
    given = structure(v30) if name.endswith("csv") else None
    kind = {"structure": given} if given else {}
    message = sdmx.read_sdmx(io.BytesIO(content), format=Path(name).suffix[1:], **kind)
    return by_item(sdmx.to_pandas(message.data[0]).rename("value"))


@pytest.mark.parametrize("name", READ)
def test_sdmx1_reads_the_same_numbers(name):
    content = (DATA / name).read_bytes()
    expected, found = theirs(name, content), ours(content)
    words = {"Consumer prices": "CPI", "Broad money": "M3"}
    found = {words.get(item, item): values for item, values in found.items()}
    assert found.keys() == expected.keys() and len(found) >= 1
    for item, values in expected.items():
        np.testing.assert_array_equal(found[item], values)


# And the other way: what sdmx1 writes, we read. --------------------------------------------


def written(kind):
    """A message of sdmx1 with the two series of the examples, written as XML."""
    made = structure(v21)
    data = kind(structured_by=made)
    for item, values in (("CPI", PRICES), ("M3", MONEY)):
        for period, value in zip(ISO_MONTHS, values, strict=True):
            codes = dict(zip(DIMENSIONS, ("M", "ULD", item, period), strict=True))
            flag = common.AttributeValue(
                value="B" if period == ISO_MONTHS[2] else "A",
                value_for=made.attributes.get("OBS_STATUS"),
            )
            data.obs.append(
                v21.Observation(
                    dimension=made.make_key(v21.Key, codes),
                    value=value,
                    value_for=made.measures[0],
                    attached_attribute={"OBS_STATUS": flag},
                )
            )
    header = Header(id="ULD1", test=True, sender=common.Agency(id="ULD"))
    flat = common.AllDimensions
    message = DataMessage(data=[data], header=header, observation_dimension=flat)
    return sdmx.to_xml(message)


@pytest.mark.parametrize("kind", [v21.GenericDataSet, v21.StructureSpecificDataSet])
def test_what_sdmx1_writes_is_read(kind):
    release = read_release("a.xml", written(kind))
    assert [series.name for series in release.series] == ["CPI", "M3"]
    for series, values in zip(release.series, (PRICES, MONEY), strict=True):
        np.testing.assert_array_equal(series.values, values)
        assert (str(series.first), str(series.last)) == (ISO_MONTHS[0], ISO_MONTHS[-1])
    breaks = [problem for problem in release.problems if problem.severity == "warning"]
    assert [str(problem.message) for problem in breaks] == ["break in Sep 2021"] * 2
