"""One bond's coupons on the screen: every period, payment date and amount, and why a day was moved."""

from __future__ import annotations

import argparse
from pathlib import Path

NAME = "schedule"
HELP = "Print a bond's coupons: periods, payment dates with the reason for each shift, days, amounts, record dates."


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declares what the command is told."""
    parser.add_argument("bond", metavar="BOND", help="the bond's identifier as it stands in the bonds file")
    parser.add_argument("--bonds", type=Path, required=True, metavar="bonds.csv",
                        help="the bonds file; rates.csv, factors.csv and closings.csv beside it are used too")  # fmt: skip
    parser.add_argument("--face", default="", metavar="N", help="the face the amounts are for (default: 100)")


def run(arguments: argparse.Namespace) -> int:
    """Reads and prints; returns the exit code."""
    from reconciler.procedures import schedule

    print("\n".join(schedule.lines(schedule.read(arguments.bond, arguments.bonds, arguments.face))))
    return 0
