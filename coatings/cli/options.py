"""Options that several commands share, and what they come to."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

if TYPE_CHECKING:
    from coatings.cli.screen import Row
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

    def check_outputs(
        self, files: Mapping[str, Path], *, folder: Path | None, inputs: Iterable[Path]
    ) -> None:
        """Refuse outputs that can't be written, or that are inputs, before any work is done.

        ``files``: files that the command writes besides ``--json``, by the option that names them.
        """
        from coatings.documents.files import check_apart, check_file, check_folder

        outputs = dict(files)
        if folder is not None:
            check_folder(folder)
        if self.json_path is not None:
            outputs["--json"] = self.json_path
        for option, path in outputs.items():
            is_in_new_folder = path.parent == folder and not folder.exists()
            if not is_in_new_folder:
                check_file(path, option=option)
        check_apart(outputs, inputs)

    @property
    def json_path(self) -> Path | None:
        """The file of ``--json FILE``; None without it and for standard output."""
        return None if self.json in (None, TO_STANDARD_OUTPUT) else Path(str(self.json))

    def deliver(self, files: Mapping[Path, bytes], text: str, rows: Iterable[Row]) -> None:
        """Write every file, ``text`` as JSON where it was asked for, and print the summary.

        The summary is silent under ``--quiet`` and when standard output carries the JSON.
        """
        from coatings.cli.screen import complain, print_rows, say_json
        from coatings.documents.files import write_files

        if self.json_path is not None:
            files = {**files, self.json_path: text.encode()}
        write_files(files)
        try:
            if self.json == TO_STANDARD_OUTPUT:
                say_json(text)
            elif not self.quiet:
                print_rows([*rows, *files_rows(list(files))])
        except KeyboardInterrupt:
            complain("facetwright: stopped while printing; every file is written")


def files_rows(files: list[Path]) -> list[Row]:
    """Where the files are, one row a folder."""
    from rich.markup import escape

    folders: dict[Path, list[str]] = {}
    for path in files:
        folders.setdefault(path.parent, []).append(path.name)
    return [
        ("FILES" if number == 0 else "", escape(f"{folder}/: {', '.join(names)}"))
        for number, (folder, names) in enumerate(folders.items())
    ]


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
