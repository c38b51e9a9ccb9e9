"""Brokers confirm in their own words: headings, styles and sides of their own. Read here into one table of our facts.

A layout, where there is one, is followed to the letter; else headings, styles and meanings are found out from the file, and what
the file does not prove is a question for the user (one clear sentence, the whole file unread), never a guess.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

from reconciler.intake import cells, layouts
from reconciler.intake.layouts import Layout
from reconciler.intake.own import BAD_SIDE, BAD_STATUS, losing
from reconciler.intake.reading import Raw, load, unreadable
from reconciler.intake.sheet import Sheet
from reconciler.money import MISSING, known_currency, minor_digits
from reconciler.records import CONFIRMATIONS, STATUSES, Table, Words, concat

NUMBERS = ("face", "price", "accrued", "principal", "fees", "settlement_amount", "yield")
DATES = ("trade_date", "settlement_date")


@dataclass(frozen=True)
class Known:
    """What the rest of the morning knows, to hold a broker's file against."""

    brokers: tuple[str, ...]
    tickets: Table
    bonds: Table
    equivalents: dict[str, str]


@dataclass(frozen=True)
class Style:
    """How a file was read: for the page of files and for the layout dialog."""

    columns: dict[str, int]
    decimal: str
    order: str
    layout: Layout
    broker: str


def read(path: Path, name: str, known: Known, shelf: Sequence[Layout]) -> tuple[Table, Sheet, Style, dict[str, Any]]:
    """One confirmations file; raises Unreadable with the question to settle when its meaning is not certain."""
    layout = next((layout for layout in shelf if layout.matches(path.name)), None)
    given = layout or Layout()
    raw = load(
        path, name, encoding=given.encoding, delimiter=given.delimiter, skip_rows=given.skip_rows,
        is_header=_header_test(given), is_footer=lambda row: layouts.is_footer(row, given.footer),
    )  # fmt: skip
    sheet = Sheet(raw)
    sheet.set_aside(_no_trades(raw, given.footer))
    broker = given.broker or layouts.broker_of(path.name, known.brokers)
    columns = _columns(sheet, given, known)
    if not broker and "broker" not in columns:
        reason = "cannot be given to a broker: no broker of the tickets has a name that makes up the file's; rename it or add a layout."
        raise unreadable(name, reason, "unknown-broker")
    style = _style(sheet, columns, given, broker)
    table = _typed(sheet, style, known)
    extras = {h: raw.columns[i] for i, h in enumerate(raw.headings) if h and i not in style.columns.values()}
    return table, sheet, style, extras


def _no_trades(raw: Raw, footer: str | None) -> np.ndarray:
    """Rows that are no trades wherever they stand: blank ones, headings again, and what the layout's footer says."""
    if not len(raw):
        return np.zeros(0, np.int64)
    blank, again = np.ones(len(raw), np.bool_), np.ones(len(raw), np.bool_)
    for column, heading in zip(raw.columns, raw.headings, strict=True):
        if not (blank.any() or again.any()):
            break
        text = cells.trimmed(column)
        blank &= pc.equal(text, "").to_numpy(zero_copy_only=False)
        again &= pc.equal(text, heading).to_numpy(zero_copy_only=False)
    mask = blank | again
    if footer:
        mask |= pc.match_substring_regex(cells.trimmed(raw.columns[0]), footer).to_numpy(zero_copy_only=False)
    return np.flatnonzero(mask)


def _header_test(layout: Layout) -> Any:
    wanted = {layouts.plain(theirs) for theirs in layout.columns.values()}
    if not wanted:
        return layouts.is_header
    return lambda row: len(wanted & {layouts.plain(cell) for cell in row}) >= min(4, len(wanted)) or layouts.is_header(row)


