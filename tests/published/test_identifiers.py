"""Check digits of ISIN, CUSIP and SEDOL against examples in public use; the source stands beside each row."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pyarrow as pa
import pytest

from reconciler.intake import identifiers

with (Path(__file__).parent / "identifiers.csv").open(encoding="utf-8") as _rows:
    ROWS = [(row["scheme"], row["identifier"], row["valid"] == "yes") for row in csv.DictReader(_rows)]

_CHECKS = {"ISIN": identifiers.isin_ok, "CUSIP": identifiers.cusip_ok, "SEDOL": identifiers.sedol_ok}


@pytest.mark.parametrize(("scheme", "identifier", "valid"), ROWS)
def test_check_digits(scheme: str, identifier: str, valid: bool) -> None:
    assert _CHECKS[scheme](identifier) is valid


def test_all_at_once_agrees_with_one_by_one() -> None:
    texts = [identifier for _scheme, identifier, _valid in ROWS] + ["", "ZZ0000000016", "ZZ0000000018", "desk code"]
    told = identifiers.check_digits_wrong(pa.array(texts))
    assert told.tolist() == [identifiers.check_digit_wrong(text) for text in texts]
    assert np.count_nonzero(told) >= 2


def test_numbers_inside_an_isin() -> None:
    same = identifiers.equivalents(["US0378331005", "GB0002634946", "desk code"])
    assert same == {"037833100": "US0378331005", "0263494": "GB0002634946"}
