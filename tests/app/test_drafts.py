"""A grid that starts afresh writes only what a change touched anew."""

from decimal import Decimal

import pytest

import engine
import sample_data
from app import drafts
from app.drafts import Draft, start
from engine.changes import Alter
from engine.intake.frames import frame_of, style_of


def test_what_a_change_did_not_touch_is_not_written_anew(monkeypatch: pytest.MonkeyPatch) -> None:
    week = engine.read_week(sample_data.path(sample_data.SMALL_WEEK)).week
    made: list[str] = []

    def counted(week, table, style):  # type: ignore[no-untyped-def]
        made.append(table)
        return frame_of(week, table, style)

    monkeypatch.setattr(drafts, "frame_of", counted)
    grids = {table: Draft() for table in ("depots", "customers", "rates", "rules")}
    later = week.apply(Alter("depot", next(iter(week.depots)), "available", Decimal(7)))
    for now in (week, later, later):
        for table, grid in grids.items():
            start(grid, now, table, style_of(now))
            assert grid.draft.equals(frame_of(now, table, style_of(now)))
    assert made == ["depots", "customers", "rates", "rules", "depots"]
    grids["rates"].draft.iloc[0, 0] = "typed"  # what is on screen is a copy
    start(grids["rates"], later, "rates", style_of(later, ","))
    assert made[-1] == "rates"
    assert grids["rates"].draft.equals(frame_of(later, "rates", style_of(later, ",")))
