"""Everything the window can do, declared once: words, keys, where it stands in the menu, what it says about itself.

Menus, tool tips, buttons and keys are all made from this list; a test walks it. A page's own key is its number. Single letters
act wherever no text is being typed.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Action:
    """One thing the window can do. `keys` are written as Qt writes them, the first is shown; `needs_day`: only with a morning."""

    key: str
    text: str
    menu: str
    help: str
    keys: tuple[str, ...] = ()
    needs_day: bool = False
    divided: bool = False


@dataclass(frozen=True)
class PageEntry:
    """One page of the navigation: `group` is the caption it stands under."""

    key: str
    text: str
    group: str
    help: str


PAGES: tuple[PageEntry, ...] = (
    PageEntry("breaks", "Breaks", "", "Payments on which a party differs or did not speak, the most urgent first"),
    PageEntry("due", "Due today", "", "Payments due today that nobody disputes and whose cash is not booked yet"),
    PageEntry("agreed", "Agreed", "", "Payments on which everybody who speaks tells the same"),
    PageEntry("ahead", "Payments ahead", "Look up", "What the terms say will be paid in the coming days, by day and currency"),
    PageEntry("bonds", "Bonds", "Look up", "The bonds of the morning with their terms and coupons"),
    PageEntry("files", "Files of the day", "Look up", "Every file with rows and money read, used, rejected and set aside"),
)

ACTIONS: tuple[Action, ...] = (
    Action("open", "&Open a morning…", "Morning", "Choose a folder of files and the day they are for", ("Ctrl+O",)),
    Action("sample", "Open the &sample", "Morning", "Load the three invented mornings that come with the program"),
    Action("reload", "&Read again", "Morning", "Read the files of this morning once more", ("F5", "Ctrl+R"), needs_day=True),
    Action("layout", "Assign a file's &columns…", "Morning", "Say what the columns of a confirmations file mean", ("Ctrl+L",)),
    Action("problems", "&Problems…", "Morning", "What was wrong with the files, in plain words", ("Ctrl+P",), needs_day=True),
    Action("export", "&Export…", "Morning", "Save what this list shows as CSV or XLSX", ("Ctrl+E",), needs_day=True, divided=True),
    Action("quit", "&Quit", "Morning", "Close the window", ("Ctrl+Q",), divided=True),
    Action("find", "&Find", "List", "Find in this list: ticket, bond, amount, broker, account, day, cause", ("Ctrl+F", "/"),
           needs_day=True),
    Action("copy", "&Copy rows", "List", "Copy the selected rows as text, with heads", ("Ctrl+C",), needs_day=True),
    Action("all", "Show &all", "List", "Clear the search and every filter", ("Ctrl+Shift+A",), needs_day=True),
    Action("next", "&Next", "List", "Go to the next row", ("N",), needs_day=True, divided=True),
    Action("previous", "&Previous", "List", "Go to the previous row", ("P",), needs_day=True),
    Action("detail", "Open &detail", "List", "Go to the detail of this row", ("Ctrl+Return",), needs_day=True),
    Action("accounts", "The four accounts", "List", "Show who told what about this payment", ("Alt+1",), needs_day=True,
           divided=True),
    Action("working", "Working", "List", "Show how the payment is reckoned, line by line", ("Alt+2",), needs_day=True),
    Action("coupons", "Coupons", "List", "Show the bond's coupons", ("Alt+3",), needs_day=True),
    Action("letter", "&Letter…", "List", "Draft a letter about this payment to whoever has to put it right", ("L",), needs_day=True),
    Action("pane", "Next &pane", "View", "Move between navigation, search, list and detail", ("F6",)),
    Action("pane_back", "Previous pane", "View", "Move back between the panes", ("Shift+F6",)),
    Action("back", "&Back", "View", "Leave the detail or the search; in the list, show all rows", ("Esc",)),
    Action("split", "Show or hide the &detail", "View", "Give the whole height to the list, or take it back", ("Ctrl+D",),
           needs_day=True),
    Action("system", "Colours of the s&ystem", "View", "Follow the system's light or dark", divided=True),
    Action("light", "&Light", "View", "Always light"),
    Action("dark", "&Dark", "View", "Always dark"),
    Action("theme", "S&witch light and dark", "View", "Change between light and dark", ("Ctrl+Shift+L",)),
    Action("keys", "&Keys…", "Help", "Every key on one page", ("F1",)),
    Action("about", "&About Reconciler…", "Help", "What this program does, and what it does not"),
)  # fmt: skip

MENUS = ("Morning", "List", "Go", "View", "Help")


def page_keys(number: int) -> tuple[str, str]:
    """The keys of the page with a number, counted from one."""
    return f"Ctrl+{number}", str(number)
