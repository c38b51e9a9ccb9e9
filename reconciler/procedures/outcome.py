"""What a morning leaves behind: four files that other programs read, and a few lines for whoever started it."""

from __future__ import annotations

from collections import Counter
from pathlib import Path

import numpy as np

from reconciler.exports import morning as files
from reconciler.problems import KnownError
from reconciler.procedures.morning import Day
from reconciler.records import BREAK_KINDS
from reconciler.texts import long_date


def write(day: Day, out: Path) -> None:
    """Writes items.csv, breaks.csv, rejects.csv and totals.csv into a folder, which is made if need be. Raises KnownError."""
    try:
        out.mkdir(parents=True, exist_ok=True)
    except OSError as fault:
        raise KnownError(f"The folder {out} cannot be made: {fault.strerror or fault}.") from fault
    entry_row = np.full(len(day.items), -1, np.int64)
    entry_row[day.allocations["item_row"]] = day.allocations["cash_row"]
    told = {
        "Broker": (day.source.confirmations["currency"], day.items["confirmation_row"]),
        "Desk": (day.source.tickets["currency"], day.items["ticket_row"]),
        "Bank": (day.source.cash["currency"], entry_row),
    }
    files.write_items(out / "items.csv", day.items, told)
    files.write_breaks(out / "breaks.csv", day.breaks)
    files.write_rejects(out / "rejects.csv", day.source.rejects)
    files.write_totals(out / "totals.csv", day.source.totals)


def summary_text(day: Day) -> str:
    """The morning in a few lines: how many payments agree, which breaks there are, whether the files tie out."""
    count = len(day.items)
    states = ", ".join(f"{day.summary[name]} {words}" for name, words in
                       (("agrees", "agree"), ("within tolerance", "within tolerance"), ("due", "due today"), ("break", "with breaks")))  # fmt: skip
    lines = [f"{long_date(np.datetime64(day.date))}: {count} payment{'' if count == 1 else 's'}, {states}."]
    kinds = Counter(day.breaks["break"].to_list())
    lines += [f"  {kinds[kind]:>7}  {kind}" for kind in BREAK_KINDS if kinds[kind]]
    read, used, rejected, aside = (int(day.source.totals[f"rows_{name}"].sum()) for name in ("read", "used", "rejected", "set_aside"))
    why = " (rejects.csv says why)" if rejected else ""
    lines.append(f"{read} rows read: {used} used, {rejected} rejected{why}, {aside} set aside.")
    return "\n".join(lines)
