"""`pricewake breadth`: how broad a print is."""

from pathlib import Path

import click

from app.breadth.fields import BREADTH_FIELDS, BREADTH_VIEWS
from app.commands import parts as cli_parts
from app.commands.parts import errors, print_json, state_of, workspace_of, write
from app.state import ViewState


@click.command()
@cli_parts.files
@click.option(
    "--weights",
    "weights",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="File of weights: a row a year and a column a component, named as the components are.",
)
@cli_parts.state_options(BREADTH_FIELDS)
@cli_parts.as_of
@cli_parts.as_json
@cli_parts.csv_path
@cli_parts.view(BREADTH_VIEWS, "contributions")
@cli_parts.kept_in
def breadth(
    files: tuple[Path, ...],
    weights: Path | None,
    newest: str | None,
    as_json: bool,
    csv_path: Path | None,
    view: str,
    kept_in: str | None,
    **flags: str | None,
) -> int:
    """Say how broad the newest print is: contributions, diffusion, core measures."""
    from app.breadth.bridge import breadth as breadth_of
    from app.breadth.exports import view_text
    from app.commands.breadth_report import report, with_weights
    from app.commands.reading import as_of_fields
    from app.compute import Bridge

    desk = with_weights(workspace_of(files, kept_in), weights)
    state = state_of(ViewState(), {**flags, **as_of_fields(newest)})
    shown = breadth_of(state, Bridge(desk))
    answer, lines = report(shown)
    if csv_path:
        write(csv_path, view_text(view, shown))
    if as_json:
        print_json(answer)
    else:
        for line in lines:
            click.echo(line)
    for problem in errors(desk):
        click.echo(f"pricewake: {problem}", err=True)
    if shown.refusal:
        offer = "; --scale yes scales them" if "must sum" in shown.refusal else ""
        click.echo(f"pricewake: {shown.refusal}{offer}", err=True)
    return int(bool(errors(desk) or shown.refusal))
