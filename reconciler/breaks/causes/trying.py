"""One recomputed payment after the other, held against all that a party told.

`Search` keeps a stretch of cases with their facts, what fits so far, and every figure that was tried: a fit means little without the
number of figures that could have fitted by accident (judging).
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np

from reconciler.bonds.terms import Terms
from reconciler.breaks.causes import reckoning
from reconciler.breaks.causes.cases import BANK, Cases
from reconciler.breaks.causes.judging import LOOSE, accidental
from reconciler.breaks.causes.variants import CHARGE, Payment, Variant
from reconciler.money import MISSING

Array = np.ndarray[Any, Any]
Hypothesis = tuple[Variant, ...]

_FACTS = ("accrued_days", "accrued", "principal", "amount")


@dataclass
class Fits:
    """What fits: flat pairs (case, hypothesis number), hypotheses in the order tried, and the chance of an accident per case."""

    case: list[Array] = field(default_factory=list)
    number: list[Array] = field(default_factory=list)
    hypotheses: list[Hypothesis] = field(default_factory=list)
    tried: int = 0
    figures: dict[Hypothesis, Payment] = field(default_factory=dict)

    def flat(self) -> tuple[Array, Array]:
        """Case numbers and hypothesis numbers."""
        if not self.case:
            return np.zeros(0, np.int64), np.zeros(0, np.int64)
        return np.concatenate(self.case), np.concatenate(self.number)


class Search:
    """The search over one stretch of cases."""

    def __init__(self, cases: Cases, terms: Terms) -> None:
        self.cases = cases
        self.facts = reckoning.of_cases(cases, terms)
        self.base = reckoning.pay(self.facts)
        self.told = {name: getattr(cases.told, name) for name in _FACTS}
        self.silent = {name: column == MISSING for name, column in self.told.items()}
        self._silent_amounts = bool(self.silent["amount"].any())
        self.right = self._right()
        self.fits = Fits()
        self.numbers: dict[str, int] = {}
        self.open = np.ones(len(cases), np.bool_)
        self.tried: list[tuple[Payment, Array, Array]] = []
        self._kinds: dict[tuple[tuple[tuple[int, ...], bool], ...], Array] = {}

    def _right(self) -> Array:
        """The figure that the told one is measured against: the amount as the terms have it."""
        return self.cases.terms.amount

    def consistent(self, payment: Payment, rows: Array) -> Array:
        """Where every told figure but the amount comes out, for some of the cases."""
        ok = np.ones(len(rows), np.bool_)
        for name in _FACTS[:3]:
            ok &= self.silent[name][rows] | (self.told[name][rows] == getattr(payment, name)[rows])
        return ok

    def try_out(self, hypothesis: Hypothesis, payment: Payment, applies: Array, amount: Array | None = None) -> None:
        """Holds one recomputed payment against what was told, for the cases still open; `amount` stands for the payment's own."""
        amount = payment.amount if amount is None else amount
        self.fits.tried += 1
        self.tried.append((payment, amount, applies))
        near = np.flatnonzero((self.told["amount"] == amount) & applies & self.open)
        if self._silent_amounts:
            near = np.union1d(near, np.flatnonzero(self.silent["amount"] & applies & self.open))
        found = near[self.consistent(payment, near)] if len(near) else near
        if len(found):
            self.fits.case.append(found)
            self.fits.number.append(np.full(len(found), len(self.fits.hypotheses)))
            self.fits.hypotheses.append(hypothesis)

    def kinds(self, *variants: Variant) -> Array:
        """Where all the variants apply to the kind of payment."""
        key = tuple((variant.kinds, variant.cause is CHARGE) for variant in variants)
        if key not in self._kinds:
            ok = np.ones(len(self.cases), np.bool_)
            for kinds, bank_alone in key:
                ok &= np.isin(self.cases.kind, kinds)
                if bank_alone:
                    ok &= self.cases.party == BANK
            self._kinds[key] = ok
        return self._kinds[key]

    def chances(self, rows: Array) -> Array:
        """Expected accidental fits for some of the cases, given all figures tried so far.

        Only figures that the other told facts allow can fit by accident. Where the told accrued may be the noise itself and the amount
        merely follows it, the accrued of every try counts.
        """
        told = self.told["amount"][rows]
        # measured from what the party's own facts give; where that is what it told, from the terms
        own, own_accrued = self.base.amount[rows], self.base.accrued[rows]
        right = np.where((told == own) | (own == MISSING), self.right[rows], own)
        accrued = np.where(self.told["accrued"][rows] == own_accrued, self.cases.terms.accrued[rows], own_accrued)
        strict, loose = np.empty((len(rows), len(self.tried)), np.int64), np.empty((len(rows), len(self.tried)), np.int64)
        for place, (payment, amount, applies) in enumerate(self.tried):
            known = applies[rows] & (amount[rows] != MISSING)
            strict[:, place] = np.where(known & self.consistent(payment, rows), amount[rows], right)
            mine = payment.accrued[rows]
            loose[:, place] = np.where(known & (mine != MISSING), mine, accrued)
        by_amount = accidental(right, told, strict)
        asked = ~self.silent["accrued"][rows] & (self.told["accrued"][rows] != accrued)
        by_accrued = accidental(accrued, np.where(asked, self.told["accrued"][rows], accrued), loose)
        return np.where(asked & (by_accrued >= LOOSE), np.maximum(by_amount, by_accrued), by_amount)


def differs(payment: Payment, base: Payment) -> Array:
    """Where a payment differs from another in a figure that a party may tell."""
    return (payment.amount != base.amount) | (payment.accrued != base.accrued) | (payment.principal != base.principal)


def explained(search: Search) -> Array:
    """The cases that something fits."""
    case, _number = search.fits.flat()
    return np.unique(case)
