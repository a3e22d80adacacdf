"""Figures of an invented trade: road salt, on an invented island in open ocean.

`tests/make_samples.py` makes every file here again, byte for byte.
"""

from importlib.resources import as_file, files
from pathlib import Path

SMALL_WEEK = "small_week.xlsx"
SMALL_WEEK_GRID = "small_week_grid.xlsx"
SMALL_WEEK_CSV = (
    "small_week_depots.csv",
    "small_week_customers.csv",
    "small_week_rates.csv",
    "small_week_rules.csv",
)
WEEK_BEFORE = "week_before.xlsx"
LARGE_WEEK = "large_week.xlsx"
MESSY_WEEK = "messy_week.xlsx"
LOADS_WEEK = "loads_week.xlsx"


def path(name: str) -> Path:
    """Where a sample file lies.

    Raises:
        FileNotFoundError: there is no sample of that name; the message lists those there are.
    """
    if name not in names():
        raise FileNotFoundError(f"There is no sample '{name}'. There are: {', '.join(names())}.")
    with as_file(files(__name__) / name) as found:
        return Path(found)


def names() -> list[str]:
    """The sample files, by name."""
    return sorted(file.name for file in files(__name__).iterdir() if file.name.endswith((".xlsx", ".csv")))
