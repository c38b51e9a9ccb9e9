"""The figures of a list that is reckoned anew: cells become terms, terms become interest, price, yield and risk, on columns.

Whatever is wrong with a row is collected as (row, column, value, reason), in the words of whoever found it, and becomes the row's `problem`.
A row with a problem in its terms, its date or its face has no figures; one that only lacks a price still shows its interest.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler import texts
from reconciler.bonds import accrual, calendars, pricing, settlement
from reconciler.bonds.resolving import calendar_codes, resolve
from reconciler.bonds.terms import NAT, ONE, QUOTES, Terms
from reconciler.exports.columns import Column
from reconciler.intake import cells
from reconciler.money import MISSING, half_up
from reconciler.records import BONDS, Words

RESULTS = (
    "previous_coupon", "next_coupon", "accrued_days", "accrued", "accrued_per_100", "price", "yield", "principal",
    "settlement_amount", "modified_duration", "money_per_basis_point", "problem",
)  # fmt: skip

_DECIMALS = {"coupon_rate_e9": ("coupon_rate", 9), "redemption_price_e12": ("redemption_price", 12)}
_CHUNK = 20_000
"""Rows priced at once: each has its payments side by side in memory."""

Fault = tuple[int, str, str, str]


class _Cells:
    """The told columns, read once per distinct text; what cannot be read is kept as faults."""

    def __init__(self, told: Mapping[str, pa.Array], length: int) -> None:
        self.told, self.length = told, length
        self.faults: list[Fault] = []

    def column(self, name: str) -> pa.Array:
        column = self.told.get(name)
        return pa.array([""] * self.length, pa.string()) if column is None else cells.trimmed(column)

    def taken(self, name: str, found: cells.Cells) -> np.ndarray:
        column = self.column(name)
        self.faults += [(row, name, column[row].as_py(), found.reason) for row in np.flatnonzero(found.bad).tolist()]
        return found.values

    def dates(self, name: str) -> np.ndarray:
        return self.taken(name, cells.dates(self.column(name), iso=True))

    def numbers(self, name: str, places: int) -> np.ndarray:
        return self.taken(name, cells.numbers(self.column(name), places))

    def words(self, name: str) -> Words:
        return Words.from_arrow(self.column(name))

    def fault(self, where: np.ndarray, name: str, reason: str) -> None:
        column = self.column(name)
        self.faults += [(row, name, column[row].as_py(), reason) for row in np.flatnonzero(where).tolist()]


@dataclass(frozen=True)
class _Asked:
    """What each row asks: terms, day, face and one of price, yield (percent) and discount (percent), times 10^12."""

    terms: Terms
    settle: np.ndarray
    face: np.ndarray
    price_e12: np.ndarray
    yield_e12: np.ndarray
    discount_e12: np.ndarray
    convention: np.ndarray
    usable: np.ndarray
    has_price: np.ndarray
    needs_price: np.ndarray


def figures(told: Mapping[str, pa.Array], length: int, torn: Sequence[tuple[int, str]]) -> dict[str, Column]:
    """Every result of each row. `told` are the list's columns by heading in small letters, `torn` rows of the wrong width."""
    read = _Cells(told, length)
    read.faults += [(row, "", "", sentence) for row, sentence in torn]
    asked = _asked(read)
    rows = np.arange(length)
    interest = accrual.accrued(asked.terms, rows, asked.settle, asked.face)
    _check_days(read, asked, interest)
    usable = asked.usable & interest.sound
    blank = np.full(length, MISSING)
    per_100 = half_up([interest.rate_e9, interest.numerator, interest.factor_e12], [interest.denominator, 10**9])
    price, yields, duration, point, principal = _priced(read, asked, np.flatnonzero(usable & asked.has_price))
    digits = asked.terms.currency_digits
    minor = np.where(usable, interest.minor, blank)
    whole = np.where((minor != MISSING) & (principal != MISSING), minor + principal, MISSING)
    silent = np.ones(length, np.bool_)
    silent[[row for row, *_ in read.faults]] = False
    read.fault(silent & (whole == MISSING), "settlement_amount", "is beyond any amount; check face, price and rates.")
    return {
        "previous_coupon": Column("previous_coupon", "date", np.where(usable, interest.previous, NAT)),
        "next_coupon": Column("next_coupon", "date", np.where(usable, interest.next, NAT)),
        "accrued_days": Column("accrued_days", "count", np.where(usable, interest.days, blank)),
        "accrued": Column("accrued", "amount", minor, digits),
        "accrued_per_100": _decimal("accrued_per_100", np.where(usable, per_100, blank)),
        "price": _told_or("price", read, asked.price_e12, price),
        "yield": _told_or("yield", read, asked.yield_e12, yields),
        "principal": Column("principal", "amount", principal, digits),
        "settlement_amount": Column("settlement_amount", "amount", whole, digits),
        "modified_duration": _decimal("modified_duration", duration),
        "money_per_basis_point": _decimal("money_per_basis_point", point),
        "problem": Column("problem", "text", _sentences(read.faults, length)),
    }


