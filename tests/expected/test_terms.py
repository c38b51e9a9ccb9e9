"""The bridge from a morning's tables to terms: row by row, problems with file and line, steps by the bond's name."""

from __future__ import annotations

from reconciler.expected.terms import bond_rows, resolve_terms
from reconciler.records import BONDS, CLOSINGS, FACTORS, MISSING, RATES, Words, table

GOOD = {"currency": "USD", "kind": "stepped", "coupon_rate_e9": 10**9, "frequency": 2, "day_count": "30/360", "maturity": "2030-06-15",
        "calendar": "XSIF"}  # fmt: skip


def bonds(*rows: dict[str, object]):
    names = {name for row in rows for name in row}
    blank = {"text": "", "int64": MISSING, "date": "NaT", "int32": 0}
    return table(BONDS, len(rows), **{name: [row.get(name, blank[BONDS[name]]) for row in rows] for name in sorted(names)})


NOTHING = {name: table(schema) for name, schema in (("rates", RATES), ("factors", FACTORS), ("closings", CLOSINGS))}


def test_row_i_of_the_terms_is_row_i_of_the_bonds():
    told = bonds(*(GOOD | {"bond": name, "maturity": f"203{n}-06-15"} for n, name in enumerate("CAB")))
    terms, problems = resolve_terms(told, *NOTHING.values())
    assert not problems and terms.maturity.tolist() == told["maturity"].tolist()


def test_faults_carry_file_line_and_the_bonds_name():
    told = bonds(GOOD | {"bond": "A", "file": "bonds.csv", "line": 2}, GOOD | {"bond": "B", "file": "bonds.csv", "line": 7, "day_count": "thirty"})
    terms, problems = resolve_terms(told, *NOTHING.values())
    assert terms.sound.tolist() == [True, False]
    assert [(p.file, p.line, p.column, p.value, p.code) for p in problems] == [("bonds.csv", 7, "day_count", "thirty", "unsound-terms")]
    assert "terms of B" in problems[0].reason


def test_steps_find_their_bond_and_strangers_are_left_out():
    told = bonds(GOOD | {"bond": "A"}, GOOD | {"bond": "B"})
    rates = table(RATES, 3, **{"bond": ["B", "X", "A"], "from": ["2021-06-15", "2021-06-15", "2022-06-15"], "rate_e9": [2, 3, 4]})
    factors = table(FACTORS, 1, **{"bond": ["B"], "from": ["2021-06-15"], "factor_e12": [5]})
    terms, _ = resolve_terms(told, rates, factors, NOTHING["closings"])
    assert terms.rate_offsets.tolist() == [0, 1, 2] and terms.rate_e9s.tolist() == [4, 2]
    assert terms.factor_offsets.tolist() == [0, 0, 1] and terms.factor_e12s.tolist() == [5]


def test_closings_reach_the_calendars():
    closings = table(CLOSINGS, 1, calendar=["XSIF"], date=["2027-05-04"], open=[False])
    terms, _ = resolve_terms(bonds(GOOD | {"bond": "A"}), NOTHING["rates"], NOTHING["factors"], closings)
    assert terms.calendars.is_open(terms.calendar, closings["date"]).tolist() == [False]


def test_where_a_name_stands():
    told = bonds(GOOD | {"bond": "A"}, GOOD | {"bond": "B"}, GOOD | {"bond": "A"})
    assert bond_rows(Words.of(["B", "A", "", "Z"]), told).tolist() == [1, 0, -1, -1]


def test_no_bonds():
    terms, problems = resolve_terms(bonds(), *NOTHING.values())
    assert len(terms) == 0 and not problems
