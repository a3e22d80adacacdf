"""When a disk or a database fails: a sentence that says what is and is not saved, and nothing half saved."""

import resource
import subprocess
import sys
from pathlib import Path

import pytest
from sqlalchemy import text
from sqlalchemy.exc import OperationalError

from engine.changes import Alter, SetHold
from engine.figures import RateKey
from engine.records import NotSaved, Records, create_week, journal, open_records, open_week, save, version_of
from engine.records.encode import NotUnderstood
from tests.records.making import D, read, small_week, wide_week

KEY = RateKey("Quarry", "Birch")
LARGE = SetHold(KEY, D(1), "because " * 20_000)


def test_a_full_disk_saves_nothing_of_a_change_and_keeps_the_rest(tmp_path: Path) -> None:
    records = open_records(tmp_path / "records.sqlite")
    opened = create_week(records, read(small_week()))
    history = save(records, opened.listed.id, opened.history.after(SetHold(KEY, D(1))), 0).history
    with records.engine.connect() as connection:  # the pool hands this very connection out again
        pages = connection.exec_driver_sql("PRAGMA page_count").scalar_one()
        connection.exec_driver_sql(f"PRAGMA max_page_count = {pages}")
    with pytest.raises(
        NotSaved, match=r"Not saved: 1 change to the week\. The disk is full.*still there"
    ) as full:
        save(records, opened.listed.id, history.after(LARGE), 1)
    assert str(tmp_path) in str(full.value)
    assert "What was saved before is still there" in str(full.value)
    with records.engine.connect() as connection:
        connection.exec_driver_sql("PRAGMA max_page_count = 1000000")
    assert open_week(records, opened.listed.id).history.entries == history.entries
    assert len(save(records, opened.listed.id, history.after(LARGE), 1).history.entries) == 2
    assert version_of(records, opened.listed.id) == 2
    records.close()


def test_a_disk_that_refuses_to_grow_loses_nothing_that_was_acknowledged(tmp_path: Path) -> None:
    """A real write error: the process may not make files larger than a limit (RLIMIT_FSIZE)."""
    place = tmp_path / "records.sqlite"
    records = open_records(place)
    week_id = create_week(records, read(small_week())).listed.id
    records.close()
    code = """
import signal, sys
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
from engine.records import NotSaved, open_records, open_week, save
from tests.records.test_failures import LARGE
records = open_records(sys.argv[1])
history = open_week(records, sys.argv[2]).history
for number in range(200):
    try:
        history = save(records, sys.argv[2], history.after(LARGE), number).history
    except NotSaved as failure:
        print(number, failure)
        break
"""
    limit = 4_000_000
    ended = subprocess.run(
        [sys.executable, "-c", code, str(place), week_id],
        capture_output=True,
        text=True,
        check=True,
        cwd=Path(__file__).parents[2],
        preexec_fn=lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (limit, limit)),
    )
    number, _, sentence = ended.stdout.partition(" ")
    assert "Not saved: 1 change to the week." in sentence
    assert "disk" in sentence
    records = open_records(place)
    assert 0 < int(number) == len(open_week(records, week_id).history.entries)
    records.close()


def test_records_that_may_not_be_written_say_so(tmp_path: Path) -> None:
    place = tmp_path / "records.sqlite"
    records = open_records(place)
    opened = create_week(records, read(small_week()))
    records.close()
    reading = open_records(f"sqlite:///file:{place}?mode=ro&uri=true")
    assert open_week(reading, opened.listed.id).history.week == small_week()
    with pytest.raises(NotSaved, match=r"Not saved: 1 change.*may not be written to: allow writing"):
        save(reading, opened.listed.id, opened.history.after(SetHold(KEY, D(1))), 0)
    with pytest.raises(NotSaved, match="Not saved: the week 'Week 6'"):
        create_week(reading, read(small_week()))
    reading.close()


def test_a_folder_that_is_none_and_a_file_that_is_no_database(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("I am a file")
    with pytest.raises(NotSaved, match="cannot be opened"):
        open_records(tmp_path / "file" / "records.sqlite")
    (tmp_path / "notes.txt").write_text("nothing like a database " * 100)
    with pytest.raises(NotSaved, match="damaged or is no records file"):
        open_records(tmp_path / "notes.txt")
    assert (tmp_path / "notes.txt").read_text().startswith("nothing like")


def test_a_lost_connection_is_taken_up_again(postgres_place: str) -> None:
    records = open_records(postgres_place)
    opened = create_week(records, read(small_week()))
    other = open_records(postgres_place)
    others = "pid <> pg_backend_pid() AND datname = current_database()"
    with other.engine.connect() as connection:
        connection.execute(text(f"SELECT pg_terminate_backend(pid) FROM pg_stat_activity WHERE {others}"))
    history = save(records, opened.listed.id, opened.history.after(SetHold(KEY, D(1))), 0).history
    assert open_week(other, opened.listed.id).history.entries == history.entries
    records.close()
    other.close()


def test_an_answer_that_was_lost_on_the_way_doubles_nothing(
    records: Records, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The commit reached the database, the connection broke before we were told."""
    opened = create_week(records, read(small_week()))
    put = journal.replace_facts
    commit = records.engine.dialect.do_commit

    def broken(connection: object) -> None:
        commit(connection)  # type: ignore[arg-type]
        monkeypatch.setattr(records.engine.dialect, "do_commit", commit)
        raise OperationalError("COMMIT", {}, Exception("server closed the connection unexpectedly"))

    def then_break(*arguments: object) -> None:
        put(*arguments)  # type: ignore[arg-type]
        monkeypatch.setattr(records.engine.dialect, "do_commit", broken)

    monkeypatch.setattr(journal, "replace_facts", then_break)
    outcome = save(records, opened.listed.id, opened.history.after(SetHold(KEY, D(1))), 0)
    assert len(outcome.history.entries) == 1
    assert version_of(records, opened.listed.id) == 1


def test_what_cannot_be_stored_is_refused_and_nothing_is_saved(records: Records) -> None:
    opened = create_week(records, read(small_week()))
    odd = opened.history.after(SetHold(KEY, D(1))).after(Alter("depot", "Quarry", "available", 1.5))
    with pytest.raises(NotUnderstood, match="float cannot be stored"):
        save(records, opened.listed.id, odd, 0)
    assert version_of(records, opened.listed.id) == 0


def test_a_name_with_a_character_that_no_database_keeps(records: Records) -> None:
    week = small_week().apply(Alter("depot", "Quarry", "name", "Quarry\ud800"))
    with pytest.raises(NotSaved, match="a character that cannot be stored"):
        create_week(records, read(week))


def test_a_wide_week_comes_back(records: Records) -> None:
    week = wide_week(20, 300)
    opened = create_week(records, read(week))
    again = open_records(records.engine.url.render_as_string(hide_password=False))
    assert open_week(again, opened.listed.id).history.week == week
    again.close()
