"""Kills the whole desk, again and again, while a visitor edits; changes that a page showed must be found.

python -m tests.crash_desk --kills 200 --seconds 900    # ends at whichever comes first

Each desk is a process of its own, started by `app.serve`; the visitor types into the grid of depots and
makes the change over the desk's WebSocket, as a browser does. A change counts as acknowledged once the page
says that it was made.
"""

import argparse
import os
import random
import re
import signal
import sys
import tempfile
import threading
import time
from pathlib import Path

import app.parts.figures_grid
import app.parts.proposal
import app.parts.uploaded
import engine
import sample_data
from app.serve import serve
from engine.network import prepare
from engine.records import create_week, open_records, open_week, version_of
from tests.browser.conftest import free_port
from tests.desk_client import Visitor, pressed, typed, visit

KILLS_A_WEEK = 10
LONGEST = 4.0
"""Seconds that a desk lives at most once a visitor is on it; an edit and its acceptance take about one."""

CHARGE = "Charge if unsent"


def started(place: str) -> tuple[int, int]:
    """A desk on these records: its process and its port."""
    port = free_port()
    child = os.fork()
    if child == 0:  # everything is imported already, so that it starts in no time
        with open(os.devnull, "w") as nowhere:
            os.dup2(nowhere.fileno(), 1)
            os.dup2(nowhere.fileno(), 2)
            try:
                serve(port, False, records=place)
            finally:
                os._exit(1)
    return child, port


def arrive(port: int, week_id: str, seconds: float = 60) -> Visitor:
    """A visitor on the week, as soon as the desk answers."""
    end = time.monotonic() + seconds
    while True:
        try:
            return visit(port, f"week={week_id}")
        except OSError:
            if time.monotonic() > end:
                raise
            time.sleep(0.02)


def made(visitor: Visitor) -> int:
    """How many changes the page says were made."""
    for text in visitor.said:
        found = re.search(r"(\d+) changes? since it was opened", text)
        if found:
            return int(found.group(1))
    return 0


def edit_until_killed(visitor: Visitor, acknowledged: int) -> int:
    """Make one change after the other; how many the page has acknowledged when the desk is gone."""
    try:
        while True:
            visitor.run(typed(visitor, "depots", 0, CHARGE, str(acknowledged + 2)))
            if "accept" in visitor.ids:
                visitor.run(pressed(visitor, "accept"))
            acknowledged = max(acknowledged, made(visitor))
    except ConnectionError:
        return acknowledged


def crash(place: str, kills: int, seconds: float, seed: int) -> tuple[int, int, int]:
    """Kills made, changes acknowledged, and changes on disk that no page had come to show.

    Raises:
        AssertionError: a change that a page showed is not there, or is there twice.
    """
    chance, end = random.Random(seed), time.monotonic() + seconds
    done = shown = beyond = before = 0
    week_id = ""
    while done < kills and time.monotonic() < end:
        if done % KILLS_A_WEEK == 0:
            records = open_records(place)
            reading = engine.read_week(sample_data.path(sample_data.SMALL_WEEK))
            week_id, before = create_week(records, reading).listed.id, 0
            records.close()
        child, port = started(place)
        killer = threading.Timer(60, os.kill, (child, signal.SIGKILL))
        try:
            visitor = arrive(port, week_id)
            assert made(visitor) == before, (
                f"kill {done}: {made(visitor)} changes on the page, {before} on disk: {visitor.said}"
            )
            killer = threading.Timer(chance.random() * LONGEST, os.kill, (child, signal.SIGKILL))
            killer.start()
            told = edit_until_killed(visitor, before)
            visitor.close()
        finally:
            killer.cancel()
            os.kill(child, signal.SIGKILL)
            os.waitpid(child, 0)
        records = open_records(place)
        history = open_week(records, week_id).history
        assert version_of(records, week_id) == len(history.entries)
        records.close()
        values = [int(entry.change.value) for entry in history.entries]  # type: ignore[union-attr]
        assert values == list(range(2, 2 + len(values))), f"kill {done}: lost or doubled: {values}"
        assert len(values) in (told, told + 1), f"kill {done}: {told} shown, {len(values)} on disk"
        shown, beyond = shown + told - before, beyond + len(values) - told
        before, done = len(values), done + 1
    return done, shown, beyond


if __name__ == "__main__":
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--kills", type=int, default=200)
    parser.add_argument("--seconds", type=float, default=900)
    parser.add_argument("--seed", type=int, default=1)
    given = parser.parse_args()
    prepare()
    assert app.parts is not None
    with tempfile.TemporaryDirectory() as folder:
        done, told, more = crash(str(Path(folder) / "records.sqlite"), given.kills, given.seconds, given.seed)
    sys.stdout.write(
        f"{done} desks killed: {told} changes shown as made, all found; {more} more were on disk that no "
        f"page had come to show\n"
    )
