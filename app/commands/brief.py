"""`pricewake brief`: the chosen views as one file to send, with the numbers to check it by."""

from pathlib import Path
from typing import Any

import click

from app.brief.parts import FORMS, PAPERS
from app.commands import parts as cli_parts
from app.commands.parts import errors, print_json, state_options, workspace_of, write

_SHARED = (
    "driver",
    "response",
    "window",
    "shift",
    "series",
    "surrogates",
    "draws",
    "seed",
    "as_of",
)


@click.command()
@cli_parts.files
@click.option(
    "-o",
    "--out",
    "folder",
    type=click.Path(path_type=Path),
    metavar="DIR",
    required=True,
    help="Folder to write: new, empty, or with an earlier brief, which is replaced.",
)
@click.option(
    "--recipe",
    "recipe_path",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="recipe.toml of an earlier brief: the same views and words, and what changed since.",
)
@click.option(
    "--form",
    type=click.Choice(tuple(FORMS)),
    help="One page, or every part; without it as in the recipe, else full.",
)
@click.option("--title", metavar="TEXT", help="Title of the brief.")
@click.option(
    "--paper",
    type=click.Choice(tuple(PAPERS)),
    default="a4",
    show_default=True,
    help="Paper of the PDF; the HTML prints on either.",
)
@click.option("--no-pictures", is_flag=True, help="Make no PNG, SVG and PDF.")
@state_options(_SHARED)
@cli_parts.as_json
@cli_parts.csv_path
@cli_parts.kept_in
def brief(
    files: tuple[Path, ...],
    folder: Path,
    recipe_path: Path | None,
    form: str | None,
    title: str | None,
    paper: str,
    no_pictures: bool,
    as_json: bool,
    csv_path: Path | None,
    kept_in: str | None,
    **flags: str | None,
) -> int:
    """Write a brief: one HTML file, its PDF, pictures and numbers of every view, and its recipe."""
    from app.brief.building import Building
    from app.brief.folder import check_folder, write_folder
    from app.brief.pictures import Pictures
    from app.brief.remembered import restore
    from app.commands.brief_report import draft_of, figures_csv, lines, recipe_of
    from app.compute import Bridge

    not_restored: tuple[str, ...] = ()
    check_folder(folder)
    before = recipe_of(recipe_path) if recipe_path else None
    desk = workspace_of(files, kept_in)
    if before is not None and before.remembered is not None and kept_in is None:
        not_restored = restore(before.remembered, desk)
    bridge = Bridge(desk)
    draft = draft_of(before, bridge, flags, form, title)
    pictures = Pictures()
    building = Building(draft, bridge, pictures, before, images=not no_pictures, paper=paper)
    building.said += not_restored
    try:
        building.finish()
    finally:
        pictures.close()
    write_folder(folder, building.files)
    if csv_path:
        write(csv_path, figures_csv(building))
    answer: dict[str, Any] = {
        "files": [str(folder / name) for name in building.files],
        "said": building.said,
        "changed": list(building.since.data) if building.since else [],
    }
    if as_json:
        print_json(answer)
    else:
        for line in lines(building, folder):
            click.echo(line)
    for problem in errors(desk):
        click.echo(f"pricewake: {problem}", err=True)
    assert building.brief is not None
    return int(bool(errors(desk) or building.brief.refusals))
