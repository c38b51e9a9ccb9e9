"""A made-up morning for the window's tests: the tables of records.py filled by hand, and a large one for the speed tests.

Every name and figure is invented. The small morning holds one payment of every look a row can have; the large one repeats plain
rows a million times with distinct tickets, references and entries, which is the worst case for searching.
"""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from types import SimpleNamespace
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler import records
from reconciler.expected.terms import resolve_terms
from reconciler.problems import Problem
from reconciler.records import MISSING, Words

DATE = datetime.date(2026, 3, 31)


@dataclass(frozen=True)
class FabricatedDay:
    """The attributes of procedures.morning.Day that the window reads."""

    date: datetime.date
    since: datetime.date
    source: Any
    terms: Any
    items: records.Table
    allocations: records.Table
    breaks: records.Table
    summary: Any = None


BONDS = [
    ("ZZ0001000012", "Marlow Gas 4.625 2031", "USD", "fixed", 4_625_000_000, 1, "Act/Act ICMA", "2031-09-15"),
    ("ZZ0001000020", "Pellerin Water 3.20 2029", "EUR", "fixed", 3_200_000_000, 2, "30E/360", "2029-09-30"),
    ("ZZ0001000038", "Osk Republic 2.875 2044", "USD", "fixed", 2_875_000_000, 2, "30/360 US", "2044-05-15"),
    ("ZZ0001000046", "Ferrant Zero 2056", "USD", "zero", MISSING, 0, "30/360", "2056-02-15"),
    ("ZZ0001000053", "Isle of Carrow 1.50 2033", "GBP", "fixed", 1_500_000_000, 2, "Act/Act ICMA", "2033-03-27"),
    ("ZZ0001000061", "Tennick Bill Jun 2026", "USD", "zero", MISSING, 0, "Act/360", "2026-06-18"),
    ("ZZ0001000079", "Dunmere 5.25 2028", "GBP", "fixed", 5_250_000_000, 2, "Act/Act ICMA", "2028-03-29"),
    ("ZZ0001000087", "Sakuraya Rail 0.60 2030", "JPY", "fixed", 600_000_000, 2, "Act/365F", "2030-09-20"),
]

# item, kind, account, bond row, currency, ticket, broker, side, face, price, terms, broker, desk, bank, terms day, bank day
ITEMS = [
    ("trade T-20931", "trade", "Northquay main", 0, "USD", "T-20931", "Tamarisk & Vane", 1, 500000000, "98.875",
     -506792808, -506792808, -506792808, -506901042, "2026-03-30", "2026-03-30"),
    ("coupon Northquay ZZ0001000020", "coupon", "Northquay custody", 1, "EUR", "", "", 0, 1240000000, "", 19840000, MISSING,
     MISSING, MISSING, "2026-03-30", ""),
    ("trade T-20940", "trade", "Northquay main", 2, "USD", "T-20940", "Brandt Holloway", -1, 200000000, "85-10", 171120548,
     170695548, 171120548, MISSING, "2026-03-31", ""),
    ("trade T-20944", "trade", "Northquay main", 3, "USD", "T-20944", "", 1, 75000000, "23.137", -17353275, MISSING, -17353275,
     MISSING, "2026-03-31", ""),
    ("coupon Northquay ZZ0001000053", "coupon", "Northquay custody", 4, "GBP", "", "", 0, 300000000, "", 2250000, MISSING,
     MISSING, 1912500, "2026-03-27", "2026-03-27"),
    ("trade T-20951", "trade", "Northquay main", 5, "USD", "T-20951", "Tamarisk & Vane", 1, 100000000, "4.55", -98736111,
     -98736111, -98738111, -98736111, "2026-03-31", "2026-03-31"),
    ("coupon Northquay ZZ0001000079", "coupon", "Northquay custody", 6, "GBP", "", "", 0, 800000000, "", 21000000, MISSING,
     MISSING, 21000000, "2026-03-30", "2026-03-27"),
    ("coupon Northquay ZZ0001000087", "coupon", "Northquay custody", 7, "JPY", "", "", 0, 480000000, "", 1440000, MISSING,
     MISSING, 1218204, "2026-03-20", "2026-03-20"),
    ("bank 88154", "bank", "Northquay main", -1, "EUR", "", "", 0, MISSING, "", MISSING, MISSING, MISSING, 4231000, "",
     "2026-03-30"),
    ("trade T-20960", "trade", "Northquay main", -1, "USD", "T-20960", "Orrin & Teale", 1, 10000000, "101.5", MISSING,
     -10150000, -10150000, MISSING, "2026-03-31", ""),
    ("confirmation Orrin & Teale OT-771", "trade", "Northquay main", 0, "USD", "", "Orrin & Teale", -1, 25000000, "98.9",
     25349640, 25349640, MISSING, MISSING, "2026-04-01", ""),
    ("trade T-20971", "trade", "Northquay main", 1, "EUR", "T-20971", "Brandt Holloway", 1, 60000000, "97.1", -58260000,
     -58260000, -58260000, MISSING, "2026-04-01", ""),
    ("trade T-20972", "trade", "Northquay main", 0, "USD", "T-20972", "Orrin & Teale", -1, 5000000, "99.02", 5076104,
     5076104, 5076104, 5076104, "2026-03-27", "2026-03-27"),
]  # fmt: skip