def _decimal(title: str, values_e12: np.ndarray) -> Column:
    return Column(title, "text", texts.decimals(values_e12, 12, at_least=10))


def _told_or(name: str, read: _Cells, told: np.ndarray, found: np.ndarray) -> Column:
    """The text as told, else the figure found."""
    own, ours = read.words(name), Words.from_arrow(texts.decimals(found, 12, at_least=10))
    return Column(name, "text", own.where(own.known() & ((told != MISSING) | ~ours.known()), ours))


def _asked(read: _Cells) -> _Asked:
    length = read.length
    settle = read.dates("settlement_date")
    price = read.taken("price", cells.prices(read.column("price")))
    yields, discount = read.numbers("yield", 12), read.numbers("discount", 12)
    names = {name: number for number, name in enumerate(pricing.YIELD_CONVENTIONS)}
    reason = f"is not a known word here; use one of: {', '.join(names)}."
    convention = read.taken("yield_convention", cells.coded(read.column("yield_convention"), names, 0, reason))
    terms = _terms(read)
    face = read.taken("face", cells.amounts(read.column("face"), terms.currency_digits))
    face = np.where(read.words("face").known(), face, 100 * 10**terms.currency_digits)
    read.fault((face != MISSING) & (face < 0), "face", "is negative; the face is a positive amount.")
    read.fault(~read.words("settlement_date").known(), "settlement_date", "is blank; every row needs it.")
    told = [(values != MISSING).astype(np.int64) for values in (price, yields, discount)]
    for name, one in zip(("price", "yield", "discount"), told, strict=True):
        others = sum(told) - one
        read.fault((one > 0) & (others > 0), name, "stands beside another of price, yield and discount; keep the one to reckon from.")
    zero = terms.frequency == 0
    read.fault((discount != MISSING) & ~zero, "discount", "is a rate for bonds without coupons; tell a price or a yield.")
    only_zeros = np.isin(convention, (pricing.DISCOUNT, pricing.INVESTMENT))
    read.fault(only_zeros & ~zero & terms.sound, "yield_convention", "is for bonds without coupons; use street, treasury, simple or annual.")
    usable = np.ones(length, np.bool_)
    usable[[row for row, *_ in read.faults]] = False
    return _Asked(terms, settle, face, price, yields, discount, convention, usable, sum(told) == 1, sum(told) == 0)


def _terms(read: _Cells) -> Terms:
    told: dict[str, Any] = {}
    for name, kind in BONDS.items():
        if kind == "text" and name not in ("file", "bond", "description"):
            words = read.words(name)
            told[name] = (words.codes, words.values.to_pylist())
        elif kind == "date":
            told[name] = read.dates(name)
        elif name in _DECIMALS:
            told[name] = read.numbers(*_DECIMALS[name])
        elif kind == "int64":
            told[name] = read.taken(name, cells.wholes(read.column(name)))
    factor = read.numbers("factor", 12)
    known = np.flatnonzero(factor != MISSING)
    none = np.zeros(0, np.int64)
    factors = (known, np.full(len(known), np.datetime64("1900-01-01")), factor[known])
    loaded, unknown = calendars.load(calendar_codes(told))
    terms, faults = resolve(told, read.length, loaded, unknown, (none, none.astype("datetime64[D]"), none), factors,
                            currency_needed=False)  # fmt: skip
    seen = {(row, column) for row, column, _value, _reason in read.faults}
    # a cell that could not be read is blank to the terms: say once what is wrong with it
    read.faults += [fault for fault in faults if fault[:2] not in seen]
    # The list's price is a price per 100 and its rates have their own columns, whatever the bond is quoted in.
    return replace(terms, quote=np.zeros(read.length, np.int8))


