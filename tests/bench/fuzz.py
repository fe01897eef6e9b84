"""Whether any damaged file gives more than a sentence: ``python -m tests.bench.fuzz``.

Takes the example files of all readers, damages them at random (bytes flipped, cut, put in,
doubled; lines doubled, dropped, swapped; cells, attributes, members of archives changed), and
reads each. The outcome must be a release or an `IntakeError`, within two seconds and with the
memory of the process under a limit. Prints the counts a reader and outcome; exit status 1, and the
seed and the damaged file in hexadecimal, where there is any other.
"""

import argparse
import io
import json
import re
import resource
import signal
import sys
import time
import traceback
import zipfile
from collections import Counter
from collections.abc import Callable, Iterator
from pathlib import Path
from types import FrameType
from typing import Any

import numpy as np

from app.intake.reading import IntakeError, read_release
from tests.data.make import examples

HANG = 2.0  # seconds of the processor
MEMORY = 3 * 1024**3
TOKENS = (
    b"NaN 1e999 -1 2024-W05 2024-13 2024-01 2024-Q5 99999999999999999999 '' \x00 \xff \xe2\x80\xae"
    b' " <![CDATA[ ]]> <!DOCTYPE <!ENTITY &amp; &lol; {} [] null 0:0 1:9 : , ; \t \n = % ../../x'
    b' OBS_VALUE TIME_PERIOD FREQ D B r="XFD1048576" r="1048576" <f>1</f> \\ud800'
).split(b" ")


class Hang(BaseException):
    """A file that takes too long; not an `Exception`, so that no reader can take it for damage."""


def flip(data: bytes, rng: np.random.Generator) -> bytes:
    changed = bytearray(data)
    for _ in range(int(rng.integers(1, 12))):
        changed[int(rng.integers(len(changed)))] = int(rng.integers(256))
    return bytes(changed)


def cut(data: bytes, rng: np.random.Generator) -> bytes:
    return data[: int(rng.integers(len(data)))]


def drop(data: bytes, rng: np.random.Generator) -> bytes:
    start = int(rng.integers(len(data)))
    return data[:start] + data[start + int(rng.integers(1, 200)) :]


def put(data: bytes, rng: np.random.Generator) -> bytes:
    start = int(rng.integers(len(data) + 1))
    return data[:start] + TOKENS[int(rng.integers(len(TOKENS)))] + data[start:]


def double(data: bytes, rng: np.random.Generator) -> bytes:
    start = int(rng.integers(len(data)))
    piece = data[start : start + int(rng.integers(1, 400))]
    return data[:start] + piece * int(rng.integers(2, 30)) + data[start:]


def lines(data: bytes, rng: np.random.Generator) -> bytes:
    """Double, drop or swap lines."""
    rows = data.split(b"\n")
    first, second = (int(rng.integers(len(rows))) for _ in range(2))
    match int(rng.integers(3)):
        case 0:
            rows[first:first] = [rows[second]] * int(rng.integers(1, 40))
        case 1:
            del rows[first : first + int(rng.integers(1, 5))]
        case _:
            rows[first], rows[second] = rows[second], rows[first]
    return b"\n".join(rows)


def words(data: bytes, rng: np.random.Generator) -> bytes:
    """Put one word of the file, or one known to hurt, in the place of another."""
    found = list(re.finditer(rb"[^\s,;:\"'<>/={}\[\]]+", data))
    if not found:
        return put(data, rng)
    place, other = (found[int(rng.integers(len(found)))] for _ in range(2))
    new = TOKENS[int(rng.integers(len(TOKENS)))] if rng.random() < 0.5 else other[0]
    return data[: place.start()] + new + data[place.end() :]


def everywhere(data: bytes, rng: np.random.Generator) -> bytes:
    """Replace one sign by another throughout."""
    old, new = (int(data[int(rng.integers(len(data)))]) for _ in range(2))
    return data.replace(bytes([old]), bytes([new]))


PLAIN = (flip, cut, drop, put, double, lines, words, words, everywhere)