def _columns(sheet: Sheet, layout: Layout, known: Known) -> dict[str, int]:
    """Our facts -> columns, by layout, then by headings, then by what the rows prove."""
    raw = sheet.raw
    found, problems = layouts.assign(layout, raw.headings, raw.file)
    if problems:
        raise unreadable(raw.file, problems[0].reason, "missing-column", raw.header_line, problems[0].column)
    taken = set(found.values())
    open_facts: dict[str, list[int]] = {}
    for fact, places in layouts.candidates(raw.headings).items():
        if fact in found:
            continue
        sure = [p for p, s in places if s and p not in taken]
        maybe = [p for p, s in places if not s and p not in taken]
        if len(sure) == 1:
            found[fact] = sure[0]
        elif sure or maybe:
            open_facts[fact] = sure or maybe
    taken = set(found.values())
    open_facts = {fact: [p for p in places if p not in taken] for fact, places in open_facts.items()}
    _references(sheet, found, open_facts, known)
    _money(sheet, found, {f: p for f, p in open_facts.items() if p and f not in found}, layout)
    missing = [fact for fact in layouts.ESSENTIAL if fact not in found]
    if missing:
        words = ", ".join(fact.replace("_", " ") for fact in missing)
        reason = f"has no column that is known to be the {words}; settle its layout in the window or add a layout file."
        raise unreadable(raw.file, reason, "missing-column", raw.header_line)
    return found


def _references(sheet: Sheet, found: dict[str, int], open_facts: dict[str, list[int]], known: Known) -> None:
    """Reference columns by whose references their values are."""
    ours, theirs = known.tickets["ticket"].values, known.tickets["broker_reference"].values

    def share(place: int, words: pa.Array) -> float:
        texts = sheet.text(place).values
        return float(pc.mean(pc.is_in(texts, value_set=words)).as_py() or 0.0) if len(texts) else 0.0

    for fact, words in (("desk_reference", ours), ("broker_reference", theirs)):
        places = open_facts.pop(fact, [])
        if fact in found or not places:
            continue
        best = sorted(places, key=lambda p: (-share(p, words), p))
        if len(best) == 1 or share(best[0], words) > share(best[1], words):
            found[fact] = best[0]
    # a lone reference column may hold our ticket numbers
    if "broker_reference" in found and "desk_reference" not in found and share(found["broker_reference"], ours) > 0.5:
        found["desk_reference"] = found.pop("broker_reference")


def _money(sheet: Sheet, found: dict[str, int], open_facts: dict[str, list[int]], layout: Layout) -> None:
    """Money columns that headings leave open, settled by face x price / 100 + accrued = amount on most rows."""
    for fact in (*DATES, "bond", "side", "currency", "account", "price", "status", "accrued", "fees", "principal", "yield", "accrued_days"):
        places = [p for p in open_facts.get(fact, []) if p not in found.values()]
        if fact in found or not places:
            continue
        if len(places) == 1 or all(sheet.raw.columns[p].equals(sheet.raw.columns[places[0]]) for p in places):
            found[fact] = places[0]
        else:
            _ask_which(sheet, fact, places)
    for fact in ("face", "settlement_amount"):
        places = [p for p in open_facts.get(fact, []) if p not in found.values()]
        if fact in found or not places:
            continue
        if fact == "face" and len(places) == 1 and "settlement_amount" in found:
            found[fact] = places[0]
            continue
        fitting = [p for p in places if _fits(sheet, {**found, fact: p}, layout)]
        if len(fitting) == 1:
            found[fact] = fitting[0]
        elif len(places) > 1:
            _ask_which(sheet, fact, places)
        elif fact == "settlement_amount":
            found[fact] = places[0]


def _ask_which(sheet: Sheet, fact: str, places: Sequence[int]) -> None:
    """Refuses a file in which several columns could be one fact."""
    words = " and ".join(f"'{sheet.raw.headings[p]}'" for p in places)
    reason = f"could be the {fact.replace('_', ' ')} in more than one column ({words}); say which in the window or in a layout file."
    raise unreadable(sheet.raw.file, reason, "ambiguous-column", sheet.raw.header_line)


def _floats(sheet: Sheet, place: int, mark: str, price: bool = False) -> np.ndarray:
    reader = cells.prices if price else lambda c, m: cells.numbers(c, 6, m)
    values = reader(sheet.column(place), mark).values
    return np.where(values == MISSING, np.nan, values / (1e12 if price else 1e6))


def _fits(sheet: Sheet, found: dict[str, int], layout: Layout) -> bool:
    if not {"face", "price", "settlement_amount"} <= set(found):
        return False
    mark = layout.decimal or _decimal(sheet, found)
    face = _floats(sheet, found["face"], mark) * layout.scale.get("face", layouts.unit(sheet.raw.headings[found["face"]]))
    price = _floats(sheet, found["price"], mark, price=True)
    amount = np.abs(_floats(sheet, found["settlement_amount"], mark))
    accrued = _floats(sheet, found["accrued"], mark) if "accrued" in found else np.zeros(len(face))
    with np.errstate(invalid="ignore"):
        near = np.abs(face * price / 100 + np.nan_to_num(accrued) - amount) <= np.maximum(2.0, 0.002 * amount)
    told = ~np.isnan(face * price * amount)
    return bool(told.any()) and near[told].mean() > 0.6