# item row, break, party, expected, found, difference, cause, certainty, explanation, next step, overdue, stake, rank
BREAKS = [
    (0, "settlement amount", "Bank", "-5067928.08", "-5069010.42", "-1082.34", "Accrued counted 30/360, terms say Act/Act",
     "proved", "Counting the accrued days 30/360 gives 125,260.42 and with it the booked amount to the cent.",
     "Ask Northquay custody to correct entry 88121: 1,082.34 was paid too much.", 1, 108234),
    (1, "no cash", "Bank", "198400.00", "", "", "Coupon not paid", "open", "The coupon was due on 30 March and no entry pays it.",
     "Ask Northquay custody where the coupon is.", 1, 19840000),
    (2, "settlement amount", "Broker", "1711205.48", "1706955.48", "-4250.00", "Price read as a decimal: 85-10 is 85.3125",
     "proved", "Read as the decimal 85.10 the price gives the confirmed amount to the cent.",
     "Ask Brandt Holloway for a corrected confirmation.", MISSING, 425000),
    (2, "price", "Broker", "85.3125", "85.1", "-0.2125", "Price read as a decimal: 85-10 is 85.3125", "proved",
     "The broker confirms 85.10, our ticket says 85-10.", "Ask Brandt Holloway for a corrected confirmation.", MISSING, 425000),
    (3, "no confirmation", "Broker", "", "", "", "Unconfirmed: one point of yield moves it by 25 %", "open",
     "Nobody has confirmed ticket T-20944; a thirty-year zero loses about a quarter for one point of yield.",
     "Ask for the confirmation before anything else.", MISSING, 4338300),
    (4, "payment amount", "Bank", "22500.00", "19125.00", "-3375.00", "15 % tax withheld at source", "proved",
     "22,500.00 less 15 % is 19,125.00.", "Claim relief at source, or the refund.", 2, 337500),
    (5, "settlement amount", "Desk", "-987361.11", "-987381.11", "-20.00", "Fee of 20.00 on our ticket only", "proved",
     "Without the fee our ticket agrees.", "Correct ticket T-20951.", MISSING, 2000),
    (5, "fees", "Desk", "0.00", "20.00", "20.00", "Fee of 20.00 on our ticket only", "proved", "Only our ticket tells a fee.",
     "Correct ticket T-20951.", MISSING, 2000),
    (6, "payment date", "Bank", "2026-03-30", "2026-03-27", "-3", "Rolled back to Friday: terms say following", "proved",
     "29 March is a Sunday; rolled to the preceding business day it is 27 March.", "Nothing to claim; tell the custodian.",
     MISSING, 0),
    (7, "payment amount", "Bank", "1440000", "1218204", "-221796", "15.4025 % withheld", "likely",
     "15.315 % is the usual rate; the amount fits 15.4025 %.", "Ask for the tax voucher.", 7, 221796),
    (8, "unexplained cash", "Bank", "", "42310.00", "42310.00", "Nothing due fits", "open",
     "No payment of this account and currency has this amount.", "Ask what entry 88154 is for.", 1, 4231000),
    (9, "unknown bond", "Terms", "", "ZZ0009999991", "", "", "open", "ZZ0009999991 is not in bonds.csv.",
     "Add the bond's terms to bonds.csv.", MISSING, 0),
    (10, "no ticket", "Desk", "", "", "", "", "open", "Orrin & Teale confirm a sale nobody booked.",
     "Ask the desk whether it dealt.", MISSING, 25349640),
    (11, "settlement date", "Broker", "2026-04-01", "2026-04-02", "1", "One business day too late", "likely",
     "The broker settles two days after the trade, the market one.", "Ask Brandt Holloway to correct the date.", MISSING, 0),
    (12, "told twice", "Broker", "", "OT-765", "", "", "open", "Confirmation OT-766 repeats OT-765.", "Ask for the cancellation.",
     MISSING, 5076104),
]  # fmt: skip


