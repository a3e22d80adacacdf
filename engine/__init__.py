"""Plans a freight desk's week: everything that can be used without a browser.

``read_week`` reads spreadsheets, ``plan_week`` plans what was read, ``write_workbook`` hands it over.
"""

from engine.exact import TooLarge
from engine.findings import Finding, Severity
from engine.history import History
from engine.intake.blank import write_blank
from engine.intake.check import check_week
from engine.intake.earlier import Quantities, read_quantities
from engine.intake.part import Part, read_part
from engine.intake.reading import Reading, Unreadable, read_week
from engine.planning.contradictions import contradictions
from engine.planning.plan import Plan, with_findings
from engine.planning.planner import NotPlannable, plan_week
from engine.report.plan_json import plan_as_json
from engine.report.workbook import write_workbook
from engine.week import Refused, Week

__all__ = [
    "Finding",
    "History",
    "NotPlannable",
    "Part",
    "Plan",
    "Quantities",
    "Reading",
    "Refused",
    "Severity",
    "TooLarge",
    "Unreadable",
    "Week",
    "check_week",
    "contradictions",
    "plan_as_json",
    "plan_week",
    "read_part",
    "read_quantities",
    "read_week",
    "with_findings",
    "write_blank",
    "write_workbook",
]