def damaged(data: bytes, rng: np.random.Generator) -> bytes:
    """Damage a file once to three times."""
    for _ in range(int(rng.integers(1, 4))):
        if data:
            data = PLAIN[int(rng.integers(len(PLAIN)))](data, rng)
    return data


MARKUP = (  # values of attributes, words, and last the names of elements and attributes
    *(re.compile(rb'="([^"<]*)"'),) * 3,
    *(re.compile(rb">([^<>]+)<"),) * 2,
    re.compile(rb"</?([\w:]+)|([\w:]+)=\""),
)


def damaged_xml(data: bytes, rng: np.random.Generator) -> bytes:
    """Change values, names and lines of XML that stays well-formed more often than not."""
    if rng.random() < 0.2:
        return damaged(data, rng)
    wide = data[:2] == b"\xff\xfe"
    data = data.decode("utf-16").encode() if wide else data
    for _ in range(int(rng.integers(1, 6))):
        kind = MARKUP[int(rng.integers(len(MARKUP)))]
        found = list(re.finditer(kind, data))
        if not found or rng.random() < 0.3:
            data = lines(data, rng)
            continue
        place, other = (found[int(rng.integers(len(found)))] for _ in range(2))
        group = place.lastindex or 1
        new = other[other.lastindex or 1]
        if kind is not MARKUP[-1] and rng.random() < 0.5:
            token = TOKENS[int(rng.integers(len(TOKENS)))]
            new = token.replace(b"&", b"").replace(b"<", b"").replace(b'"', b"")
        data = data[: place.start(group)] + new + data[place.end(group) :]
    return data.decode("utf-8", "replace").encode("utf-16") if wide else data


def damaged_json(data: bytes, rng: np.random.Generator) -> bytes:
    """Change, drop or move parts of JSON that stays well-formed."""
    if rng.random() < 0.2:
        return damaged(data, rng)
    root = json.loads(data)
    for _ in range(int(rng.integers(1, 4))):
        parts = list(_parts(root))
        holder, key = parts[int(rng.integers(len(parts)))]
        donor, other = parts[int(rng.integers(len(parts)))]
        odd = (None, -1, 10**30, 1e308, "", "NaN", [], {}, True, "0:0", "2024-W05", "\ud800", [[0]])
        match int(rng.integers(4)):
            case 0:
                del holder[key]
            case 1:
                holder[key] = odd[int(rng.integers(len(odd)))]
            case 2 if isinstance(holder, dict):
                holder[str(odd[int(rng.integers(len(odd)))])] = holder[key]
            case _:
                holder[key] = json.loads(json.dumps(donor[other]))
    return json.dumps(root).encode()


def _parts(node: Any) -> Iterator[tuple[Any, Any]]:
    """Yield every place of a JSON tree; of long lists and objects the first few."""
    keys = list(node) if isinstance(node, dict) else range(len(node))
    for key in list(keys)[:12]:
        yield node, key
        if isinstance(node[key], dict | list):
            yield from _parts(node[key])


def damaged_archive(data: bytes, rng: np.random.Generator) -> bytes:
    """Damage one member of an archive and pack it again; one time in five the archive itself."""
    if rng.random() < 0.2:
        return damaged(data, rng)
    with zipfile.ZipFile(io.BytesIO(data)) as source:
        members = [(name, source.read(name)) for name in source.namelist()]
    place = int(rng.integers(len(members)))
    sheets = [n for n, (name, _) in enumerate(members) if "sheet" in name or "." in name[-5:]]
    if sheets and rng.random() < 0.6:
        place = sheets[int(rng.integers(len(sheets)))]
    name, content = members[place]
    match int(rng.integers(8)):
        case 0:
            del members[place]
        case 1:
            other = int(rng.integers(len(members)))
            members[place] = (name, members[other][1])
        case 2:
            members[place] = (damaged(name.encode(), rng).decode("utf-8", "replace"), content)
        case _:
            change = damaged_xml if content.startswith(b"<") else damaged
            members[place] = (name, change(content, rng) if content else content)
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as target:
        for inside, content in members:
            target.writestr(zipfile.ZipInfo(inside or "x", (2024, 1, 1, 0, 0, 0)), content)
    return stream.getvalue()


