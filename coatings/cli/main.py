"""The command ``facetwright``: finds the command, runs it, turns errors into lines and exit statuses."""

from __future__ import annotations

import difflib
import importlib
import os
import sys

import click

from coatings import __version__
from coatings.cli.interrupts import watched_interrupts
from coatings.cli.screen import complain
from coatings.errors import CoatingsError

# Before numpy is imported: its matrices are small here, and threads of the linear algebra only fight.
os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

MOST_LINES = 5
YES, NO, UNUSABLE = 0, 1, 2

# In the order of the work. Each module holds one command of its own name and imports nothing heavy.
COMMANDS = (
    "start", "trade", "plan", "curve", "field", "materials", "ripple", "calibrate", "reflectivity",
)  # fmt: skip


class Commands(click.Group):
    """Loads a command's module only when it is needed."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Commands in the order of the work."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """The command of that name, or None."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = getattr(
            importlib.import_module(f"coatings.cli.{cmd_name}"), cmd_name
        )
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """The command that the arguments name; an unknown one is answered with the nearest."""
        if args and args[0] not in COMMANDS and not args[0].startswith("-"):
            near = difflib.get_close_matches(args[0], COMMANDS, n=1, cutoff=0.5)
            hint = f"did you mean '{near[0]}'?" if near else f"expected {', '.join(COMMANDS)}."
            raise click.UsageError(f"No command '{args[0]}'; {hint}", ctx)
        return super().resolve_command(ctx, args)


@click.group(
    cls=Commands,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
    epilog="Example: facetwright plan recipes/pump-976.toml",
)
@click.version_option(__version__, prog_name="facetwright")
def program() -> None:
    """Facet coatings of semiconductor lasers: from windows to layers.

    Exit status: 0 done, the answer is yes; 1 done, the answer is no; 2 the input can't be used.
    """


def main() -> None:
    """Entry point of the command line."""
    try:
        status = run(sys.argv[1:])
    except (
        KeyboardInterrupt
    ):  # between the program's start and the watch over interrupts, or after it
        complain("facetwright: stopped; nothing was written")
        status = NO
    sys.exit(status)


def run(arguments: list[str]) -> int:
    """Run one command line and return its exit status; without arguments, help is shown."""
    with watched_interrupts() as interrupts:
        try:
            status = program.main(
                args=arguments or ["--help"], prog_name="facetwright", standalone_mode=False
            )
        except click.ClickException as error:
            return _refuse([_usage_line(error)])
        except CoatingsError as error:
            _refuse([str(problem) for problem in error.problems])
            # What a stopped search could not find is no fault of the input.
            return NO if interrupts.seen else UNUSABLE
        except (KeyboardInterrupt, click.Abort):
            complain("facetwright: stopped; nothing was written")
            return NO
    return status if isinstance(status, int) else YES


def _usage_line(error: click.ClickException) -> str:
    context = getattr(error, "ctx", None)
    command = context.command_path if context is not None else "facetwright"
    said = error.format_message().rstrip()
    stop = "" if said.endswith((".", "?")) else "."
    return f"{said}{stop} See: {command} --help"


def _refuse(lines: list[str]) -> int:
    for line in lines[:MOST_LINES]:
        complain(f"facetwright: {' '.join(line.split())}")
    if len(lines) > MOST_LINES:
        complain(f"facetwright: and {len(lines) - MOST_LINES} more")
    return UNUSABLE
