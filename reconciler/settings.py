"""A house has its own tolerances and interest rates; they are told once, in one file, and every wrong word in it is named.

Every option is declared in `OPTIONS`: name, type, default, help. A settings file is TOML; options by currency are tables whose key
`all` stands for every currency not named:

    reporting_currency = "USD"
    [tolerance]              # smallest units of the currency
    all = 1
    JPY = 0
    [interest]               # percent a year
    EUR = 2.15

A settings file replaces defaults key by key. Unknown keys and wrong types are problems that name the key; a file with problems is
not used at all, because a tolerance somebody believes in must not be dropped in silence. Nothing here is read from the
user's own folder unless the caller asks for it: the same command gives the same result on every machine.
"""

from __future__ import annotations

import tomllib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from decimal import Decimal
from pathlib import Path
from typing import Any

import numpy as np

from reconciler import resources
from reconciler.money import known_currency
from reconciler.problems import KnownError, Problem

ALL = "all"
"""The key that stands for every currency a table does not name."""


@dataclass(frozen=True)
class Kind:
    """The type of an option: `says` completes "must be …", `fits` tests one value, `by_currency` makes it a table."""

    says: str
    fits: Callable[[Any], bool]
    by_currency: bool = False


def _is_whole(value: Any) -> bool:
    return isinstance(value, int) and not isinstance(value, bool) and 0 <= value <= 10**9


def _is_rate(value: Any) -> bool:
    if isinstance(value, bool) or not isinstance(value, (int, Decimal)):
        return False
    rate = Decimal(value)
    return rate.is_finite() and abs(rate) <= 1000 and rate.as_tuple().exponent >= -9  # type: ignore[operator]


def _is_worth(value: Any) -> bool:
    return not isinstance(value, bool) and isinstance(value, (int, Decimal)) and Decimal(value).is_finite() and value > 0


WHOLE = Kind("a whole number from 0", _is_whole)
CURRENCY = Kind('a currency code such as "USD"', lambda value: isinstance(value, str) and known_currency(value))
WHOLE_BY_CURRENCY = Kind("a whole number from 0", _is_whole, by_currency=True)
RATE_BY_CURRENCY = Kind("a number with at most nine decimals", _is_rate, by_currency=True)
BASIS_BY_CURRENCY = Kind("360 or 365", lambda value: not isinstance(value, bool) and value in (360, 365), by_currency=True)
WORTH_BY_CURRENCY = Kind("a number above 0", _is_worth, by_currency=True)


@dataclass(frozen=True)
class Option:
    """One thing a house may decide."""

    name: str
    kind: Kind
    default: Any
    help: str


OPTIONS: tuple[Option, ...] = (
    Option("tolerance", WHOLE_BY_CURRENCY, {ALL: 1},
           "How many smallest units of a currency two amounts may differ by and still be within tolerance."),
    Option("interest", RATE_BY_CURRENCY, {ALL: 0},
           "Percent a year that late or missing money costs, by currency; 0 reckons no interest."),
    Option("interest_basis", BASIS_BY_CURRENCY,
           # money market practice, from memory: sterling, the old dominions and their neighbours count 365 days a year
           {ALL: 360, "AUD": 365, "CAD": 365, "CNY": 365, "GBP": 365, "HKD": 365, "INR": 365, "KRW": 365, "KWD": 365, "MYR": 365,
            "NZD": 365, "PLN": 365, "SGD": 365, "THB": 365, "TWD": 365, "ZAR": 365},
           "Days in the year of that interest: 360 or 365, by currency."),
    Option("reporting_currency", CURRENCY, "USD", "The currency in which breaks of all currencies are put in order of urgency."),
    Option("reporting_rates", WORTH_BY_CURRENCY, {},
           "What one unit of a currency is worth in the reporting currency; shipped rates are rounded and from memory."),
    Option("since_days", WHOLE, 10, "How many business days back coupons and redemptions are expected when no first day is told."),
    Option("ahead_days", WHOLE, 30, "How many calendar days ahead coming payments are shown."),
)  # fmt: skip

_BY_NAME = {option.name: option for option in OPTIONS}


