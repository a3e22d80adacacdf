"""Weeks as far as whoever works here may see them: pages open, list, copy and archive through these alone."""

from dataclasses import replace
from datetime import datetime

import streamlit as st

from app.kept import READING_ONLY
from app.rights import person
from engine.intake.answers import Answers
from engine.records import (
    Issued,
    Listed,
    Missing,
    NotSaved,
    Opened,
    Records,
    WeekTotals,
    archive_week,
    copy_week,
    default_place,
    find_plan,
    list_plans,
    list_weeks,
    load_answers,
    open_records,
    open_week,
    restore_as_new,
    save_answers,
    totals_by_week,
    week_before,
)
from engine.records.journal import NO_SUCH_WEEK
from engine.week import Refused

_ANSWERS = "answers"


@st.cache_resource(show_spinner=False)
def _at(place: str) -> Records:
    return open_records(place)


def records() -> Records:
    """The records of this desk, shared by all sessions.

    Raises:
        NotSaved: they cannot be opened.
    """
    return _at(default_place())


def opened(any_id: str) -> Opened:
    """A week by either of its ids; for reading only where that is all that the person or the id allows.

    Raises:
        Missing: there is no such week, or it is another desk's: the two are not told apart.
        NotSaved: the records cannot be read.
    """
    me = person()
    found = open_week(records(), any_id)
    if not me.may_open(found.listed.desk):
        raise Missing(NO_SUCH_WEEK)
    return found if me.may_change else replace(found, may_change=False)


def listed(search: str, archived: bool, limit: int) -> list[Listed]:
    """The weeks that the person may open; none where weeks open by their addresses alone."""
    me = person()
    return list_weeks(records(), search, archived, me.desks, limit) if me.may_list else []


def totals() -> list[WeekTotals]:
    """What the weeks that the person may open added up to."""
    me = person()
    return totals_by_week(records(), me.desks) if me.may_list else []


def copied(week_id: str, name: str) -> Opened:
    """A new week with the figures of another, on the same desk.

    Raises:
        Missing, NotSaved: as `opened`.
        Refused: the person may only read.
    """
    return copy_week(records(), week_id, name, _changeable(week_id).listed.desk)


def restored(week_id: str, version: int, name: str) -> Opened:
    """A new week with the figures that another had after `version` changes.

    Raises:
        Missing, NotSaved: as `opened`.
        Refused: the person may only read.
    """
    return restore_as_new(records(), week_id, version, name, _changeable(week_id).listed.desk)


def put_away(week_id: str, archived: bool = True) -> None:
    """Take a week out of the list, or put it back.

    Raises:
        Missing, NotSaved: as `opened`.
        Refused: the person may only read.
    """
    archive_week(records(), _changeable(week_id).listed.id, archived)


def before(week_id: str) -> Listed | None:
    """The week that the person may open before this one; none where weeks open by their addresses alone."""
    me = person()
    found = week_before(records(), week_id) if me.may_list else None
    return found if found is not None and me.may_open(found.desk) else None


def plans_of(week: Listed) -> list[tuple[int, datetime, str, str]]:
    """Number, time, person and note of every plan that was issued of a week that was listed."""
    return list_plans(records(), week.id) if person().may_open(week.desk) else []


def issued_of(week: Listed, number: int | None = None) -> Issued:
    """An issued plan of a week that was listed, by its number or (None) the latest.

    Raises:
        Missing: no such plan was issued, or the week is another desk's.
        NotSaved: the records cannot be read.
    """
    if not person().may_open(week.desk):
        raise Missing(NO_SUCH_WEEK)
    return find_plan(records(), week.id, number)


def answers() -> Answers:
    """What this desk has answered and accepted; nothing where the records cannot be read."""
    if not person().may_list:  # strangers to each other: what one answers is not said for the others
        found: Answers = st.session_state.get(_ANSWERS, Answers())
        return found
    try:
        return load_answers(records(), person().home)
    except NotSaved:
        return Answers()


def learn(now: Answers, before: Answers) -> None:
    """Remember what was answered since `before`.

    Raises:
        NotSaved: it could not be written.
        Refused: the person may only read.
    """
    if not person().may_change:
        raise Refused(READING_ONLY)
    if person().may_list:
        save_answers(records(), now, before, person().home)
    else:
        st.session_state[_ANSWERS] = now


def _changeable(week_id: str) -> Opened:
    found = opened(week_id)
    if not found.may_change:
        raise Refused(READING_ONLY)
    return found
