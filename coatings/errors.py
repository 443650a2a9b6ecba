"""The error tree.

    CoatingsError                 root; the command line catches only this one
    ├── InputError                what was given can't be used (exit status 2)
    │   ├── RecipeError           problems of a recipe file, all at once
    │   └── ArrayError            an array handed to a numerical function
    └── OutputError               a result could not be written (exit status 2)

Every error carries its problems one by one: what, where, how to mend.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True)
class Problem:
    """One thing that is wrong: ``where`` (file and key path, or argument) and ``what`` with its mend."""

    where: str
    what: str

    def __str__(self) -> str:
        return f"{self.where}: {self.what}" if self.where else self.what


class CoatingsError(Exception):
    """Root of every error that facetwright raises on purpose."""

    def __init__(self, problems: str | Problem | Sequence[Problem]) -> None:
        if isinstance(problems, str):
            problems = Problem("", problems)
        if isinstance(problems, Problem):
            problems = (problems,)
        self.problems: tuple[Problem, ...] = tuple(problems)
        super().__init__("\n".join(str(problem) for problem in self.problems))


class InputError(CoatingsError):
    """What was given can't be used."""


class RecipeError(InputError):
    """A recipe file can't be used; carries all its problems."""


class ArrayError(InputError):
    """An array handed to a numerical function has a wrong shape, order or value."""


class OutputError(CoatingsError):
    """A result could not be written; nothing was left half-written."""
