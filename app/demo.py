"""The invented economy that opens when no file is given."""

from app.intake.reading import Release, demo_metadata, read_release
from app.places import bundled

FILES = ("economy_monthly.csv", "divisions.csv", "output_quarterly.csv")
WEIGHTS = "weights.csv"
PANEL = "panel.csv"


def demo_releases() -> tuple[Release, ...]:
    """Read the files of the invented economy, with what its publisher says of each series."""
    folder = bundled("data_samples")
    notes = demo_metadata((folder / "series.csv").read_text(encoding="utf-8"))
    return tuple(
        read_release(name, (folder / name).read_bytes(), metadata=notes.get(name))
        for name in (*FILES, WEIGHTS)
    )


def demo_panel() -> Release:
    """Read the thirty invented economies."""
    return read_release(PANEL, (bundled("data_samples") / PANEL).read_bytes())
