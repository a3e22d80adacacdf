"""The two ends of `hithe compare`: files, or weeks and issued plans of the records by their names."""

from dataclasses import dataclass, replace
from datetime import datetime
from pathlib import Path

import click

import engine
from app.parts.change_words import words_of
from engine.compare.bridge import Side
from engine.compare.events import events_of
from engine.compare.quantities import Priced
from engine.compare.service import SECONDS
from engine.compare.usual import Rule, usual_plan
from engine.exact import TooLarge
from engine.findings import Finding, Severity, stops
from engine.history import History
from engine.planning.near import sent_by

SENDS_OTHERWISE = Finding(
    Severity.CHECK,
    "plan as sent",
    "The sheet Plan does not send what the figures in this file lead to; it is compared as it stands.",
    "Where you changed a figure in a plan's workbook, run hithe plan on it and compare what that writes.",
    sheet="Plan",
)


@dataclass(frozen=True)
class _End:
    """A side; of a week in the records also its changes, up to which of them, and when it was opened."""

    side: Side
    week_id: str = ""
    history: History | None = None
    version: int = 0
    opened: datetime | None = None


def sides(ctx: click.Context, first: str, second: str, place: str | None) -> tuple[Side, Side]:
    """Both ends with their plans; ends the command where one cannot be used.

    place: where the records are, None for the usual place
    """
    one, two = (_end(ctx, said, place) for said in (first, second))
    before, after = one.side, two.side
    if two.history is not None:  # what somebody did to the second week since is told event by event
        since = one.version if one.week_id == two.week_id else 0
        figures, events = events_of(two.history, words_of, since, two.version)
        after = replace(after, before=figures, events=events)
    if before.name == after.name and one.opened is not None:
        before = replace(before, name=f"{before.name} as opened on {one.opened.astimezone():%d %b, %H:%M}")
    return before, after


def _end(ctx: click.Context, said: str, place: str | None) -> _End:
    file = Path(said)
    return _End(_of_file(ctx, file)) if file.is_file() else _of_records(ctx, said, place)


def _of_records(ctx: click.Context, said: str, place: str | None) -> _End:
    from app.command import _refuse, _together
    from engine.records import Missing, NotSaved, are_there, find_named, open_records

    try:
        if not are_there(place):
            raise click.UsageError(f"'{said}' is no file here, and there are no records to look it up in.")
        records = open_records(place)
        try:
            found = find_named(records, said)
        finally:
            records.close()
    except Missing as missing:
        raise click.UsageError(f"'{said}' is no file here, nor a week in the records. {missing}") from None
    except NotSaved as failure:
        raise click.UsageError(f"'{said}' is no file here. {failure}") from None
    opened, issued = found.opened, found.issued
    history, listed = opened.history, opened.listed
    if issued is not None:
        week = history.at(issued.version)
        side = Side(f"{listed.name}, plan {issued.number}", week, issued)
        return _End(side, listed.id, history, issued.version, listed.created)
    if stops(opened.findings):
        _refuse(ctx, opened.findings)
    try:
        plan = engine.plan_week(history.week, time_limit=SECONDS)
    except engine.NotPlannable as stopped:
        _refuse(ctx, _together(opened.findings, stopped.findings))
    except TooLarge as too_large:
        _refuse(ctx, [*opened.findings, Finding(Severity.STOPS, "too large", str(too_large))])
    side = Side(listed.name, history.week, plan)
    return _End(side, listed.id, history, len(history.entries), listed.created)


def _of_file(ctx: click.Context, file: Path) -> Side:
    """The week in a file with its plan: as the file sends it, where it is a plan's workbook."""
    from app.command import _read, _refuse, _tell, _together

    reading = _read(ctx, (file,))
    try:
        sent = engine.read_quantities(file)
    except engine.Unreadable:
        sent = None
    try:
        plan = engine.plan_week(reading.week, near=sent)
        as_it_was: Priced = plan
        if sent is not None and dict(sent_by(plan)) != {key: much for key, much in sent.items() if much}:
            as_it_was = usual_plan(reading.week, Rule.ACTUAL, sent, completed=None).costs
            _tell([replace(SENDS_OTHERWISE, file=file.name)])
    except engine.NotPlannable as stopped:
        _refuse(ctx, _together(reading.findings, stopped.findings))
    except TooLarge as too_large:
        _refuse(ctx, [*reading.findings, Finding(Severity.STOPS, "too large", str(too_large))])
    _tell(reading.findings)
    return Side(reading.week.rules.week, reading.week, as_it_was)
