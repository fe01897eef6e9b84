"""Example workbooks. What they hold is the same each time; their bytes carry the time of making."""

import datetime
import io
import re
import zipfile
from collections.abc import Callable

from openpyxl import Workbook
from openpyxl.utils.datetime import CALENDAR_MAC_1904

from tests.data.make_csv import comma
from tests.data.truth import (
    BASIC,
    FOOD,
    ISO_MONTHS,
    ISO_QUARTERS,
    MONEY,
    MONTHS,
    NARROW,
    OUTPUT,
    POLICY,
    PRICES,
    Example,
    month,
    monthly,
    quarterly,
)

DATES = [datetime.datetime(*month(place), 1) for place in range(MONTHS)]
HEADER = ["Month", "Consumer prices", "Broad money"]
GROUPED = [
    monthly("Consumer prices: All items", PRICES, kind="index"),
    monthly("Consumer prices: Food", FOOD, kind="index"),
    monthly("Policy rate", POLICY, kind="rate"),
    monthly("Money: Narrow", NARROW, kind="level"),
    monthly("Money: Broad", MONEY, kind="level"),
]


def _saved(build: Callable[[Workbook], None]) -> bytes:
    book = Workbook()
    build(book)
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def _rows(sheet, header: list[str], *columns: list) -> None:
    sheet.append(header)
    for row in zip(*columns, strict=True):
        sheet.append(row)


def _plain(book: Workbook) -> None:
    _rows(book.active, HEADER, DATES, PRICES, MONEY)


def _text_months(book: Workbook) -> None:
    _rows(book.active, HEADER, ISO_MONTHS, PRICES, MONEY)


def _titled(book: Workbook) -> None:
    sheet = book.active
    sheet["A1"] = "Prices and money of Uldrevay"
    sheet.merge_cells("A1:C1")
    sheet["A2"] = "Office of Uldrevay (invented)"
    sheet.append([])
    _rows(sheet, HEADER, DATES, PRICES, MONEY)
    sheet.append([])
    sheet.append(["1) Rebased in 2015."])
    sheet.append(["Source: Office of Uldrevay (invented)"])


def _two_rows(book: Workbook, *, merge: bool) -> None:
    sheet = book.active
    sheet["A1"] = "Table 3"
    sheet.append([])
    upper = ["Month", "Consumer prices", None, "Policy rate", "Money", None]
    lower = [None, "All items", "Food", None, "Narrow", "Broad"]
    if merge:
        sheet.append(upper)
        sheet.append(lower)
        for cells in ("A3:A4", "B3:C3", "D3:D4", "E3:F3"):
            sheet.merge_cells(cells)
    else:
        sheet.append([None, *upper[1:3], "Interest rates", *upper[4:]])
        sheet.append(["Month", *lower[1:3], "Policy rate", *lower[4:]])
    for row in zip(DATES, PRICES, FOOD, POLICY, NARROW, MONEY, strict=True):
        sheet.append(row)


def _unit_row(book: Workbook) -> None:
    sheet = book.active
    sheet.append(HEADER)
    sheet.append([None, "2015 = 100", "million undrels"])
    sheet.append([1, 2, 3])
    for row in zip(DATES, PRICES, MONEY, strict=True):
        sheet.append(row)


def _stored_as_text(book: Workbook) -> None:
    sheet = book.active
    mixed = [text if place % 2 else value for place, (text, value) in _both(MONEY)]
    _rows(sheet, ["Month", "Consumer prices", "Broad money"], DATES, comma(PRICES), mixed)


def _both(values: list) -> list:
    return list(enumerate(zip(comma(values), values, strict=True)))


def _percent(book: Workbook) -> None:
    sheet = book.active
    _rows(sheet, ["Month", "Policy rate"], DATES, [round(v / 100, 4) for v in POLICY])
    for row in sheet.iter_rows(min_row=2, min_col=2):
        row[0].number_format = "0.00%"


def _second_sheet(book: Workbook) -> None:
    cover = book.active
    cover.title = "Contents"
    cover["A1"] = "Monthly release"
    cover["A2"] = "Data"
    cover["B2"] = "prices and money"
    _rows(book.create_sheet("Data"), HEADER, DATES, PRICES, MONEY)
    _rows(book.create_sheet("Quarterly"), ["Quarter", "Output"], ISO_QUARTERS, OUTPUT)


def _hidden_first(book: Workbook) -> None:
    hidden = book.active
    hidden.title = "Working"
    _rows(hidden, ["Month", "Draft"], DATES, NARROW)
    _rows(book.create_sheet("Published"), HEADER, DATES, PRICES, MONEY)
    hidden.sheet_state = "hidden"
    book.active = 1


def _blank_margin(book: Workbook) -> None:
    sheet = book.active
    sheet["B2"] = "Uldrevay, monthly"
    for place, cells in enumerate([HEADER, *zip(DATES, PRICES, MONEY, strict=True)]):
        for column, value in enumerate(cells):
            sheet.cell(4 + place, 3 + column, value)
        if place:
            sheet.cell(4 + place, 6, "revised" if place == 5 else None)


def _old_epoch(book: Workbook) -> None:
    book.epoch = CALENDAR_MAC_1904
    _plain(book)


