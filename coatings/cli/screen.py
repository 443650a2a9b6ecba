"""The two streams of the terminal: what is said, and how it wraps."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable
from io import StringIO
from typing import TYPE_CHECKING, TextIO

from coatings.errors import OutputError, Problem

if TYPE_CHECKING:
    from rich.console import Console

Row = tuple[str | None, str]
"""Label and text, in console markup; None for a line that takes the whole width and is not wrapped."""

GAP = 1


def new_console() -> Console:
    """Console as wide and as colourful as standard output, but on paper: ``say`` does the writing."""
    from rich.console import Console

    is_terminal = sys.stdout is not None and sys.stdout.isatty()
    return Console(file=StringIO(), force_terminal=is_terminal or None, highlight=False)


def print_rows(rows: Iterable[Row]) -> None:
    """Print labelled rows; long text wraps beside its label, without spaces at the ends of lines."""
    from rich.text import Text

    console = new_console()
    parsed = [(None if label is None else Text.from_markup(label), text) for label, text in rows]
    indent = max((label.cell_len for label, _ in parsed if label is not None), default=0) + GAP
    with console.capture() as captured:
        for label, text in parsed:
            if label is None:
                console.print(Text.from_markup(text), soft_wrap=True)
                continue
            lines = Text.from_markup(text).wrap(console, max(console.width - indent, 20))
            for number, line in enumerate(lines):
                head = label if number == 0 else Text()
                line.rstrip()
                console.print(
                    Text.assemble(head, " " * (indent - head.cell_len), line), soft_wrap=True
                )
    say(captured.get())


def say(text: str) -> None:
    """Write text to standard output. A reader who has left is no error.

    Raises OutputError when the text can't be written, as on a full disk.
    """
    if sys.stdout is None:
        return
    encoding = sys.stdout.encoding or "utf-8"
    _write(sys.stdout, text.encode(encoding, "backslashreplace").decode(encoding))


def say_json(text: str) -> None:
    """Write JSON to standard output, in UTF-8 whatever the terminal's encoding."""
    if sys.stdout is None:
        return
    if (sys.stdout.encoding or "").lower().replace("-", "") != "utf8":
        reconfigure = getattr(sys.stdout, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(encoding="utf-8")
    _write(sys.stdout, text)


def complain(line: str) -> None:
    """Write one line to standard error, if there is one."""
    if sys.stderr is not None:
        try:
            print(line, file=sys.stderr, flush=True)
        except OSError:
            _abandon(sys.stderr)


def _write(stream: TextIO, text: str) -> None:
    try:
        stream.write(text)
        stream.flush()
    except BrokenPipeError:
        _abandon(stream)
    except OSError as error:
        _abandon(stream)
        reason = error.strerror or str(error)
        raise OutputError(Problem("standard output", f"can't be written: {reason}")) from None


def _abandon(stream: TextIO) -> None:
    """Let what is still in the stream's buffer go nowhere: the interpreter flushes it at the end."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    try:
        os.dup2(nowhere, stream.fileno())
    except OSError:  # a stream without a file behind it has nothing to flush
        return
    finally:
        os.close(nowhere)
