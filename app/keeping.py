"""The desk and the records: the address names the week, and what is on screen as made is on disk."""

import getpass
from contextlib import nullcontext

import streamlit as st

from app.access import opened, records
from app.kept import READING_ONLY, Kept
from app.rights import house, person
from app.session import Desk
from engine.exact import TooLarge
from engine.intake.build_lists import Unused
from engine.planning.plan import Plan
from engine.records import (
    Issued,
    Missing,
    NotSaved,
    Opened,
    caught_up,
    changes_since,
    create_week,
    find_plan,
    issue_plan,
    latest_number,
    note_totals,
    save_remarks,
    version_of,
)

WATCH_SECONDS = 2.0
MANY_RATES = 100_000
WEEK, READ, WHO, VIEW = "week", "read", "who", "view"
"""What the address says: the week's id, its id for reading only, who works here, and the view of a page."""


@st.cache_resource(show_spinner=False)
def _at_start() -> dict[tuple[str, ...], str]:
    """The weeks that were made from the files named when the desk was started."""
    return {}


def whoever() -> str:
    """Who works here unless the address says otherwise: the name that the machine knows them by."""
    if house().on_network:  # whoever comes by the network is not who started the desk
        return "Somebody"
    try:
        return getpass.getuser()
    except (OSError, KeyError):  # an account without a name, in a container for instance
        return "Desk"


def named_in_address(state: Desk) -> bool:
    """Bring back the week that the address names, if it names one that is there and may be opened."""
    state.who = person().who or st.query_params.get(WHO, "") or whoever()
    any_id = st.query_params.get(WEEK) or st.query_params.get(READ)
    if not any_id:
        return False
    try:
        show(state, opened(any_id))
    except (Missing, NotSaved) as failure:
        st.query_params.clear()
        state.message = ("error", str(failure))
        return False
    return True


def made_at_start(state: Desk, files: tuple[str, ...]) -> bool:
    """Bring back the week that an earlier session made of the files named at the start."""
    week_id = _at_start().get(files)
    if week_id is None or not person().may_list:
        return False
    try:
        show(state, opened(week_id))
    except (Missing, NotSaved):
        return False
    return True


def show(state: Desk, opened: Opened) -> None:
    """Put a week from the records on the desk."""
    state.show(opened.history, opened.decimal_mark, opened.findings, opened.unused)
    listed = opened.listed
    state.kept = Kept(
        records(),
        listed.id,
        listed.read_id,
        len(opened.history.entries),
        opened.may_change,
        opened.unused,
        opened.findings,
    )
    state.issued = _issued_last(state.kept)


def keep_up(state: Desk, files: tuple[str, ...] = ()) -> None:
    """Put a week that was just read into the records, and its id into the address."""
    if state.fresh is not None and not state.week.is_empty and person().may_change:
        try:
            many = len(state.week.rates) > MANY_RATES
            with st.spinner("Saving the week …") if many else nullcontext():
                opened = create_week(records(), state.fresh, person().home)
            ids = opened.listed.id, opened.listed.read_id
            state.kept = Kept(records(), *ids, unread=opened.unused, said=opened.findings)
            state.fresh, state.unsaved = None, ""
            if state.history.entries:
                state.kept.take(state.history)
            if files:
                _at_start()[files] = opened.listed.id
        except (NotSaved, ValueError) as failure:
            state.unsaved = str(failure)
    if state.kept is not None:
        name, value = (WEEK, state.kept.week_id) if state.kept.may_change else (READ, state.kept.read_id)
        wanted = {name: value} | ({WHO: state.who} if state.kept.may_change and not person().who else {})
        if any(st.query_params.get(key) != said for key, said in wanted.items()):
            seen = {VIEW: st.query_params[VIEW]} if VIEW in st.query_params else {}
            st.query_params.from_dict(wanted | seen)


def issue(state: Desk, plan: Plan, note: str = "") -> Issued | None:
    """Freeze the plan under the next number; None with a message where it could not be kept."""
    if state.kept is None:
        state.message = (
            "error",
            state.unsaved or "The week is not in the records, so no plan can be issued.",
        )
        return None
    if not state.kept.may_change:
        state.message = ("error", READING_ONLY)
        return None
    try:
        state.issued = issue_plan(
            state.kept.records, state.kept.week_id, plan, state.kept.saved, state.who, note
        )
    except (Missing, NotSaved, TooLarge) as failure:
        state.message = ("error", str(failure))
        return None
    return state.issued


def catch_up(state: Desk) -> bool:
    """Work in what others changed; whether there was anything."""
    kept = state.kept
    if kept is None:
        return False
    try:
        if not is_behind(state, kept):
            return False
        theirs = changes_since(kept.records, kept.week_id, kept.saved)
        state.issued = _issued_last(kept)
    except (NotSaved, Missing) as failure:
        state.unsaved = str(failure)
        return False
    before = len(state.history.entries)
    state.history = caught_up(state.history, theirs)
    kept.saved = len(state.history.entries)
    state.hear(state.history.entries[before:])
    return True


def keep_rest(state: Desk) -> None:
    """Keep what is no change: cells that nobody can read yet, and what the plan adds up to."""
    kept = state.kept
    if kept is None or not kept.may_change:
        return
    texts = _unread(state)
    version = kept.saved
    try:
        if texts != kept.unread or state.read != kept.said:
            save_remarks(kept.records, kept.week_id, texts, state.read)
            kept.unread, kept.said = texts, state.read
        if state.plan is not None and state.planned_for is state.week and kept.noted != version:
            note_totals(kept.records, kept.week_id, version, state.plan)
            kept.noted = version
        state.unsaved = ""
    except (NotSaved, ValueError) as failure:
        state.unsaved = str(failure)


def is_behind(state: Desk, kept: Kept) -> bool:
    """Whether others changed the week, or issued a plan of it, since we looked.

    Raises:
        NotSaved: the records cannot be reached.
        Missing: the week is gone.
    """
    if version_of(kept.records, kept.week_id) != kept.saved:
        return True
    return latest_number(kept.records, kept.week_id) != (state.issued.number if state.issued else 0)


def _issued_last(kept: Kept) -> Issued | None:
    try:
        return find_plan(kept.records, kept.week_id)
    except Missing:
        return None


def _unread(state: Desk) -> tuple[Unused, ...]:
    return tuple(one for texts in state.unread_texts() for one in texts)
