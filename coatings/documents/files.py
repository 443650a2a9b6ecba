"""Output files: each appears whole or not at all."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from coatings.errors import OutputError, Problem


def check_folder(folder: Path, *, option: str = "--out") -> None:
    """Refuse a folder that can't be written before any long work; creates nothing.

    Raises OutputError naming the option, the folder and the mend.
    """
    nearest = folder
    while not os.path.lexists(nearest) and nearest != nearest.parent:
        nearest = nearest.parent
    if not nearest.is_dir():
        raise OutputError(
            Problem(option, f"{nearest} is not a folder; give a folder to write into")
        )
    if not os.access(nearest, os.W_OK | os.X_OK):
        raise OutputError(Problem(option, f"{nearest} can't be written; give another folder"))


def check_file(path: Path, *, option: str) -> None:
    """Refuse a file path that can't be written; creates nothing."""
    if path.is_dir():
        raise OutputError(Problem(option, f"{path} is a folder; give a file to write"))
    if os.path.lexists(path) and not path.is_file():
        raise OutputError(Problem(option, f"{path} is not a regular file; give another"))
    if not path.parent.is_dir():
        raise OutputError(
            Problem(option, f"{path.parent} is not a folder; create it or give another")
        )
    if not os.access(path.parent, os.W_OK | os.X_OK):
        raise OutputError(Problem(option, f"{path.parent} can't be written; give another folder"))


def write_files(files: dict[Path, bytes]) -> None:
    """Write all files, then put all in place: a failure before that leaves what was there before.

    Parameters: ``files`` contents by path; folders are created. Raises OutputError.
    """
    staged: list[tuple[str, Path]] = []
    try:
        for path, content in files.items():
            path.parent.mkdir(parents=True, exist_ok=True)
            staged.append((_staged(path, content), path))
        for temporary, path in staged:
            os.replace(temporary, path)
    except OSError as error:
        where = str(error.filename or "output")
        reason = error.strerror or str(error)
        raise OutputError(
            Problem(where, f"can't be written: {reason}; give another --out")
        ) from None
    finally:
        for temporary, _ in staged:
            Path(temporary).unlink(missing_ok=True)


def _staged(path: Path, content: bytes) -> str:
    handle, temporary = tempfile.mkstemp(prefix=".unfinished-", dir=path.parent)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.chmod(temporary, _new_file_mode())
    except BaseException:
        Path(temporary).unlink(missing_ok=True)
        raise
    return temporary


def _new_file_mode() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask
