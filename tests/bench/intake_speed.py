"""How long intake takes for files of about 40 MB: ``python tests/bench/intake_speed.py``.

Prints processor seconds and the peak memory of the process so far, one line a shape.
"""

import resource
import time

import numpy as np

from app.intake.reading import read_release


def wide(rows: int, columns: int, separator: str = ",") -> bytes:
    """Write months down and price-like series across."""
    rng = np.random.default_rng(1)
    values = 100 * np.exp(np.cumsum(rng.normal(0, 0.003, (rows, columns)), axis=0))
    lines = [separator.join(["month", *(f"S{number}" for number in range(columns))])]
    for place, row in enumerate(values):
        numbers = separator.join(f"{value:.2f}" for value in row)
        if separator == ";":
            numbers = numbers.replace(".", ",")
        lines.append(f"{1100 + place // 12}-{place % 12 + 1:02d}{separator}{numbers}")
    return "\n".join(lines).encode()


def long(economies: int) -> bytes:
    """Write one value a row, fifty years of months an economy."""
    rows = (
        f"E{economy:05d},{1960 + month // 12}-{month % 12 + 1:02d},Prices,{100 + month / 7:.4f}"
        for economy in range(economies)
        for month in range(600)
    )
    return "\n".join(["economy,period,series,value", *rows]).encode()


if __name__ == "__main__":
    shapes = {
        "720 x 7500": wide(720, 7500),
        "720 x 7500, decimal comma": wide(720, 7500, ";"),
        "9600 x 600": wide(9600, 600),
        "long, 2167 series": long(2167),
    }
    for label, content in shapes.items():
        start = time.process_time()
        release = read_release("bench.csv", content)
        seconds = time.process_time() - start
        peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss // 1024
        print(
            f"{label}: {len(content) / 1e6:.1f} MB, {len(release.series)} series,"
            f" {seconds:.1f} s, peak {peak} MB"
        )