def bonds_table() -> records.Table:
    """The invented bonds."""
    return records.table(
        records.BONDS, bond=[b[0] for b in BONDS], description=[b[1] for b in BONDS], currency=[b[2] for b in BONDS],
        kind=[b[3] for b in BONDS], coupon_rate_e9=[b[4] for b in BONDS], frequency=[b[5] for b in BONDS],
        day_count=[b[6] for b in BONDS], maturity=[b[7] for b in BONDS], market=["" for _ in BONDS],
    )  # fmt: skip


def _dates(texts: list[str]) -> np.ndarray:
    return np.array([text or "NaT" for text in texts], "datetime64[D]")


def _breaks_table(rows: list[tuple[Any, ...]], items: records.Table) -> records.Table:
    at = np.array([row[0] for row in rows], np.int64)
    return records.table(
        records.BREAKS, item=items["item"].take(at), item_row=at, party=[r[2] for r in rows], expected=[r[3] for r in rows],
        found=[r[4] for r in rows], difference=[r[5] for r in rows], cause=[r[6] for r in rows],
        certainty=[r[7] for r in rows], explanation=[r[8] for r in rows], next_step=[r[9] for r in rows],
        overdue_days=[r[10] for r in rows], stake_minor=[r[11] for r in rows], currency=items["currency"].take(at),
        rank=np.arange(1, len(rows) + 1), **{"break": [r[1] for r in rows]},
    )  # fmt: skip


