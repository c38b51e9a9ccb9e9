"""A list handed to people opens as they expect: numbers that add up, dates that sort, a head that stays in sight.

Cells are typed (amounts as numbers with the digits of their currency, dates as dates, everything else as text, so that no text is
ever run as a formula), the head is frozen with filters on, columns are as wide as what they hold. Written row by row, so that memory
does not grow with the list. A sheet holds 1,048,575 rows below its head; longer lists go on in further sheets. Numbers beyond 15
digits, which a spreadsheet would round, are written as text.
"""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import Any

import numpy as np

from reconciler.exports.columns import DECIMAL_PLACES, Column, Progress, put_in_place, rows_of
from reconciler.records import MISSING

ROWS_PER_SHEET = 1_048_575
_CHUNK = 2_000
_WIDEST = 60
_SAMPLE = 1_000
_TEXT_LIMIT = 32_767
_EXACT = 10**15
_DAY_ZERO = np.datetime64("1899-12-30", "D")


def write(path: Path, columns: Sequence[Column], title: str = "", progress: Progress | None = None) -> None:
    """Writes the columns into a workbook. Raises KnownError when the place cannot be written."""
    with put_in_place(path) as beside:
        _book(beside, columns, title, progress)


def _book(path: Path, columns: Sequence[Column], title: str, progress: Progress | None) -> None:
    import xlsxwriter

    rows = rows_of(columns)
    # a fixed date of creation: the same list gives the same bytes
    book = xlsxwriter.Workbook(str(path), {"constant_memory": True, "strings_to_formulas": False, "strings_to_urls": False})
    book.set_properties({"title": title, "created": datetime.datetime(2000, 1, 1)})
    try:
        formats = _Formats(book)
        for number, first in enumerate(range(0, max(rows, 1), ROWS_PER_SHEET)):
            last = min(first + ROWS_PER_SHEET, rows)
            sheet = book.add_worksheet("Sheet" if not number else f"Sheet {number + 1}")
            _head(sheet, columns, formats, last - first)
            for start in range(first, last, _CHUNK):
                if progress is not None:
                    progress(start)
                _rows(sheet, [c.part(start, min(start + _CHUNK, last)) for c in columns], formats, start - first + 1)
    except BaseException:
        # an unfinished book must not be put together only to be thrown away
        book.fileclosed = True
        _close_temporary(book)
        raise
    book.close()


def _close_temporary(book: Any) -> None:
    for sheet in book.worksheets():
        handle = getattr(sheet, "row_data_fh", None)
        if handle is not None:
            handle.close()
            Path(sheet.row_data_filename).unlink(missing_ok=True)


class _Formats:
    """Number formats of the book, made when first needed."""

    def __init__(self, book: Any) -> None:
        self.book = book
        self.head = book.add_format({"bold": True, "bottom": 1, "valign": "top", "text_wrap": True})
        self.date = book.add_format({"num_format": "yyyy-mm-dd", "align": "left"})
        self.count = book.add_format({"num_format": "#,##0"})
        self.decimal = book.add_format({"num_format": "0.0###########"})
        self._amounts: dict[int, Any] = {}

    def amount(self, digits: int) -> Any:
        """The format of an amount with so many digits after the point."""
        if digits not in self._amounts:
            shown = "#,##0" + ("." + "0" * digits if digits else "")
            self._amounts[digits] = self.book.add_format({"num_format": shown})
        return self._amounts[digits]


def _head(sheet: Any, columns: Sequence[Column], formats: _Formats, rows: int) -> None:
    for place, column in enumerate(columns):
        sheet.set_column(place, place, _width(column))
    for place, column in enumerate(columns):
        sheet.write_string(0, place, column.title, formats.head)
    sheet.freeze_panes(1, 0)
    if columns:
        sheet.autofilter(0, 0, max(rows, 1), len(columns) - 1)


def _width(column: Column) -> float:
    """As wide as the longest of the first rows, within reason."""
    lengths = [len(text) for text in column.part(0, _SAMPLE).texts().to_pylist() if text]
    grouping = max(lengths, default=0) // 4 if column.kind in ("amount", "count") else 0
    return float(min(max([len(column.title), *lengths]) + grouping + 3, _WIDEST))


def _rows(sheet: Any, columns: Sequence[Column], formats: _Formats, at: int) -> None:
    cells = [_cells(column, formats) for column in columns]
    write_text, write_number = sheet.write_string, sheet.write_number
    for row, line in enumerate(zip(*cells, strict=True), at):
        for place, (value, form) in enumerate(line):
            if value is None:
                continue
            if isinstance(value, str):
                write_text(row, place, value[:_TEXT_LIMIT])
            else:
                write_number(row, place, value, form)


def _cells(column: Column, formats: _Formats) -> Iterable[tuple[Any, Any]]:
    """Every row's value (a number, or text; None for an empty cell) and format."""
    texts = column.texts().to_pylist()
    if column.kind == "text":
        return [(text or None, None) for text in texts]
    if column.kind == "date":
        return _days(column.values, texts, formats)
    numbers = np.asarray(column.values, np.int64)
    known = numbers != MISSING
    if column.kind == "amount":
        digits = np.broadcast_to(np.asarray(2 if column.digits is None else column.digits, np.int64), len(numbers))
        forms = [formats.amount(places) for places in digits.tolist()]
        values = numbers / 10.0**digits
    else:
        scale = 10.0**DECIMAL_PLACES if column.kind == "decimal" else 1.0
        forms = [formats.decimal if column.kind == "decimal" else formats.count] * len(numbers)
        values = numbers / scale
    # a float of more than fifteen digits would show other digits than the number has
    exact = (np.abs(numbers) < _EXACT) | np.array([text is not None and len(text.replace(".", "").strip("-0")) <= 15 for text in texts])
    return [(value if good else text if there else None, form) for value, good, text, there, form in
            zip(values.tolist(), (exact & known).tolist(), texts, known.tolist(), forms, strict=True)]  # fmt: skip


def _days(values: Any, texts: list[str | None], formats: _Formats) -> Iterable[tuple[Any, Any]]:
    """Days as the numbers that spreadsheets count from the end of 1899; days before 1900 March are text, for there calendars differ."""
    days = np.asarray(values, "datetime64[D]")
    serial = (days - _DAY_ZERO).astype(np.int64)
    counted = ~np.isnat(days) & (serial > 60)
    return [(number if good else text, formats.date) for number, good, text in
            zip(serial.tolist(), counted.tolist(), texts, strict=True)]  # fmt: skip
