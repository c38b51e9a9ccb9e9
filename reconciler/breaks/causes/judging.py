"""When an explanation that fits counts as proof, and when it may be chance.

Explained means: the recomputed figures equal the told ones to the minor unit. Even so a fit can be an accident: try enough
explanations and one of them comes near any difference. The chance is reckoned, not felt: among the figures that the tries gave
for this very payment, count the distinct ones as far from the right figure as the told one (up to twice as far), and
divide by the number of figures there are in that span. That is how many accidental fits one would expect for a difference
of that size that has nothing to do with any cause.

`proved` needs one explanation (or several that come to the same thing), a difference of more than a few minor units, and fewer
accidental fits than `CHANCE`. Whatever fits without that is `likely`. What we do not do: call an explanation proved because it
is common, or because other payments of the same party show it too (that only puts it first among those that fit).
"""

from __future__ import annotations

import numpy as np

CHANCE = 5e-6
"""Accidental fits tolerated per proof: with it, noise of any size gives less than one proof in a hundred thousand cases."""

LOOSE = 1e-4
"""The same when every figure tried counts, also those that another told fact rules out."""

COARSE = 5
"""Differences up to this many minor units prove nothing but rounding (common practice, no source)."""


def accidental(right: np.ndarray, told: np.ndarray, tried: np.ndarray) -> np.ndarray:
    """Expected accidental fits per case, a float of the cases' length.

    `right` and `told` are int64 figures per case; `tried` (cases x tries, int64) holds every figure that a try gave, with
    `right` itself where a try changed nothing or could not be made.
    """
    distance = np.abs(told - right).astype(np.float64)
    away = np.abs(tried - right[:, None]).astype(np.float64)
    near = np.where((away > 0) & (away <= 2 * distance[:, None]), tried, right[:, None])
    # the right figure put in front is no try; every change in the sorted row is one distinct figure more
    near = np.sort(np.concatenate([right[:, None], near], axis=1), axis=1)
    distinct = (np.diff(near, axis=1) != 0).sum(axis=1)
    return np.maximum(distinct, 1) / np.maximum(4 * distance, 1)
