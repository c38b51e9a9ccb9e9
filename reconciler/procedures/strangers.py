"""What is told of a bond that bonds.csv does not have must be said aloud, or its coupons would be missed in silence.

Tickets and confirmations on such a bond become items with a break of their own; bank entries stay unexplained. Holdings, rates and factors
would leave no trace, so each bond they name in vain is a problem, once a file.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from reconciler.problems import Problem
from reconciler.records import Table

_WHY = {
    "holdings": "is not a bond of bonds.csv, so its coupons and redemption cannot be expected; add its terms.",
    "rates": "is not a bond of bonds.csv, so its rates are not used; add its terms or correct the name.",
    "factors": "is not a bond of bonds.csv, so its factors are not used; add its terms or correct the name.",
}


def strangers(source: Any) -> tuple[Problem, ...]:
    """A problem for every bond that holdings, rates or factors name and bonds.csv does not, with the first line that names it."""
    out = []
    for name, why in _WHY.items():
        told: Table = getattr(source, name)
        lost = np.flatnonzero(told["bond"].known() & (told["bond"].codes_in(source.bonds["bond"].values) < 0))
        order = lost[np.argsort(told["line"][lost], kind="stable")]
        _, first = np.unique(told["bond"].codes[order], return_index=True)
        for row in order[np.sort(first)].tolist():
            bond, file = told["bond"].text(row), told["file"].text(row) or f"{name}.csv"
            out.append(Problem(file, int(told["line"][row]), "bond", bond, why, "unknown-bond"))
    return tuple(out)
