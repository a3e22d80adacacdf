"""Several writers on one week: no change is lost, none is doubled, and every list tells the same story."""

import subprocess
import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

from engine.changes import SetHold
from engine.records import Records, append, create_week, open_records, open_week, version_of
from engine.records.journal import Conflict
from engine.week import Week
from tests.records.making import TEAL, D, read, small_week
from tests.records.writers import keep_changing, note_of

ROOT = Path(__file__).parents[2]


def check_all_there(records: Records, week_id: str, writers: list[str], count: int) -> None:
    history = open_week(records, week_id).history
    notes = [note_of(entry.change) for entry in history.entries]
    assert sorted(notes) == sorted(f"{who} {number}" for who in writers for number in range(count))
    for who in writers:
        assert [note for note in notes if note.split()[0] == who] == [f"{who} {n}" for n in range(count)]
    assert version_of(records, week_id) == len(notes)
    week: Week = history.uploaded
    for entry in history.entries:
        week = week.apply(entry.change)
    assert week == history.week


def test_threads_lose_and_double_nothing(records: Records) -> None:
    week_id = create_week(records, read(small_week())).listed.id
    writers = ["Ann", "Ben", "Cid"]
    with ThreadPoolExecutor(3) as pool:
        list(pool.map(lambda who: keep_changing(records, week_id, who, 0, 15), writers))
    check_all_there(records, week_id, writers, 15)


def test_processes_lose_and_double_nothing(records: Records, place: str) -> None:
    week_id = create_week(records, read(small_week())).listed.id
    writers = ["Ann", "Ben", "Cid"]
    started = [
        subprocess.Popen(
            [sys.executable, "-m", "tests.records.writers", place, week_id, who, "15"],
            stdout=subprocess.PIPE,
            text=True,
            cwd=ROOT,
        )
        for who in writers
    ]
    said = [one.communicate()[0].split("\n")[:-1] for one in started]
    assert [one.returncode for one in started] == [0, 0, 0]
    assert said == [[f"{who} {number}" for number in range(15)] for who in writers]
    check_all_there(records, week_id, writers, 15)


def test_of_many_who_append_to_one_version_one_wins(records: Records, place: str) -> None:
    opened = create_week(records, read(small_week()))
    week_id = opened.listed.id

    def once(number: int) -> int:
        own = open_records(place)
        try:
            return append(own, week_id, opened.history.after(SetHold(TEAL, D(number)), str(number)), 0)
        except Conflict as conflict:
            return -1 if [made.who for made in conflict.theirs] == [str(number)] else 0
        finally:
            own.close()

    with ThreadPoolExecutor(6) as pool:
        versions = list(pool.map(once, range(6)))
    assert sorted(versions) == [0, 0, 0, 0, 0, 1]
    winner = str(versions.index(1))
    assert [entry.who for entry in open_week(records, week_id).history.entries] == [winner]