def day(agreeing: int = 40, broken: bool = True, problems: tuple[Problem, ...] = ()) -> FabricatedDay:
    """The small morning: `agreeing` payments that agree or are due beside the broken ones."""
    rows: list[tuple[Any, ...]] = list(ITEMS) if broken else []
    broken_rows = len(rows)
    for number in range(agreeing):
        bond = number % len(BONDS)
        minor = -(123_456_78 + 1_000_01 * number)
        rows.append((f"trade T-{30000 + number}", "trade", "Northquay main", bond, BONDS[bond][2], f"T-{30000 + number}",
                     ("Tamarisk & Vane", "Brandt Holloway", "Orrin & Teale")[number % 3], 1, 12_000_000 + number * 100_000, "99.5",
                     minor, minor, minor, MISSING if number % 5 == 0 else minor,
                     "2026-03-31" if number % 5 == 0 else "2026-03-30", "" if number % 5 == 0 else "2026-03-30"))  # fmt: skip
    state = ["break"] * broken_rows + ["due" if n % 5 == 0 else "agrees" for n in range(agreeing)]
    names = [r[5] for r in rows]
    tickets = records.table(
        records.TICKETS, ticket=[n for n in names if n], side=[r[7] for r in rows if r[5]], face_minor=[r[8] for r in rows if r[5]],
        price_text=[r[9] for r in rows if r[5]], settlement_minor=[abs(r[12]) if r[12] != MISSING else MISSING for r in rows if r[5]],
        currency=[r[4] for r in rows if r[5]], broker=[r[6] for r in rows if r[5]], account=[r[2] for r in rows if r[5]],
        settlement_date=_dates([r[14] for r in rows if r[5]]), trade_date=_dates(["2026-03-27" for r in rows if r[5]]),
    )  # fmt: skip
    told = [r for r in rows if r[11] != MISSING]
    confirmations = records.table(
        records.CONFIRMATIONS, broker=[r[6] for r in told], broker_reference=[f"REF-{i}" for i in range(len(told))],
        side=[r[7] for r in told], face_minor=[r[8] for r in told], price_text=[r[9] for r in told],
        settlement_minor=[abs(r[11]) for r in told], currency=[r[4] for r in told], settlement_date=_dates([r[14] for r in told]),
    )  # fmt: skip
    paid = [(i, r) for i, r in enumerate(rows) if r[13] != MISSING]
    cash = records.table(
        records.CASH, entry=[str(88121 + i) for i, _ in paid], account=[r[2] for _, r in paid], currency=[r[4] for _, r in paid],
        value_date=_dates([r[15] for _, r in paid]), amount_minor=[r[13] for _, r in paid],
    )  # fmt: skip
    ticket_rows = np.cumsum([bool(n) for n in names]) - 1
    confirmation_rows = np.cumsum([r[11] != MISSING for r in rows]) - 1
    entry_of = {i: str(88121 + i) for i, _ in paid}
    items = records.table(
        records.ITEMS, item=[r[0] for r in rows], kind=[r[1] for r in rows], account=[r[2] for r in rows],
        bond=[BONDS[r[3]][0] if r[3] >= 0 else "" for r in rows], currency=[r[4] for r in rows], ticket=names,
        broker=[r[6] for r in rows], side=[r[7] for r in rows], face_minor=[r[8] for r in rows], price_text=[r[9] for r in rows],
        terms_minor=[r[10] for r in rows], broker_minor=[r[11] for r in rows], desk_minor=[r[12] for r in rows],
        bank_minor=[r[13] for r in rows], terms_date=_dates([r[14] for r in rows]), bank_date=_dates([r[15] for r in rows]),
        bank_entries=[entry_of.get(i, "") for i in range(len(rows))], state=state, bond_row=[r[3] for r in rows],
        ticket_row=np.where([bool(n) for n in names], ticket_rows, -1),
        confirmation_row=np.where([r[11] != MISSING for r in rows], confirmation_rows, -1),
    )  # fmt: skip
    breaks = _breaks_table(BREAKS if broken else [], items)
    allocations = records.table(
        records.ALLOCATIONS, item_row=[i for i, _ in paid], cash_row=np.arange(len(paid)), share_minor=[r[13] for _, r in paid],
    )  # fmt: skip
    rejects = records.table(
        records.REJECTS, file=["orrin_teale_20260331.csv", "cash.csv"], row=[14, 203], column=["Net Amt", "value_date"],
        value=["1O2.50", "31/02/2026"],
        reason=["is not an amount: a letter O stands among the digits; correct the file or ask the broker for it again.",
                "is not a day of the calendar; write the day as 2026-02-28."], code=["bad-amount", "bad-date"],
    )  # fmt: skip
    totals = records.table(
        records.TOTALS, file=["tickets.csv", "tickets.csv", "orrin_teale_20260331.csv", "cash.csv", "cash.csv"],
        currency=["EUR", "USD", "USD", "JPY", "USD"], rows_read=[20, 34, 18, 3, 41], rows_used=[20, 34, 16, 3, 40],
        rows_rejected=[0, 0, 1, 0, 1], rows_set_aside=[0, 0, 1, 0, 0],
        amount_read=[1204000000, 2204410010, 890012344, 4112000, 99120400], amount_used=[1204000000, 2204410010, 880012344, 4112000,
                                                                                         98110200],
        amount_rejected=[0, 0, 10000000, 0, 1010200], amount_set_aside=[0, 0, 0, 0, 0],
    )  # fmt: skip
    files = tuple(
        SimpleNamespace(name=name, broker=broker, layout=layout, encoding=encoding, delimiter=delimiter)
        for name, broker, layout, encoding, delimiter in (
            ("tickets.csv", "", "", "utf-8", ","), ("orrin_teale_20260331.csv", "Orrin & Teale", "by its headings", "cp1252", ";"),
        )
    )  # fmt: skip
    source = SimpleNamespace(bonds=bonds_table(), tickets=tickets, confirmations=confirmations, cash=cash, rejects=rejects,
                             totals=totals, problems=problems, files=files, extras={})  # fmt: skip
    nothing = [records.table(schema) for schema in (records.RATES, records.FACTORS, records.CLOSINGS)]
    terms, _problems = resolve_terms(source.bonds, *nothing)
    return FabricatedDay(DATE, datetime.date(2026, 3, 17), source, terms, items, allocations, breaks)


def ahead() -> Any:
    """What lies ahead of the small morning."""
    from reconciler.procedures.ahead import AHEAD, Ahead, Bar

    rows = [
        ("2026-04-01", 1, "trade", "EUR", -58260000, 1, 60000000), ("2026-04-01", 0, "trade", "USD", 25349640, -1, 25000000),
        ("2026-04-02", 4, "coupon", "GBP", 2250000, 0, 300000000), ("2026-04-07", 6, "coupon", "GBP", 23625000, 0, 900000000),
        ("2026-04-08", 7, "coupon", "JPY", 1440000, 0, 480000000), ("2026-04-09", 2, "coupon", "USD", 2875000, 0, 200000000),
        ("2026-04-14", 5, "redemption", "USD", 100000000, 0, 100000000),
    ]  # fmt: skip
    payments = records.table(
        AHEAD, date=[r[0] for r in rows], kind=[r[2] for r in rows], account=["Northquay custody"] * len(rows),
        bond=[BONDS[r[1]][0] for r in rows], bond_row=[r[1] for r in rows], currency=[r[3] for r in rows],
        amount_minor=[r[4] for r in rows], side=[r[5] for r in rows], face_minor=[r[6] for r in rows],
        ticket=["T-20971", "", "", "", "", "", ""],
    )  # fmt: skip
    digits = np.array([0 if r[3] == "JPY" else 2 for r in rows], np.int64)
    bars = tuple(Bar(np.datetime64(r[0]), r[3], max(r[4], 0), max(-r[4], 0), int(digits[i]), 1) for i, r in enumerate(rows))
    return Ahead(payments, digits, bars, np.datetime64("2026-04-14"))


