"""Where the files that travel with the program lie: a checkout's folders, or the wheel's copies."""

from functools import lru_cache
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path

_HERE = Path(__file__).resolve().parent


def bundled(folder: str) -> Path:
    """Return `assets` or `data_samples`, from the checkout if there is one, else from the wheel."""
    beside = _HERE.parent / folder
    if beside.is_dir() and (_HERE.parent / "pyproject.toml").is_file():
        return beside
    return _HERE / "bundled" / folder


@lru_cache(maxsize=1)
def software_version() -> str:
    """Return the version of the installed program."""
    try:
        return version("pricewake")
    except PackageNotFoundError:  # run from a bare checkout
        return "unversioned"
