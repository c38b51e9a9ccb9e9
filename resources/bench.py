"""How fast, beside how fast it could be said otherwise: python resources/bench.py [--only NAME …] [--scale 0.1]

Prints a table; nothing here passes or fails by the clock. Each row stands beside a reference run in the same process where there is
one (a loop over trades with QuantLib, a loop in plain Python), sampled and scaled up; the ratio says more than the seconds.
"""

from __future__ import annotations

import argparse
import datetime
import os
import resource
import shutil
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parent.parent))

import bench_data
import numpy as np

from reconciler.bonds import accrual, schedules, settlement
from reconciler.expected.terms import resolve_terms
from reconciler.records import BONDS, CLOSINGS, FACTORS, MISSING, RATES, table

DATA = Path(__file__).resolve().parent.parent / "bench-data"
Row = tuple[str, float, str, float | None]
"""What was measured, seconds, beside what, that in seconds (None: nothing beside it)."""


def best(work: Callable[[], object], times: int = 3) -> float:
    """The shortest of a few runs, in seconds."""
    spent = []
    for _ in range(times):
        start = time.perf_counter()
        work()
        spent.append(time.perf_counter() - start)
    return min(spent)


def book(bonds: int) -> tuple[object, np.ndarray, np.ndarray]:
    """Terms of so many bonds of mixed markets."""
    draw = np.random.default_rng(3)
    start = np.datetime64("2012-01-15") + draw.integers(0, 4000, bonds)
    maturity = np.datetime64("2027-01-15") + draw.integers(0, 9000, bonds)
    markets = [bench_data.MARKETS[n % len(bench_data.MARKETS)] for n in range(bonds)]
    told = table(BONDS, bond=[f"B{n}" for n in range(bonds)], market=markets, accrual_start=start, maturity=maturity,
                 coupon_rate_e9=draw.integers(4, 64, bonds) * 125 * 10**6)  # fmt: skip
    terms, _problems = resolve_terms(told, table(RATES), table(FACTORS), table(CLOSINGS))
    return terms, start, maturity


