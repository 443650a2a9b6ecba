"""Output files: each appears whole or not at all, and a failed run leaves what was there before."""

from __future__ import annotations

import os
import signal
import tempfile
import threading
from collections.abc import Iterable, Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path

from coatings.errors import OutputError, Problem

_SPECIAL = (Path("/dev"), Path("/proc"), Path("/sys"))


def check_folder(folder: Path, *, option: str = "--out") -> None:
    """Refuse a folder that can't be written before any long work; leaves nothing behind.

    Raises OutputError naming the option, the folder and the mend.
    """
    nearest = folder
    while not os.path.lexists(nearest) and nearest != nearest.parent:
        nearest = nearest.parent
    if not nearest.is_dir():
        raise OutputError(
            Problem(option, f"{nearest} is not a folder; give a folder to write into")
        )
    _try_writing(nearest, option)


def check_file(path: Path, *, option: str) -> None:
    """Refuse a file path that can't be written; leaves nothing behind."""
    if path.is_dir():
        raise OutputError(Problem(option, f"{path} is a folder; give a file to write"))
    target = Path(os.path.realpath(path))
    if (target.exists() and not target.is_file()) or _is_special(path) or _is_special(target):
        raise OutputError(Problem(option, f"{path} is not a regular file; give another"))
    if not target.parent.is_dir():
        raise OutputError(
            Problem(option, f"{path.parent} is not a folder; create it or give another")
        )
    _try_writing(target.parent, option)


def check_apart(outputs: Mapping[str, Path], inputs: Iterable[Path]) -> None:
    """Refuse outputs that would replace an input or each other.

    ``outputs``: files by the option that names them. Raises OutputError.
    """
    read = {os.path.realpath(path) for path in inputs}
    taken: dict[str, str] = {}
    for option, path in outputs.items():
        real = os.path.realpath(path)
        if real in read:
            raise OutputError(
                Problem(option, f"would replace {path}, which is read; give another place")
            )
        if real in taken:
            raise OutputError(
                Problem(option, f"would write {path}, as {taken[real]} does; give another place")
            )
        taken[real] = option


def write_files(files: Mapping[Path, bytes]) -> None:
    """Write all files, then put all in place; a failure leaves what was there before.

    Parameters: ``files`` contents by path; folders are created, links are followed. Raises OutputError.
    """
    staged: list[tuple[Path, Path]] = []
    made: list[Path] = []
    try:
        for path, content in files.items():
            target = Path(os.path.realpath(path))
            made += _make_folders(target.parent)
            staged.append((_staged(target, content), target))
        with undisturbed():
            _put_in_place(staged)
            made.clear()
    except OSError as error:
        where = str(error.filename2 or error.filename or "output")
        reason = error.strerror or str(error)
        raise OutputError(
            Problem(where, f"can't be written: {reason}; give another place")
        ) from None
    finally:
        for temporary, _ in staged:
            temporary.unlink(missing_ok=True)
        for folder in reversed(made):
            folder.rmdir()


@contextmanager
def undisturbed() -> Iterator[None]:
    """Let Ctrl-C wait until a short piece of work is done."""
    if threading.current_thread() is not threading.main_thread():
        yield  # signals go to the main thread
        return
    waiting: list[int] = []
    before = signal.signal(signal.SIGINT, lambda number, _frame: waiting.append(number))
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)
    if waiting:
        signal.raise_signal(signal.SIGINT)


def _put_in_place(staged: list[tuple[Path, Path]]) -> None:
    earlier = {path: path.read_bytes() if path.is_file() else None for _, path in staged}
    placed: list[Path] = []
    try:
        for temporary, path in staged:
            os.replace(temporary, path)
            placed.append(path)
    except OSError:
        for path in placed:
            _put_back(path, earlier[path])
        raise


def _put_back(path: Path, content: bytes | None) -> None:
    if content is None:
        path.unlink()
    else:
        os.replace(_staged(path, content), path)


def _make_folders(folder: Path) -> list[Path]:
    """Create a folder with its parents; returns those that were not there, outermost first."""
    missing = [place for place in (folder, *folder.parents) if not place.exists()][::-1]
    folder.mkdir(parents=True, exist_ok=True)
    return missing


def _staged(path: Path, content: bytes) -> Path:
    handle, temporary = tempfile.mkstemp(prefix=".unfinished-", dir=path.parent)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.chmod(temporary, _new_file_mode())
    except OSError as error:
        Path(temporary).unlink(missing_ok=True)
        error.filename = str(path)
        raise
    except BaseException:
        Path(temporary).unlink(missing_ok=True)
        raise
    return Path(temporary)


def _new_file_mode() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask


def _is_special(path: Path) -> bool:
    absolute = Path(os.path.abspath(path))
    return any(absolute.is_relative_to(folder) for folder in _SPECIAL)


def _try_writing(folder: Path, option: str) -> None:
    """A file without a name tells more than permissions do: superusers and odd file systems."""
    try:
        with tempfile.TemporaryFile(dir=folder):
            return
    except OSError as error:
        reason = (error.strerror or str(error)).lower()
        raise OutputError(
            Problem(option, f"{folder} can't be written ({reason}); give another folder")
        ) from None
