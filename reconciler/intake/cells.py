"""A cell holds a number, a date or a word in somebody's own style; here it becomes an exact typed value or a named fault.

Amounts become whole minor units and prices decimal numbers times 10^12, exactly: a figure with more decimals than its currency has is
a fault, not something to round in silence. Columns in plain style (digits, one decimal point) are converted whole by arrow's decimals;
whatever else occurs is looked at once per distinct text. Styles are settled per file from evidence: three digits behind a single
separator prove nothing, 31/12 proves that the day comes first, 03/04 proves nothing and is asked about, never guessed.
"""

from __future__ import annotations

import re
import unicodedata
from collections import Counter
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from decimal import Decimal, InvalidOperation

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.records import MISSING, Words

NAT = np.datetime64("NaT", "D")
_GAPS = " \u00a0\u202f\u2009'\u2019"
_SPACES = str.maketrans(dict.fromkeys(_GAPS, ""))
_SPACED = re.compile(rf"-?[1-9]\d{{0,2}}([{_GAPS}]\d{{3}})+([.,]\d*)?")
_PLAIN = r"^-?\d{1,13}(\.\d{1,4})?$"


@dataclass(frozen=True)
class Cells:
    """A typed column and the rows that could not be read: `values` MISSING/NaT/0 there and where blank."""

    values: np.ndarray
    bad: np.ndarray
    reason: str = ""


def trimmed(column: pa.Array) -> pa.Array:
    """The texts without spaces around them."""
    return pc.utf8_trim_whitespace(column)


# --- numbers ----------------------------------------------------------------------------------------------------------------


_DIGITS_AND_MARKS = re.compile(r"[0-9.,]*[0-9][0-9.,]*")


def tidy(text: str) -> str:
    """A number's text in plain characters: width folded, one kind of minus, no inner spaces or apostrophes, sign in front."""
    plain = unicodedata.normalize("NFKC", text.replace("\u2009", " ").replace("\u202f", " ").replace("\u00a0", " "))
    plain = plain.strip().replace("\u2212", "-")
    if plain.startswith("(") and plain.endswith(")"):
        plain = "-" + plain[1:-1].strip()
    if plain.endswith("-"):
        plain = "-" + plain[:-1].strip()
    plain = plain.removeprefix("+").strip()
    if plain.startswith("- "):
        plain = "-" + plain[2:].strip()
    # gaps group thousands or mean nothing that is understood: then they stay, and the text is no number
    return plain.translate(_SPACES) if _SPACED.fullmatch(plain) else plain


_GROUPED = {
    # every figure in one style, and figures that prove its mark: both marks, two group marks, or no three digits behind the only one
    ".": (r"^-?(\d{1,3}(,\d{3})+|\d*)(\.\d+)?$", r",.*\.|,.*,|\.(\d{1,2}|\d{4,})$|^-?(0?|\d{4,})\.\d{3}$"),
    ",": (r"^-?(\d{1,3}(\.\d{3})+|\d*)(,\d+)?$", r"\..*,|\..*\.|,(\d{1,2}|\d{4,})$|^-?(0?|\d{4,}),\d{3}$"),
}


def mark_evidence(column: pa.Array) -> tuple[Counter[str], bool]:
    """How many texts prove each decimal mark ("." or ","), and whether some text leaves it open.

    Columns in one plain style are looked at whole; only others are looked at text by text.
    """
    for mark, (style, proof) in _GROUPED.items():
        if pc.all(pc.match_substring_regex(column, style)).as_py() is not False:
            proven = pc.sum(pc.match_substring_regex(column, proof)).as_py()
            if proven:
                return Counter({mark: proven}), False
            return Counter(), bool(pc.any(pc.match_substring_regex(column, "[.,]")).as_py())
    return _mark_evidence(pc.unique(column).to_pylist())


def _mark_evidence(texts: Sequence[str]) -> tuple[Counter[str], bool]:
    """The same, one text after the other.

    A text that is no number in either style (1,000O) proves nothing: it costs its own row, not the file.
    """
    proven: Counter[str] = Counter()
    undecided = False
    for text in texts:
        plain = tidy(text).lstrip("-")
        if not _DIGITS_AND_MARKS.fullmatch(plain):
            continue
        points, commas = plain.count("."), plain.count(",")
        if points and commas:
            proven["." if plain.rfind(".") > plain.rfind(",") else ","] += 1
        elif points > 1 or commas > 1:
            proven["," if points > 1 else "."] += 1
        elif points or commas:
            mark = "." if points else ","
            head, tail = plain.split(mark)
            if len(tail) != 3 or len(head) > 3 or head in ("", "0"):
                proven[mark] += 1
            else:
                undecided = True
    return proven, undecided


