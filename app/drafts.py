"""What a grid of figures holds between two runs of a page: its frame, and what nobody can read."""

from collections.abc import Hashable, Iterable
from dataclasses import dataclass, field, replace

import pandas as pd

from engine.changes import Alter, Change
from engine.figures import RateKey
from engine.findings import Finding
from engine.intake.build_lists import Unused
from engine.intake.frames import (
    GRID_COLUMNS,
    CellProblem,
    changes_between,
    draft_of,
    frame_of,
    identified,
    keys_of,
)
from engine.intake.numbers import NumberStyle
from engine.week import Week


@dataclass
class Draft:
    """`base` stays as it is for as long as `key` does; `draft` is what is on screen.

    `named` is the draft with the names that the week has for its rows, where those on screen cannot be read.
    `week` is the one that `named` was last shown with. `again` counts fresh starts of this grid alone.
    `unread` are texts that are on screen and not in the week: the grid shows them when it starts afresh.
    `clean` is the table as the week has it, and `made_of` what of the week it was made of, in which style.
    """

    key: str = ""
    again: int = 0
    week: Week = field(default_factory=Week)
    base: pd.DataFrame = field(default_factory=pd.DataFrame)
    draft: pd.DataFrame = field(default_factory=pd.DataFrame)
    named: pd.DataFrame = field(default_factory=pd.DataFrame)
    problems: tuple[CellProblem, ...] = ()
    unread: tuple[Unused, ...] = ()
    made_of: tuple[object, NumberStyle] | None = None
    clean: pd.DataFrame = field(default_factory=pd.DataFrame)

    @property
    def findings(self) -> list[Finding]:
        """What there is to say of the grid's cells, each with its table, row and column as the place."""
        return [self._placed(problem) for problem in self.problems]

    def _placed(self, problem: CellProblem) -> Finding:
        frame = self.draft
        named = list(frame.loc[[problem.row]].iloc[0]) if problem.row in frame.index else []
        row = ", ".join(str(text) for text in named[: 2 if problem.table == "rates" else 1] if text)
        return replace(
            problem.finding, file="", sheet=problem.table.capitalize(), cell=f"{row}: {problem.column}"
        )


def opened(week: Week, table: str, unused: tuple[Unused, ...], style: NumberStyle) -> Draft:
    """The draft of a table as it was read, with the cells that nobody can read among its problems."""
    unread = tuple(one for one in unused if one.table == table)
    if not unread:
        return Draft()
    draft = Draft(unread=unread)
    start(draft, week, table, style)
    return draft


def start(draft: Draft, week: Week, table: str, style: NumberStyle) -> list[Change]:
    """Let a draft show the week anew, with the texts that nobody could read where they stood.

    Returns the changes that those of them make which can be read by now.
    """
    part = getattr(week, table)
    if draft.made_of is None or draft.made_of[0] is not part or draft.made_of[1] != style:
        # A change shares what it did not touch: a depot's stock is no reason to write all rates anew.
        draft.clean, draft.made_of = frame_of(week, table, style), (part, style)
    draft.named, draft.week = draft.clean.copy(), week
    draft.problems = ()
    if not draft.unread:
        draft.draft = draft.named
        return []
    draft.draft = draft_of(week, table, draft.unread, style)
    draft.named = _named_in(draft.named, draft.draft)
    changes, problems = changes_between(week, table, draft.named, draft.draft, style)
    draft.problems = tuple(problems)
    return changes


def edit(draft: Draft, edited: pd.DataFrame, week: Week, table: str, style: NumberStyle) -> list[Change]:
    """Take over an edited frame: the changes that it makes; what nobody can read becomes its problems."""
    changes, problems = changes_between(week, table, draft.named, edited, style)
    unread = {(problem.row, problem.column) for problem in problems if problem.stops}
    draft.named = identified(table, draft.named, edited, unread)
    draft.draft, draft.problems = edited, tuple(problems)
    return changes


def unread_in(draft: Draft, week: Week, table: str) -> tuple[Unused, ...]:
    """The texts of a draft that are not in the week, so that they outlive a fresh start of the grid.

    A row of the week keeps its unread cells, under its name or key; a row that never was in it keeps all.
    """
    faulty: dict[Hashable, set[str]] = {}
    for problem in draft.problems:
        if problem.stops and problem.row in draft.draft.index:
            faulty.setdefault(problem.row, set()).add(problem.column)
    if not faulty:
        return ()
    keys = keys_of(draft.week, table, draft.named) | keys_of(week, table, draft.named)
    fields = {column.heading: column.field for column in GRID_COLUMNS[table]}
    found = []
    for label, headings in faulty.items():
        row = draft.draft.loc[[label]].iloc[0]
        if table == "rules":
            if label in keys and pd.notna(row["Value"]):
                found.append(Unused(table, {"value": str(row["Value"])}, keys[label]))
            continue
        texts = {str(name): str(text) for name, text in row.items() if pd.notna(text)}
        kept = headings if label in keys else fields
        found.append(
            Unused(table, {fields[h]: texts.get(h, "") for h in kept if h in fields}, keys.get(label))
        )
    return tuple(found)


def renamed(unread: tuple[Unused, ...], changes: Iterable[Change]) -> tuple[Unused, ...]:
    """Texts of rates, their rows known by the new names of depots and customers."""
    for change in changes:
        if isinstance(change, Alter) and change.field == "name" and change.what in ("depot", "customer"):
            unread = tuple(
                replace(one, key=one.key._replace(**{change.what: change.value}))
                if isinstance(one.key, RateKey) and getattr(one.key, change.what) == change.key
                else one
                for one in unread
            )
    return unread


def _named_in(frame: pd.DataFrame, draft: pd.DataFrame) -> pd.DataFrame:
    """The rows of a draft as the week has them, then those that are not in it."""
    return pd.concat([frame, draft.iloc[len(frame) :]]) if len(draft) > len(frame) else frame
