"""A list handed to people opens as they expect: numbers that add up, dates that sort, a head that stays in sight.

Cells are typed (amounts as numbers with the digits of their currency, dates as dates, everything else as text, so that no text is
ever run as a formula), the head is frozen with filters on, columns are as wide as what they hold. Written row by row, so that memory
does not grow with the list. A sheet holds 1,048,575 rows below its head; longer lists go on in further sheets. Numbers beyond 15
digits, which a spreadsheet would round, are written as text.
"""

from __future__ import annotations

import datetime
from collections.abc import Sequence
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
    for row in range(len(cells[0]) if cells else 0):
        for place, column in enumerate(cells):
            cell = column[row]
            if cell is None:
                continue
            value, form = cell
            if isinstance(value, str):
                sheet.write_string(at + row, place, value[:_TEXT_LIMIT])
            elif isinstance(value, datetime.date):
                sheet.write_datetime(at + row, place, value, form)
            else:
                sheet.write_number(at + row, place, value, form)


def _cells(column: Column, formats: _Formats) -> list[tuple[Any, Any] | None]:
    """Every row's value and format, None for an empty cell."""
    if column.kind == "text":
        return [(text, None) if text else None for text in column.texts().to_pylist()]
    if column.kind == "date":
        return [_day(day, formats) for day in np.asarray(column.values, "datetime64[D]").tolist()]
    numbers = np.asarray(column.values, np.int64).tolist()
    if column.kind == "amount":
        digits = np.broadcast_to(np.asarray(2 if column.digits is None else column.digits), len(numbers)).tolist()
    else:
        digits = [DECIMAL_PLACES if column.kind == "decimal" else 0] * len(numbers)
    plain = column.texts().to_pylist()
    out: list[tuple[Any, Any] | None] = []
    for number, places, text in zip(numbers, digits, plain, strict=True):
        if number == MISSING:
            out.append(None)
        elif len(text.replace(".", "").strip("-0")) > 15:
            out.append((text, None))
        elif column.kind == "amount":
            out.append((number / 10**places, formats.amount(places)))
        else:
            out.append((float(text) if places else number, formats.decimal if places else formats.count))
    return out


def _day(day: datetime.date | None, formats: _Formats) -> tuple[Any, Any] | None:
    if day is None:
        return None
    # the calendar of spreadsheets begins in 1900
    return (day, formats.date) if day.year >= 1900 else (day.isoformat(), None)
