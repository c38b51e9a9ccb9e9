"""A morning without a window: a folder in, four files and a short summary out."""

from __future__ import annotations

import argparse
import datetime
from pathlib import Path

from reconciler import command
from reconciler.problems import KnownError

NAME = "morning"
HELP = "Reconcile a folder of this morning's files and write items, breaks, rejects and totals."


def _date(text: str) -> datetime.date:
    try:
        return datetime.date.fromisoformat(text)
    except ValueError:
        raise argparse.ArgumentTypeError(f"'{text}' is not a date; write it as 2026-03-31") from None


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Declares what the command is told."""
    parser.add_argument("folder", type=Path, metavar="FOLDER", help="the morning's folder")
    parser.add_argument("--date", type=_date, required=True, metavar="DATE", help="the morning's date, as 2026-03-31")
    parser.add_argument("--out", type=Path, required=True, metavar="OUTFOLDER", help="where the four files are written")
    parser.add_argument("--since", type=_date, metavar="DATE",
                        help="first payment date of coupons and redemptions looked at (default: ten business days back)")  # fmt: skip
    parser.add_argument("--settings", type=Path, metavar="FILE", help="a settings file (TOML)")


def run(arguments: argparse.Namespace) -> int:
    """Reconciles, writes, tells; returns the exit code."""
    from reconciler import settings
    from reconciler.procedures import morning, outcome

    if arguments.since is not None and arguments.since > arguments.date:
        raise KnownError(f"--since {arguments.since} lies after --date {arguments.date}; exchange them.")
    told = settings.read(arguments.settings) if arguments.settings is not None else settings.Settings()
    own_layouts = (settings.user_folder() / "layouts",)
    day = morning.run(arguments.folder, arguments.date, arguments.since, told, layouts=own_layouts)
    command.tell(day.problems)
    outcome.write(day, arguments.out)
    print(outcome.summary_text(day))
    if day.unread:
        return command.NOTHING
    return command.BREAKS if len(day.breaks) else command.AGREES
