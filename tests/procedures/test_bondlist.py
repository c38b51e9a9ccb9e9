"""The bonds as they are reckoned: told where told, else the market's word."""

from __future__ import annotations

from types import SimpleNamespace

from reconciler import records
from reconciler.expected.terms import resolve_terms
from reconciler.procedures.bondlist import BONDLIST, bondlist


def test_blanks_are_filled_from_the_market_and_the_unsound_say_so() -> None:
    bonds = records.table(
        records.BONDS, bond=["A", "B", "C"], market=["UK_GILT", "", ""], kind=["", "zero", "fixed"], currency=["", "USD", "EUR"],
        coupon_rate_e9=[4_000_000_000, records.MISSING, 5_000_000_000], maturity=["2031-01-22", "2030-06-15", "NaT"],
        frequency=[records.MISSING, records.MISSING, 1], day_count=["", "", "30E/360"], ex_dividend=["", "", "10c"],
    )  # fmt: skip
    nothing = [records.table(schema) for schema in (records.RATES, records.FACTORS, records.CLOSINGS)]
    terms, _problems = resolve_terms(bonds, *nothing)
    shown = bondlist(SimpleNamespace(source=SimpleNamespace(bonds=bonds), terms=terms))
    assert set(shown) == set(BONDLIST)
    gilt, zero, unsound = (shown.row(i) for i in range(3))
    # resources/tables/markets.csv: UK gilts pay twice a year in sterling, count Act/Act ICMA, go ex six business days before
    assert (gilt["currency"], gilt["day_count"], gilt["frequency"], gilt["ex_dividend"]) == ("GBP", "Act/Act ICMA", 2, "6b")
    assert (zero["kind"], zero["frequency"], zero["ex_dividend"]) == ("zero", records.MISSING, "")
    assert (unsound["terms"], unsound["ex_dividend"], gilt["terms"]) == ("not sound", "10c", "sound")
