"""Invents bonds of many kinds, each with its terms in full and as a clerk might leave them half blank in bonds.csv.

Every kind has one short function in `KINDS`; coupon dates are laid so that many of them fall into the morning's
window. Where a market fills the blanks, the values filled are those of the contract (UK gilts 6b) or of the market's
public rules.
"""

from __future__ import annotations

import random
from collections.abc import Callable
from datetime import date, timedelta
from fractions import Fraction

from tests.oracle.arithmetic import Bond, Calendar, isin, months_on, payment_date, periods

STEM = (
    "Marlow",
    "Teasel",
    "Ostrel",
    "Quarn",
    "Vinmoor",
    "Hasp",
    "Kelder",
    "Dray",
    "Farrow",
    "Lindmere",
    "Ombra",
    "Sallow",
)
TRADE = ("Gas", "Water", "Rail", "Canals", "Harbour", "Timber", "Bridges", "Glass", "Ferries", "Salt", "Power", "Mills")


class Scene:
    """What a bond maker needs: random numbers, the morning's window, the closings, and a count for identifiers."""

    def __init__(
        self, rng: random.Random, since: date, today: date, closings: tuple[tuple[str, date, bool], ...]
    ) -> None:
        self.rng, self.since, self.today, self.closings, self.made = rng, since, today, closings, 0
        self.styles = ("T{:06d}", "{0:.2}{1}")
        """How our ticket numbers and a broker's references look: by number, and by the broker's name and a number."""
        self.desk_codes = False
        """Whether some bonds go by a code of the desk instead of an ISIN."""

    def coupon_day(self) -> date:
        """A day for coupons: six times of ten one inside the window, else anywhere."""
        if self.rng.random() < 0.6:
            return self.since + timedelta(days=self.rng.randint(0, (self.today - self.since).days))
        return self.today + timedelta(days=self.rng.randint(-180, 180))

    def years_on(self, day: date, least: int = 1, most: int = 29) -> date:
        return months_on(day, 12 * self.rng.randint(least, most), False)

    def rate(self) -> Fraction:
        return self.rng.choice((Fraction(self.rng.randint(4, 60), 8), Fraction(self.rng.randint(500, 7999), 1000)))

    def calendar(self, code: str) -> Calendar:
        return Calendar(code, self.closings)

    def new(self, currency: str, calendar: str, kind: str, maturity: date, issued: date, **terms: object) -> Bond:
        self.made += 1
        code = isin("ZZ", f"{self.made:04d}{self.rng.randint(0, 99999):05d}")
        if self.desk_codes and self.rng.random() < 0.08:
            code = f"{self.rng.choice(STEM).upper()}{self.made:03d}"
        name = f"{self.rng.choice(STEM)} {self.rng.choice(TRADE)}"
        bond = Bond(code, name, currency, kind, maturity, issued, self.calendar(calendar), **terms)  # type: ignore[arg-type]
        rate = f" {float(bond.rate):g}" if bond.rate else ""
        bond.description = f"{name}{rate} {maturity.year}"
        return bond

    def plain(self, currency: str, calendar: str, frequency: int, **terms: object) -> Bond:
        """A fixed coupon bond on regular periods."""
        day = self.coupon_day()
        maturity = self.years_on(day)
        issued = months_on(maturity, -12 * (maturity.year - self.today.year + self.rng.randint(2, 6)), False)
        terms = {"rate": self.rate(), "frequency": frequency, **terms}
        return self.new(currency, calendar, str(terms.pop("kind", "fixed")), maturity, issued, **terms)

    def steps(self, bond: Bond, draw: Callable[[int], Fraction]) -> Bond:
        """A value that changes with every coupon period up to the one after the morning."""
        ahead = [p for p in periods(bond) if p.start <= self.today + timedelta(days=20)]
        bond.steps = [(p.start, draw(n)) for n, p in enumerate(ahead)]
        return bond


def _treasury(s: Scene) -> Bond:
    bond = s.plain("USD", "XSIF", 2, settlement_days=1, quote="32nds", market="US_TNOTE")
    bond.written = dict.fromkeys(
        ("kind", "frequency", "day_count", "quote", "payment_adjustment", "settlement_days"), ""
    )
    bond.written["end_of_month"] = "no"
    return bond


def _month_end(s: Scene) -> Bond:
    target = date(s.today.year, s.today.month, 1) - timedelta(days=1)
    target = months_on(target, s.rng.choice((0, 1, 2, 3)), True)
    maturity = months_on(target, 12 * s.rng.randint(1, 20), True)
    issued = months_on(maturity, -12 * (maturity.year - s.today.year + 3), True)
    day_count = s.rng.choice(("Act/Act ICMA", "30/360 US"))
    terms = {"rate": s.rate(), "frequency": 2, "end_of_month": True, "day_count": day_count, "settlement_days": 1}
    return s.new("USD", "XSIF", "fixed", maturity, issued, **terms)


