"""A file arrives as bytes that somebody's program wrote; what is wanted are columns of text with exact line numbers.

Encoding, delimiter, title lines above the heading and totals below it are found here, never guessed past the evidence: text that is not
valid in the encoding is refused with the line of the first bad byte. Clean files go through pyarrow's parallel reader; files
with quoted line breaks, torn rows or blank lines in between go through the csv module row by row, so that every row keeps its line.
A row with too few or too many fields is kept aside as torn and reported, the rest arrives.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
import pyarrow as pa
import pyarrow.csv as pacsv

from reconciler.problems import Problem

LONGEST_LINE = 1_000_000
"""Bytes; no line of a broker's or bank's file comes near it."""

_BOMS = ((b"\xef\xbb\xbf", "utf-8-sig"), (b"\xff\xfe", "utf-16"), (b"\xfe\xff", "utf-16"))
_DELIMITERS = (",", ";", "\t", "|")


class Unreadable(Exception):
    """A file that cannot be read at all; carries the problem."""

    def __init__(self, problem: Problem) -> None:
        super().__init__(problem.sentence())
        self.problem = problem


@dataclass(frozen=True)
class Raw:
    """A file as columns of text: `columns[i]` belongs to `headings[i]`; `lines` is each row's line in the file (1 is the first)."""

    file: str
    headings: tuple[str, ...]
    columns: tuple[pa.Array, ...]
    lines: np.ndarray
    header_line: int
    encoding: str
    delimiter: str
    torn: tuple[tuple[int, int], ...] = ()
    footer: tuple[tuple[int, tuple[str, ...]], ...] = ()
    titles: tuple[str, ...] = field(default=())

    def __len__(self) -> int:
        return len(self.lines)


def unreadable(file: str, reason: str, code: str, line: int = 0, value: str = "") -> Unreadable:
    """The exception for a file that cannot be used, with its sentence."""
    return Unreadable(Problem(file, line, "", value, reason, code))


def content(path: Path, name: str) -> bytes:
    """The file's bytes; a file that is locked or has vanished becomes a sentence."""
    try:
        return path.read_bytes()
    except FileNotFoundError:
        raise unreadable(name, "is no longer there; ask for it to be sent again.", "file-vanished") from None
    except OSError as error:
        reason = f"cannot be opened ({error.strerror or 'no access'}); close it elsewhere or copy it again."
        raise unreadable(name, reason, "file-locked") from None


def decode(data: bytes, name: str, encoding: str | None = None) -> tuple[str, str]:
    """The text and the encoding it was in (told, or by byte order mark, UTF-8, else cp1252); line ends made plain."""
    if not data.strip(b" \t\r\n\x1a\xef\xbb\xbf"):
        raise unreadable(name, "is empty; ask for the file to be sent again.", "empty-file")
    for mark, code in _BOMS:
        if encoding is None and data.startswith(mark):
            encoding = code
    if encoding is None and b"\x00" in data[:100_000]:
        raise unreadable(name, "is not a text file; export it as CSV.", "binary-file")
    tried = [encoding] if encoding else ["utf-8", "cp1252"]
    failure: UnicodeDecodeError | None = None
    for code in tried:
        try:
            text = data.decode(code)
        except UnicodeDecodeError as error:
            failure = failure or error
            continue
        except LookupError:
            raise unreadable(name, f"names an encoding that is not known: {code}; correct the layout.", "bad-encoding") from None
        if code == "cp1252" and encoding is None and _looks_mixed(data):
            break
        return text.removeprefix("\ufeff").rstrip("\x1a"), "utf-8" if code == "utf-8-sig" else code
    assert failure is not None
    line = data.count(b"\n", 0, failure.start) + 1
    reason = "mixes encodings: a byte here is not valid beside the rest; ask for the file in UTF-8, or name its encoding in a layout."
    raise unreadable(name, reason, "mixed-encodings", line, f"byte {data[failure.start]:#04x}")


def _looks_mixed(data: bytes) -> bool:
    """Whether bytes above 127 form UTF-8 sequences in one place and stand alone in another."""
    good = bad = 0
    for piece in data.split(b"\n"):
        if piece.isascii():
            continue
        try:
            piece.decode("utf-8")
            good += 1
        except UnicodeDecodeError:
            bad += 1
        if good and bad:
            return True
    return False


def check_lines(data: bytes, name: str) -> None:
    """Refuses a file whose first lines are longer than any line can be."""
    if data[:2] in (b"\xff\xfe", b"\xfe\xff"):
        return
    start = 0
    for number in range(1, 21):
        end = data.find(b"\n", start, start + LONGEST_LINE)
        if end < 0:
            if len(data) - start > LONGEST_LINE:
                raise unreadable(name, f"has a line of more than {LONGEST_LINE:,} bytes; it is no table of rows.", "long-line", number)
            return
        start = end + 1


def delimiter_of(lines: Sequence[str]) -> str:
    """The delimiter most of the first lines agree on."""
    best, most = ",", 0
    for mark in _DELIMITERS:
        counts = [len(next(csv.reader([line], delimiter=mark), [])) for line in lines if line.strip()]
        wide = [count for count in counts if count > 1]
        agreed = max((wide.count(count) * count for count in set(wide)), default=0)
        if agreed > most:
            best, most = mark, agreed
    return best


