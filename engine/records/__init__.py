"""Weeks, changes and plans on disk: SQLite in the user's folder by default, PostgreSQL by URL.

records = open_records()
opened = create_week(records, engine.read_week("week.xlsx"))
history = opened.history.after(change, who="Ann")
merged = save(records, opened.listed.id, history, saved=0)      # on disk when this returns
again = open_week(records, opened.listed.id)                    # again.history.week == history.week
"""

from engine.records.answers import load_answers, save_answers
from engine.records.before import week_before
from engine.records.failures import Missing, NotSaved
from engine.records.journal import Conflict, Made, append, changes_since, version_of
from engine.records.merging import Clash, Merged, caught_up, merge, save
from engine.records.named import Named, find_named
from engine.records.opening import Records, are_there, default_place, open_records
from engine.records.plans import Issued, find_plan, issue_plan, latest_number, list_plans
from engine.records.remarks import save_remarks
from engine.records.totals import WeekTotals, note_totals, totals_by_week
from engine.records.variants import list_variants, load_sent, remove_variant, save_sent, save_variant
from engine.records.weeks import (
    Listed,
    Opened,
    archive_week,
    copy_week,
    create_week,
    list_weeks,
    open_week,
    restore_as_new,
)

__all__ = [
    "Clash",
    "Conflict",
    "Issued",
    "Listed",
    "Made",
    "Merged",
    "Missing",
    "Named",
    "NotSaved",
    "Opened",
    "Records",
    "WeekTotals",
    "append",
    "archive_week",
    "are_there",
    "caught_up",
    "changes_since",
    "copy_week",
    "create_week",
    "default_place",
    "find_named",
    "find_plan",
    "issue_plan",
    "latest_number",
    "list_plans",
    "list_variants",
    "list_weeks",
    "load_answers",
    "load_sent",
    "merge",
    "note_totals",
    "open_records",
    "open_week",
    "remove_variant",
    "restore_as_new",
    "save",
    "save_answers",
    "save_remarks",
    "save_sent",
    "save_variant",
    "totals_by_week",
    "version_of",
    "week_before",
]