def _bill(s: Scene) -> Bond:
    inside = s.since + timedelta(days=s.rng.randint(0, (s.today - s.since).days))
    maturity = s.rng.choice((inside, s.today + timedelta(days=s.rng.randint(20, 360))))
    bond = s.new(
        "USD",
        "XSIF",
        "zero",
        maturity,
        maturity - timedelta(days=364),
        day_count="Act/360",
        settlement_days=1,
        quote="discount",
        market="US_TBILL",
    )
    bond.written = dict.fromkeys(
        s.rng.sample(("currency", "day_count", "quote", "settlement_days", "frequency"), 3), ""
    )
    return bond


def _bund(s: Scene) -> Bond:
    bond = s.plain("EUR", "XECB", 1, market="DE_BUND", settlement_days=1)
    bond.old_cycle = (date(2027, 10, 11), 2)
    names = ("currency", "frequency", "day_count", "calendar", "settlement_days", "payment_adjustment", "quote")
    bond.written = dict.fromkeys(names, "")
    return bond


def _gilt(s: Scene) -> Bond:
    bond = s.plain("GBP", "GB", 2, settlement_days=1, ex_dividend="6b", record="7b", market="UK_GILT")
    bond.written = dict.fromkeys(
        s.rng.sample(("day_count", "calendar", "ex_dividend", "settlement_days", "currency"), 3), ""
    )
    return bond


def _floater(s: Scene, currency: str, calendar: str, day_count: str) -> Bond:
    adjustment = s.rng.choice(("modified following", "following"))
    bond = s.plain(
        currency,
        calendar,
        4,
        kind="floating",
        rate=Fraction(0),
        day_count=day_count,
        adjusted=True,
        payment_adjustment=adjustment,
    )
    bond.accrual_start = bond.calendar.roll(bond.accrual_start, "following")
    while payment_date(bond, bond.maturity) != bond.maturity:
        bond.maturity += timedelta(days=1)
    bond.accrual_start = bond.calendar.roll(
        months_on(bond.maturity, -12 * (bond.maturity.year - s.today.year + 2), False), "following"
    )
    first = [p for p in periods(bond) if (p.end - p.start).days > 45]
    bond.first_coupon = first[0].end
    return s.steps(bond, lambda n: Fraction(s.rng.randint(1_00000, 5_00000), 100000))


def _company(s: Scene) -> Bond:
    """Its market says how it settles: T+2 until 27 May 2024, T+1 from the 28th."""
    bond = s.plain("USD", "XFED", 2, day_count="30/360", settlement_days=1, market="US_CORP")
    bond.old_cycle = (date(2024, 5, 28), 2)
    bond.written = dict.fromkeys(
        ("day_count", "settlement_days", "currency", "payment_adjustment", "quote", "redemption_price"), ""
    )
    return bond


def _month_end_floater(s: Scene) -> Bond:
    """Coupon dates on month ends, moved back into a month that ends on a weekend, and interest with them."""
    last = date(s.today.year, s.today.month, 1) - timedelta(days=1)
    maturity = months_on(last, 12 * s.rng.randint(2, 8), True)
    issued = months_on(maturity, -12 * (maturity.year - s.today.year + 2), True)
    bond = s.new(
        "EUR",
        "XECB",
        "floating",
        maturity,
        issued,
        frequency=4,
        day_count="Act/360",
        adjusted=True,
        end_of_month=True,
        payment_adjustment="modified following",
    )
    bond.first_coupon = next(p.end for p in periods(bond) if (p.end - p.start).days > 45)
    s.steps(bond, lambda n: Fraction(s.rng.randint(1_00000, 5_00000), 100000))
    if s.rng.random() < 0.5:
        bond.steps = [(payment_date(bond, day), rate) for day, rate in bond.steps]
    return bond


def _odd_first(s: Scene, currency: str, calendar: str, frequency: int, day_count: str, long: bool) -> Bond:
    bond = s.plain(currency, calendar, frequency, day_count=day_count, settlement_days=s.rng.choice((1, 2)))
    step = 12 // frequency
    coupon = months_on(bond.maturity, -12 * (bond.maturity.year - s.today.year), False)
    while coupon < s.since:
        coupon = months_on(coupon, step, False)
    back = s.rng.randint(35, 25 * step) + (30 * step if long else 0)
    bond.first_coupon, bond.accrual_start = coupon, coupon - timedelta(days=back)
    if bond.accrual_start > s.since - timedelta(days=20):
        bond.accrual_start -= timedelta(days=60 if step > 3 else 0)
    return bond


