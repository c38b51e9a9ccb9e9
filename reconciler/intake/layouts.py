"""Every broker writes its own headings; a layout says what they mean, and common ones are recognised without one.

A layout file (TOML) is somebody's word and is followed to the letter. Without one the headings are looked up in
resources/tables/headings.csv. A heading that names different facts in different files, or two headings for one fact, is settled only
by what the rows prove (face times price plus accrued gives the amount; references that are ours); where they prove nothing, the
question is put to the user, never answered in silence.
"""

from __future__ import annotations

import fnmatch
import re
import tomllib
import unicodedata
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from reconciler import resources
from reconciler.problems import Problem

FACTS = (
    "broker_reference", "desk_reference", "trade_date", "settlement_date", "bond", "side", "face", "price", "accrued_days",
    "accrued", "principal", "fees", "settlement_amount", "currency", "account", "yield", "status", "broker", "description",
)  # fmt: skip
"""What a column of a confirmation can be."""

ESSENTIAL = ("bond", "side", "face", "settlement_amount")

_KEYS = {
    "broker", "file", "encoding", "delimiter", "decimal", "date", "side_told_by", "skip_rows", "footer", "columns", "values", "scale",
}  # fmt: skip


@dataclass(frozen=True)
class Layout:
    """How to read one broker's files; blank or None means found out from the file."""

    name: str = ""
    broker: str = ""
    file: str = ""
    encoding: str | None = None
    delimiter: str | None = None
    decimal: str | None = None
    date: str | None = None
    side_told_by: str = "desk"
    skip_rows: int | None = None
    footer: str | None = None
    columns: Mapping[str, str] = field(default_factory=dict)
    values: Mapping[str, Mapping[str, str]] = field(default_factory=dict)
    scale: Mapping[str, int] = field(default_factory=dict)

    def matches(self, file: str) -> bool:
        """Whether the layout speaks for a file of this name."""
        if self.file:
            return fnmatch.fnmatch(file.lower(), self.file.lower())
        return bool(self.broker) and broker_of(file, [self.broker]) == self.broker


def plain(heading: str) -> str:
    """A heading in its plain form: lower case, letters and digits only, words apart."""
    text = unicodedata.normalize("NFKC", heading).replace("\ufeff", "")
    text = re.sub(r"(?<=[a-z])(?=[A-Z])", " ", text)
    text = text.casefold().replace("ä", "ae").replace("ö", "oe").replace("ü", "ue").replace("ß", "ss")
    text = "".join(sign for sign in unicodedata.normalize("NFKD", text) if not unicodedata.combining(sign))
    return " ".join(re.sub(r"[^0-9a-z]+", " ", text).split())


def _synonyms() -> dict[str, list[tuple[str, bool]]]:
    out: dict[str, list[tuple[str, bool]]] = {}
    for row in resources.table("headings"):
        out.setdefault(row["heading"], []).append((row["fact"], row["sure"] == "yes"))
    return out


def _without_unit(heading: str) -> tuple[str, int]:
    """The heading without a unit behind it, and the unit: "nominal 000" is told in thousands."""
    for tail, unit in ((" 000s", 1000), (" 000", 1000), (" in thousands", 1000), (" thousands", 1000)):
        if heading.endswith(tail):
            return heading.removesuffix(tail), unit
    return heading, 1


def meanings(heading: str) -> list[tuple[str, bool]]:
    """The facts a heading may name, each with whether it names nothing else."""
    table = _synonyms()
    text = plain(heading)
    if text in table:
        return table[text]
    text, _unit = _without_unit(text)
    if text in table:
        return table[text]
    # a currency behind the name ("net amount usd") says nothing about the fact
    head, _, tail = text.rpartition(" ")
    return table.get(head, []) if len(tail) == 3 and head else []


def unit(heading: str) -> int:
    """1000 where the heading says that figures are told in thousands, else 1."""
    return _without_unit(plain(heading))[1]


def known_headings(cells: Sequence[str]) -> int:
    """How many of the cells are headings that are known."""
    return sum(1 for cell in cells if meanings(cell))


def is_header(cells: Sequence[str]) -> bool:
    """Whether a line is the line of headings: it names at least four known columns."""
    return known_headings(cells) >= 4


_FOOTER = re.compile(r"^\s*(TOTAL|TRAILER)", re.IGNORECASE)


def is_footer(cells: Sequence[str], pattern: str | None = None) -> bool:
    """Whether a row is a totals or trailer row, by the layout's pattern or the usual words."""
    first = next((cell for cell in cells if cell and cell.strip()), "")
    rule = re.compile(pattern) if pattern else _FOOTER
    return bool(rule.search(first) if pattern else rule.match(first))


def broker_of(file: str, brokers: Sequence[str]) -> str:
    """The broker whose words make up the file's name, "" where none or several do."""
    name = set(plain(Path(file).stem.replace("_", " ")).split())
    joined = plain(Path(file).stem).replace(" ", "")
    found = []
    for broker in sorted(set(brokers)):
        words = [word for word in plain(broker).split() if word not in ("and", "the", "co", "ltd", "plc")]
        if words and (set(words) <= name or joined.startswith("".join(words))):
            found.append((len(words), broker))
    found.sort(reverse=True)
    if len(found) > 1 and found[0][0] == found[1][0]:
        return ""
    return found[0][1] if found else ""


