"""What a grid of figures holds between two runs of a page: its frame, and what nobody can read."""

from dataclasses import dataclass, field, replace

import pandas as pd

from engine.findings import Finding
from engine.intake.build_lists import Unused
from engine.intake.frames import GRID_COLUMNS, CellProblem, changes_between, draft_of
from engine.intake.numbers import NumberStyle
from engine.week import Week


@dataclass
class Draft:
    """`base` stays as it is for as long as `key` does; `draft` is what is on screen.

    `unread` are texts that are on screen and not in the week: the grid shows them when it starts afresh.
    """

    key: str = ""
    base: pd.DataFrame = field(default_factory=pd.DataFrame)
    draft: pd.DataFrame = field(default_factory=pd.DataFrame)
    problems: tuple[CellProblem, ...] = ()
    unread: tuple[Unused, ...] = ()

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
    frame = draft_of(week, table, unread, style)
    _, problems = changes_between(week, table, frame, frame, style)
    return Draft(draft=frame, unread=unread, problems=tuple(problems))


def unread_in(draft: Draft, week: Week, table: str) -> tuple[Unused, ...]:
    """The texts of a draft that are not in the week, so that they outlive a fresh start of the grid."""
    if table == "rules":
        return ()
    columns = GRID_COLUMNS[table]
    fields = {column.heading: column.field for column in columns}
    known = {"depots": week.depots, "customers": week.customers}.get(table, {})
    firsts = draft.draft[columns[0].heading].drop_duplicates().index  # a repeat is no row of the week
    found = []
    for label in dict.fromkeys(problem.row for problem in draft.problems if problem.stops):
        if label not in draft.draft.index:
            continue
        texts = {
            fields[str(name)]: str(text)
            for name, text in draft.draft.loc[[label]].iloc[0].items()
            if pd.notna(text)
        }
        name = texts.get(columns[0].field, "")
        if name in known and label in firsts:
            faulty = {fields[p.column] for p in draft.problems if p.row == label}
            found.append(Unused(table, {f: text for f, text in texts.items() if f in faulty}, name))
        elif table != "rates" or not _in_rates(week, texts):
            found.append(Unused(table, texts))
    return tuple(found)


def _in_rates(week: Week, texts: dict[str, str]) -> bool:
    """Whether the week has a rate row for this lane and haulier."""
    haulier = texts.get("haulier", "").strip() or None
    return bool(week.rates.ids(texts.get("depot", ""), texts.get("customer", ""), haulier))