def arithmetic(scale: float) -> Iterator[Row]:
    """A million trades: coupon period, accrued, settlement amount, payment date."""
    count, bonds = int(1_000_000 * scale), int(100_000 * scale)
    terms, _start, maturity = book(bonds)
    draw = np.random.default_rng(4)
    row = draw.integers(0, bonds, count)
    settle = np.datetime64("2020-01-01") + draw.integers(0, 2500, count)
    settle = np.minimum(settle, maturity[row] - 1)
    face, price = draw.integers(1, 5000, count) * 100_000, draw.integers(20_000, 30_000, count) * (10**12 // 256)
    spent = best(lambda: settlement.reckon(terms, row, settle, face, price))
    few = 2_000
    beside = _quantlib(terms, row[:few], settle[:few]) * count / few
    yield f"{count:,} trades: period, accrued, amount, payment date", spent, "QuantLib, one trade at a time", beside
    beside = _plain(terms, row[:few], settle[:few], face[:few], price[:few]) * count / few
    yield "  the same", spent, "plain Python, one trade at a time", beside


def _quantlib(terms: object, rows: np.ndarray, settle: np.ndarray) -> float:
    import QuantLib as ql

    def day(value: np.datetime64) -> ql.Date:
        plain = value.astype(object)
        return ql.Date(plain.day, plain.month, plain.year)

    calendar = ql.UnitedStates(ql.UnitedStates.GovernmentBond)
    start = time.perf_counter()
    for row, when in zip(rows.tolist(), settle, strict=True):
        schedule = ql.Schedule(
            day(terms.accrual_start[row]), day(terms.maturity[row]), ql.Period(12 // max(int(terms.frequency[row]), 1), ql.Months),
            calendar, ql.Unadjusted, ql.Unadjusted, ql.DateGeneration.Backward, False,
        )  # fmt: skip
        count = ql.ActualActual(ql.ActualActual.ISMA, schedule)
        bond = ql.FixedRateBond(0, 100.0, schedule, [terms.rate_e9[row] / 1e11], count, ql.Following)
        bond.accruedAmount(day(when))
    return time.perf_counter() - start


def _plain(terms: object, rows: np.ndarray, settle: np.ndarray, face: np.ndarray, price: np.ndarray) -> float:
    from fractions import Fraction

    from dateutil.relativedelta import relativedelta

    start = time.perf_counter()
    for at, row in enumerate(rows.tolist()):
        when, maturity = settle[at].astype(object), terms.maturity[row].astype(object)
        months = 12 // max(int(terms.frequency[row]), 1)
        steps = max(((maturity.year - when.year) * 12 + maturity.month - when.month) // months - 1, 0)
        while maturity - relativedelta(months=months * steps) > when:
            steps += 1
        last, following = maturity - relativedelta(months=months * steps), maturity - relativedelta(months=months * (steps - 1))
        share = Fraction((when - last).days, (following - last).days) / max(int(terms.frequency[row]), 1)
        accrued = Fraction(int(face[at])) * int(terms.rate_e9[row]) / 10**11 * share
        principal = Fraction(int(face[at])) * int(price[at]) / 10**14
        _amount = int(accrued + Fraction(1, 2)) + int(principal + Fraction(1, 2))
        paid = following
        while paid.weekday() > 4:
            paid += datetime.timedelta(days=1)
    return time.perf_counter() - start


def full_schedules(scale: float) -> Iterator[Row]:
    """Full schedules of 100,000 bonds: dates, payment dates, exact amounts."""
    bonds = int(100_000 * scale)
    terms, _start, _maturity = book(bonds)
    rows = np.arange(bonds)
    flows = len(schedules.all_coupons(terms, rows))
    yield f"{bonds:,} bonds' schedules ({flows:,} coupons): dates", best(lambda: schedules.all_coupons(terms, rows), 2), "", None

    def amounts() -> None:
        found = schedules.all_coupons(terms, rows)
        accrual.coupon_amounts(terms, found.bond_row, found.unadjusted, np.full(len(found), 100_000_00))

    yield "  with exact amounts", best(amounts, 1), "", None


def causes(scale: float) -> Iterator[Row]:
    """Ten thousand differences that nothing explains: every cause, pair and slip is tried on each; beside a loop over breaks."""
    from reconciler.breaks.causes import search
    from reconciler.breaks.causes.cases import BANK, Cases, Told

    count, bonds = int(10_000 * scale), 500
    terms, _start, maturity = book(bonds)
    draw = np.random.default_rng(5)
    row, side = draw.integers(0, bonds, count), draw.choice(np.array([1, -1], np.int8), count)
    traded = np.datetime64("2026-03-02") + draw.integers(0, 20, count)
    settles = np.minimum(settlement.settlement_dates(terms, row, traded), maturity[row] - 1)
    face, price = draw.integers(1, 5000, count) * 100_000, draw.integers(20_000, 30_000, count) * (10**12 // 256)
    done = settlement.settle(terms, row, settles, face, price)
    amount = -side * (done.principal_minor + done.accrued_minor)
    none, zero, nat = np.full(count, MISSING), np.zeros(count, np.int64), np.full(count, np.datetime64("NaT", "D"))
    ours = Told(side, face, price, zero, done.accrued_days, done.accrued_minor, done.principal_minor, amount, settles, traded)
    told = Told(np.zeros(count, np.int8), none, none, none, none, none, none, amount + draw.integers(-10**6, 10**6, count), settles, nat)
    cases = Cases(np.arange(count), np.full(count, BANK, np.int8), np.zeros(count, np.int8), row, nat, np.full(count, 2), none, none, ours, told)
    spent = best(lambda: search.run(cases, terms), 1)
    tried = search.run(cases.take(np.arange(100)), terms)[0][1].fits.tried
    few = 10
    start = time.perf_counter()
    for one in range(few):
        search.run(cases.take(np.array([one])), terms)
    beside = (time.perf_counter() - start) * count / few
    yield f"{count:,} breaks searched, {tried:,} explanations each", spent, "the same search, one break at a time", beside


def files(scale: float) -> Iterator[Row]:
    """A million rows of CSV to exact typed columns."""
    from reconciler.intake import own

    folder = _morning(scale)
    bonds, _read = own.bonds(folder / "bonds.csv")
    rows = len(own.tickets(folder / "tickets.csv", bonds)[0])
    size = (folder / "tickets.csv").stat().st_size / 1e6

    def raw() -> None:
        import pyarrow.csv as pacsv

        pacsv.read_csv(folder / "tickets.csv")

    spent, beside = best(lambda: own.tickets(folder / "tickets.csv", bonds), 2), best(raw, 2)
    yield f"{rows:,} tickets ({size:.0f} MB) to exact columns", spent, "arrow, types inferred, money as floats", beside


def morning(scale: float) -> Iterator[Row]:
    """A whole morning headless, files in to files out."""
    folder, out = _morning(scale), DATA / "out"
    shutil.rmtree(out, ignore_errors=True)
    command = [sys.executable, "-m", "reconciler", "morning", str(folder), "--date", "2026-03-31", "--out", str(out)]
    start = time.perf_counter()
    done = subprocess.run(command, capture_output=True, text=True, check=False, cwd=DATA.parent, env=os.environ.copy())
    spent = time.perf_counter() - start
    peak = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss / 2**20
    print(done.stdout.strip() or done.stderr.strip()[-500:])
    yield f"a morning of {int(1_000_000 * scale):,} tickets, confirmations, entries; {peak:.1f} GiB", spent, "", None


def _morning(scale: float) -> Path:
    folder = DATA / f"morning-{scale:g}"
    if not (folder / "cash.csv").exists():
        print(f"making {folder.name} …", flush=True)
        bench_data.make(folder, int(1_000_000 * scale), int(100_000 * scale))
    return folder


ROWS: dict[str, Callable[[float], Iterator[Row]]] = {
    "arithmetic": arithmetic,
    "schedules": full_schedules,
    "causes": causes,
    "files": files,
    "morning": morning,
}


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--only", nargs="*", choices=ROWS, default=list(ROWS))
    parser.add_argument("--scale", type=float, default=1.0)
    told = parser.parse_args()
    print(f"{'what':<72}{'seconds':>9}  {'beside':<42}{'seconds':>9}{'ratio':>9}")
    for name in told.only:
        for what, spent, beside, other in ROWS[name](told.scale):
            tail = f"  {beside:<42}{other:>9.2f}{other / spent:>8.0f}x" if other is not None else ""
            print(f"{what:<72}{spent:>9.3f}{tail}", flush=True)


if __name__ == "__main__":
    main()
