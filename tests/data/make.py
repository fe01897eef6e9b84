"""Make the example files again: ``python -m tests.data.make``.

The text files come out the same to the byte, archives and workbooks the same in what they hold.
"""

import io
import zipfile
from pathlib import Path

from tests.data import make_csv, make_sdmx, make_sdmx_json, make_xlsx
from tests.data.truth import BASIC, OUTPUT, Example, monthly, quarterly

HERE = Path(__file__).parent
PACKED = (".xlsx", ".zip")


def _zipped(members: dict[str, bytes]) -> bytes:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in members.items():
            archive.writestr(zipfile.ZipInfo(name, (2024, 1, 15, 9, 0, 0)), content)
    return stream.getvalue()


def _zip_examples(made: dict[str, Example]) -> dict[str, Example]:
    plain, quarters = made["csv_plain.csv"], made["csv_quarterly.csv"]
    book, message = made["xlsx_plain.xlsx"], made["sdmx_specific_quarters.xml"]
    clash = [monthly(f"{stem}: {one.name}", one.values) for stem in ("a", "b") for one in BASIC]
    return {
        "zip_one.zip": Example(_zipped({"release/prices.csv": plain.content}), BASIC),
        "zip_several.zip": Example(
            _zipped(
                {
                    "readme.txt": b"Made for tests.\n",
                    "__MACOSX/._prices.csv": b"\x00\x05\x16\x07",
                    "prices.xlsx": book.content,
                    "../../output.csv": quarters.content,
                    "national/gdp.xml": message.content,
                }
            ),
            [*BASIC, quarterly("Output", OUTPUT), quarterly("ULD, GDP", OUTPUT)],
            ["zip_several.zip, readme.txt"],
        ),
        "zip_same_names.zip": Example(
            _zipped({"a.csv": plain.content, "old/b.csv": plain.content}), clash
        ),
    }


def examples() -> dict[str, Example]:
    """File name to example, in the order in which they are made."""
    made = {
        **make_csv.examples(),
        **make_xlsx.examples(),
        **make_sdmx.csv_examples(),
        **make_sdmx.xml_examples(),
        **make_sdmx_json.examples(),
    }
    return {**made, **_zip_examples(made)}


if __name__ == "__main__":
    for name, example in examples().items():
        (HERE / name).write_bytes(example.content)
