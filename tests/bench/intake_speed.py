"""How long intake takes for large files: ``python -m tests.bench.intake_speed``.

Each file is read by a process of its own. Prints what became of it, processor seconds, seconds by
the clock and peak memory. Limits: 10 s and 1 GB, or one sentence that refuses the file at once.
"""

import resource
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np

from app.intake.problems import IntakeError
from app.intake.reading import read_path

NUMBERS = 600  # months of each series of a long file


def wide(rows: int, columns: int, separator: str = ",") -> Iterator[str]:
    """Write months down and price-like series across."""
    rng = np.random.default_rng(1)
    values = 100 * np.exp(np.cumsum(rng.normal(0, 0.003, (rows, columns)), axis=0))
    yield separator.join(["month", *(f"S{number}" for number in range(columns))])
    for place, row in enumerate(values):
        numbers = separator.join(f"{value:.2f}" for value in row)
        if separator == ";":
            numbers = numbers.replace(".", ",")
        yield f"{1100 + place // 12}-{place % 12 + 1:02d}{separator}{numbers}"


def long(economies: int, series: str = "Prices") -> Iterator[str]:
    """Write one value a row, fifty years of months an economy."""
    yield "economy,period,series,value"
    for economy in range(economies):
        for month in range(NUMBERS):
            when = f"{1960 + month // 12}-{month % 12 + 1:02d}"
            yield f"E{economy:05d},{when},{series},{100 + month / 7:.4f}"


def sdmx(series: int) -> Iterator[str]:
    """Write SDMX-CSV, one observation a row."""
    yield "DATAFLOW,FREQ,REF_AREA,INDICATOR,TIME_PERIOD,OBS_VALUE"
    for number in range(series):
        for month in range(NUMBERS):
            when = f"{1960 + month // 12}-{month % 12 + 1:02d}"
            yield f"OWN:PRICES(1.0),M,E{number:04d},PRICES,{when},{100 + month / 7:.3f}"


SHAPES = {
    "720 rows, 7500 columns": lambda: wide(720, 7500),
    "720 rows, 7500 columns, decimal comma": lambda: wide(720, 7500, ";"),
    "9600 rows, 600 columns": lambda: wide(9600, 600),
    "12 rows, 100000 columns": lambda: wide(12, 100_000),
    "long, 1300200 rows": lambda: long(2167),
    "long, 2000400 rows": lambda: long(3334),
    "long, 780000 rows, quotes": lambda: long(1300, '"Prices"'),
    "long, 1980000 rows, quotes": lambda: long(3300, '"P"'),
    "SDMX-CSV, 780000 rows": lambda: sdmx(1300),
}


def main() -> None:
    """Read every file in turn and print one line each."""
    with tempfile.TemporaryDirectory() as folder:
        for label, lines in SHAPES.items():
            path = Path(folder) / "bench.csv"
            with path.open("w", encoding="utf-8") as stream:
                stream.writelines(f"{line}\n" for line in lines())
            size = path.stat().st_size / 1e6
            print(f"{label}: {size:.1f} MB,", end=" ", flush=True)
            subprocess.run([sys.executable, "-m", "tests.bench.intake_speed", path], check=True)


def one(path: Path) -> None:
    """Read one file and print what it cost."""
    processor, clock = time.process_time(), time.perf_counter()
    try:
        said = f"{len(read_path(path).series)} series"
    except IntakeError as error:
        said = f"refused ({error})"
    processor, clock = time.process_time() - processor, time.perf_counter() - clock
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss // 1024
    print(f"{said}, {processor:.1f} s of processor, {clock:.1f} s, peak {peak} MB", flush=True)


if __name__ == "__main__":
    if len(sys.argv) > 1:
        one(Path(sys.argv[1]))
    else:
        main()
