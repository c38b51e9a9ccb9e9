"""A broker's file that is not understood is settled once, by a person: which column is which fact, how figures and days are told.

`look` reads the first rows of a file as text, with what is known of its columns beyond doubt. `becomes` reads the same rows under what
was assigned, so that every value is seen before anything is saved. `save` writes the layout into the user's own folder,
where the next morning finds it. The reading is the intake's own; nothing is understood here in another way.
"""

from __future__ import annotations

import re
import tempfile
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pyarrow as pa

from reconciler import settings, texts
from reconciler.intake import cells, layouts
from reconciler.intake.confirmations import DATES, NUMBERS
from reconciler.intake.folder import shelf
from reconciler.intake.layouts import Layout
from reconciler.intake.reading import Raw, Unreadable, content, load
from reconciler.problems import KnownError, Problem

FIRST_BYTES = 200_000
FIRST_ROWS = 40
KINDS = (".csv", ".txt", ".tsv")

FACTS: tuple[tuple[str, str, str], ...] = (
    # our name, what it is called, what it means
    ("bond", "Bond", "ISIN, CUSIP, SEDOL or the desk's code"), ("side", "Side", "Buy or sell"),
    ("face", "Face", "What is dealt, in the bond's currency"), ("price", "Price", "Clean, per 100, or in the bond's own quote"),
    ("settlement_amount", "Settlement amount", "All that is paid"), ("settlement_date", "Settlement date", "When it is paid"),
    ("trade_date", "Trade date", "When it was dealt"), ("accrued", "Accrued", "Accrued interest, an amount"),
    ("accrued_days", "Accrued days", "Days of accrued interest"), ("principal", "Principal", "Face times price"),
    ("fees", "Fees", "Commission, charges, tax"), ("currency", "Currency", "Three letters"),
    ("account", "Account", "Ours"), ("broker_reference", "Broker's reference", "Names this confirmation"),
    ("desk_reference", "Our ticket", "The ticket's number as the broker tells it"), ("yield", "Yield", "In percent"),
    ("status", "Status", "New, amended or cancelled"), ("broker", "Broker", "Where one file holds several brokers"),
    ("description", "Description", "The bond in words"),
)  # fmt: skip


@dataclass(frozen=True)
class Choice:
    """One thing about a whole file that can be chosen: `values` are (value, words), the first stands for "as found"."""

    key: str
    title: str
    help: str
    values: tuple[tuple[str, str], ...]


CHOICES: tuple[Choice, ...] = (
    Choice("decimal", "Decimals", "What stands before the decimals of a figure",
           (("", "as found"), (".", "1,234.56"), (",", "1.234,56"))),
    Choice("date", "Days", "How days are written", (("", "as found"), ("%d/%m/%Y", "31/12/2026"), ("%m/%d/%Y", "12/31/2026"),
           ("%d.%m.%Y", "31.12.2026"), ("%d-%m-%Y", "31-12-2026"), ("%Y-%m-%d", "2026-12-31"), ("%Y%m%d", "20261231"),
           ("%d %b %Y", "31 Dec 2026"))),
    Choice("side_told_by", "Sides", "Whose buy and sell the file speaks of", (("", "ours"), ("broker", "the broker's"))),
    Choice("face_scale", "Faces", "The unit faces are told in", (("", "in full"), ("1000", "in thousands"))),
)  # fmt: skip


@dataclass(frozen=True)
class Heading:
    """One column of a file: its heading, its first values, and the fact it is beyond doubt ("" none)."""

    name: str
    values: tuple[str, ...]
    suggested: str = ""


@dataclass(frozen=True)
class Look:
    """The first rows of a file as text, what is known of it, and what has to be settled."""

    file: str
    broker: str
    headings: tuple[Heading, ...]
    questions: tuple[str, ...]
    options: Mapping[str, str]
    raw: Raw
    layout: Layout


@dataclass(frozen=True)
class Value:
    """What one value becomes, or why it cannot be read."""

    text: str
    problem: str = ""


@dataclass(frozen=True)
class Seen:
    """What the first rows become: per heading that is assigned its values, what is wrong as a whole, words of sides not known."""

    columns: Mapping[str, tuple[Value, ...]]
    problems: tuple[str, ...]
    words: tuple[str, ...] = ()


def files(folder: Path, problems: Collection[Problem | str] = ()) -> list[tuple[str, str]]:
    """The confirmations files of a morning and what is known of each, those with problems first."""
    place = folder / "confirmations"
    names = sorted(path.name for path in place.iterdir() if path.suffix.lower() in KINDS) if place.is_dir() else []
    told = {one.file: one for one in problems if isinstance(one, Problem) and not one.line}
    unread = [name for name in names if f"confirmations/{name}" in told]
    return [(name, "not read") for name in unread] + [(name, "read") for name in names if name not in unread]


