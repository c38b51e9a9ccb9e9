"""Start-up must not wait for the `holidays` package: this writes calendars in common use to tables/calendars.npz.

Run it after the package was upgraded or a code added below: `python resources/pack_calendars.py`. A test compares the
file with the installed package; corrections (calendar_corrections.csv) are applied when a calendar is loaded and are
not in the file.
"""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Any

import numpy as np

HERE = Path(__file__).resolve().parent
sys.path.insert(0, str(HERE.parent))

from reconciler.bonds import closed_days

CODES = """
    XSIF XFED XECB XLON XNYS XASX XMEX XNSE XSES XHKG XJPX XSWX XTSE XWAR XNZE ENX US GB-ENG GB-SCT GB-NIR JP
    CA-ON CA-QC CH-ZH SE NO DK FI AU-NSW AU-VIC NZ-AUK NZ-WGN ZA BR MX IN-MH SG HK PL CZ HU DE FR IT ES BE NL AT
    IE PT LU GR
""".split()


def packed() -> dict[str, Any]:
    """The arrays of the file: days and names code by code, and which other codes mean the same calendar."""
    import holidays.registry

    days, names, offsets = [], [], [0]
    for code in sorted(CODES):
        found, called, weekend = closed_days.from_package(code)
        if not np.array_equal(weekend, closed_days.weekends()):
            raise SystemExit(
                f"{code} has a weekend of its own, which the file cannot hold; leave it to be built on demand"
            )
        days.append(found)
        names += called
        offsets.append(offsets[-1] + len(found))
    vocabulary = sorted(set(names))
    aliases = {
        alias: codes[0]
        for registry in (holidays.registry.COUNTRIES, holidays.registry.FINANCIAL)
        for _, *codes in registry.values()
        for alias in codes[1:]
    }
    return {
        "codes": np.array(sorted(CODES)),
        "offsets": np.array(offsets, np.int32),
        "days": np.concatenate(days).astype(np.int32),
        "name_of": np.searchsorted(vocabulary, names).astype(np.int16),
        "names": np.array(vocabulary),
        "aliases": np.array(sorted(aliases)),
        "alias_of": np.array([aliases[alias] for alias in sorted(aliases)]),
    }


if __name__ == "__main__":
    np.savez_compressed(HERE / "tables" / "calendars.npz", **packed())