def from_toml(path: Path, name: str) -> tuple[Layout | None, list[Problem]]:
    """A layout file; what is wrong in it is named with its key."""
    try:
        data = tomllib.loads(path.read_text(encoding="utf-8"))
    except (OSError, UnicodeDecodeError, tomllib.TOMLDecodeError) as error:
        return None, [Problem(name, 0, "", "", f"is not a layout that can be read ({error}); correct it.", "bad-layout")]
    problems = []

    def bad(key: str, value: object, reason: str) -> None:
        problems.append(Problem(name, 0, key, str(value), reason, "bad-layout"))

    for key in sorted(set(data) - _KEYS):
        bad(key, data[key], "is not a key of a layout; remove it or correct its name.")
    for key in ("broker", "file", "encoding", "delimiter", "decimal", "date", "side_told_by", "footer"):
        if key in data and not isinstance(data[key], str):
            bad(key, data[key], "must be a text in quotes.")
    if data.get("decimal", ".") not in (".", ","):
        bad("decimal", data["decimal"], 'must be "." or ",".')
    if data.get("side_told_by", "desk") not in ("desk", "broker"):
        bad("side_told_by", data["side_told_by"], 'must be "desk" or "broker".')
    if not isinstance(data.get("skip_rows", 0), int):
        bad("skip_rows", data["skip_rows"], "must be a whole number.")
    for key, kind, words in (("columns", str, "texts in quotes"), ("values", dict, "tables of their own"), ("scale", int, "whole numbers")):
        part = data.get(key, {})
        if not isinstance(part, dict) or any(not isinstance(value, kind) or isinstance(value, bool) for value in part.values()):
            bad(key, part, f"must be a table whose values are {words}.")
            data[key] = {}
    for fact, table in data.get("values", {}).items():
        if not all(isinstance(value, str) for value in table.values()):
            bad(f"values.{fact}", table, "must turn texts into texts, such as K = \"buy\".")
    if any(isinstance(number, int) and number <= 0 for number in data.get("scale", {}).values()):
        bad("scale", data["scale"], "must hold numbers above zero.")
    for fact in sorted(set(data.get("columns", {})) - set(FACTS)):
        bad(f"columns.{fact}", data["columns"][fact], f"is not one of our facts; use one of {', '.join(FACTS)}.")
    try:
        re.compile(data["footer"] if isinstance(data.get("footer"), str) else "")
    except re.error:
        bad("footer", data["footer"], "is not a pattern that can be used.")
    if problems:
        return None, problems
    return Layout(
        name=name, broker=data.get("broker", ""), file=data.get("file", ""), encoding=data.get("encoding"),
        delimiter=data.get("delimiter"), decimal=data.get("decimal"), date=data.get("date"),
        side_told_by=data.get("side_told_by", "desk"), skip_rows=data.get("skip_rows"), footer=data.get("footer"),
        columns=data.get("columns", {}), values=data.get("values", {}), scale=data.get("scale", {}),
    ), []  # fmt: skip


def _quoted(text: str) -> str:
    return '"' + text.replace("\\", "\\\\").replace('"', '\\"').replace("\t", "\\t") + '"'


def to_toml(layout: Layout) -> str:
    """The layout as a layout file."""
    lines = []
    for key in ("broker", "file", "encoding", "delimiter", "decimal", "date", "side_told_by", "skip_rows", "footer"):
        value = getattr(layout, key)
        if value not in (None, "") and not (key == "side_told_by" and value == "desk"):
            lines.append(f"{key} = {value if isinstance(value, int) else _quoted(value)}")
    lines += ["[columns]", *(f"{fact} = {_quoted(theirs)}" for fact, theirs in sorted(layout.columns.items()))]
    for fact, words in sorted(layout.values.items()):
        lines += [f"[values.{fact}]", *(f"{_quoted(theirs)} = {_quoted(ours)}" for theirs, ours in sorted(words.items()))]
    if layout.scale:
        lines += ["[scale]", *(f"{fact} = {number}" for fact, number in sorted(layout.scale.items()))]
    return "\n".join(lines) + "\n"


def assign(layout: Layout, headings: Sequence[str], file: str) -> tuple[dict[str, int], list[Problem]]:
    """Our facts -> column numbers as a layout says, and what it names that the file does not have."""
    places = {heading.strip(): place for place, heading in reversed(list(enumerate(headings)))}
    loose = {plain(heading): place for heading, place in places.items()}
    found, problems = {}, []
    for fact, theirs in layout.columns.items():
        place = places.get(theirs.strip(), loose.get(plain(theirs)))
        if place is None:
            reason = f"the layout {layout.name} expects this column for {fact}, but the file has none of that name; correct the layout."
            problems.append(Problem(file, 0, theirs, "", reason, "missing-column"))
        else:
            found[fact] = place
    return found, problems


def candidates(headings: Sequence[str]) -> dict[str, list[tuple[int, bool]]]:
    """For each fact the columns that may hold it: (column number, whether the heading names nothing else)."""
    out: dict[str, list[tuple[int, bool]]] = {}
    for place, heading in enumerate(headings):
        for fact, sure in meanings(heading):
            if fact in FACTS:
                out.setdefault(fact, []).append((place, sure))
    return out