def large_day(rows: int = 1_000_000) -> FabricatedDay:
    """`rows` broken payments with distinct tickets, references and bank entries."""
    small = day(agreeing=0)
    number = np.arange(rows)
    random = np.random.default_rng(7)

    def distinct(prefix: str) -> Words:
        texts = pa.array(np.char.add(prefix, np.char.zfill(number.astype("U7"), 7)))
        return Words(number.astype(np.int32), texts)

    pattern = np.tile(np.arange(6), rows // 6 + 1)[:rows]
    terms = random.integers(-(10**12), 10**12, rows)
    base = small.items.take(np.where(pattern % 2 == 0, 0, 2))
    items = base.with_columns(
        item=distinct("trade T-"), ticket=distinct("T-"), broker_reference=distinct("R/"), bank_entries=distinct("9"),
        terms_minor=terms, desk_minor=terms, broker_minor=terms, bank_minor=terms + 100 * pattern,
        terms_date=np.datetime64("2026-03-01") + pattern, face_minor=random.integers(1, 10**6, rows) * 10_000,
        bond_row=(number % len(BONDS)).astype(np.int32), ticket_row=np.zeros(rows, np.int32),
        confirmation_row=np.zeros(rows, np.int32),
    )  # fmt: skip
    breaks = small.breaks.take(np.zeros(rows, np.int64)).with_columns(
        item=items["item"], item_row=number, rank=number + 1, stake_minor=random.integers(0, 10**9, rows),
        overdue_days=pattern.astype(np.int64),
    )  # fmt: skip
    return FabricatedDay(small.date, small.since, small.source, small.terms, items, small.allocations, breaks)


def working(_day: Any, item_row: int) -> Any:
    """What procedures.working.working tells of the first payment of the small morning, and something short of the others."""
    from reconciler.procedures.bond_coupons import Strip
    from reconciler.procedures.working import Line, Working

    if item_row:
        return Working("", "", (Line("Payment amount", "198,400.00", note="12,400,000 × 3.20 % / 2"),), ())
    lines = (
        Line("Principal", "4,943,750.00", "4,943,750.00", "4,943,750.00", note="5,000,000 × 98.875 %"),
        Line("Accrued days", "196", "196", "196", "195", frozenset({"Bank"}), "from 15 Sep 2025 to 30 Mar 2026"),
        Line("Day count", "Act/Act ICMA 196 / 365", "", "", "30/360 195 / 360", frozenset({"Bank"})),
        Line("Accrued interest", "124,178.08", "124,178.08", "124,178.08", "125,260.42", frozenset({"Bank"}), "4.625 % a year"),
        Line("Fees", "0.00", "0.00", "0.00", "0.00"),
        Line("Settlement amount", "5,067,928.08", "5,067,928.08", "5,067,928.08", "5,069,010.42", frozenset({"Bank"})),
    )
    days = np.array(["2023-09-15", "2024-09-15", "2025-09-15", "2026-09-15", "2027-09-15"], "datetime64[D]")
    strip = Strip(tuple(days), (days[2], np.datetime64("2026-03-30")), np.datetime64("2026-03-30"), "settles 30 Mar",
                  "196 days accrued", 3)  # fmt: skip
    return Working("Buy 5,000,000 Marlow Gas 4.625 2031", "", lines, ("Terms", "Broker", "Desk", "Bank"), (), strip)


def bond_coupons(_day: Any, _bond_row: int, item_row: int = -1, _face: int = 100) -> Any:
    """What procedures.working.bond_coupons tells."""
    from reconciler.procedures.bond_coupons import COUPONS, Coupons

    ends = np.array([f"{year}-09-15" for year in range(2022, 2032)], "datetime64[D]")
    moved = np.where(np.is_busday(ends), ends, np.busday_offset(ends, 0, roll="following"))
    table = records.table(
        COUPONS, start=ends - 365, end=ends, payment_date=moved,
        why=["" if a == b else f"{a} is a weekend day" for a, b in zip(ends, moved, strict=True)], days=[365] * 10,
        ex_date=ends - 7, record_date=ends - 1, face_minor=[500000000] * 10, amount_minor=[23125000] * 10,
    )  # fmt: skip
    return Coupons(table, working(_day, 0).strip, 2, 4 if item_row >= 0 else -1)
