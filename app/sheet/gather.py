"""Which tables share a worksheet: those that fit a page together, so that a small layout prints on few."""

from collections import defaultdict
from collections.abc import Iterable
from dataclasses import replace

from app.sheet.measure import fits
from app.sheet.table import SheetTable

TOGETHER = (  # tabs that may share one, and its name, the broadest first; where none fits, X takes `X, cases`
    ("Head", ("Head", "Cautions")),
    ("Cables", ("Cables", "Cable data", "Spacing")),
    ("Transformers", ("Transformers", "Transformer data", "Regulators")),
    ("Transformers", ("Transformers", "Transformer data")),
    ("Loads and supplies", ("Loads", "Motors", "Motor starts", "Supplies", "Switches")),
    ("Loads and supplies", ("Loads", "Supplies")),
    ("Motors", ("Motors", "Motor starts")),
    ("Supplies", ("Supplies", "Switches")),
    ("Faults", ("Faults", "Circuit ends", "Devices", "Withstand")),
    ("Faults", ("Faults", "Circuit ends", "Devices")),
    ("Balance", ("Balance", "Losses")),
    ("Year", ("Year", "Year basis")),
    ("Year by element", ("Year branches", "Year nodes", "Year loads")),
)
APART = {  # what leaves a tab that is longer than a page: where to together, and where to each where that is
    # longer too, as heads are repeated only where a table has a tab of its own
    "Basis": (
        "Cases and assumed values",
        {"cases": "Cases", "case_own": "Cases", "assumed": "Assumed values"},
    ),
    "Build list": ("Phases", {"laterals": "Laterals", "allocation": "Phases"}),
}


def gathered(tables: Iterable[SheetTable]) -> tuple[SheetTable, ...]:
    """The tables with the worksheets they go on."""
    tabs: dict[str, list[SheetTable]] = defaultdict(list)
    tables = tuple(tables)
    for t in tables:
        tabs[t.tab].append(t)
    home: dict[str, str] = {}
    for name, bases in (*TOGETHER, *((base, (base,)) for base in dict.fromkeys(map(_base, tabs)))):
        members = [tab for tab in tabs if _base(tab) in bases and tab not in home]
        led = any(_base(tab) == bases[0] for tab in members)
        if led and len(members) > 1 and fits([t for tab in members for t in tabs[tab]]):
            home |= dict.fromkeys(members, name)
    moved: dict[str, str] = {}
    for tab, (to, keys) in APART.items():
        leave = [t for t in tabs.get(tab, ()) if t.key in keys]
        if leave and not fits(tabs[tab]):
            moved |= dict.fromkeys(keys, to) if fits(leave) else keys
    return tuple(replace(t, tab=moved.get(t.key, home.get(t.tab, t.tab))) for t in tables)


def _base(tab: str) -> str:
    """`Busbars` of `Busbars, cases`."""
    return tab.split(",")[0]