def _odd_last(s: Scene, frequency: int, day_count: str) -> Bond:
    """Matures off its own coupon grid, at times within the window."""
    bond = s.plain("EUR", "XECB", frequency, day_count=day_count)
    step = 12 // frequency
    if s.rng.random() < 0.5:
        bond.maturity = s.since + timedelta(days=s.rng.randint(0, (s.today - s.since).days))
    off = s.rng.randint(20, 24 * step) + (30 * step if s.rng.random() < 0.4 else 0)
    bond.last_regular = bond.maturity - timedelta(days=off)
    bond.accrual_start = months_on(bond.last_regular, -12 * 4, False)
    return bond


def _amortising(s: Scene) -> Bond:
    bond = s.plain(
        "EUR", "XECB", s.rng.choice((2, 4)), kind="amortising", day_count=s.rng.choice(("30E/360", "Act/Act ICMA"))
    )
    total = len(periods(bond))
    return s.steps(
        bond,
        lambda n: (
            Fraction(total - n, total).limit_denominator(1)
            if n == 0
            else Fraction(round(10**8 * (total - n) / total), 10**8)
        ),
    )


def _linked(s: Scene) -> Bond:
    bond = s.plain("USD", "XFED", 2, kind="linked", settlement_days=1)
    day, ratio = s.since - timedelta(days=400), Fraction(113, 100)
    while day <= s.today + timedelta(days=10):
        bond.steps.append((day, ratio))
        day += timedelta(days=7)
        ratio += Fraction(s.rng.randint(-40, 90), 100000)
    return bond


def _stepped(s: Scene) -> Bond:
    bond = s.plain("EUR", "XECB", 1, kind="stepped", day_count="30E/360 ISDA")
    first = Fraction(s.rng.randint(8, 24), 8)
    return s.steps(bond, lambda n: first + Fraction(n, 4))


def _zero(s: Scene, currency: str, calendar: str, years: int, days: int) -> Bond:
    maturity = s.years_on(s.coupon_day(), max(years - 2, 1), years) if years else s.coupon_day()
    if maturity < s.since:
        maturity = s.today
    return s.new(
        currency, calendar, "zero", maturity, date(2019, 5, 14), day_count="Act/Act ICMA", settlement_days=days
    )


def _maturing(s: Scene, currency: str, calendar: str, frequency: int, **terms: object) -> Bond:
    """A coupon bond that matures in the window: coupon and redemption on one day."""
    maturity = s.since + timedelta(days=s.rng.randint(0, (s.today - s.since).days))
    issued = months_on(maturity, -36, False)
    return s.new(currency, calendar, "fixed", maturity, issued, rate=s.rate(), frequency=frequency, **terms)


def _any_adjustment(s: Scene) -> Bond:
    adjustment = s.rng.choice(
        ("unadjusted", "following", "modified following", "preceding", "modified preceding", "nearest")
    )
    calendar = s.rng.choice(("XECB", "XSIF+XECB", "XLON", "GB", "GB-ENG", "JP"))
    return s.plain("EUR", calendar, s.rng.choice((1, 2)), payment_adjustment=adjustment)


def _counted(day_count: str, currency: str, calendar: str, frequency: int, **terms: object) -> Callable[[Scene], Bond]:
    return lambda s: s.plain(currency, calendar, frequency, day_count=day_count, **terms)