def _decimal(sheet: Sheet, columns: dict[str, int]) -> str:
    """The file's decimal mark, from all its figures together."""
    proven, undecided = cells.marks((fact, sheet.column(columns[fact])) for fact in NUMBERS if fact in columns)
    if proven and not cells.settled(proven):
        reason = "writes decimals with a point in some figures and with a comma in others; name the decimal mark in a layout file."
        raise unreadable(sheet.raw.file, reason, "ambiguous-decimal", sheet.raw.header_line)
    if undecided and not proven:
        heading = sheet.raw.headings[columns[undecided[0]]]
        reason = f"leaves it open whether 1.234 is one thousand or one and a bit (column {heading}); name the decimal mark in a layout file."
        raise unreadable(sheet.raw.file, reason, "ambiguous-decimal", sheet.raw.header_line)
    return cells.settled(proven) or "."


def _order(sheet: Sheet, columns: dict[str, int]) -> str:
    """Whether slashed dates have the day or the month first."""
    texts = {fact: sheet.text(columns[fact]).values.to_pylist() for fact in DATES if fact in columns}
    every = [text for values in texts.values() for text in values]
    if not cells.has_slashed(every):
        return ""
    order = cells.settled(cells.slashed(every))
    if order:
        return order
    reason = "has dates in which day and month cannot be told apart; name the date style in a layout file, such as date = \"%d/%m/%Y\"."
    raise unreadable(sheet.raw.file, reason, "ambiguous-dates", sheet.raw.header_line, next(iter(every), ""))


def _style(sheet: Sheet, columns: dict[str, int], layout: Layout, broker: str) -> Style:
    decimal = layout.decimal or _decimal(sheet, columns)
    order = "" if layout.date else _order(sheet, columns)
    scale = dict(layout.scale)
    for fact, place in columns.items():
        if fact in NUMBERS and fact not in scale and layouts.unit(sheet.raw.headings[place]) != 1:
            scale[fact] = layouts.unit(sheet.raw.headings[place])
    return Style(columns, decimal, order, replace(layout, scale=scale), broker)


def _replaced(sheet: Sheet, style: Style, fact: str) -> Words:
    """A text column with the layout's own words turned into ours."""
    words = sheet.text(style.columns.get(fact))
    table = style.layout.values.get(fact)
    if not table:
        return words
    texts = [table.get(text, text) for text in words.values.to_pylist()]
    return Words.of([texts[code] if code >= 0 else "" for code in words.codes.tolist()])


def _typed(sheet: Sheet, style: Style, known: Known) -> Table:
    place, layout = style.columns.get, style.layout
    bond = _bonds(sheet, style, known)
    currency = _currencies(sheet, style, bond, known)
    digits = np.append(minor_digits(currency.values.to_pylist()), 2)[currency.codes]
    length = len(sheet.raw)

    def amount(fact: str) -> np.ndarray:
        if fact not in style.columns:
            return np.full(length, MISSING)
        found = cells.amounts(sheet.column(place(fact)), digits, style.decimal, layout.scale.get(fact, 1))
        return sheet.take(found, place(fact), fact, "bad-amount")

    def date(fact: str) -> np.ndarray:
        if fact not in style.columns:
            return np.full(length, cells.NAT)
        return sheet.take(cells.dates(sheet.column(place(fact)), style.order, layout.date or ""), place(fact), fact, "bad-date")

    def number(fact: str, reader: Any, code: str) -> np.ndarray:
        if fact not in style.columns:
            return np.full(length, MISSING)
        return sheet.take(reader(sheet.column(place(fact))), place(fact), fact, code)

    side = cells.coded(_replaced(sheet, style, "side").to_arrow().fill_null(""), cells.SIDE_WORDS, 0, BAD_SIDE)
    status = cells.coded(_replaced(sheet, style, "status").to_arrow().fill_null(""), cells.STATUS_WORDS, 0, BAD_STATUS)
    settlement, face = amount("settlement_amount"), amount("face")
    columns: dict[str, Any] = {
        "broker": Words.constant(style.broker, length) if style.broker else sheet.text(place("broker")),
        "broker_reference": sheet.text(place("broker_reference")), "desk_reference": sheet.text(place("desk_reference")),
        "trade_date": date("trade_date"), "settlement_date": date("settlement_date"), "bond": bond,
        "side": sheet.take(side, place("side"), "side", "bad-side") * (-1 if layout.side_told_by == "broker" else 1),
        "face_minor": face, "price_e12": number("price", lambda c: cells.prices(c, style.decimal), "bad-price"),
        "price_text": sheet.text(place("price")), "accrued_days": number("accrued_days", cells.wholes, "bad-number"),
        "accrued_minor": amount("accrued"), "principal_minor": amount("principal"), "fees_minor": amount("fees"),
        "settlement_minor": settlement, "currency": currency, "account": sheet.text(place("account")),
        "yield_e12": number("yield", lambda c: cells.numbers(c, 12, style.decimal), "bad-number"),
        "yield_text": sheet.text(place("yield")), "status": sheet.take(status, place("status"), "status", "bad-status"),
    }  # fmt: skip
    columns["side"] = columns["side"].astype(np.int8)
    sheet.amount = np.where(settlement == MISSING, 0, settlement)
    _check(sheet, style, columns)
    whole = Table({**columns, **sheet.places()})
    return Table({name: whole[name] for name in CONFIRMATIONS}).take(sheet.used())


