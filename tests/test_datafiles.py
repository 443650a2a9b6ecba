"""Files of measured data: what is read, and how each fault is named."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from coatings.datafiles import MOST_BYTES, named, read_data
from coatings.errors import ArrayError, InputError, Problem

LAYOUTS = (("a", "b"), ("a", "b", "c"))


def file(folder: Path, content: str | bytes) -> Path:
    path = folder / "data.csv"
    path.write_bytes(content.encode() if isinstance(content, str) else content)
    return path


def test_columns_in_any_order_with_comments_and_blank_lines(tmp_path: Path) -> None:
    text = "\ufeff# from the bench\n b , a\r\n 1, -2e-3 \n\n# a break\n.5,3.\n"
    found = read_data(file(tmp_path, text), layouts=LAYOUTS)
    assert found.layout == ("a", "b")
    assert found.columns["a"].tolist() == [-2e-3, 3.0]
    assert found.columns["b"].tolist() == [1.0, 0.5]


@pytest.mark.parametrize(
    ("content", "said"),
    [
        ("", "is empty; expected the columns a, b or a, b, c"),
        ("a,b\n", "has no rows below its column names"),
        ("a,x\n1,2\n", "line 1: names a, x; expected a, b or a, b, c"),
        ("a,a\n1,2\n", "line 1: names a, a; expected"),
        ("a;b\n1;2\n", "line 1: names a;b; expected"),
        ("a,b\n1,2\n1,two\n", "line 3, b: is 'two'; expected a finite number"),
        ("a,b\nnan,2\n", "line 2, a: is 'nan'; expected a finite number"),
        ("a,b\n1,inf\n", "line 2, b: is 'inf'; expected a finite number"),
        ("a,b\n1,1e999\n", "line 2, b: is '1e999'; expected a finite number"),
        ("a,b\n1,1_0\n", "line 2, b: is '1_0'; expected a finite number"),
        ("a,b\n1,\n", "line 2, b: is ''; expected a finite number"),
        ("a,b\n1,2,5\n", "line 2: has 3 values, expected 2; the decimal mark is a point"),
        (b"a,b\n\xff\xfe,2\n", "give a CSV file of measured data"),
    ],
)
def test_faults_are_named(tmp_path: Path, content: str | bytes, said: str) -> None:
    path = file(tmp_path, content)
    with pytest.raises(InputError) as caught:
        read_data(path, layouts=LAYOUTS)
    assert str(path) in str(caught.value)
    assert said in str(caught.value)


def test_every_fault_at_once(tmp_path: Path) -> None:
    with pytest.raises(InputError) as caught:
        read_data(file(tmp_path, "a,b\nx,1\n1\n2,y\n"), layouts=LAYOUTS)
    assert len(caught.value.problems) == 3


def test_no_file_a_folder_a_pipe_and_a_large_file(tmp_path: Path) -> None:
    with pytest.raises(InputError, match="no such file"):
        read_data(tmp_path / "none.csv", layouts=LAYOUTS)
    with pytest.raises(InputError, match="give a CSV file"):
        read_data(tmp_path, layouts=LAYOUTS)
    os.mkfifo(tmp_path / "pipe")
    with pytest.raises(InputError, match="give a CSV file"):
        read_data(tmp_path / "pipe", layouts=LAYOUTS)
    large = file(tmp_path, b"a,b\n" + b" " * MOST_BYTES)
    with pytest.raises(InputError, match="is larger than 10 MB"):
        read_data(large, layouts=LAYOUTS)


def test_a_fault_of_the_numbers_gets_the_files_name() -> None:
    with pytest.raises(InputError, match=r"^x\.csv: a: falls$"), named(Path("x.csv")):
        raise ArrayError(Problem("a", "falls"))
    with pytest.raises(InputError, match=r"^x\.csv: falls$"), named(Path("x.csv")):
        raise InputError("falls")