def _long(book: Workbook) -> None:
    sheet = book.active
    sheet.append(["series", "value", "period"])
    for name, values in (("Consumer prices", PRICES), ("Broad money", MONEY)):
        for date, value in zip(DATES, values, strict=True):
            sheet.append([name, value, date])


def _formulas(*, stored: bool) -> bytes:
    """Write a workbook whose last column is computed; openpyxl keeps no computed values."""
    content = _saved(_text_months)
    source = zipfile.ZipFile(io.BytesIO(content))
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as target:
        for name in source.namelist():
            part = source.read(name).decode()
            if name == "xl/worksheets/sheet1.xml":
                for place, value in enumerate(MONEY):
                    kept = f"<v>{value}</v>" if stored or place != 3 else "<v></v>"
                    formula = f'<c r="C{place + 2}"><f>B{place + 2}*2</f>{kept}</c>'
                    part, count = re.subn(rf'<c r="C{place + 2}"[^>]*>.*?</c>', formula, part)
                    assert count == 1
            target.writestr(name, part)
    return stream.getvalue()


def shared_strings(content: bytes) -> bytes:
    """Move the words of the first sheet to the list of shared strings, as office programs do."""
    words: list[str] = []

    def shared(cell: re.Match[str]) -> str:
        words.append(cell[2])
        return f'<c{cell[1]} t="s"><v>{len(words) - 1}</v></c>'

    main = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
    kind = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/sharedStrings"
    program = "application/vnd.openxmlformats-officedocument.spreadsheetml.sharedStrings+xml"
    new = {
        "[Content_Types].xml": (
            "</Types>",
            f'<Override PartName="/xl/sharedStrings.xml" ContentType="{program}"/></Types>',
        ),
        "xl/_rels/workbook.xml.rels": (
            "</Relationships>",
            f'<Relationship Type="{kind}" Target="sharedStrings.xml" Id="rId99"/></Relationships>',
        ),
    }
    source = zipfile.ZipFile(io.BytesIO(content))
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as target:
        for name in source.namelist():
            part = source.read(name).decode()
            if name == "xl/worksheets/sheet1.xml":
                cell = r'<c( r="\w+")(?: s="\d+")? t="inlineStr"[^>]*><is><t>([^<]*)</t></is></c>'
                part = re.sub(cell, shared, part)
            old, put = new.get(name, ("", ""))
            target.writestr(name, part.replace(old, put) if old else part)
        assert words
        listed = "".join(f"<si><t>{word}</t></si>" for word in words)
        target.writestr("xl/sharedStrings.xml", f'<sst xmlns="{main}">{listed}</sst>')
    return stream.getvalue()


def examples() -> dict[str, Example]:
    """File name to example."""
    hole = [*MONEY[:3], float("nan"), *MONEY[4:]]
    return {
        "xlsx_plain.xlsx": Example(_saved(_plain), BASIC),
        "xlsx_text_months.xlsx": Example(_saved(_text_months), BASIC),
        "xlsx_titled.xlsx": Example(
            _saved(_titled), BASIC, ["'Prices and money of Uldrevay'", "'1) Rebased in 2015.'"]
        ),
        "xlsx_two_rows_merged.xlsx": Example(
            _saved(lambda book: _two_rows(book, merge=True)), GROUPED
        ),
        "xlsx_two_rows.xlsx": Example(
            _saved(lambda book: _two_rows(book, merge=False)),
            [
                *GROUPED[:2],
                monthly("Interest rates: Policy rate", POLICY, kind="rate"),
                *GROUPED[3:],
            ],
        ),
        "xlsx_unit_row.xlsx": Example(
            _saved(_unit_row),
            [
                monthly("Consumer prices: 2015 = 100", PRICES, kind="index", unit="2015 = 100"),
                monthly("Broad money: million undrels", MONEY, kind="level"),
            ],
        ),
        "xlsx_stored_as_text.xlsx": Example(_saved(_stored_as_text), BASIC),
        "xlsx_percent.xlsx": Example(
            _saved(_percent), [monthly("Policy rate", POLICY, kind="rate", unit="percent")]
        ),
        "xlsx_second_sheet.xlsx": Example(
            _saved(_second_sheet),
            BASIC,
            ["sheet 'Data' was read; the file also holds 'Contents', 'Quarterly'"],
        ),
        "xlsx_hidden_first.xlsx": Example(
            _saved(_hidden_first),
            BASIC,
            ["sheet 'Published' was read; the file also holds 'Working'"],
        ),
        "xlsx_blank_margin.xlsx": Example(
            _saved(_blank_margin), BASIC, ["a column of words without a name was not read"]
        ),
        "xlsx_old_epoch.xlsx": Example(_saved(_old_epoch), BASIC),
        "xlsx_long.xlsx": Example(_saved(_long), BASIC),
        "xlsx_shared_strings.xlsx": Example(shared_strings(_saved(_text_months)), BASIC),
        "xlsx_formulas.xlsx": Example(_formulas(stored=True), BASIC),
        "xlsx_formulas_not_stored.xlsx": Example(
            _formulas(stored=False),
            [BASIC[0], monthly("Broad money", hole)],
            ["a formula must have its value stored with it, but one has none"],
        ),
        "xlsx_quarterly.xlsx": Example(
            _saved(lambda book: _rows(book.active, ["Quarter", "Output"], ISO_QUARTERS, OUTPUT)),
            [quarterly("Output", OUTPUT, kind="level")],
        ),
    }