DAMAGE: dict[str, Callable[[bytes, np.random.Generator], bytes]] = {
    "workbook": damaged_archive,
    "zip": damaged_archive,
    "SDMX-ML generic": damaged_xml,
    "SDMX-ML specific": damaged_xml,
    "SDMX-JSON": damaged_json,
}


def seeds() -> dict[str, list[bytes]]:
    """Example files, by the reader that takes them."""
    kinds: dict[str, list[bytes]] = {}
    for name, example in examples().items():
        start = name.split(".")[0]
        kind = next(
            label
            for label, starts in (
                ("workbook", ("xlsx",)),
                ("SDMX-CSV 1.0", ("sdmx_csv_1",)),
                ("SDMX-CSV 2", ("sdmx_csv_2",)),
                ("SDMX-ML generic", ("sdmx_generic",)),
                ("SDMX-ML specific", ("sdmx_specific",)),
                ("SDMX-JSON", ("sdmx_json",)),
                ("zip", ("zip",)),
                ("CSV", ("csv",)),
            )
            if start.startswith(starts)
        )
        kinds.setdefault(kind, []).append(example.content)
    return kinds


def files(total: int, seed: int) -> Iterator[tuple[str, bytes]]:
    """Yield the reader and the bytes of damaged files, each reader in turn."""
    rng = np.random.default_rng(seed)
    kinds = seeds()
    names = list(kinds)
    for number in range(total):
        kind = names[number % len(names)]
        data = kinds[kind][int(rng.integers(len(kinds[kind])))]
        yield kind, DAMAGE.get(kind, damaged)(data, rng)


def _hang(_signal: int, _frame: FrameType | None) -> None:
    raise Hang


def outcome(data: bytes) -> str:
    """Read a file and say what came of it; anything but the first three is a fault."""
    signal.setitimer(signal.ITIMER_PROF, HANG)
    try:
        release = read_release("fuzz", data)
        if release.series:
            return "read, with errors" if _errors(release) else "read"
        return "nothing read" if _errors(release) else "nothing read and nothing said"
    except IntakeError as error:
        text = str(error)
        return "refused" if text.startswith("fuzz") and "\n" not in text else "no sentence"
    except Hang:
        return "hang"
    except BaseException:
        traceback.print_exc()
        return "another exception"
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0)


def _errors(release: object) -> bool:
    return any(one.severity == "error" for one in release.problems)  # type: ignore[attr-defined]


GOOD = ("read", "read, with errors", "nothing read", "refused")


def main() -> int:
    """Run the program."""
    parser = argparse.ArgumentParser(description=__doc__.partition("\n")[0])
    parser.add_argument("--files", type=int, default=20_000)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--keep", type=Path, help="folder for the files that are faults")
    given = parser.parse_args()
    resource.setrlimit(resource.RLIMIT_AS, (MEMORY, MEMORY))
    signal.signal(signal.SIGPROF, _hang)
    counts: Counter[tuple[str, str]] = Counter()
    slowest: dict[str, float] = {}
    for number, (kind, data) in enumerate(files(given.files, given.seed)):
        start = time.process_time()
        what = outcome(data)
        slowest[kind] = max(slowest.get(kind, 0.0), time.process_time() - start)
        counts[kind, what] += 1
        if what not in GOOD:
            print(f"file {number} of seed {given.seed} ({kind}): {what}", file=sys.stderr)
            if given.keep:
                (given.keep / f"{given.seed}-{number}").write_bytes(data)
    for kind, seconds in slowest.items():
        row = ", ".join(f"{what} {n:,}" for (k, what), n in sorted(counts.items()) if k == kind)
        print(f"{kind}: {row}; slowest {seconds:.2f} s")
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    bad = sum(n for (_, what), n in counts.items() if what not in GOOD)
    print(f"{given.files:,} files, {bad} faults, peak memory {peak:.0f} MB")
    return 1 if bad else 0


if __name__ == "__main__":
    sys.exit(main())