@dataclass(frozen=True)
class Settings:
    """What a house decided; `values` holds every option's value by name."""

    values: Mapping[str, Any] = field(default_factory=lambda: {option.name: option.default for option in OPTIONS})

    def __getitem__(self, name: str) -> Any:
        return self.values[name]

    def tolerance_minor(self, currencies: Sequence[str]) -> np.ndarray:
        """Tolerated difference of each currency in its smallest units, int64."""
        return np.array([self._of("tolerance", code) for code in currencies], np.int64)

    def interest_e9(self, currencies: Sequence[str]) -> np.ndarray:
        """Interest of each currency in percent a year times 10**9, int64."""
        return np.array([int(Decimal(self._of("interest", code)).scaleb(9)) for code in currencies], np.int64)

    def interest_basis(self, currencies: Sequence[str]) -> np.ndarray:
        """Days in the year of each currency's interest, int64."""
        return np.array([self._of("interest_basis", code) for code in currencies], np.int64)

    def reporting_rates(self, currencies: Sequence[str]) -> np.ndarray:
        """What one unit of each currency is worth in the reporting currency, float64; 1 where nobody knows."""
        shipped = {row["currency"]: float(row["usd"]) for row in resources.table("reporting_rates")}
        reporting = self["reporting_currency"]
        base = shipped.get(reporting, 1.0)
        own = {code: float(worth) for code, worth in self["reporting_rates"].items()}
        other = own.pop(ALL, 1.0)
        own.setdefault(reporting, 1.0)
        return np.array([own.get(code, shipped[code] / base if code in shipped else other) for code in currencies], np.float64)

    def _of(self, name: str, currency: str) -> Any:
        told = self[name]
        return told.get(currency, told[ALL])


def read(path: Path) -> Settings:
    """The settings of a file, defaults where it is silent. Raises KnownError naming every wrong key."""
    try:
        told = tomllib.loads(path.read_text(encoding="utf-8-sig"), parse_float=Decimal)
    except (OSError, UnicodeDecodeError) as fault:
        why = fault.strerror if isinstance(fault, OSError) and fault.strerror else "it is not UTF-8 text"
        reason = f"the settings file cannot be read ({why}); check its name and that it may be read."
        raise KnownError(Problem(path.name, 0, "", "", reason, "settings-unreadable")) from fault
    except tomllib.TOMLDecodeError as fault:
        reason = f"the settings file is not TOML: {fault}; correct that line."
        raise KnownError(Problem(path.name, 0, "", "", reason, "settings-not-toml")) from fault
    return of(told, path.name)


def of(told: Mapping[str, Any], file: str = "settings") -> Settings:
    """Settings from told values, defaults where nothing was told. Raises KnownError naming every wrong key."""
    problems: list[Problem] = []
    values: dict[str, Any] = {option.name: option.default for option in OPTIONS}
    for name, value in told.items():
        option = _BY_NAME.get(name)
        if option is None:
            known = ", ".join(sorted(_BY_NAME))
            problems.append(_problem(file, name, f"is not a setting; there are: {known}.", "unknown-setting"))
        elif option.kind.by_currency:
            values[name] = {**option.default, **_checked_table(option, value, file, problems)}
        elif option.kind.fits(value):
            values[name] = value
        else:
            problems.append(_problem(file, name, f"must be {option.kind.says}, not {value}."))
    if problems:
        raise KnownError(*problems)
    return Settings(values)


def _problem(file: str, key: str, reason: str, code: str = "bad-setting") -> Problem:
    return Problem(file, 0, "", key, reason, code)


def _checked_table(option: Option, value: Any, file: str, problems: list[Problem]) -> dict[str, Any]:
    if not isinstance(value, Mapping):
        reason = f"must be a table by currency: write [{option.name}] and below it lines such as USD = …"
        problems.append(_problem(file, option.name, reason))
        return {}
    out = {}
    for code, one in value.items():
        key = f"{option.name}.{code}"
        if code != ALL and not known_currency(code):
            problems.append(_problem(file, key, f"is neither a currency code nor '{ALL}'.", "unknown-setting"))
        elif not option.kind.fits(one):
            problems.append(_problem(file, key, f"must be {option.kind.says}, not {one}."))
        else:
            out[code] = one
    return out


def user_folder() -> Path:
    """Where the user's own settings (settings.toml) and layouts (layouts/) are kept; need not exist."""
    import platformdirs

    return Path(platformdirs.user_config_dir("Reconciler", appauthor=False))


def of_user() -> Settings:
    """The user's own settings, or the defaults when there are none; for the window."""
    own = user_folder() / "settings.toml"
    return read(own) if own.is_file() else Settings()
