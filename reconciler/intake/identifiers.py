"""An identifier carries its own check digit; a wrong one is a typing slip found before it costs anything.

ISIN: ISO 6166 (letters as 10 to 35, then the Luhn sum). CUSIP: ANSI X9.6 (double-add-double). SEDOL: weights 1 3 1 7 3 9 1,
no vowels. A Luhn sum does not see 09 and 90 exchanged: a valid digit is no proof. Nothing is looked up.
"""

from __future__ import annotations

import re
from collections.abc import Iterable

import numpy as np
import pyarrow as pa
import pyarrow.compute as pc

_ISIN = re.compile(r"^[A-Z]{2}[A-Z0-9]{9}[0-9]$")
_CUSIP = re.compile(r"^[0-9A-Z*@#]{8}[0-9]$")
_SEDOL = re.compile(r"^[0-9B-DF-HJ-NP-TV-Z]{6}[0-9]$")
_SIGNS = {"*": 36, "@": 37, "#": 38}


def _value(sign: str) -> int:
    return _SIGNS[sign] if sign in _SIGNS else int(sign, 36)


def isin_ok(text: str) -> bool:
    """Whether the text is an ISIN with the right check digit."""
    if not _ISIN.match(text):
        return False
    digits = "".join(str(int(sign, 36)) for sign in text)
    total = 0
    for place, digit in enumerate(reversed(digits)):
        doubled = int(digit) * (1 + place % 2)
        total += doubled // 10 + doubled % 10
    return total % 10 == 0


def cusip_ok(text: str) -> bool:
    """Whether the text is a CUSIP with the right check digit."""
    if not _CUSIP.match(text):
        return False
    total = 0
    for place, sign in enumerate(text[:8]):
        doubled = _value(sign) * (1 + place % 2)
        total += doubled // 10 + doubled % 10
    return (10 - total % 10) % 10 == int(text[8])


def sedol_ok(text: str) -> bool:
    """Whether the text is a SEDOL with the right check digit."""
    if not _SEDOL.match(text):
        return False
    total = sum(_value(sign) * weight for sign, weight in zip(text, (1, 3, 1, 7, 3, 9, 1), strict=True))
    return total % 10 == 0


def shape(text: str) -> str:
    """Which scheme a text is written in: ISIN, CUSIP, SEDOL, or "" for a desk's own code."""
    if _ISIN.match(text):
        return "ISIN"
    if len(text) == 9 and _CUSIP.match(text) and any(sign.isdigit() for sign in text[:8]):
        return "CUSIP"
    return "SEDOL" if _SEDOL.match(text) else ""


def check_digit_wrong(text: str) -> bool:
    """Whether a text is written like an ISIN but its check digit is wrong."""
    return bool(_ISIN.match(text)) and not isin_ok(text)


def check_digits_wrong(texts: pa.Array) -> np.ndarray:
    """`check_digit_wrong` of every text at once."""
    shaped = pc.match_substring_regex(texts, _ISIN.pattern).to_numpy(zero_copy_only=False)
    out = np.zeros(len(texts), np.bool_)
    rows = np.flatnonzero(shaped)
    if len(rows):
        signs = np.array(texts.take(pa.array(rows)).to_pylist(), "S12").view(np.uint8).reshape(len(rows), 12).astype(np.int64)
        value = np.where(signs >= 65, signs - 55, signs - 48)
        # a letter is two digits, so the places to double are counted from the right in digits, not in signs
        wide = (value >= 10).astype(np.int64)
        behind = np.cumsum((1 + wide)[:, ::-1], axis=1)[:, ::-1] - (1 + wide)
        total = _luhn(value % 10, behind) + np.where(wide == 1, _luhn(value // 10, behind + 1), 0)
        out[rows] = total.sum(axis=1) % 10 != 0
    return out


def _luhn(digit: np.ndarray, place: np.ndarray) -> np.ndarray:
    doubled = digit * (1 + place % 2)
    return doubled // 10 + doubled % 10


def embedded(isin: str) -> list[str]:
    """The national identifiers that an ISIN carries: a CUSIP behind US and CA, a SEDOL behind GB00."""
    if isin[:2] not in ("US", "CA", "GB") or not isin_ok(isin):
        return []
    if isin[:2] in ("US", "CA") and cusip_ok(isin[2:11]):
        return [isin[2:11]]
    if isin[:4] == "GB00" and sedol_ok(isin[4:11]):
        return [isin[4:11]]
    return []


def equivalents(known: Iterable[str]) -> dict[str, str]:
    """National identifier -> known bond and known national identifier -> ISIN form, only where exactly one bond answers."""
    found: dict[str, list[str]] = {}
    bonds = sorted(set(known))
    for bond in bonds:
        for code in embedded(bond):
            found.setdefault(code, []).append(bond)
    own = set(bonds)
    return {code: answers[0] for code, answers in sorted(found.items()) if len(answers) == 1 and code not in own}