KINDS: dict[str, Callable[[Scene], Bond]] = {
    "treasury": _treasury,
    "month end": _month_end,
    "bill": _bill,
    "bund": _bund,
    "gilt": _gilt,
    "zero of thirty years": lambda s: _zero(s, "USD", "XSIF", 30, 1),
    "zero": lambda s: _zero(s, "EUR", "XECB", 9, 2),
    "zero that matures": lambda s: _zero(s, "GBP", "XLON", 0, 1),
    "US company": _counted("30/360", "USD", "XFED", 2, settlement_days=1),
    "monthly": _counted("30/360", "USD", "XFED", 12, settlement_days=1, record="10c"),
    "quarterly": _counted("Act/365F", "GBP", "XLON", 4, record="5b"),
    "European": _counted("30E/360", "EUR", "XECB", 1),
    "Swiss": _counted("30E/360 ISDA", "CHF", "XSWX", 1),
    "Australian": _counted("Act/Act ICMA", "AUD", "XASX", 2, ex_dividend="7c", record="8c", accrued_rounding="100:3"),
    "South African manner": _counted("Act/365F", "GBP", "XLON", 2, ex_dividend="10c", record="11c"),
    "Japanese": _counted("30/360", "JPY", "JP", 2, accrued_rounding="100:7 down", settlement_days=1),
    "Japanese cut": _counted("Act/Act ICMA", "JPY", "JP", 2, accrued_rounding="down", settlement_days=1),
    "Kuwaiti": _counted("30/360", "KWD", "XECB", 2),
    "leap": _counted("Act/365L", "GBP", "XLON", 1),
    "leap semi-annual": _counted("Act/365L", "GBP", "XLON", 2),
    "calendar years": _counted("Act/Act ISDA", "EUR", "XECB", 1),
    "Canadian manner": _counted("Act/365 Canada", "USD", "XTSE", 2, settlement_days=1),
    "no leap days": _counted("NL/365", "EUR", "XECB", 1),
    "business days": _counted("Bus/252", "USD", "XFED", 2, settlement_days=1),
    "money market": _counted("Act/360", "EUR", "XECB", 2, payment_adjustment="modified following", adjusted=False),
    "five decimals": _counted("Act/Act ICMA", "EUR", "XECB", 2, accrued_rounding="1000:5"),
    "cut": _counted("30/360", "USD", "XFED", 2, accrued_rounding="down", settlement_days=1),
    "premium": lambda s: _maturing(s, "EUR", "XECB", 1, redemption_price=Fraction(205, 2)),
    "maturing": lambda s: _maturing(s, "USD", "XSIF", 2, settlement_days=1),
    "maturing gilt": lambda s: _maturing(s, "GBP", "GB", 2, settlement_days=1, ex_dividend="6b", record="7b"),
    "company by its market": _company,
    "month-end floater": _month_end_floater,
    "dollar floater": lambda s: _floater(s, "USD", "XSIF", "Act/360"),
    "euro floater": lambda s: _floater(s, "EUR", "XECB", "Act/360"),
    "sterling floater": lambda s: _floater(s, "GBP", "XLON", "Act/365F"),
    "short first": lambda s: _odd_first(s, "EUR", "XECB", 1, "Act/Act ICMA", False),
    "long first": lambda s: _odd_first(s, "USD", "XSIF", 2, "Act/Act ICMA", True),
    "short first in months": lambda s: _odd_first(s, "USD", "XFED", 2, "30/360", False),
    "long first counted": lambda s: _odd_first(s, "GBP", "XLON", 4, "Act/365F", True),
    "odd last": lambda s: _odd_last(s, 1, "Act/Act ICMA"),
    "odd last in months": lambda s: _odd_last(s, 2, "30E/360"),
    "amortising": _amortising,
    "linked": _linked,
    "stepped": _stepped,
    "any adjustment": _any_adjustment,
    "two calendars": lambda s: s.plain("EUR", "XSIF+XECB", 2, settlement_days=s.rng.choice((2, 3))),
    "no cycle": lambda s: s.plain("EUR", "XECB", 1, settlement_days=None),
}


def text(number: Fraction | int | None) -> str:
    """A decimal without needless zeros."""
    if number is None:
        return ""
    whole = f"{float(number):.10f}".rstrip("0").rstrip(".")
    assert Fraction(whole) == number or abs(Fraction(whole) - number) < Fraction(1, 10**9)
    return whole


def row(bond: Bond) -> dict[str, str]:
    """The bond as a row of bonds.csv."""

    def day(value: date | None) -> str:
        return value.isoformat() if value else ""

    told = {
        "bond": bond.bond,
        "description": bond.description,
        "market": bond.market,
        "currency": bond.currency,
        "kind": bond.kind,
        "coupon_rate": text(bond.rate) if bond.kind not in ("zero", "floating") else "",
        "frequency": str(bond.frequency),
        "day_count": bond.day_count,
        "accrual_start": day(bond.accrual_start),
        "first_coupon": day(bond.first_coupon),
        "last_regular_coupon": day(bond.last_regular),
        "maturity": day(bond.maturity),
        "end_of_month": "yes" if bond.end_of_month else "no",
        "payment_adjustment": bond.payment_adjustment,
        "accrual_adjustment": "adjusted" if bond.adjusted else "unadjusted",
        "calendar": bond.calendar.code,
        "settlement_days": "" if bond.settlement_days is None else str(bond.settlement_days),
        "ex_dividend": bond.ex_dividend,
        "record": bond.record,
        "quote": bond.quote,
        "redemption_price": text(bond.redemption_price),
        "accrued_rounding": bond.accrued_rounding,
    }
    return {**told, **bond.written}
