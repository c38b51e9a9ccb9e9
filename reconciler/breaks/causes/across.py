"""Some breaks explain each other: cash that nothing explains and a payment that has none, an entry and its reversal, one broker's habit.

Looked at over all breaks of the morning at once. An unexplained entry that equals, to the last unit and as the only one, a payment
without cash on another account is named with it; two unexplained entries that undo each other likewise. Neither is proof (amounts
recur), so both are `likely` and nothing is paired. A cause that stands on several payments of one broker says so, because a habit is put
right once, not payment by payment.
"""

from __future__ import annotations

from collections import Counter, defaultdict
from typing import Any

from reconciler.breaks.causes.singles import FOLLOWS
from reconciler.records import MISSING, Table, Words

OTHER_ACCOUNT = "booked to another account"
UNDONE = "undone by another entry"

_ASK_MOVE = "Ask the bank to move the entry to the account of the payment."
_ASK_BOTH = "Ask the bank what the two entries were for; together they come to nothing."


def across(items: Table, breaks: Table) -> Table:
    """The breaks with what other breaks say about them; only breaks without a cause, and sentences of shared causes, change."""
    columns = {name: breaks[name].to_list() for name in ("cause", "certainty", "explanation", "next_step")}
    kinds, item_rows = breaks["break"].to_list(), breaks["item_row"].tolist()
    lone = [row for row, kind in enumerate(kinds) if kind == "unexplained cash" and not columns["cause"][row]]
    unpaid = [row for row, kind in enumerate(kinds) if kind == "no cash" and not columns["cause"][row]]
    _other_accounts(items, columns, lone, unpaid, item_rows)
    _undone(items, columns, [row for row in lone if not columns["cause"][row]], item_rows)
    _habits(items, breaks, columns, item_rows)
    return breaks.with_columns(**{name: Words.of(texts) for name, texts in columns.items()})


def _say(columns: dict[str, list[str]], row: int, cause: str, sentence: str, step: str) -> None:
    columns["cause"][row], columns["certainty"][row] = cause, "likely"
    columns["explanation"][row] = f"{columns['explanation'][row]} {sentence}"
    columns["next_step"][row] = step


def _other_accounts(
    items: Table, columns: dict[str, list[str]], lone: list[int], unpaid: list[int], item_rows: list[int]
) -> None:
    """An entry and a payment of the same amount and currency on different accounts, each the only one of its amount."""
    entries, payments = _by_amount(items, lone, item_rows, "bank_minor"), _by_amount(items, unpaid, item_rows, "terms_minor")
    for key, rows in sorted(entries.items()):
        partners = payments.get(key, [])
        if len(rows) != 1 or len(partners) != 1:
            continue
        entry, payment = items.row(item_rows[rows[0]]), items.row(item_rows[partners[0]])
        if entry["account"] == payment["account"]:
            continue
        _say(columns, rows[0], OTHER_ACCOUNT, f"It equals the cash missing on {payment['item']}, account {payment['account']}.", _ASK_MOVE)
        _say(columns, partners[0], OTHER_ACCOUNT,
             f"Entry {entry['bank_entries']} on account {entry['account']} is of the same amount and explained by nothing else.", _ASK_MOVE)  # fmt: skip


def _undone(items: Table, columns: dict[str, list[str]], lone: list[int], item_rows: list[int]) -> None:
    """Two unexplained entries of one account that come to nothing together, each the only one of its amount."""
    entries = _by_amount(items, lone, item_rows, "bank_minor", with_account=True)
    for key, rows in sorted(entries.items()):
        others = entries.get((*key[:2], -key[2]), [])
        if key[2] > 0 and len(rows) == 1 and len(others) == 1:
            for one, other in ((rows[0], others[0]), (others[0], rows[0])):
                name = items["bank_entries"].text(item_rows[other])
                _say(columns, one, UNDONE, f"Entry {name} is of the same amount the other way round.", _ASK_BOTH)


def _by_amount(
    items: Table, rows: list[int], item_rows: list[int], name: str, with_account: bool = False
) -> dict[tuple[str, str, int], list[int]]:
    out: dict[tuple[str, str, int], list[int]] = defaultdict(list)
    for row in rows:
        at = item_rows[row]
        minor = int(items[name][at])
        if minor not in (0, MISSING):
            out[items["currency"].text(at), items["account"].text(at) if with_account else "", minor].append(row)
    return out


def _habits(items: Table, breaks: Table, columns: dict[str, list[str]], item_rows: list[int]) -> None:
    """Says on how many other payments of the same broker a cause stands."""
    parties = breaks["party"].to_list()
    seen: dict[tuple[str, str], set[int]] = defaultdict(set)
    keys: list[tuple[str, str] | None] = []
    brokers: Any = items["broker"].take(breaks["item_row"]).to_list()
    for row, (party, broker) in enumerate(zip(parties, brokers, strict=True)):
        cause = columns["cause"][row]
        shared = party == "Broker" and broker and cause and cause != FOLLOWS.name
        keys.append((broker, cause) if shared else None)
        if shared:
            seen[broker, cause].add(item_rows[row])
    counts = Counter({key: len(rows) for key, rows in seen.items()})
    for row, key in enumerate(keys):
        others = counts[key] - 1 if key else 0
        if key and others > 0:
            word = "payment" if others == 1 else "payments"
            columns["explanation"][row] += f" The same cause stands on {others:,} other {word} of {key[0]}."
