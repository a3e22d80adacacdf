"""Kills a program that saves changes, again and again, and looks for every change it had acknowledged.

python -m tests.crash --kills 300 [--records URL]      # default: a new SQLite file in a temporary folder
"""

import argparse
import os
import random
import select
import signal
import sys
import tempfile
import time
from pathlib import Path

from engine.records import create_week, open_records, open_week, version_of
from tests.records.making import read, small_week
from tests.records.writers import keep_changing, note_of

KILLS_A_WEEK = 10
"""A new week is begun now and then, so that replaying a long list does not take all the time."""

LONGEST = 0.25
"""Seconds that a writer lives at most once it has started; its first change takes some milliseconds."""


def killed_after(place: str, week_id: str, first: int, seconds: float) -> list[int]:
    """The numbers that a writer acknowledged before it was killed, `seconds` after its first."""
    out, into = os.pipe()
    child = os.fork()
    if child == 0:  # a process of its own that opens the records anew: nothing is shared with this one
        os.close(out)
        os.dup2(into, sys.stdout.fileno())
        sys.stdout = os.fdopen(into, "w", closefd=False)
        try:
            keep_changing(open_records(place), week_id, "child", first, 100_000)
        finally:
            os._exit(1)
    os.close(into)
    told = b""
    end: float | None = None
    while end is None or time.monotonic() < end:
        ready, _, _ = select.select([out], [], [], 20 if end is None else max(0, end - time.monotonic()))
        if ready:
            piece = os.read(out, 65536)
            if not piece:
                break
            told += piece
        elif end is None:
            break
        end = end or time.monotonic() + seconds
    os.kill(child, signal.SIGKILL)
    os.waitpid(child, 0)
    while piece := os.read(out, 65536):
        told += piece
    os.close(out)
    whole = told[: told.rfind(b"\n") + 1].decode().split("\n")[:-1]
    return [int(line.split()[1]) for line in whole if line.startswith("child ")]


def crash(place: str, kills: int, seed: int) -> tuple[int, int]:
    """How many changes were acknowledged, and how many were found beyond those, in so many kills.

    Raises:
        AssertionError: an acknowledged change is not there, is there twice, or the list does not replay.
    """
    chance = random.Random(seed)
    acknowledged = beyond = 0
    for kill in range(kills):
        if kill % KILLS_A_WEEK == 0:
            records = open_records(place)
            week_id = create_week(records, read(small_week())).listed.id
            records.close()
            found: list[int] = []
        first = len(found)
        told = killed_after(place, week_id, first, chance.random() * LONGEST)
        records = open_records(place)
        history = open_week(records, week_id).history
        assert version_of(records, week_id) == len(history.entries)
        records.close()
        found = [int(note_of(entry.change).split()[1]) for entry in history.entries]
        assert told, f"kill {kill}: the writer acknowledged nothing, so the kill proves nothing"
        assert found == list(range(len(found))), f"kill {kill}: changes lost or doubled: {found}"
        assert told == list(range(first, first + len(told))), f"kill {kill}: told {told}"
        assert len(found) - first in (len(told), len(told) + 1), f"kill {kill}: {len(told)} told, {found}"
        acknowledged += len(told)
        beyond += len(found) - first - len(told)
        week = history.uploaded
        for entry in history.entries:
            week = week.apply(entry.change)
        assert week == history.week
    return acknowledged, beyond


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--kills", type=int, default=300)
    parser.add_argument("--records", default="")
    parser.add_argument("--seed", type=int, default=1)
    given = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        told, more = crash(given.records or str(Path(folder) / "records.sqlite"), given.kills, given.seed)
    sys.stdout.write(
        f"{given.kills} kills: {told} acknowledged changes, all found; {more} more were on disk that the "
        f"killed writer had not come to acknowledge\n"
    )
