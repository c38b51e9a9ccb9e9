"""CSV as any reader of CSV takes it; the reference is Python's own csv module and openpyxl is not needed."""

from __future__ import annotations

import csv as standard
import io
from pathlib import Path

import numpy as np
import pyarrow as pa
import pytest
from hypothesis import given
from hypothesis import strategies as st

from reconciler.exports import csv
from reconciler.exports.columns import Column
from reconciler.problems import KnownError
from reconciler.records import MISSING, Words


def _written(tmp_path: Path, columns: list[Column], safe: bool = False) -> str:
    path = tmp_path / "list.csv"
    csv.write(path, columns, safe=safe)
    return path.read_bytes().decode("utf-8")


def test_every_kind(tmp_path: Path) -> None:
    columns = [
        Column("name", "text", Words.of(["a,b", "", 'say "x"'])),
        Column("day", "date", np.array(["2026-03-31", "NaT", "1999-01-01"], "datetime64[D]")),
        Column("money", "amount", np.array([-5, MISSING, 12345]), np.array([2, 2, 0])),
        Column("price", "decimal", np.array([98_875 * 10**9, MISSING, 10**14])),
        Column("rows", "count", np.array([7, MISSING, 0])),
    ]
    assert _written(tmp_path, columns) == (
        'name,day,money,price,rows\n"a,b",2026-03-31,-0.05,98.875,7\n,,,,\n"say ""x""",1999-01-01,12345,100,0\n'
    )


@given(st.lists(st.tuples(st.text(st.characters(codec="utf-8", exclude_characters="\x00")), st.text("ab\",\r\n'= "))))
def test_a_reader_of_csv_gets_back_what_was_written(rows: list[tuple[str, str]]) -> None:
    import tempfile

    with tempfile.TemporaryDirectory() as folder:
        columns = [Column("one", "text", Words.of([r[0] for r in rows])), Column("two", "text", pa.array([r[1] for r in rows], pa.string()))]
        text = _written(Path(folder), columns)
    assert [tuple(line) for line in standard.reader(io.StringIO(text, newline=""))] == [("one", "two"), *rows]


@pytest.mark.parametrize(
    ("told", "safe"),
    [("=1+1", "'=1+1"), ("+cmd", "'+cmd"), ("-cmd|' /C calc'!A0", "'-cmd|' /C calc'!A0"), ("@SUM(A1)", "'@SUM(A1)"), ("\t=1", "'\t=1"),
     ("-1234.50", "-1234.50"), ("+5", "+5"), ("-", "'-"), ("-1-1", "'-1-1"), ("plain", "plain"), ("a=b", "a=b")],
)  # fmt: skip
def test_no_text_is_run_as_a_formula(tmp_path: Path, told: str, safe: str) -> None:
    for values in (Words.of([told]), pa.array([told])):
        text = _written(tmp_path, [Column("x", "text", values)], safe=True)
        assert text.startswith("\ufeff")
        assert list(standard.reader(io.StringIO(text[1:], newline="")))[1] == [safe]
        assert list(standard.reader(io.StringIO(_written(tmp_path, [Column("x", "text", values)]), newline="")))[1] == [told]


def test_a_carriage_return_first_is_no_formula_either(tmp_path: Path) -> None:
    text = _written(tmp_path, [Column("x", "text", Words.of(["\r=1"]))], safe=True)
    assert list(standard.reader(io.StringIO(text[1:], newline="")))[1] == ["'\r=1"]


def test_no_rows_leave_the_titles(tmp_path: Path) -> None:
    assert _written(tmp_path, [Column("a", "text", Words.blank(0)), Column("b", "count", np.zeros(0, np.int64))]) == "a,b\n"


def test_more_rows_than_are_written_at_a_time(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    columns = [Column("n", "count", np.arange(25)), Column("t", "text", Words.of([f"x{i}" for i in range(25)])),
               Column("m", "amount", np.arange(25), np.full(25, 2))]  # fmt: skip
    whole = _written(tmp_path, columns)
    monkeypatch.setattr(csv, "_CHUNK", 7)
    assert _written(tmp_path, columns) == whole
    assert whole.splitlines()[-1] == "24,x24,0.24"


def test_cancelled_leaves_the_old_file_and_nothing_else(tmp_path: Path) -> None:
    path = tmp_path / "list.csv"
    path.write_text("before")

    def stop(_done: int) -> None:
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        csv.write(path, [Column("n", "count", np.arange(3))], progress=stop)
    assert [p.name for p in tmp_path.iterdir()] == ["list.csv"]
    assert path.read_text() == "before"


def test_a_place_that_cannot_be_written_is_a_clear_sentence(tmp_path: Path) -> None:
    with pytest.raises(KnownError, match="cannot be written"):
        csv.write(tmp_path / "none" / "list.csv", [Column("n", "count", np.arange(3))])
    (tmp_path / "folder").mkdir()
    with pytest.raises(KnownError, match="cannot be written"):
        csv.write(tmp_path / "folder", [Column("n", "count", np.arange(3))])
    assert not list(tmp_path.glob(".*.part"))