def load(
    path: Path,
    name: str,
    *,
    encoding: str | None = None,
    delimiter: str | None = None,
    skip_rows: int | None = None,
    is_header: Callable[[Sequence[str]], bool] = lambda cells: True,
    is_footer: Callable[[Sequence[str]], bool] = lambda cells: False,
    settle: str = "settle its layout in the window or add a layout file",
) -> Raw:
    """Reads one file; raises Unreadable with a sentence when nothing can be had from it."""
    data = content(path, name)
    check_lines(data, name)
    text, found = decode(data, name, encoding)
    # lines end at line feeds alone: a form feed inside a title is no new line to anybody's editor
    head = [line.removesuffix("\r") for line in text[: 64 * LONGEST_LINE // 100].split("\n")[:60]]
    if head and head[0].lower().startswith("sep=") and len(head[0]) == 5:
        delimiter, skip_rows = head[0][4], (skip_rows or 0) + 1
    mark = delimiter or delimiter_of(head)
    header = _header_line(head, mark, skip_rows, is_header, name, settle)
    headings = tuple(cell.strip() for cell in next(csv.reader([head[header]], delimiter=mark)))
    raw = None
    if found == "utf-8":
        raw = _fast(data, text, name, mark, header, headings, is_footer)
    if raw is None:
        raw = _careful(text, name, mark, header, headings, is_footer, found)
    if not len(raw) and not raw.torn:
        raise unreadable(name, "has headings but no rows; ask whether the day had none.", "header-only", header + 1)
    return raw


def _header_line(
    head: Sequence[str], mark: str, skip: int | None, is_header: Callable[[Sequence[str]], bool], name: str, settle: str
) -> int:
    if skip is not None:
        if skip >= len(head):
            raise unreadable(name, "is shorter than the layout's skip_rows; correct the layout.", "no-header")
        return skip
    for number, line in enumerate(head):
        cells = next(csv.reader([line], delimiter=mark), [])
        if is_header(cells):
            return number
    raise unreadable(name, f"has no line of headings that is known; {settle}.", "no-header")


def _fast(
    data: bytes, text: str, name: str, mark: str, header: int, headings: tuple[str, ...], is_footer: Callable[[Sequence[str]], bool]
) -> Raw | None:
    """The parallel reader, for files in which a row is a line; None where that does not hold."""
    if b'"' in data and text.count('"') > 200_000:
        quoted = True
    else:
        quoted = '"' in text
    newline = text.count("\n")
    if "\r" in text and text.count("\r\n") != text.count("\r"):
        return None
    torn: list[object] = []

    def keep(row: object) -> str:
        torn.append(row)
        return "skip"

    try:
        table = pacsv.read_csv(
            pa.BufferReader(data),
            read_options=pacsv.ReadOptions(
                column_names=[str(i) for i in range(len(headings))], skip_rows=header + 1, block_size=8 << 20
            ),
            parse_options=pacsv.ParseOptions(
                delimiter=mark, quote_char='"' if quoted else False, invalid_row_handler=keep, newlines_in_values=False
            ),
            convert_options=pacsv.ConvertOptions(
                column_types={str(i): pa.string() for i in range(len(headings))}, strings_can_be_null=False
            ),
        )
    except pa.ArrowInvalid:
        return None
    rows = table.num_rows
    expected = newline - header - (1 if text.endswith("\n") else 0)
    if torn or rows != expected:
        return None
    columns = tuple(column.combine_chunks() if column.num_chunks != 1 else column.chunk(0) for column in table.columns)
    end, footer = rows, []
    while end > 0 and rows - end < 50:
        cells = [column[end - 1].as_py() for column in columns]
        if not is_footer(cells):
            break
        end -= 1
        footer.append((header + 2 + end, tuple(cells)))
    if end < rows:
        columns = tuple(column.slice(0, end) for column in columns)
    lines = np.arange(header + 2, header + 2 + end, dtype=np.int32)
    return Raw(name, headings, columns, lines, header + 1, "utf-8", mark, (), tuple(reversed(footer)))


def _careful(
    text: str, name: str, mark: str, header: int, headings: tuple[str, ...], is_footer: Callable[[Sequence[str]], bool], encoding: str
) -> Raw:
    """Row by row with exact lines."""
    csv.field_size_limit(LONGEST_LINE)
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=mark)
    rows: list[list[str]] = []
    lines: list[int] = []
    torn: list[tuple[int, int]] = []
    last = 0
    try:
        for cells in reader:
            first, last = last + 1, reader.line_num
            if first <= header + 1 or not any(cell.strip() for cell in cells):
                continue
            rows.append(cells)
            lines.append(first)
    except csv.Error as error:
        raise unreadable(name, f"cannot be split into columns ({error}).", "bad-csv", reader.line_num) from None
    footer: list[tuple[int, tuple[str, ...]]] = []
    while rows and is_footer(rows[-1]):
        footer.append((lines.pop(), tuple(rows.pop())))
    width = len(headings)
    good: list[list[str]] = []
    good_lines: list[int] = []
    for cells, line in zip(rows, lines, strict=True):
        if len(cells) > width and not any(cell.strip() for cell in cells[width:]):
            cells = cells[:width]
        if len(cells) != width:
            torn.append((line, len(cells)))
            continue
        good.append(cells)
        good_lines.append(line)
    columns = tuple(pa.array([row[i] for row in good], type=pa.string()) for i in range(width))
    return Raw(
        name, headings, columns, np.array(good_lines, np.int32), header + 1, encoding, mark, tuple(torn), tuple(reversed(footer))
    )
