"""A morning, from a folder of files to a ranked list of breaks, as one list of plain steps.

`STEPS` is the whole of it, to be read aloud. Each step takes what is known so far and returns it with something added; none edits what
it was given and none reaches back. The only turn is in the middle: where broker and desk tell different facts, the bank's cash may
say which of them was dealt, so trades are reckoned again once the cash is paired.
"""

from __future__ import annotations

import datetime
from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler.bonds.terms import Terms
from reconciler.breaks import causes, finding, proposing, ranking, stake
from reconciler.breaks.given import Given
from reconciler.expected import coupons, settlements
from reconciler.expected.terms import resolve_terms
from reconciler.intake import folder as intake
from reconciler.matching import cash as cash_matching
from reconciler.matching import trades as trade_matching
from reconciler.problems import Problem
from reconciler.procedures import disputes
from reconciler.procedures import totals as totals_of
from reconciler.procedures.strangers import strangers
from reconciler.records import STATES, Table, Words, concat, unify
from reconciler.settings import Settings

Progress = Callable[[str, int, int], None]
"""Told the step in words, how many steps are done and how many there are; while files are read, the rows of the file just read and 0.
May raise to stop the morning."""


class Stopped(BaseException):
    """The morning was stopped because `cancelled` said so."""


@dataclass(frozen=True)
class Day:
    """A reconciled morning. `items`, `allocations` and `breaks` are tables of records.py; row i of `terms` is row i of the bonds."""

    date: datetime.date
    since: datetime.date
    source: Any
    settings: Settings
    terms: Terms
    items: Table
    allocations: Table
    breaks: Table
    proposals: Table
    explanations: Table
    """Everything that fits each break (schema causes.EXPLANATIONS); `break_row` is the row of `breaks`."""
    problems: tuple[Problem, ...]
    summary: Mapping[str, int] = field(default_factory=dict)
    """How many items there are of each state."""

    @property
    def unread(self) -> tuple[str, ...]:
        """Files that could not be read or recognised, so that what they tell is missing; a file without rows is not among them."""
        hollow = {problem.file for problem in self.problems if problem.code == "header-only"}
        return tuple(file.name for file in self.source.files if file.layout == "not read" and file.name not in hollow)


@dataclass(frozen=True)
class State:
    """What the steps hand on; each fills in more of it."""

    folder: Path
    date: np.datetime64
    since: np.datetime64
    settings: Settings
    layouts: tuple[Path, ...] = ()
    progress: Progress | None = None
    source: Any = None
    terms: Any = None
    term_problems: tuple[Problem, ...] = ()
    strangers: tuple[Problem, ...] = ()
    pairs: Any = None
    trades: Any = None
    payments: Any = None
    paid: Any = None
    items: Any = None
    given: Any = None
    breaks: Any = None
    explanations: Any = None


def read(state: State) -> State:
    """Reading the files"""
    tell = state.progress
    seen = None if tell is None else lambda file, rows: tell(f"Reading {file}", rows, 0)
    return replace(state, source=intake.read(state.folder, seen, state.layouts))


def resolve(state: State) -> State:
    """Filling in the bonds' terms"""
    source = state.source
    terms, problems = resolve_terms(source.bonds, source.rates, source.factors, source.closings)
    # a bond whose rows were rejected stands without terms and without a line; what is wrong with it was told with the row
    told = tuple(problem for problem in problems if problem.line > 0)
    return replace(state, terms=terms, term_problems=told, strangers=strangers(source))


def pair_trades(state: State) -> State:
    """Pairing tickets with confirmations"""
    pairs = trade_matching.pair_trades(state.source.tickets, state.source.confirmations)
    totals = totals_of.with_set_aside(state.source.totals, state.source.confirmations, pairs.set_aside)
    return replace(state, pairs=pairs, source=replace(state.source, totals=totals))


def expect_settlements(state: State) -> State:
    """Reckoning what trades settle for"""
    return replace(state, trades=_trades(state))


def expect_payments(state: State) -> State:
    """Reckoning coupons and redemptions"""
    source = state.source
    payments = coupons.expect_coupons(
        state.terms, source.bonds, source.holdings, state.trades, state.since, state.date, state.pairs.repeats
    )
    return replace(state, payments=payments)


def pair_cash(state: State) -> State:
    """Pairing the bank's entries with payments"""
    return _with_cash(state, concat([state.trades, state.payments]))


def reckon_again(state: State) -> State:
    """Reckoning disputed trades by the cash"""
    source = state.source
    rows = disputes.disputed(state.trades, state.items, source.tickets, source.confirmations)
    if not len(rows):
        return state
    part = replace(state, pairs=disputes.part_of(state.pairs, rows))
    anew = _trades(part, state.items["bank_minor"][rows], state.items["bank_date"][rows])
    if disputes.same(anew, state.trades.take(rows), disputes.RECKONED):
        return state
    again = expect_payments(replace(state, trades=disputes.put_in(state.trades, rows, anew)))
    if not disputes.same(again.payments, state.payments):
        return _with_cash(again, concat([again.trades, again.payments]), state)
    items = disputes.put_in(state.items, rows, anew)
    return replace(again, items=items, given=replace(state.given, items=items))