def _plain_number(text: str, mark: str) -> str:
    plain = tidy(text)
    other = "," if mark == "." else "."
    if other in plain:
        whole = plain.split(mark)[0].lstrip("-")
        groups = whole.split(other)
        if mark in plain and other in plain.split(mark, 1)[1]:
            raise InvalidOperation
        if len(groups) > 1 and (not 1 <= len(groups[0]) <= 3 or any(len(group) not in (2, 3) for group in groups[1:])):
            raise InvalidOperation
        if len(groups) > 1 and (len(groups[-1]) != 3 or groups[0].startswith("0")):
            raise InvalidOperation
        plain = plain.replace(other, "")
    return plain.replace(mark, ".")


def decimal_of(text: str, mark: str = ".") -> Decimal:
    """The exact number of a text; InvalidOperation when it is none."""
    plain = _plain_number(text, mark)
    if not re.fullmatch(r"-?(\d+\.?\d*|\.\d+)", plain):
        raise InvalidOperation
    return Decimal(plain)


def _low_words(decimals: pa.Array) -> np.ndarray:
    """The low 64 bits of each 128-bit decimal: the unscaled number wherever it fits int64."""
    words = np.frombuffer(decimals.buffers()[1], np.int64)
    return words[2 * decimals.offset : 2 * (decimals.offset + len(decimals)) : 2]


def _scaled(column: pa.Array, places: int, pattern: str) -> tuple[np.ndarray, np.ndarray]:
    """Plain texts as whole numbers times 10^places, and where the text was plain."""
    plain = pc.match_substring_regex(column, pattern)
    text = column if pc.all(plain).as_py() else pc.if_else(plain, column, "0")
    decimals = pc.cast(text, pa.decimal128(38, places))
    return _low_words(decimals), plain.to_numpy(zero_copy_only=False)


def amounts(column: pa.Array, digits: np.ndarray, mark: str = ".", scale: int = 1) -> Cells:
    """Texts of major units as int64 minor units; `digits` per row are the currency's; `scale` multiplies (faces in thousands)."""
    column = trimmed(column)
    blank = pc.equal(column, "").to_numpy(zero_copy_only=False)
    bad = np.zeros(len(column), np.bool_)
    values, plain = _scaled(column, 4, _PLAIN)
    values, plain = values.copy(), plain & ~blank
    rest = np.flatnonzero(~plain & ~blank)
    if mark == ",":
        # 1.234 is plain to look at, but here the point groups thousands
        rest = np.flatnonzero(~blank)
        plain = np.zeros(len(column), np.bool_)
    if len(rest):
        _grouped(column.take(pa.array(rest)), rest, mark, values, plain)
    values *= scale
    step = 10 ** (4 - digits.astype(np.int64))
    left = values % step
    bad |= plain & (left != 0)
    values //= step
    odd = np.flatnonzero(~plain & ~blank)
    if len(odd):
        _odd_amounts(column, odd, digits, mark, scale, values, bad)
    values[blank | bad] = MISSING
    return Cells(values, bad, "is not an amount in the currency's units, or has more decimals than the currency; correct it.")


def _grouped(part: pa.Array, rows: np.ndarray, mark: str, values: np.ndarray, plain: np.ndarray) -> None:
    """Figures with grouped thousands (or a decimal comma), written plain and converted whole."""
    group = "," if mark == "." else "."
    escaped = {".": r"\.", ",": ","}
    shape = rf"^-?([1-9]\d{{0,2}}({escaped[group]}\d{{3}})+|\d{{1,13}})({escaped[mark]}\d{{1,4}})?$"
    shaped = pc.match_substring_regex(part, shape)
    written = pc.replace_substring(pc.replace_substring(part, group, ""), mark, ".")
    found, good = _scaled(pc.if_else(shaped, written, "x"), 4, _PLAIN)
    good = good & shaped.to_numpy(zero_copy_only=False)
    values[rows[good]] = found[good]
    plain[rows[good]] = True


def _odd_amounts(
    column: pa.Array, odd: np.ndarray, digits: np.ndarray, mark: str, scale: int, values: np.ndarray, bad: np.ndarray
) -> None:
    words = Words.from_arrow(column.take(pa.array(odd)))
    exact: list[Decimal | None] = []
    for text in words.values.to_pylist():
        try:
            exact.append(decimal_of(text, mark) * scale)
        except InvalidOperation:
            exact.append(None)
    for place in sorted(set(digits[odd].tolist())):
        minor = np.array([_whole(number, place) for number in exact] + [MISSING], np.int64)
        rows = odd[digits[odd] == place]
        values[rows] = minor[words.codes[digits[odd] == place]]
        bad[rows] = values[rows] == MISSING


