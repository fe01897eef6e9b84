"""Example files in CSV."""

import calendar

from tests.data.truth import (
    BASIC,
    FOOD,
    ISO_MONTHS,
    ISO_QUARTERS,
    ISO_YEARS,
    MONEY,
    MONTHS,
    NAN,
    NARROW,
    OUTPUT,
    POLICY,
    PRICES,
    WAGES,
    Example,
    annual,
    month,
    monthly,
    quarterly,
)

HEADER = ["Month", "Consumer prices", "Broad money"]
SHORT = [calendar.month_abbr[number] for number in range(13)]


def table(header: list[str], *columns: list, separator: str = ",", end: str = "\n") -> str:
    """Write columns under a header."""
    rows = [header, *(map(str, row) for row in zip(*columns, strict=True))]
    return "".join(separator.join(row) + end for row in rows)


def comma(values: list) -> list[str]:
    """Write numbers with a decimal comma."""
    return [str(value).replace(".", ",") for value in values]


def grouped(values: list, sign: str, mark: str) -> list[str]:
    """Write numbers with grouped thousands."""
    return [f"{v:,.1f}".replace(".", "!").replace(",", sign).replace("!", mark) for v in values]


def examples() -> dict[str, Example]:
    """File name to example."""
    plain = table(HEADER, ISO_MONTHS, PRICES, MONEY)
    rows = plain.splitlines()
    days = [f"{y}-{m:02d}-{calendar.monthrange(y, m)[1]}" for y, m in map(month, range(MONTHS))]
    named = [f"{SHORT[m]}-{y}" for y, m in map(month, range(MONTHS))]
    dotted = [f"1.{m}.{y}" for y, m in map(month, range(MONTHS))]
    long = [
        f"{name},{period},{value}"
        for name, values in (("Consumer prices", PRICES), ("Broad money", MONEY))
        for period, value in zip(ISO_MONTHS, values, strict=True)
    ]
    panel = [
        f"{economy},{period},Consumer prices,{value}"
        for economy, values in (("Uldrevay", PRICES), ("Belquoy", FOOD))
        for period, value in zip(ISO_MONTHS, values, strict=True)
    ]
    holes = ["..", *map(str, FOOD[1:4]), "n/a", *map(str, FOOD[5:-1]), ":"]
    with_holes = [*FOOD[1:4], NAN, *FOOD[5:-1]]
    french = table(
        ["Mois", "Prix à la consommation (2015 = 100)", "Masse monétaire (millions d'undrels)"],
        ISO_MONTHS,
        comma(PRICES),
        comma(MONEY),
        separator=";",
    )
    made = {
        "csv_plain.csv": Example(plain.encode(), BASIC),
        "csv_crlf_mark.csv": Example(b"\xef\xbb\xbf" + plain.replace("\n", "\r\n").encode(), BASIC),
        "csv_old_line_ends.csv": Example(plain.replace("\n", "\r").encode(), BASIC),
        "csv_semicolon_latin1.csv": Example(
            french.encode("latin-1"),
            [
                monthly("Prix à la consommation (2015 = 100)", PRICES, unit="2015 = 100"),
                monthly("Masse monétaire (millions d'undrels)", MONEY, unit="millions d'undrels"),
            ],
            ["read as Latin-1 text"],
        ),
        "csv_tab_utf16.csv": Example(
            b"\xff\xfe" + plain.replace(",", "\t").encode("utf-16-le"),
            BASIC,
            ["read as UTF-16 text"],
        ),
        "csv_declared_separator.csv": Example(
            (
                "sep=;\n" + table(HEADER, ISO_MONTHS, comma(PRICES), comma(MONEY), separator=";")
            ).encode(),
            BASIC,
        ),
        "csv_grouped_quoted.csv": Example(
            table(
                HEADER, ISO_MONTHS, PRICES, [f'"{v}"' for v in grouped(MONEY, ",", ".")]
            ).encode(),
            BASIC,
        ),
        "csv_grouped_spaces.csv": Example(
            table(
                HEADER, ISO_MONTHS, comma(PRICES), grouped(MONEY, "\u202f", ","), separator=";"
            ).encode(),
            BASIC,
        ),
        "csv_comments_title.csv": Example(
            (
                "# Uldrevay, an invented economy\n#\nPrices and money of Uldrevay\n\n"
                f"{plain}\nSource: Office of Uldrevay (invented)\n"
            ).encode(),
            BASIC,
            ["'Prices and money of Uldrevay'"],
        ),
        "csv_newest_first.csv": Example(
            "\n".join([rows[0], *rows[:0:-1]]).encode(), BASIC, ["the newest period comes first"]
        ),
        "csv_month_ends.csv": Example(table(HEADER, days, PRICES, MONEY).encode(), BASIC),
        "csv_month_names.csv": Example(table(HEADER, named, PRICES, MONEY).encode(), BASIC),
        "csv_dotted_days.csv": Example(table(HEADER, dotted, PRICES, MONEY).encode(), BASIC),
        "csv_percent.csv": Example(
            table(["Month", "Policy rate"], ISO_MONTHS, [f"{v}%" for v in POLICY]).encode(),
            [monthly("Policy rate", POLICY, kind="rate", unit="percent")],
        ),
        "csv_holes.csv": Example(
            table(["Month", "Food prices", "Narrow money"], ISO_MONTHS, holes, NARROW).encode(),
            [
                type(BASIC[0])("Food prices", with_holes, ISO_MONTHS[1], ISO_MONTHS[-2]),
                monthly("Narrow money", NARROW),
            ],
            ["every month must have a value, but Nov 2021 has none"],
        ),
        "csv_long.csv": Example(
            "\n".join(["series,period,value", *long]).encode(),
            BASIC,
        ),
        "csv_panel.csv": Example(
            "\n".join(["economy,period,series,value", *panel]).encode(),
            [
                monthly("Uldrevay: Consumer prices", PRICES, kind="index"),
                monthly("Belquoy: Consumer prices", FOOD, kind="index"),
            ],
        ),
        "csv_quarterly.csv": Example(
            table(["Quarter", "Output"], ISO_QUARTERS, OUTPUT).encode(),
            [quarterly("Output", OUTPUT, kind="level")],
        ),
        "csv_annual.csv": Example(
            table(["Year", "Wage index"], ISO_YEARS, WAGES).encode(),
            [annual("Wage index", WAGES, kind="index")],
        ),
    }
    return made