def find_breaks(state: State) -> State:
    """Finding breaks"""
    items, breaks = finding.find_breaks(state.given)
    return replace(state, items=items, breaks=proposing.mention(state.given, breaks, state.paid.proposals))


def weigh(state: State) -> State:
    """Weighing what is at stake"""
    return replace(state, breaks=stake.weigh(state.given, state.breaks))


def rank(state: State) -> State:
    """Putting the most urgent first"""
    return replace(state, breaks=ranking.rank(state.given, state.breaks))


def name_causes(state: State) -> State:
    """Searching for causes"""
    source, given = state.source, state.given
    breaks, explanations = causes.name_causes(
        state.items, source.tickets, source.confirmations, state.terms, state.breaks, given.digits
    )
    return replace(state, breaks=breaks, explanations=explanations)


STEPS: tuple[Callable[[State], State], ...] = (
    read,
    resolve,
    pair_trades,
    expect_settlements,
    expect_payments,
    pair_cash,
    reckon_again,
    find_breaks,
    weigh,
    rank,
    name_causes,
)


def _with_cash(state: State, payments: Table, before: State | None = None) -> State:
    """The payments with what the bank paid, and everything the search for breaks looks at.

    With `before`, cash stays paired with payments that are as they were.
    """
    source, pairs = state.source, state.pairs
    if before is None:
        paid = cash_matching.pair_cash(payments, source.cash, pairs.repeats, source.confirmations)
    else:
        was = concat([before.trades, before.payments])
        paid = cash_matching.pair_again(payments, source.cash, was, before.paid, pairs.repeats, source.confirmations)
    items, allocations = cash_matching.with_bank(payments, source.cash, paid)
    given = Given(
        items, source.tickets, source.confirmations, source.cash, allocations, concat([pairs.repeats, paid.repeats]), state.terms,
        _faults(state), state.date, state.settings, _accounts(source),
    )  # fmt: skip
    return replace(state, paid=paid, items=items, given=given)


def _accounts(source: Any) -> pa.Array:
    """The account names that the desk's own files use."""
    return unify(source.tickets["account"], source.holdings["account"], source.cash["account"])[0].values


def _trades(state: State, bank_minor: Any = None, bank_date: Any = None) -> Table:
    source = state.source
    return settlements.expect_trades(
        state.terms, source.bonds, source.tickets, source.confirmations, state.pairs, bank_minor, bank_date
    )


def _faults(state: State) -> Words:
    """What is wrong with each bond's terms, blank where nothing is: of several faults the first."""
    lines = state.source.bonds["line"].tolist()
    reasons = ["" if line > 0 else "its row in bonds.csv was rejected." for line in lines]
    row_of = {line: row for row, line in enumerate(lines)}
    for problem in reversed(state.term_problems):
        if problem.line in row_of:
            named = f"{problem.column} '{problem.value}'" if problem.value else problem.column
            reasons[row_of[problem.line]] = f"{named} {problem.reason.partition(' terms of ')[2].partition(' ')[2]}"
    return Words.of(reasons)


def run(
    folder: Path,
    date: datetime.date,
    since: datetime.date | None = None,
    settings: Settings | None = None,
    progress: Progress | None = None,
    cancelled: Callable[[], bool] | None = None,
    layouts: tuple[Path, ...] = (),
    meanwhile: Callable[[Day], None] | None = None,
) -> Day:
    """Reconciles a folder as of a date.

    Coupons and redemptions are expected from `since` (default: so many weekdays before `date` as the settings say). `layouts` are
    folders of layouts beside the morning's own and the shipped ones. `meanwhile` is given the day as it stands before causes are
    searched for (its `explanations` are None), so that it can be looked at already. Raises KnownError when nothing can be reconciled.
    """
    told = settings or Settings()
    today = np.datetime64(date, "D")
    first = np.datetime64(since, "D") if since is not None else np.busday_offset(today, -told["since_days"], roll="forward")
    state = State(Path(folder), today, first, told, layouts, progress)
    for number, step in enumerate(STEPS):
        if cancelled is not None and cancelled():
            raise Stopped
        if progress is not None:
            progress(str(step.__doc__), number, len(STEPS))
        if step is name_causes and meanwhile is not None:
            meanwhile(_day(state))
        state = step(state)
    return _day(state)


def _day(state: State) -> Day:
    """The outcome, items in the order of their names."""
    problems = tuple(sorted({*state.source.problems, *state.term_problems, *state.strangers}))
    source = replace(state.source, problems=problems)
    order = np.argsort(state.items["item"].rank(), kind="stable")
    place = np.empty(len(order), np.int64)
    place[order] = np.arange(len(order))
    items = state.items.take(order)
    breaks = state.breaks.with_columns(item_row=place[state.breaks["item_row"]])
    paid = state.given.allocations
    allocations = paid.with_columns(item_row=place[paid["item_row"]])
    proposals = state.paid.proposals.with_columns(item_row=place[state.paid.proposals["item_row"]])
    counts = Counter(items["state"].to_list())
    return Day(
        date=state.date.astype(object), since=state.since.astype(object), source=source, settings=state.settings, terms=state.terms,
        items=items, allocations=allocations, breaks=breaks, proposals=proposals,
        explanations=state.explanations, problems=problems, summary={name: counts[name] for name in STATES},
    )  # fmt: skip
