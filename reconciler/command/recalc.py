"""A list of trades in, the same list out with every figure reckoned anew."""

from __future__ import annotations

import argparse
from pathlib import Path

NAME = "recalc"
HELP = "Reckon a list of trades anew from the bonds' terms: interest, price, yield, settlement amount."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declares what the command is told."""
    parser.add_argument("source", type=Path, metavar="IN.csv", help="the list: a bond's terms and a trade in each row")
    parser.add_argument("target", type=Path, metavar="OUT.csv", help="where the list is written with its figures")


def run(arguments: argparse.Namespace) -> int:
    """Reckons, writes, tells; 0 also where rows have problems, since each says its own."""
    from reconciler.procedures import recalc

    outcome = recalc.run(arguments.source, arguments.target)
    rows = f"{outcome.rows:,} row{'' if outcome.rows == 1 else 's'} reckoned"
    print(f"{rows}, {outcome.problems:,} with a problem." if outcome.problems else f"{rows}.")
    return 0