def look(folder: Path, file: str, problems: Collection[Problem | str] = (), brokers: Sequence[str] = ()) -> Look:
    """The first rows of a confirmations file; raises KnownError when not even these can be had."""
    name = f"confirmations/{file}"
    known = shelf(folder, (settings.user_folder() / "layouts",), [])
    layout = next((one for one in known if one.matches(file)), Layout())
    try:
        raw = _first_rows(folder / "confirmations" / file, name, layout)
    except Unreadable as failure:
        raise KnownError(failure.problem) from None
    suggested = _suggested(raw, layout)
    headings = tuple(
        Heading(heading, tuple(raw.columns[place].slice(0, FIRST_ROWS).to_pylist()), suggested.get(place, ""))
        for place, heading in enumerate(raw.headings)
        if heading and raw.headings.index(heading) == place
    )
    questions = tuple(one.reason[:1].upper() + one.reason[1:] for one in problems if isinstance(one, Problem) and one.file == name)
    options = {"decimal": layout.decimal or "", "date": layout.date or "",
               "side_told_by": "broker" if layout.side_told_by == "broker" else "",
               "face_scale": str(layout.scale["face"]) if layout.scale.get("face", 1) != 1 else ""}  # fmt: skip
    broker = layout.broker or layouts.broker_of(file, brokers)
    return Look(file, broker, headings, questions, options, raw, layout)


def _first_rows(path: Path, name: str, layout: Layout) -> Raw:
    data = content(path, name)[:FIRST_BYTES]
    end = data.rfind(b"\n")
    data = data if len(data) < FIRST_BYTES or end < 0 else data[: end + 1]
    with tempfile.TemporaryDirectory() as place:
        part = Path(place) / "first_rows.csv"
        part.write_bytes(data)
        told = {"encoding": layout.encoding, "delimiter": layout.delimiter, "skip_rows": layout.skip_rows}
        try:
            return load(part, name, **told, is_header=layouts.is_header, is_footer=layouts.is_footer)  # type: ignore[arg-type]
        except Unreadable as failure:
            if failure.problem.code != "no-header":
                raise
        # nothing is known of these headings: the first line with as many cells as any is taken for them
        widest = _widest(part, name)
        return load(part, name, **told, is_header=lambda row: _filled(row) >= widest, is_footer=layouts.is_footer)  # type: ignore[arg-type]


def _filled(row: Sequence[str]) -> int:
    return sum(1 for cell in row if cell.strip())


def _widest(path: Path, name: str) -> int:
    seen = [0]

    def note(row: Sequence[str]) -> bool:
        seen.append(_filled(row))
        return False

    try:
        load(path, name, is_header=note)
    except Unreadable:
        pass
    return max(2, max(seen[:20]))


def _suggested(raw: Raw, layout: Layout) -> dict[int, str]:
    """Column -> fact, where the layout or the heading leaves no doubt."""
    found, _problems = layouts.assign(layout, raw.headings, raw.file)
    out = {place: fact for fact, place in found.items()}
    for fact, places in layouts.candidates(raw.headings).items():
        sure = [place for place, certain in places if certain and place not in out]
        if fact not in out.values() and len(sure) == 1:
            out[sure[0]] = fact
    return out


def becomes(
    seen: Look, assignment: Mapping[str, str], options: Mapping[str, str], sides: Mapping[str, str] | None = None
) -> Seen:
    """What the first values become under what is assigned (heading -> fact), chosen (CHOICES) and said of words of sides."""
    problems = list(_doubts(assignment))
    columns = {one.name: pa.array([text or "" for text in one.values], pa.string()) for one in seen.headings}
    mark, open_mark = _mark(assignment, columns, options)
    if open_mark:
        problems.append("It is open whether 1.234 is one thousand or one and a bit: choose how decimals are written.")
    order, open_order = _order(assignment, columns, options)
    if open_order:
        problems.append("Day and month cannot be told apart: choose how days are written.")
    read, words = {}, []
    for heading, fact in assignment.items():
        column = columns.get(heading)
        if column is None:
            continue
        values = _read(fact, column, mark, order, options, {**dict(seen.layout.values.get("side", {})), **(sides or {})})
        if fact == "side":
            words = [text for text, value in zip(column.to_pylist(), values, strict=True) if value.problem and text.strip()]
        read[heading] = values
    asked = tuple(dict.fromkeys(word.strip() for word in words))
    if asked:
        problems.append(f"Say whether {' and '.join(asked[:6])} is to buy or to sell.")
    return Seen(read, tuple(problems), asked)


def _doubts(assignment: Mapping[str, str]) -> list[str]:
    names = {key: title for key, title, _help in FACTS}
    facts = list(assignment.values())
    doubts = [f"Two columns are said to be the {names[fact].lower()}; only one can be."
              for fact in dict.fromkeys(facts) if facts.count(fact) > 1]  # fmt: skip
    missing = [names[fact].lower() for fact in layouts.ESSENTIAL if fact not in facts]
    if missing:
        doubts.append(f"Still to be found: {', '.join(missing)}.")
    return doubts