def _whole(number: Decimal | None, places: int) -> int:
    if number is None:
        return MISSING
    scaled = number.scaleb(places)
    return int(scaled) if scaled == scaled.to_integral_value() and abs(scaled) < 2**62 else MISSING


def numbers(column: pa.Array, places: int, mark: str = ".", read: Callable[[str, str], Decimal] = decimal_of) -> Cells:
    """Texts as whole numbers times 10^places (rates, yields, factors, prices), once per distinct text."""
    words = Words.from_arrow(trimmed(column))
    exact: list[int] = []
    for text in words.values.to_pylist():
        try:
            exact.append(_whole(read(text, mark), places))
        except InvalidOperation:
            exact.append(MISSING)
    values = np.array([*exact, MISSING], np.int64)[words.codes]
    return Cells(values, (values == MISSING) & (words.codes >= 0), "is not a number; correct it.")


_TICKS = re.compile(r"^(\d{1,4})(?:-|'|:|\s)(\d{1,2})([0-7+])?(?:/32)?$")
_EIGHTHS = {"+": 4, None: 0}
_VULGAR = re.compile(r"^(\d{1,4})[\s-](\d{1,3})/(\d{1,3})$")


def price_of(text: str, mark: str = ".") -> Decimal:
    """A price: a decimal number, or whole points and 32nds (99-16, 99-16+, 99-162 in eighths), or a vulgar fraction (99 16/32).

    Cash market: the third digit is eighths of a 32nd (CME education page on price quoting).
    """
    text = re.sub(r"([¼½¾⅛⅜⅝⅞])", lambda sign: " " + unicodedata.normalize("NFKC", sign[1]), text)
    plain = re.sub(r"\s+", " ", text.replace("\u2019", "'").replace("\u00a0", " ").strip()).removesuffix("%").strip()
    plain = unicodedata.normalize("NFKC", plain).replace("\u2044", "/")
    found = _VULGAR.match(plain)
    if found:
        top, bottom = int(found[2]), int(found[3])
        if bottom == 0 or top >= bottom or (bottom & (bottom - 1)) != 0:
            raise InvalidOperation
        return Decimal(int(found[1])) + Decimal(top) / Decimal(bottom)
    found = _TICKS.match(plain)
    if found and ("'" in plain or "-" in plain or ":" in plain):
        ticks = int(found[2])
        if ticks > 31 or len(found[2]) != 2:
            raise InvalidOperation
        eighths = _EIGHTHS[found[3]] if found[3] in _EIGHTHS else int(found[3])
        return Decimal(int(found[1])) + Decimal(ticks) / 32 + Decimal(eighths) / 256
    return decimal_of(plain, mark)


def prices(column: pa.Array, mark: str = ".") -> Cells:
    """Prices times 10^12."""
    cells = numbers(column, 12, mark, price_of)
    return Cells(cells.values, cells.bad, "is not a price; write 99.50, 99-16, 99-16+ or 99 16/32.")


def wholes(column: pa.Array) -> Cells:
    """Whole numbers (days, payments a year); MISSING where blank."""
    cells = numbers(column, 0)
    return Cells(cells.values, cells.bad, "is not a whole number; correct it.")


# --- dates ------------------------------------------------------------------------------------------------------------------

_MONTHS = {m: i + 1 for i, m in enumerate("jan feb mar apr may jun jul aug sep oct nov dec".split())}
_DATE_SHAPES = (
    (re.compile(r"^(\d{4})-(\d{1,2})-(\d{1,2})(?:[T ]\d{2}:\d{2}.*)?$"), "ymd"),
    (re.compile(r"^(\d{4})(\d{2})(\d{2})$"), "ymd"),
    (re.compile(r"^(\d{4})/(\d{1,2})/(\d{1,2})$"), "ymd"),
    (re.compile(r"^(\d{1,2})\.(\d{1,2})\.(\d{4}|\d{2})$"), "dmy"),
    (re.compile(r"^(\d{1,2})[/-](\d{1,2})[/-](\d{4}|\d{2})$"), "slash"),
)
_NAMED = re.compile(r"^(\d{1,2})[-\s]?([A-Za-z]{3})[a-z]*[-\s]?(\d{4}|\d{2})$")


def _day(year: int, month: int, day: int) -> np.datetime64:
    year += (2000 if year < 70 else 1900) if year < 100 else 0
    return np.datetime64(f"{year:04d}-{month:02d}-{day:02d}", "D")


