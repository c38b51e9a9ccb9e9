"""A house that deals in round amounts: the same sums again and again, on few accounts and days, and the truth of every entry is known.

Where nothing but the amount could tell payments apart, staying apart is right and pairing wrongly is not. What cannot be told at all, half
of a split payment that equals another payment of that account and day to the cent, is allowed for: two in a thousand.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from reconciler.matching.cash import pair_cash
from reconciler.records import CASH, ITEMS, Table, table

ACCOUNTS, BONDS, DAYS = 8, 120, 5
Truth = list[tuple[int, ...]]


def _crowd(size: int, named: float, bonded: float) -> tuple[Table, Table, Truth]:
    """Payments and entries: some named, some with a bond only, some with neither; 2 % in two parts, 1 % missing, 1 % wrong, 1 % strangers."""
    chance = np.random.default_rng(7)
    account, bond = chance.integers(0, ACCOUNTS, size), chance.integers(0, BONDS, size)
    day = np.datetime64("2026-03-23") + chance.integers(0, DAYS, size)
    amount = chance.choice([-1, 1], size) * chance.choice([1, 2, 5, 10, 20, 25, 50], size) * chance.choice([10**6, 10**7, 10**8], size)
    items = table(
        ITEMS, item=[f"trade T{n:06d}" for n in range(size)], kind=["trade"] * size, account=[f"ACC-{n}" for n in account],
        bond=[f"ZZ{n:010d}" for n in bond], currency=["EUR"] * size, ticket=[f"T{n:06d}" for n in range(size)], terms_minor=amount,
        terms_date=day,
    )  # fmt: skip
    told: list[tuple[int, Any, int, str, str, tuple[int, ...]]] = []
    for n in range(size):
        draw, manner = chance.random(), chance.random()
        if draw < 0.01:
            continue
        name, known = (f"T{n:06d}" if manner < named else ""), (f"ZZ{bond[n]:010d}" if named <= manner < named + bonded else "")
        parts = [int(amount[n])]
        if draw < 0.02:
            parts = [int(amount[n]) - 7_777_700]
        elif draw < 0.04:
            parts = [int(amount[n]) * 3 // 10, int(amount[n]) - int(amount[n]) * 3 // 10]
        told += [(int(account[n]), day[n], part, name, known, (n,)) for part in parts]
        if draw > 0.99:
            told.append((int(chance.integers(0, ACCOUNTS)), day[n], int(chance.integers(10**5, 10**9)), "", "", ()))
    told = [told[n] for n in chance.permutation(len(told))]
    cash = table(
        CASH, entry=[f"E{n:06d}" for n in range(len(told))], account=[f"ACC-{one[0]}" for one in told], currency=["EUR"] * len(told),
        value_date=np.array([one[1] for one in told]), amount_minor=[one[2] for one in told], reference=[one[3] for one in told],
        bond=[one[4] for one in told],
    )  # fmt: skip
    return items, cash, [one[5] for one in told]


def _wrong(items: Table, cash: Table, truth: Truth) -> tuple[int, int]:
    """How many entries are paired with a payment that anybody could tell from the true one, and how many are paired at all."""
    allocations = pair_cash(items, cash).allocations
    told = list(zip(items["account"].to_list(), items["terms_date"].tolist(), items["terms_minor"].tolist(), strict=True))
    bonds, entry_bonds = items["bond"].to_list(), cash["bond"].to_list()
    found: dict[int, list[int]] = {}
    for item, entry in zip(allocations["item_row"].tolist(), allocations["cash_row"].tolist(), strict=True):
        found.setdefault(entry, []).append(item)

    def looks(entry: int, rows: list[int]) -> list[Any]:
        # what the entry does not tell, nobody can tell
        return sorted((told[n], bonds[n] if entry_bonds[entry] else "") for n in rows)

    return sum(looks(entry, rows) != looks(entry, list(truth[entry])) for entry, rows in found.items()), len(found)


@pytest.mark.parametrize("named, bonded, least", [(0.5, 0.4, 0.95), (0.0, 0.9, 0.88), (0.0, 1.0, 0.98), (0.0, 0.0, 0.25)])
def test_round_amounts_are_seldom_paired_wrongly(named: float, bonded: float, least: float) -> None:
    items, cash, truth = _crowd(8000, named, bonded)
    wrong, paired = _wrong(items, cash, truth)
    assert wrong <= 0.002 * len(cash)
    assert paired >= least * len(cash)


def test_one_account_one_bond_one_amount_is_no_trap() -> None:
    """Twenty thousand equal payments and entries would be four hundred million pairs; they are never made."""
    size = 20_000
    same = {"account": ["A"] * size, "bond": ["ZZ0000000017"] * size, "currency": ["EUR"] * size}
    items = table(ITEMS, item=[f"trade {n}" for n in range(size)], kind=["trade"] * size, terms_minor=np.full(size, 10**8),
                  terms_date=np.full(size, np.datetime64("2026-03-26")), **same)  # fmt: skip
    cash = table(CASH, entry=[f"E{n}" for n in range(size)], amount_minor=np.full(size, 10**8),
                 value_date=np.repeat(np.array(["2026-03-26", "2026-03-27"], "datetime64[D]"), size // 2), **same)  # fmt: skip
    assert len(pair_cash(items, cash).allocations) == size
    assert len(pair_cash(items, cash.with_columns(amount_minor=np.full(size, 99_000_000))).allocations) == 0
