"""A fact that was told wrong in itself (a price, a face, fees, a side) explains the amount that follows from it; here is why it was told wrong.

Looked at one by one, since such breaks are few: the reading of a price, the unit of a face, fees left out or with a levy on them,
and slips of the pen in the written figure. A price has a coarse grid, so a fit is never called proved here.
"""

from __future__ import annotations

from collections.abc import Iterator
from decimal import Decimal

import numpy as np

from reconciler.breaks.causes.readings import READINGS
from reconciler.breaks.causes.slips import SLIPS
from reconciler.breaks.causes.variants import FACE_SCALE, FEE_TAX, FEES_OUT, FEES_TWICE, Cause

MISTYPED = Cause("one digit mistyped", "slip", "Ask for the figure to be corrected.", 0.1)
ONE_SIDED = Cause("fees on one side only", "fees", "Agree whether the fees were dealt; they stand on one side only.", 0.8)
REVERSED = Cause("side reversed", "side", "Ask who bought; one of the two has the side the wrong way round.", 0.8)

_LEVIES = (5, 7, 8, 10, 15, 19, 20, 21, 22, 23, 25)
_TURNED = READINGS[:6]
_UNITS = (1000, 10**6)
_WRITTEN = len(SLIPS) + 1

TRIES = {
    "price": len(READINGS) + len(_TURNED) + _WRITTEN,
    "face": len(_UNITS) + _WRITTEN,
    "fees": 4 + len(_LEVIES) + _WRITTEN,
    "side": 1,
}
"""How many ways of going wrong each fact is held against."""

Explanation = tuple[Cause, str, float]
"""The cause, its wording, and how common it is."""


def price(right: int, told: int) -> Iterator[Explanation]:
    """Why a price (times 10^12) was told as another."""
    one = np.array([right], np.int64)
    for reading in READINGS:
        if int(reading.read(one)[0]) == told:
            yield Cause(reading.name, "price", "Ask for the price as dealt, written in decimals.", 0.8), reading.wording, reading.weight
    back = np.array([told], np.int64)
    for reading in _TURNED:
        if int(reading.read(back)[0]) == right:
            words = f"the price was dealt as told here and {reading.wording} on the other side"
            yield Cause(reading.name, "price", "Ask for the price as dealt, written in decimals.", 0.8), words, reading.weight * 0.1
    yield from written(Decimal(right).scaleb(-12), Decimal(told).scaleb(-12), "price")


def face(right: int, told: int, digits: int) -> Iterator[Explanation]:
    """Why a face (minor units) was told as another."""
    for times in _UNITS:
        if told * times == right or right * times == told:
            size = "larger" if told > right else "smaller"
            yield FACE_SCALE, f"the face is {times:,} times {size}, as if told in another unit", 1.0
    yield from written(Decimal(right).scaleb(-digits), Decimal(told).scaleb(-digits), "face")


def fees(right: int, told: int, digits: int) -> Iterator[Explanation]:
    """Why fees (minor units) were told as others."""
    if told == 0 and right:
        yield FEES_OUT, "the fees are left out", 1.0
    if right == 0 and told:
        yield ONE_SIDED, "fees were told where the other side has none", 1.0
    if right and told == 2 * right:
        yield FEES_TWICE, "the fees are counted twice", 1.0
    if right and told == -right:
        yield ONE_SIDED, "the fees carry the other sign", 1.0
    for rate in _LEVIES:
        if right and (right * (100 + rate) * 2 + 100) // 200 == told:
            yield FEE_TAX, f"a levy of {rate} % is put on the fees", 0.5
    yield from written(Decimal(right).scaleb(-digits), Decimal(told).scaleb(-digits), "fees")


def written(right: Decimal, told: Decimal, fact: str) -> Iterator[Explanation]:
    """Slips of the pen between two written figures."""
    causes = {slip.name: Cause(slip.name, "slip", "Ask for the figure to be corrected.", slip.weight) for slip in SLIPS}
    a, b = _digits(right), _digits(told)
    if told == -right and right:
        yield causes["sign lost"], f"the sign of the {fact} is lost", 0.5
        return
    if right <= 0 or told <= 0:
        return
    whole_a, fraction_a = a
    whole_b, fraction_b = b
    one, other = whole_a + fraction_a, whole_b + fraction_b
    if one.strip("0") == other.strip("0"):
        yield causes["decimal point moved"], f"the decimal point of the {fact} moved", 0.5
    width = max(len(fraction_a), len(fraction_b))
    x, y = whole_a + fraction_a.ljust(width, "0"), whole_b + fraction_b.ljust(width, "0")
    if len(x) == len(y):
        apart = [i for i, (p, q) in enumerate(zip(x, y, strict=True)) if p != q]
        if len(apart) == 2 and apart[1] == apart[0] + 1 and x[apart[0]] == y[apart[1]] and x[apart[1]] == y[apart[0]]:
            yield causes["two digits exchanged"], f"two neighbouring digits of the {fact} are exchanged", 0.6
        if len(apart) == 1:
            yield MISTYPED, f"one digit of the {fact} is mistyped", 0.2
    for longer, shorter, name, words in (
        ((whole_a, fraction_a), told, "digit left out", f"one digit of the {fact} is left out"),
        ((whole_b, fraction_b), right, "digit typed twice", f"one digit of the {fact} is typed twice"),
    ):
        if any(candidate == shorter for candidate, _twice in _shorter(*longer)) and (
            name == "digit left out" or any(c == shorter and twice for c, twice in _shorter(*longer))
        ):
            yield causes[name], words, 0.4


def _digits(number: Decimal) -> tuple[str, str]:
    whole, _, fraction = format(abs(number), "f").partition(".")
    return whole.lstrip("0"), fraction.rstrip("0")


def _shorter(whole: str, fraction: str) -> Iterator[tuple[Decimal, bool]]:
    """Every figure with one digit left out, and whether that digit stood twice in a row."""
    text = whole + "." + fraction
    for place, sign in enumerate(text):
        if sign == ".":
            continue
        left = text[:place] + text[place + 1 :]
        beside = text.replace(".", "")
        at = place - (place > len(whole))
        twice = (at > 0 and beside[at - 1] == sign) or (at + 1 < len(beside) and beside[at + 1] == sign)
        if left.strip("."):
            yield Decimal(left.strip(".") or "0"), twice