def slashed(texts: Sequence[str]) -> Counter[str]:
    """How many of the slashed dates prove each order ("dmy", "mdy"): those with one part above 12; with two they are no dates."""
    proven: Counter[str] = Counter()
    for text in texts:
        found = _DATE_SHAPES[4][0].match(text.strip())
        if found:
            first, second = int(found[1]) > 12, int(found[2]) > 12
            if first != second:
                proven["dmy" if first else "mdy"] += 1
    return proven


def marks(columns: Iterable[tuple[str, pa.Array]]) -> tuple[Counter[str], list[str]]:
    """Evidence for the decimal mark from all figures of a file together: proofs, and the facts whose columns leave it open.

    `columns` are (fact, texts); prices written in 32nds or fractions say nothing about decimals.
    """
    proven: Counter[str] = Counter()
    left_open = []
    for fact, column in columns:
        texts = trimmed(column)
        if fact == "price":
            texts = texts.filter(pc.invert(pc.match_substring_regex(texts, "[-/':+]")))
        found, undecided = mark_evidence(texts)
        proven += found
        if undecided:
            left_open.append(fact)
    return proven, left_open


def settled(proven: Counter[str]) -> str:
    """The style that the texts prove: the only one, or one that nine in ten of them prove; "" where they contradict each other.

    The few that are written otherwise are then faults of their own rows.
    """
    if not proven:
        return ""
    best, count = min(proven.items(), key=lambda item: (-item[1], item[0]))
    return best if count * 10 >= proven.total() * 9 else ""


def has_slashed(texts: Sequence[str]) -> bool:
    """Whether some text is a date with the order of day and month left open by its shape."""
    return any(_DATE_SHAPES[4][0].match(text.strip()) for text in texts)


def date_of(text: str, order: str = "", style: str = "") -> np.datetime64:
    """The date of a text; `order` settles slashed dates, `style` is a layout's own strptime style. NaT when it is none."""
    from datetime import datetime

    try:
        if style:
            return np.datetime64(datetime.strptime(text.strip(), style).date(), "D")
        for shape, kind in _DATE_SHAPES:
            found = shape.match(text.strip())
            if not found:
                continue
            a, b, c = (int(part) for part in found.groups())
            if kind == "ymd":
                return _day(a, b, c)
            if kind == "dmy" or order == "dmy":
                return _day(c, b, a)
            return _day(c, a, b) if order == "mdy" else NAT
        found = _NAMED.match(text.strip())
        if found and found[2].lower() in _MONTHS:
            return _day(int(found[3]), _MONTHS[found[2].lower()], int(found[1]))
    except ValueError:
        return NAT
    return NAT


def dates(column: pa.Array, order: str = "", style: str = "", iso: bool = False) -> Cells:
    """Dates once per distinct text; with `iso` only year-month-day is taken."""
    words = Words.from_arrow(trimmed(column))
    texts = words.values.to_pylist()
    if iso:
        style = "%Y-%m-%d"
    values = np.array([date_of(text, order, style) for text in texts] + [NAT], "datetime64[D]")[words.codes]
    reason = "is not a date written as year-month-day; correct it." if iso else "is not a date that can be read; correct it."
    return Cells(values, np.isnat(values) & (words.codes >= 0), reason)


# --- words ------------------------------------------------------------------------------------------------------------------

SIDE_WORDS = {
    "buy": 1, "b": 1, "bought": 1, "bot": 1, "purchase": 1, "purchased": 1, "kauf": 1, "achat": 1, "compra": 1, "acquisto": 1,
    "sell": -1, "s": -1, "sold": -1, "sld": -1, "sale": -1, "verkauf": -1, "vente": -1, "venta": -1, "vendita": -1,
}  # fmt: skip

STATUS_WORDS = {
    "": 0, "new": 0, "newm": 0, "original": 0, "amended": 1, "amend": 1, "amendment": 1, "corrected": 1, "correction": 1,
    "cancelled": 2, "canceled": 2, "cancel": 2, "canc": 2, "cancellation": 2,
}  # fmt: skip


def coded(column: pa.Array, words: dict[str, int], blank: int, reason: str) -> Cells:
    """Words as int8 codes; an unknown word is a fault."""
    texts = Words.from_arrow(trimmed(column))
    known = [words.get(text.strip().lower(), -128) for text in texts.values.to_pylist()]
    values = np.array([*known, blank], np.int8)[texts.codes]
    bad = values == -128
    return Cells(np.where(bad, 0, values).astype(np.int8), bad, reason)
