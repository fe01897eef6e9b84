"""Example files in all shapes that are read: each gives back the numbers it was made from."""

import json
from pathlib import Path

import numpy as np
import pytest

from app.intake.reading import inspection, read_path
from tests.data.make import PACKED, examples

DATA = Path(__file__).parent.parent / "data"
EXAMPLES = examples()


def test_there_are_examples_of_every_kind() -> None:
    assert len(EXAMPLES) >= 40
    for start in ("csv_", "xlsx_", "sdmx_csv_1", "sdmx_csv_2", "sdmx_generic", "sdmx_specific"):
        assert sum(name.startswith(start) for name in EXAMPLES) >= 2
    assert sum(name.endswith(".json") for name in EXAMPLES) >= 4


@pytest.mark.parametrize("name", [name for name in EXAMPLES if not name.endswith(PACKED)])
def test_the_program_makes_the_text_files_again_to_the_byte(name: str) -> None:
    assert (DATA / name).read_bytes() == EXAMPLES[name].content


@pytest.mark.parametrize("name", EXAMPLES)
def test_every_example_gives_back_its_numbers(name: str) -> None:
    release = read_path(DATA / name)
    expected = EXAMPLES[name].series
    assert [series.name for series in release.series] == [one.name for one in expected]
    for series, one in zip(release.series, expected, strict=True):
        assert (str(series.first), str(series.last)) == (one.first, one.last)
        np.testing.assert_array_equal(series.values, one.values)
        found = {field: getattr(series, field) for field in one.attributes}
        assert found == one.attributes
    json.dumps(inspection([release]), allow_nan=False)


@pytest.mark.parametrize("name", EXAMPLES)
def test_every_example_says_what_was_found(name: str) -> None:
    said = [str(problem) for problem in read_path(DATA / name).problems]
    for part in EXAMPLES[name].problems:
        assert any(part in sentence for sentence in said), said
    assert all(sentence.startswith(name) and "\n" not in sentence for sentence in said)


@pytest.mark.parametrize("name", EXAMPLES)
def test_the_content_tells_what_a_file_is_and_not_its_name(name: str, tmp_path: Path) -> None:
    other = tmp_path / "release.pdf"
    other.write_bytes((DATA / name).read_bytes())
    named = [series.fingerprint for series in read_path(DATA / name).series]
    assert [series.fingerprint for series in read_path(other).series] == named
