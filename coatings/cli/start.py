"""``facetwright start``: a starter recipe to edit."""

from __future__ import annotations

from pathlib import Path

import click

STARTER = "starter.toml"


@click.command(epilog="Example: facetwright start my-chip && facetwright plan my-chip/starter.toml")
@click.argument(
    "folder", metavar="[DIR]", required=False, default=".", type=click.Path(path_type=Path)
)
@click.option("--quiet", is_flag=True, help="Print nothing.")
def start(folder: Path, quiet: bool) -> int:
    """Write a commented starter recipe into DIR (default: here). An existing file is never replaced."""
    from importlib.resources import files

    from coatings.cli.screen import say
    from coatings.documents.files import check_folder, write_files
    from coatings.errors import OutputError, Problem

    check_folder(folder, option="DIR")
    path = folder / STARTER
    if path.exists() or path.is_symlink():
        raise OutputError(Problem(str(path), "is already there; move it away or give another DIR"))
    write_files({path: files("coatings.documents").joinpath(STARTER).read_bytes()})
    if not quiet:
        say(f"wrote {path}; next: facetwright plan {path}\n")
    return 0
