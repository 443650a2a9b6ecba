"""Options that several commands share, and what they come to."""

from __future__ import annotations

import sys
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

if TYPE_CHECKING:
    from rich.console import Console

    from coatings.recipe import FacetName

Command = TypeVar("Command", bound=Callable[..., Any])

DEFAULT_SEED = 1
TO_STANDARD_OUTPUT = "-"


@dataclass(frozen=True)
class Shared:
    """Values of the shared options of one call."""

    out: Path | None
    json: str | None
    seed: int
    workers: int | None
    quiet: bool

    def folder(self, recipe: Path) -> Path:
        """Where output files go: ``--out``, or ``out/<recipe name>``."""
        return self.out if self.out is not None else Path("out") / recipe.stem

    def console(self) -> Console:
        """Where the summary goes; silent under ``--quiet`` and when standard output carries the JSON."""
        from rich.console import Console

        silent = self.quiet or self.json == TO_STANDARD_OUTPUT
        return Console(quiet=silent, highlight=False)

    def check_outputs(self, folder: Path) -> None:
        """Refuse outputs that can't be written before any work is done."""
        from coatings.documents.files import check_file, check_folder

        check_folder(folder)
        if self.json not in (None, TO_STANDARD_OUTPUT):
            check_file(Path(str(self.json)), option="--json")

    def json_files(self, text: str) -> dict[Path, bytes]:
        """The file that ``--json FILE`` asks for, if any."""
        if self.json in (None, TO_STANDARD_OUTPUT):
            return {}
        return {Path(str(self.json)): text.encode()}

    def print_json(self, text: str) -> None:
        """Write the JSON to standard output when ``--json -`` asks for it."""
        if self.json == TO_STANDARD_OUTPUT:
            sys.stdout.write(text)
            sys.stdout.flush()


def shared_options(command: Command) -> Command:
    """Add --out, --json, --seed, --workers and --quiet."""
    for option in (
        click.option("--quiet", is_flag=True, help="Print no summary."),
        click.option(
            "--workers", type=click.IntRange(min=1), metavar="N",
            help="Worker processes; default: one a processor. The result does not depend on it.",
        ),
        click.option(
            "--seed", type=click.IntRange(0, 2**32 - 1), default=DEFAULT_SEED, show_default=True,
            metavar="N", help="Seed of all random draws.",
        ),
        click.option(
            "--json", "json", metavar="FILE",
            help="Write the result as JSON; '-' is standard output, and nothing else goes there.",
        ),
        click.option(
            "--out", type=click.Path(path_type=Path), metavar="DIR",
            help="Folder for the output files; default: out/<recipe name>.",
        ),
    ):  # fmt: skip
        command = option(command)
    return command


def shared_from(options: dict[str, Any]) -> Shared:
    """Take the shared options out of a command's keyword arguments."""
    return Shared(
        **{name: options.pop(name) for name in ("out", "json", "seed", "workers", "quiet")}
    )


recipe_argument = click.argument("recipe", type=click.Path(path_type=Path), metavar="RECIPE")

facet_option = click.option(
    "--facet", type=click.Choice(["front", "rear"]), help="Only this facet; default: both."
)


def sides(facet: FacetName | None) -> tuple[FacetName, ...]:
    """The facets that ``--facet`` leaves."""
    return ("front", "rear") if facet is None else (facet,)