def _check_days(read: _Cells, asked: _Asked, interest: accrual.Accrued) -> None:
    late = asked.usable & (asked.settle >= asked.terms.maturity)
    read.fault(late, "settlement_date", "lies on or after the maturity; nothing accrues any more.")
    unknown = asked.usable & ~late & ~interest.sound
    read.fault(unknown, "coupon_rate", "is not known for this period; add the coupon rate in force.")
    short = asked.usable & interest.sound & asked.needs_price
    read.fault(short, "price", "is blank, and so are yield and discount; only the interest is reckoned.")


def _priced(read: _Cells, asked: _Asked, rows: np.ndarray) -> tuple[np.ndarray, ...]:
    """Price, yield, modified duration, money per basis point (all x 10^12) and principal (minor units) of each row."""
    out = tuple(np.full(read.length, MISSING) for _ in range(5))
    for first in range(0, len(rows), _CHUNK):
        some = rows[first : first + _CHUNK]
        for column, values in zip(out, _chunk(read, asked, some), strict=True):
            column[some] = values
    return out


def _chunk(read: _Cells, asked: _Asked, rows: np.ndarray) -> tuple[np.ndarray, ...]:
    terms, settle, convention = asked.terms, asked.settle[rows], asked.convention[rows]
    discounted, yielding = asked.discount_e12[rows] != MISSING, asked.yield_e12[rows] != MISSING
    given = np.where(yielding, asked.yield_e12[rows], 0) / 1e12
    clean = np.where(yielding, pricing.price_from_yield(terms, rows, settle, given, convention), np.nan)
    quoted = replace(terms, quote=np.where(asked.discount_e12 != MISSING, QUOTES.index("discount"), 0).astype(np.int8))
    told = np.where(discounted, asked.discount_e12[rows], np.where(yielding, _e12(clean), asked.price_e12[rows]))
    settled = settlement.settle(quoted, rows, settle, asked.face[rows], told)
    clean = np.where(yielding, clean, settled.price_per100)
    # The Treasury reckons a bill's investment rate from the price as it prints it, to six decimals (its auction results).
    printed = half_up(*_ratio(quoted, rows, settle, told, 10**6)) / 1e6
    from_price = np.where(discounted & (convention == pricing.INVESTMENT), printed, clean)
    yields = np.where(yielding, given, pricing.yield_from_price(terms, rows, settle, from_price, convention))
    _say(read, rows[yielding & ~np.isfinite(clean)], "yield", "gives no price under this convention; correct the yield.")
    lost = ~yielding & settled.sound & ~np.isfinite(yields)
    reason = "gives no yield; correct it."
    _say(read, rows[lost & ~discounted], "price", reason)
    _say(read, rows[lost & discounted], "discount", reason)
    duration, point = pricing.risk(terms, rows, settle, yields, convention)
    scale = asked.face[rows] / (100.0 * 10.0 ** terms.currency_digits[rows]) * accrual.factors(terms, rows, settle) / ONE
    price = np.where(discounted, half_up(*_ratio(quoted, rows, settle, told, ONE)), _e12(clean))
    return price, _e12(yields), _e12(duration), _e12(point * scale), settled.principal_minor


def _ratio(
    terms: Terms, rows: np.ndarray, settle: np.ndarray, told: np.ndarray, scale: int
) -> tuple[list[Any], list[Any]]:
    above, below = settlement.price_ratio(terms, rows, settle, told)
    return [above, scale], [below]


def _say(read: _Cells, rows: np.ndarray, name: str, reason: str) -> None:
    where = np.zeros(read.length, np.bool_)
    where[rows] = True
    read.fault(where, name, reason)


def _e12(values: np.ndarray) -> np.ndarray:
    """Floats times 10^12, MISSING where there is none or it would not fit."""
    sound = np.isfinite(values) & (np.abs(np.where(np.isfinite(values), values, 0)) < 9e6)
    return np.where(sound, np.rint(np.where(sound, values, 0) * 1e12).astype(np.int64), MISSING)


def _sentences(faults: Sequence[Fault], length: int) -> Words:
    """Each row's faults as sentences, in the order of columns; blank where there is none."""
    found: dict[int, list[str]] = {}
    for row, column, value, reason in sorted(set(faults)):
        shown = f"{column} '{value}' {reason}" if value else f"{column} {reason}"
        found.setdefault(row, []).append(shown.strip())
    return Words.of([" ".join(found.get(row, ())) for row in range(length)])
