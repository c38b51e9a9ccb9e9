"""Tickets and confirmations as columns that compare."""

from __future__ import annotations

import numpy as np
import pytest

from reconciler.matching.facts import DEALT, TOLD, facts_of
from reconciler.records import MISSING
from tests.matching.hand import confirmations, tickets

ONE = np.array([0]), np.array([0])


def test_equal_rows_have_equal_facts_and_keys() -> None:
    facts = facts_of(tickets({}), confirmations({}))
    assert all(facts.equal(name, ONE).all() for name in TOLD)
    left, right = facts.keys(DEALT, *ONE)
    assert left.tolist() == right.tolist()


def test_what_nobody_told_is_never_equal() -> None:
    untold = {"account": "", "trade_date": "NaT", "side": 0, "price_e12": MISSING}
    facts = facts_of(tickets(untold), confirmations(untold))
    for name in ("account", "trade_date", "side", "price"):
        assert not facts.equal(name, ONE).any()
        assert facts.told((name,), *ONE)[0].tolist() == []
    assert np.isinf(facts.apart("price", ONE)).all()


def test_amounts_in_different_units_are_brought_to_one() -> None:
    facts = facts_of(tickets({"currency": "EUR", "face_minor": 100}), confirmations({"currency": "JPY", "face_minor": 1}))
    assert facts.equal("face", ONE).all()
    assert not facts.equal("price", ONE).any() or facts.desk["price"][0] == facts.broker["price"][0]


@pytest.mark.parametrize("mine, theirs, zeros", [(100, 1000, True), (1_000_000, 1000, True), (100, 100, False), (100, 2000, False)])
def test_zeros_too_many(mine: int, theirs: int, zeros: bool) -> None:
    facts = facts_of(tickets({"face_minor": mine}), confirmations({"face_minor": theirs}))
    assert facts.power_of_ten("face", ONE).tolist() == [zeros]


def test_the_more_alike_the_higher() -> None:
    told = tickets(*({} for _ in range(4)))
    confirmed = confirmations({}, {"settlement_minor": 99_912_344}, {"settlement_minor": 50}, {"settlement_minor": 50, "face_minor": 7})
    facts = facts_of(told, confirmed)
    score = facts.likeness((np.zeros(4, np.int64), np.arange(4))).tolist()
    assert score == sorted(score, reverse=True)
    assert len(set(score)) == 4
