"""Files whole or not at all, and what is refused before any work."""

from __future__ import annotations

import os
import stat
from pathlib import Path

import pytest

from coatings.documents.files import check_apart, check_file, check_folder, write_files
from coatings.errors import OutputError


def test_files_appear_with_their_folders_and_usual_rights(tmp_path: Path) -> None:
    before = os.umask(0o027)
    try:
        write_files({tmp_path / "a" / "b" / "x": b"1", tmp_path / "y": b"2"})
    finally:
        os.umask(before)
    assert (tmp_path / "a/b/x").read_bytes() == b"1"
    assert stat.S_IMODE((tmp_path / "y").stat().st_mode) == 0o640
    assert {path.name for path in tmp_path.rglob("*")} == {"a", "b", "x", "y"}


def test_new_file_that_was_placed_is_taken_away_again(tmp_path: Path) -> None:
    (tmp_path / "wall").mkdir()
    with pytest.raises(OutputError, match="can't be written"):
        write_files({tmp_path / "new": b"1", tmp_path / "wall": b"2"})
    assert [path.name for path in tmp_path.iterdir()] == ["wall"]


def test_replaced_file_is_put_back(tmp_path: Path) -> None:
    (tmp_path / "old").write_bytes(b"before")
    (tmp_path / "wall").mkdir()
    with pytest.raises(OutputError, match="wall: can't be written"):
        write_files({tmp_path / "old": b"after", tmp_path / "wall": b"2"})
    assert (tmp_path / "old").read_bytes() == b"before"
    assert sorted(path.name for path in tmp_path.iterdir()) == ["old", "wall"]


def test_checks_leave_nothing_behind(tmp_path: Path) -> None:
    check_folder(tmp_path / "new" / "deeper")
    check_file(tmp_path / "file", option="--json")
    assert list(tmp_path.iterdir()) == []


def test_folder_that_is_a_file(tmp_path: Path) -> None:
    (tmp_path / "file").write_bytes(b"")
    with pytest.raises(OutputError, match=r"--out: .*file is not a folder"):
        check_folder(tmp_path / "file" / "below")


def test_folder_that_cannot_be_written() -> None:
    with pytest.raises(OutputError, match="/proc can't be written"):
        check_folder(Path("/proc/no-such"))


def test_file_that_is_none(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe")
    for path, said in {
        tmp_path: "is a folder",
        tmp_path / "pipe": "not a regular file",
        Path("/dev/null"): "not a regular file",
        tmp_path / "missing" / "x": "missing is not a folder",
    }.items():
        with pytest.raises(OutputError, match=said):
            check_file(path, option="--csv")


def test_outputs_apart_from_inputs_and_each_other(tmp_path: Path) -> None:
    recipe = tmp_path / "r.toml"
    recipe.write_bytes(b"")
    (tmp_path / "link").symlink_to(recipe)
    with pytest.raises(OutputError, match=r"--json: would replace .*, which is read"):
        check_apart({"--json": tmp_path / "link"}, [recipe])
    with pytest.raises(OutputError, match=r"--json: would write .*, as --csv does"):
        check_apart({"--csv": tmp_path / "x", "--json": tmp_path / "." / "x"}, [recipe])
    check_apart({"--csv": tmp_path / "x", "--json": tmp_path / "y"}, [recipe])