def _check(sheet: Sheet, style: Style, columns: dict[str, Any]) -> None:
    place = style.columns.get
    for fact, values in (("face", columns["face_minor"]), ("settlement_amount", columns["settlement_minor"])):
        if fact == "face":
            bad = (values != MISSING) & (values < 0)
            sheet.reject(bad, place(fact), fact, "is negative; the side says buy or sell, the face is positive.", "negative-face")
    for fact, known in (
        ("bond", columns["bond"].known()), ("side", columns["side"] != 0), ("face", columns["face_minor"] != MISSING),
    ):  # fmt: skip
        blank = ~known & (sheet.fate == 0)
        sheet.reject(blank, place(fact), fact, "is blank; every row needs it.", "blank-cell")
    # some brokers sign amounts by the direction of the cash; the side already says it
    columns["settlement_minor"] = np.where(
        columns["settlement_minor"] == MISSING, MISSING, np.abs(columns["settlement_minor"])
    )


def _bonds(sheet: Sheet, style: Style, known: Known) -> Words:
    words = sheet.text(style.columns.get("bond"))
    texts = words.values.to_pylist()
    own = set(known.bonds["bond"].values.to_pylist())
    better = [text if text in own else known.equivalents.get(text, text) for text in texts]
    if better == texts:
        return words
    return Words.of([better[code] if code >= 0 else "" for code in words.codes.tolist()])


def _currencies(sheet: Sheet, style: Style, bond: Words, known: Known) -> Words:
    told = _replaced(sheet, style, "currency")
    unknown = np.array([not known_currency(text) for text in told.values.to_pylist()] + [False])[told.codes]
    sheet.reject(unknown, style.columns.get("currency"), "currency", "is not a currency of ISO 4217; correct the code.", "bad-currency")
    row_of = np.full(len(known.bonds["bond"].values) + 1, -1, np.int64)
    row_of[known.bonds["bond"].codes] = np.arange(len(known.bonds))
    row_of[-1] = -1
    of_bond = known.bonds["currency"].take(row_of[bond.codes_in(known.bonds["bond"].values)])
    sheet.currency = told.where(told.known(), of_bond)
    return sheet.currency


def in_force(tables: Sequence[Table], sheets: Sequence[Sheet]) -> Table:
    """The confirmations of all files that stand: cancelled beats amended beats new, whichever file says so.

    What is cancelled, or beaten by another row of the same broker and reference, is set aside in its sheet.
    """
    whole = concat(tables)
    gone = np.zeros(len(whole), np.bool_)
    gone[losing(whole.columns, np.arange(len(whole)), ("broker", "broker_reference"), keep_equal=True)] = True
    gone |= whole["status"] == STATUSES["cancelled"]
    if not gone.any():
        return whole
    first = 0
    for part, sheet in zip(tables, sheets, strict=True):
        sheet.set_aside(sheet.used()[gone[first : first + len(part)]])
        first += len(part)
    return whole.take(~gone)