def _mark(assignment: Mapping[str, str], columns: Mapping[str, pa.Array], options: Mapping[str, str]) -> tuple[str, bool]:
    if options.get("decimal"):
        return options["decimal"], False
    proven, undecided = cells.marks((fact, columns[h]) for h, fact in assignment.items() if fact in NUMBERS and h in columns)
    mark = cells.settled(proven)
    return (mark, False) if mark else (".", bool(proven) or bool(undecided))


def _order(assignment: Mapping[str, str], columns: Mapping[str, pa.Array], options: Mapping[str, str]) -> tuple[str, bool]:
    told = [text for heading, fact in assignment.items() if fact in DATES and heading in columns
            for text in columns[heading].to_pylist()]  # fmt: skip
    if options.get("date") or not cells.has_slashed(told):
        return "", False
    order = cells.settled(cells.slashed(told))
    return order, not order


def _read(
    fact: str, column: pa.Array, mark: str, order: str, options: Mapping[str, str], sides: Mapping[str, str]
) -> tuple[Value, ...]:
    if fact in ("face", "accrued", "principal", "fees", "settlement_amount"):
        scale = int(options.get("face_scale") or 1) if fact == "face" else 1
        found = cells.amounts(column, np.full(len(column), 4, np.int64), mark, scale)
        return _values(found, texts.decimals(found.values, 4, at_least=2, grouped=True))
    if fact == "price":
        found = cells.prices(column, mark)
        return _values(found, texts.decimals(found.values, 12))
    if fact == "yield":
        found = cells.numbers(column, 12, mark)
        return _values(found, texts.decimals(found.values, 12))
    if fact == "accrued_days":
        found = cells.wholes(column)
        return _values(found, texts.whole(found.values))
    if fact in DATES:
        found = cells.dates(column, order, options.get("date", ""))
        return _values(found, [texts.long_date(day) for day in found.values])
    if fact == "side":
        turned = -1 if options.get("side_told_by") == "broker" else 1
        told = pa.array([sides.get(text.strip(), text) for text in column.to_pylist()], pa.string())
        found = cells.coded(told, cells.SIDE_WORDS, 0, "is not a side that is known; say what it means.")
        return _values(found, [{1: "we buy", -1: "we sell"}.get(int(side) * turned, "") for side in found.values])
    return tuple(Value(text.strip()) for text in column.to_pylist())


def _values(found: cells.Cells, shown: Any) -> tuple[Value, ...]:
    told = shown.to_pylist() if isinstance(shown, pa.Array) else shown
    return tuple(Value("", found.reason) if bad else Value(text or "") for bad, text in zip(found.bad.tolist(), told, strict=True))


def save(
    seen: Look, broker: str, assignment: Mapping[str, str], options: Mapping[str, str], sides: Mapping[str, str] | None = None
) -> Path:
    """Writes the layout into the user's own folder; returns where. Raises KnownError with what is still to be settled."""
    doubts = list(becomes(seen, assignment, options, sides).problems)
    if not broker and "broker" not in assignment.values():
        doubts.insert(0, "Say which broker the file is from.")
    if doubts:
        raise KnownError(*doubts)
    pattern = re.sub(r"[\d][\d_.-]*[\d]", "*", Path(seen.file).stem) + Path(seen.file).suffix
    values = {name: dict(words) for name, words in seen.layout.values.items()}
    if sides:
        values["side"] = {**values.get("side", {}), **sides}
    scale = dict(seen.layout.scale)
    scale.pop("face", None)
    if options.get("face_scale"):
        scale["face"] = int(options["face_scale"])
    layout = Layout(
        broker=broker, file=pattern, encoding=seen.layout.encoding, delimiter=seen.layout.delimiter,
        decimal=options.get("decimal") or None, date=options.get("date") or None,
        side_told_by=options.get("side_told_by") or "desk", skip_rows=_titles(seen, assignment), footer=seen.layout.footer,
        columns={fact: heading for heading, fact in assignment.items()}, values=values, scale=scale,
    )  # fmt: skip
    place = settings.user_folder() / "layouts"
    path = place / (re.sub(r"[^a-z0-9]+", "_", (broker or Path(seen.file).stem).casefold()).strip("_") + ".toml")
    try:
        place.mkdir(parents=True, exist_ok=True)
        path.write_text(layouts.to_toml(layout), encoding="utf-8")
    except OSError as fault:
        raise KnownError(f"The layout cannot be written to {place}: {fault.strerror or fault}.") from fault
    return path


def _titles(seen: Look, assignment: Mapping[str, str]) -> int | None:
    """Title lines above the headings, told only where fewer than four headings could name the line by themselves."""
    return seen.raw.header_line - 1 if len(assignment) < 4 and seen.raw.header_line > 1 else seen.layout.skip_rows
