"""How long saving takes, printed: the first time, the second time with one changed order, one change.

python -m tests.speed_records [--depots 100] [--customers 10000] [--records URL]
"""

import argparse
import statistics
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import replace
from decimal import Decimal
from pathlib import Path

from engine.changes import Alter
from engine.rates import Rates
from engine.records import copy_week, create_week, open_records, open_week, save
from tests.records.making import read, wide_week


def seconds(work: Callable[[], object]) -> float:
    start = time.perf_counter()
    work()
    return time.perf_counter() - start


def measure(place: str, depots: int, customers: int) -> dict[str, float]:
    """Seconds by what was done."""
    week = wide_week(depots, customers)
    next_week = wide_week(depots, customers).apply(
        Alter("customer", "Customer 7", "ordered", Decimal(77))
    )  # built anew, as from a second upload: nothing but the content says that the rates are the same
    assert isinstance(next_week.rates, Rates)
    found = {}
    records = open_records(place)
    found["first saving"] = seconds(lambda: create_week(records, read(week)))
    found["second saving, one changed order"] = seconds(lambda: create_week(records, read(next_week)))
    opened = create_week(records, read(replace(next_week, rates=week.rates)))
    history = opened.history
    spent = []
    for number in range(20):
        history = history.after(Alter("customer", "Customer 9", "ordered", Decimal(number + 1)), "Ann")
        spent.append(seconds(lambda saved=number, now=history: save(records, opened.listed.id, now, saved)))  # type: ignore[misc]
    found["one change (median of 20)"] = statistics.median(spent)
    found["copy as next week"] = seconds(lambda: copy_week(records, opened.listed.id, "Next"))
    found["open again, kept in memory"] = seconds(lambda: open_week(records, opened.listed.id))
    records.close()
    afresh = open_records(place)
    found["open from disk"] = seconds(lambda: open_week(afresh, opened.listed.id))
    afresh.close()
    return found


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--depots", type=int, default=100)
    parser.add_argument("--customers", type=int, default=10_000)
    parser.add_argument("--records", default="")
    given = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        place = given.records or str(Path(folder) / "records.sqlite")
        found = measure(place, given.depots, given.customers)
        size = sum(file.stat().st_size for file in Path(folder).iterdir())
    sys.stdout.write(f"{given.depots} x {given.customers:,} rates\n")
    for what, took in found.items():
        sys.stdout.write(f"{what:36} {1000 * took:10.1f} ms\n")
    share = found["second saving, one changed order"] / found["first saving"]
    sys.stdout.write(f"the second saving takes {share:.1%} of the first\n")
    if size:
        sys.stdout.write(f"the file holds {size / 1e6:.0f} MB\n")
