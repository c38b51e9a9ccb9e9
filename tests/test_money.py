"""Money against rational arithmetic: every rounding is held against fractions.Fraction, ties and overflows included."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from reconciler import money
from reconciler.money import MISSING

WHOLE = st.integers(min_value=-(10**13), max_value=10**13)
COUNT = st.integers(min_value=-(10**6), max_value=10**6)
BELOW = st.integers(min_value=1, max_value=10**14)


def half_up(value: Fraction) -> int:
    """Half away from zero, by the definition."""
    whole = int(abs(value) + Fraction(1, 2))
    return -whole if value < 0 else whole


def down(value: Fraction) -> int:
    """Toward zero, by the definition."""
    return int(value)


RULES = [(money.half_up, half_up), (money.down, down)]


def quotient(above: list[int], below: list[int]) -> Fraction:
    out = Fraction(1)
    for factor in above:
        out *= factor
    for factor in below:
        out /= factor
    return out


@pytest.mark.parametrize(("rule", "definition"), RULES)
@settings(max_examples=500, deadline=None)
@given(above=st.lists(st.one_of(WHOLE, COUNT), min_size=1, max_size=4), below=st.lists(BELOW, min_size=1, max_size=3))
@example(above=[1], below=[2])
@example(above=[-1], below=[2])
@example(above=[-3], below=[2])
@example(above=[10**13, 10**13, 10**13], below=[10**14, 10**12, 7])
@example(above=[10**13, 99_999_999_999_999 // 10], below=[10**13])
@example(above=[2**53 + 1, 1], below=[2])
def test_equals_rational_arithmetic(rule, definition, above, below):
    expected = definition(quotient(above, below))
    got = rule([np.array([a]) for a in above], [np.array([b]) for b in below])
    assert got.dtype == np.int64
    assert got.tolist() == [expected if abs(expected) < 2**63 else MISSING]


@pytest.mark.parametrize(("rule", "definition"), RULES)
@settings(max_examples=200, deadline=None)
@given(half=st.integers(-(10**13), 10**13), scale=st.integers(1, 10**5), nudge=st.sampled_from([-1, 0, 1]))
def test_ties_and_their_neighbours(rule, definition, half, scale, nudge):
    """(2 half + 1) / 2 is a tie however it is expanded; one unit of the expansion beside it is not."""
    above, below = (2 * half + 1) * scale + nudge, 2 * scale
    assert rule([np.array([above])], [below]).tolist() == [definition(Fraction(above, below))]


@pytest.mark.parametrize(("rule", "definition"), RULES)
def test_accruals_of_a_book_with_their_ties(rule, definition):
    """Face x rate x days over basis as accruals have it: thousands of exact ties, every one the right way."""
    random = np.random.default_rng(20260331)
    size = 20_000
    face = random.integers(1, 50_000, size) * 100_000 * random.choice([-1, 1], size)
    rate = random.integers(0, 80, size) * 125_000_000
    days = random.integers(0, 361, size)
    got = rule([face, rate, days], [360 * 100 * 10**9])
    exact = [Fraction(int(f) * int(r) * int(d), 360 * 100 * 10**9) for f, r, d in zip(face, rate, days, strict=True)]
    assert sum(value.denominator == 2 for value in exact) > 200
    assert got.tolist() == [definition(value) for value in exact]


@pytest.mark.parametrize(("rule", "definition"), RULES)
def test_products_that_wrap_around(rule, definition):
    """Every product overflows int64; the remainder still comes out right."""
    random = np.random.default_rng(7)
    size = 20_000
    face = random.integers(10**11, 10**13, size) * random.choice([-1, 1], size)
    rate = random.integers(10**9, 15 * 10**9, size)
    days = random.integers(1, 184, size)
    length = random.integers(181, 185, size)
    got = rule([face, rate, days], [length, 2, 100 * 10**9])
    columns = zip(face.tolist(), rate.tolist(), days.tolist(), length.tolist(), strict=True)
    exact = [Fraction(f * r * d, e * 2 * 100 * 10**9) for f, r, d, e in columns]
    assert all(abs(f * r * d) > 2**63 for f, r, d in zip(face.tolist(), rate.tolist(), days.tolist(), strict=True))
    assert got.tolist() == [definition(value) for value in exact]


@pytest.mark.parametrize(("rule", "definition"), RULES)
def test_denominators_beyond_the_fast_range(rule, definition):
    """Prices and factors of twelve decimals each: 10**26 below, reduced by common factors or reckoned one by one."""
    random = np.random.default_rng(11)
    size = 4_000
    face = random.integers(1, 10**13, size)
    price = random.integers(1, 10**14, size)
    factor = random.integers(1, 10**12, size)
    price[::2] = price[::2] // 10**7 * 10**7
    factor[::2] = factor[::2] // 10**7 * 10**7
    got = rule([face, price, factor], [100 * 10**12, 10**12])
    columns = zip(face.tolist(), price.tolist(), factor.tolist(), strict=True)
    assert got.tolist() == [definition(Fraction(f * p * r, 10**26)) for f, p, r in columns]


def test_chunks_are_one_answer():
    """More rows than one chunk, a missing one and an odd one among them: same as row by row."""
    size = 140_000
    face = np.arange(size, dtype=np.int64) * 997 - 50_000_000
    face[70_000] = MISSING
    face[139_999] = 10**18
    got = money.half_up([face, 37], [np.full(size, 24), 2])
    for row in (0, 1, 65_535, 65_536, 69_999, 70_001, 131_072, 139_999):
        assert got[row] == half_up(Fraction(int(face[row]) * 37, 48))
    assert got[70_000] == MISSING


def test_single_values_and_columns_mix():
    assert money.half_up([7], [2]).tolist() == [4]
    assert money.half_up([np.array([7, -7]), np.array([1])], [np.array([2])]).tolist() == [4, -4]
    assert money.down([np.array([7, -7])], [2]).tolist() == [3, -3]
    assert money.half_up([np.array([], np.int64), 5], [2]).tolist() == []
    assert money.half_up([np.array([0, 5], np.int32)], [np.array([9, 2], np.int16)]).tolist() == [0, 3]


@pytest.mark.parametrize(
    ("above", "below"),
    [
        ([np.array([MISSING])], [2]),
        ([np.array([3]), np.array([MISSING])], [2]),
        ([np.array([3]), MISSING], [2]),
        ([np.array([3])], [np.array([0])]),
        ([np.array([3])], [np.array([-2])]),
        ([np.array([3])], [0]),
        ([np.array([3])], [np.array([MISSING])]),
        ([np.array([10**18]), np.array([10**18])], [np.array([3])]),
    ],
)
def test_what_is_no_amount_is_missing(above, below):
    assert money.half_up(above, below).tolist() == [MISSING]
    assert money.down(above, below).tolist() == [MISSING]


def test_inputs_are_left_alone():
    face, days = np.array([100, 250, -7]), np.array([3, 5, 7])
    money.half_up([face, days], [np.array([2, 4, 8])])
    money.down([face, days], [np.array([10**17, 4, 8]), np.array([10**17, 4, 8])])
    assert face.tolist() == [100, 250, -7]
    assert days.tolist() == [3, 5, 7]


def test_large_constants_cancel():
    """Powers of ten above and below are cancelled before anything is multiplied."""
    assert money.half_up([np.array([123]), 10**30], [10**30]).tolist() == [123]
    assert money.half_up([np.array([125]), 10**30], [np.array([10]), 10**29 * 20]).tolist() == [
        half_up(Fraction(125 * 10**30, 10 * 10**29 * 20))
    ]


# ISO 4217, table A.1, minor units; from memory.
@pytest.mark.parametrize(
    ("code", "digits"),
    [("USD", 2), ("EUR", 2), ("GBP", 2), ("JPY", 0), ("KRW", 0), ("CLP", 0), ("ISK", 0), ("KWD", 3), ("BHD", 3),
     ("TND", 3), ("CLF", 4), ("HUF", 2), ("MXN", 2), ("ZAR", 2)],
)  # fmt: skip
def test_minor_digits(code, digits):
    assert money.known_currency(code)
    assert money.minor_digits([code]).tolist() == [digits]


def test_unknown_currency_has_two_digits():
    assert not money.known_currency("XQX")
    assert money.minor_digits(["XQX", "", "JPY"]).tolist() == [2, 2, 0]
    assert money.minor_digits([]).tolist() == []


def test_to_text():
    assert money.to_text(np.array([123450, -5, 0, MISSING, 7]), np.array([2, 2, 3, 2, 0])) == [
        "1234.50",
        "-0.05",
        "0.000",
        "",
        "7",
    ]
    assert money.to_text([100, 5], 2) == ["1.00", "0.05"]
