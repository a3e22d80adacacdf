"""Sheet *Notes*: what was assumed, accepted, held and not checked, so that the plan can be answered for."""

from collections.abc import Iterator
from datetime import datetime
from decimal import Decimal

from engine.exact import canonical
from engine.findings import Severity, by_gravity
from engine.planning.plan import Plan
from engine.report.costs import service_in_words
from engine.report.look import Style, height_of
from engine.report.rules_used import rules_used
from engine.report.sheet import MOST_DIGITS, Row, Sheet, fits_a_number
from engine.week import describe

CAUTIONS = (
    "The plan allocates quantities. It does not check axle or gross weights, drivers' hours, dangerous "
    "goods, "
    "temperature, site access or customs.",
    "Local codes and licensed practice decide those. Have them checked before anything is loaded.",
)

NOT_CHECKED = (
    "Whether a haulier has the vehicles, or a depot the loading bays, on a given day: Loads a day counts for "
    "the whole week, and only where load sizes are given.",
    "On which day of the week a quantity goes: order numbers and days are carried along, not scheduled.",
    "Distances and positions: Km, Latitude and Longitude are not used in the costs.",
    "Whether the figures themselves are right. Findings name what looks wrong; nobody but the desk can say "
    "what is.",
)

_MOST_LISTED = 500

PART = Style("part")
_STYLES = [Style("strong", wrap=True), Style(wrap=True)]
_WIDTHS = (26, 110)


def notes_sheet(
    plan: Plan, header: str, made: datetime | None = None, remarks: tuple[str, ...] = ()
) -> Sheet:
    """Sheet *Notes*.

    made: when the file is written, as the desk's clock has it; None leaves it out.
    remarks: what the writer of the workbook has to say about the workbook itself.
    """
    rows = list(_rows(plan, made, remarks))
    return Sheet("Notes", _WIDTHS, rows, length=len(rows), header=header, landscape=False)


def notes_of(
    plan: Plan, made: datetime | None = None, remarks: tuple[str, ...] = ()
) -> list[tuple[str, list[tuple[str, str]]]]:
    """The notes in parts: a title, and pairs of a label (may be empty) and a sentence."""
    parts = [
        (f"Notes on the plan for {plan.week.rules.week}", list(_about(plan, made))),
        ("How the figures were understood", list(rules_used(plan))),
        ("Holds", list(_holds(plan)) if plan.week.holds else []),
        ("Findings that came with this plan", list(_findings(plan))),
        ("Cautions", [("", sentence) for sentence in CAUTIONS]),
        ("Not checked", [("", sentence) for sentence in NOT_CHECKED]),
        ("About this workbook", [("", remark) for remark in (*_about_numbers(plan), *remarks)]),
    ]
    return [(title, pairs) for title, pairs in parts if pairs]


def _rows(plan: Plan, made: datetime | None, remarks: tuple[str, ...]) -> Iterator[Row]:
    (title, about), *parts = notes_of(plan, made, remarks)
    yield Row([title], [Style("title")], height=26)
    yield from _pairs(about)
    for name, pairs in parts:
        yield from _part(name)
        yield from _pairs(pairs)


def _part(name: str) -> Iterator[Row]:
    yield Row([])
    yield Row([name, None], [PART, PART])


def _pairs(pairs: Iterator[tuple[str, str]] | list[tuple[str, str]]) -> Iterator[Row]:
    for label, words in pairs:
        values = [label or None, words]
        yield Row(values, _STYLES, height_of(values, _WIDTHS, _STYLES))


def _about(plan: Plan, made: datetime | None) -> list[tuple[str, str]]:
    week, rules = plan.week, plan.week.rules
    pairs = [("Week", rules.week)]
    if made is not None:
        pairs.append(("Written", made.isoformat(sep=" ", timespec="minutes")))
    pairs += [
        (
            "Figures",
            f"{len(week.depots)} depots, {len(week.customers)} customers, {len(week.rates):,} rate rows; "
            f"quantities in {rules.unit}, money in {rules.currency}.",
        ),
        ("Orders", service_in_words(plan)),
        ("Freight payable", f"{canonical(plan.freight_payable)} {rules.currency}"),
        ("Proof", _proof_in_words(plan)),
    ]
    return pairs


def _proof_in_words(plan: Plan) -> str:
    currency = plan.week.rules.currency
    if plan.proof.exact:
        return (
            "Proved: with these figures, holds and aims no plan costs less than "
            f"{canonical(plan.total_cost)} "
            f"{currency}, exactly (freight before rounding, and charges). Sheet Proof adds it up again."
        )
    if plan.whole is not None:
        return (
            f"No plan with whole loads costs less than {canonical(plan.proof.lower_bound)} {currency}, which "
            f"is proved; this one costs at most {canonical(plan.proof.gap)} {currency} more than it must."
        )
    return (
        f"Not proved to the last digit: no plan costs less than {canonical(plan.proof.lower_bound)} "
        f"{currency}; "
        f"this one costs {canonical(plan.proof.gap)} {currency} more than that."
    )


def _holds(plan: Plan) -> Iterator[tuple[str, str]]:
    unit = plan.week.rules.unit
    for key, hold in plan.week.holds.items():
        yield f"{canonical(hold.quantity)} {unit}", f"{describe(key)}: {hold.reason or 'no reason given'}"


def _findings(plan: Plan) -> Iterator[tuple[str, str]]:
    found = by_gravity(plan.findings)
    if not found:
        yield "", "None: nothing in the figures called for a remark."
    for finding in found[:_MOST_LISTED]:
        where = f"{finding.place}: " if finding.place else ""
        mend = f" ({finding.mend})" if finding.mend and finding.severity is not Severity.NOTE else ""
        yield finding.severity.word, f"{where}{finding.message}{mend}"
    if len(found) > _MOST_LISTED:
        yield "", f"{len(found) - _MOST_LISTED:,} more findings are not listed here."


def _about_numbers(plan: Plan) -> Iterator[str]:
    yield (
        f"A spreadsheet keeps {MOST_DIGITS} digits of a number. Whatever needs more stands in these sheets "
        "as text, so "
        "that no digit is lost; formulas pass such cells over."
    )
    long = [name for name, amount in _totals(plan) if not fits_a_number(amount)]
    if long:
        yield f"In this workbook that concerns {', '.join(long)}."
    yield (
        "Depots, Customers, Rates and Rules are the figures as used, holds included: the workbook can be "
        "read in again "
        "and gives the same week and the same cost. Text is never a formula, whatever it begins with."
    )


def _totals(plan: Plan) -> Iterator[tuple[str, Decimal]]:
    yield "exact freight", plan.freight_cost
    yield "freight payable", plan.freight_payable
    yield "charges for short", plan.short_cost
    yield "charges for unsent", plan.unsent_cost
    yield "freight and charges", plan.total_cost
