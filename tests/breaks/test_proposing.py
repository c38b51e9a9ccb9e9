"""Proposed sums are named where a clerk looks for the cash, and only there."""

from __future__ import annotations

from reconciler import records
from reconciler.breaks import finding, proposing
from reconciler.matching.cash import PROPOSALS
from tests.breaks.hand import One, coupon, entry, given


def _steps(ones: list[One], rows: list[tuple[int, int, int, int]]) -> dict[str, str]:
    morning = given(ones)
    _, breaks = finding.find_breaks(morning)
    columns = dict(zip(PROPOSALS, zip(*rows, strict=True), strict=True)) if rows else {}
    told = proposing.mention(morning, breaks, records.table(PROPOSALS, **columns))
    return dict(zip(told["item"].to_list(), told["next_step"].to_list(), strict=True))


def test_two_entries_that_add_up() -> None:
    ones = [coupon(name="c", bank=[]), entry(amount_minor=5), entry(amount_minor=7), entry(amount_minor=9)]
    steps = _steps(ones, [(0, 0, 0, 5), (0, 0, 1, 7)])
    assert steps["c"].startswith("See whether entries E0 and E1 together come to this payment: the amounts add up. Ask the bank")
    assert steps["bank 001"].startswith("See whether entries E0 and E1 together come from c: the amounts add up. Ask the bank")
    assert steps["bank 003"] == "Ask the bank what entry E2 is for."


def test_one_entry_for_two_payments() -> None:
    steps = _steps([coupon(name="a", bank=[]), coupon(name="b", bank=[]), entry()], [(0, 0, 0, 5), (0, 1, 0, 7)])
    assert steps["b"].startswith("See whether entry E0 comes to a and b together: the amounts add up.")
    assert steps["bank 002"].startswith("See whether this entry comes from a and b: the amounts add up.")


def test_long_sums_are_cut_short() -> None:
    ones = [coupon(name="c", bank=[])] + [entry() for _ in range(6)]
    steps = _steps(ones, [(0, 0, number, 5) for number in range(6)])
    assert "entries E0, E1, E2, E3 and 2 more together" in steps["c"]


def test_without_proposals_nothing_changes() -> None:
    assert _steps([coupon(name="c", bank=[])], [])["c"].startswith("Ask the bank")
