"""Files read with care: regular, of a sane size, text; each fault one clear sentence."""

from __future__ import annotations

import os
import stat
from pathlib import Path, PurePosixPath, PureWindowsPath

from coatings.errors import InputError
from coatings.recipe.paths import shown

MEGABYTE = 1_000_000


class ReadError(InputError):
    """Why a file can't be read: a sentence without the file's name."""


def read_bytes(path: Path, *, at_most: int) -> bytes:
    """Content of a regular file.

    Parameters
    ----------
    path : the file
    at_most : greatest size [byte]

    Returns
    -------
    bytes

    Raises
    ------
    ReadError
        when it is missing, a folder, a pipe or a device, too large, or may not be read
    """
    try:
        _refuse_special(os.stat(path))
        # A pipe that replaces the file after the look must not block: hence O_NONBLOCK.
        descriptor = os.open(path, os.O_RDONLY | getattr(os, "O_NONBLOCK", 0))
        with os.fdopen(descriptor, "rb") as file:
            _refuse_special(os.fstat(file.fileno()))
            content = file.read(at_most + 1)
    except FileNotFoundError:
        raise ReadError("no such file") from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise ReadError(f"can't be read ({reason.lower()})") from None
    if len(content) > at_most:
        raise ReadError(f"is larger than {at_most // MEGABYTE} MB")
    return content


def decode(content: bytes) -> str:
    """Text of a file in UTF-8, a byte order mark left off.

    Raises
    ------
    ReadError
        when the content is not text in UTF-8
    """
    place = content.find(b"\0")
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        place = error.start
    if place >= 0:
        raise ReadError(f"is not text in UTF-8 (byte {place + 1}); save it as plain text, UTF-8")
    return text


def inside(folder: Path, name: str) -> Path:
    """A file named relative to a folder, which it may not leave.

    Parameters
    ----------
    folder : the folder
    name : what the recipe says

    Returns
    -------
    Path
        of a file in the folder or below it, links followed

    Raises
    ------
    ReadError
        when the name is absolute, climbs with "..", holds control characters, or is a link
        that leads outside
    """
    if not name.isprintable():
        raise ReadError(f"is {shown(name)}; expected a file name without control characters")
    posix, windows = PurePosixPath(name), PureWindowsPath(name)
    if posix.is_absolute() or windows.drive or windows.root:
        raise ReadError(f"is {shown(name)}, an absolute path; {_BESIDE}")
    if ".." in posix.parts or ".." in windows.parts:
        raise ReadError(f"is {shown(name)}, which leaves the recipe's folder; {_BESIDE}")
    path = folder / name
    try:
        target, home = path.resolve(), folder.resolve()
    except (OSError, RuntimeError):
        raise ReadError(f"is {shown(name)}, a link that leads nowhere; {_BESIDE}") from None
    if not target.is_relative_to(home):
        raise ReadError(f"is {shown(name)}, a link that leaves the recipe's folder; {_BESIDE}")
    return target


_BESIDE = "expected a file in the recipe's own folder"


def _refuse_special(status: os.stat_result) -> None:
    if stat.S_ISDIR(status.st_mode):
        raise ReadError("is a folder; expected a file")
    if not stat.S_ISREG(status.st_mode):
        raise ReadError("is not a regular file (a pipe or a device); expected a file")
