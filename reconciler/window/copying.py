"""Rows leave the window as plain text that a spreadsheet reads: tabs between cells, one head line, plain figures and ISO dates."""

from __future__ import annotations

import numpy as np

from reconciler.records import MISSING, Words
from reconciler.window import figures
from reconciler.window.sheet import Fact, Sheet, texts


def fact_texts(sheet: Sheet, fact: Fact, rows: np.ndarray) -> list[str]:
    """One column of a copy, as text."""
    values = fact.take(sheet.data, rows)
    if isinstance(values, Words):
        return texts(values)
    if fact.kind == "date":
        return [figures.iso(value) for value in values]
    numbers = np.asarray(values, np.int64).tolist()
    if fact.kind == "amount":
        assert fact.digits is not None
        digits = np.asarray(fact.digits(sheet.data, rows), np.int64).tolist()
        return [figures.plain_amount(number, digits[i]) for i, number in enumerate(numbers)]
    if fact.kind == "decimal":
        return [figures.decimal(number, 12).replace(figures.MINUS, "-").replace(",", "") for number in numbers]
    return ["" if number == MISSING else str(number) for number in numbers]


def as_text(sheet: Sheet, rows: np.ndarray) -> str:
    """The rows as tab-separated text with a head line; columns that are blank in every row are left out."""
    columns = [(fact.title, fact_texts(sheet, fact, rows)) for fact in sheet.facts]
    filled = [(title, texts) for title, texts in columns if any(texts)]
    clean = str.maketrans({"\t": " ", "\n": " ", "\r": " "})
    lines = ["\t".join(title for title, _ in filled)]
    lines += ["\t".join(texts[i].translate(clean) for _, texts in filled) for i in range(len(rows))]
    return "\n".join(lines) + "\n"
