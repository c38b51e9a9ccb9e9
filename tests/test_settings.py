"""Settings: every option is whole in itself, every wrong key is named."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from reconciler import resources, settings
from reconciler.money import known_currency
from reconciler.problems import KnownError


@pytest.mark.parametrize("option", settings.OPTIONS, ids=lambda option: option.name)
def test_every_option_passes_its_own_type_and_says_what_it_is(option: settings.Option) -> None:
    values = option.default.values() if option.kind.by_currency else [option.default]
    assert all(option.kind.fits(value) for value in values)
    assert option.help.endswith(".")
    assert len(option.help) > 20
    if option.kind.by_currency:
        assert set(option.default) <= {settings.ALL} | {code for code in option.default if known_currency(code)}


def test_names_are_unique() -> None:
    names = [option.name for option in settings.OPTIONS]
    assert len(set(names)) == len(names)


def _written(tmp_path: Path, text: str) -> Path:
    path = tmp_path / "house.toml"
    path.write_text(text, encoding="utf-8")
    return path


def test_a_file_replaces_defaults_key_by_key(tmp_path: Path) -> None:
    told = settings.read(_written(tmp_path, "since_days = 5\n[tolerance]\nJPY = 0\n[interest]\nall = 4.25\nEUR = 2\n"))
    assert told["since_days"] == 5
    assert told["ahead_days"] == settings.Settings()["ahead_days"]
    assert told.tolerance_minor(["JPY", "USD"]).tolist() == [0, 1]
    assert told.interest_e9(["EUR", "USD"]).tolist() == [2_000_000_000, 4_250_000_000]
    assert told.interest_basis(["USD", "GBP"]).tolist() == [360, 365]


@pytest.mark.parametrize(
    ("text", "key", "says"),
    [
        ("tolerances = 1", "tolerances", "is not a setting"),
        ("tolerance = 1", "tolerance", "must be a table by currency"),
        ("[tolerance]\nUSD = 1.5", "tolerance.USD", "must be a whole number"),
        ("[tolerance]\nUSD = true", "tolerance.USD", "must be a whole number"),
        ("[tolerance]\ndollars = 1", "tolerance.dollars", "is neither a currency code"),
        ("[interest]\nUSD = 'five'", "interest.USD", "must be a number"),
        ("[interest]\nUSD = nan", "interest.USD", "must be a number"),
        ("[interest_basis]\nUSD = 366", "interest_basis.USD", "must be 360 or 365"),
        ("reporting_currency = 'EURO'", "reporting_currency", "must be a currency code"),
        ("[reporting_rates]\nEUR = 0", "reporting_rates.EUR", "must be a number above 0"),
        ("since_days = -1", "since_days", "must be a whole number"),
    ],
)
def test_a_wrong_key_is_named(tmp_path: Path, text: str, key: str, says: str) -> None:
    with pytest.raises(KnownError) as caught:
        settings.read(_written(tmp_path, text))
    assert f"house.toml: '{key}' " in str(caught.value)
    assert says in str(caught.value)


def test_all_wrong_keys_are_told_together(tmp_path: Path) -> None:
    with pytest.raises(KnownError) as caught:
        settings.read(_written(tmp_path, "one = 1\ntwo = 2\n[interest]\nUSD = ''"))
    assert len(caught.value.problems) == 3


@pytest.mark.parametrize("text", [b"tolerance = ", b"\xff\xfe\x00"])
def test_an_unreadable_file_is_a_clear_sentence(tmp_path: Path, text: bytes) -> None:
    path = tmp_path / "house.toml"
    path.write_bytes(text)
    with pytest.raises(KnownError, match="settings file"):
        settings.read(path)


def test_a_missing_file_is_a_clear_sentence(tmp_path: Path) -> None:
    with pytest.raises(KnownError, match="cannot be read"):
        settings.read(tmp_path / "none.toml")


def test_shipped_rates_say_that_they_are_from_memory() -> None:
    rows = resources.table("reporting_rates")
    assert all(row["standing"] == "memory" and known_currency(row["currency"]) and float(row["usd"]) > 0 for row in rows)
    assert [row["currency"] for row in rows] == sorted({row["currency"] for row in rows})


def test_rates_in_another_reporting_currency() -> None:
    usd = settings.Settings().reporting_rates(["USD", "EUR", "GBP"])
    eur = settings.of({"reporting_currency": "EUR"}).reporting_rates(["USD", "EUR", "GBP"])
    np.testing.assert_allclose(usd / usd[1], eur)
    own = settings.of({"reporting_rates": {"EUR": 2}}).reporting_rates(["EUR", "XXX"])
    assert own.tolist() == [2.0, 1.0]


def test_the_users_own_settings(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(settings, "user_folder", lambda: tmp_path)
    assert settings.of_user() == settings.Settings()
    (tmp_path / "settings.toml").write_text("ahead_days = 3", encoding="utf-8")
    assert settings.of_user()["ahead_days"] == 3
