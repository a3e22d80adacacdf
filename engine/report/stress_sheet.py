"""Sheet *Stress*: what each loss would do, ranked, and how the drawn weeks are distributed; with charts."""

from collections.abc import Sequence
from decimal import Decimal
from typing import Any

from engine.compare.stress import Stressed, histogram, short_often, spreading
from engine.compare.stress_draws import Spread
from engine.compare.stress_solve import Outcome
from engine.exact import canonical
from engine.money import minor_places
from engine.report.look import DEEP, Style, number_format, places_of
from engine.report.native_charts import bars_height, chart_rows, columns, ranked_bars
from engine.report.sheet import Row, Sheet, Value

_WIDTHS = (44, 15, 16, 16, 16, 16, 17, 66)
_MORE_WIDTHS = (18, 18)
_MOST_BARS = 15
_MOST_NAMED = 4
_COUNT = "#,##0"


def stress_sheet(stressed: Stressed, header: str) -> Sheet:
    """The sheet; the named cases first, then the drawn weeks. Charts stand where they print with it."""
    listed = len(stressed.ranked())
    bars = min(listed, _MOST_BARS)
    above = _about(stressed)
    charts_at = len(above) + 1
    rows = [*above, *([Row([])] * chart_rows(bars_height(bars)) if bars else []), *_cases(stressed)]
    first = len(rows) - listed + 1
    bins = histogram([one.total for one in stressed.drawn])
    rows += _drawn(stressed)
    first_bin = next((at for at, row in enumerate(rows, 1) if row.values[:1] == ("From",)), 0) + 1

    def finish(sheet: Any) -> None:
        money, unit = stressed.plan.week.rules.currency, stressed.plan.week.rules.unit
        if bars:
            where = (1, first, first + bars - 1)
            sheet.add_chart(ranked_bars(sheet, f"More short, {unit}", where, 2, "#,##0.##"), f"A{charts_at}")
            sheet.add_chart(ranked_bars(sheet, f"Dearer by, {money}", where, 3, _COUNT), f"E{charts_at}")
        if bins:
            where = (1, first_bin, first_bin + len(bins) - 1)
            axes = (f"Freight and charges from, {money}", "Drawn weeks")
            sheet.add_chart(columns(sheet, "Cost of the drawn weeks", where, 3, axes), f"E{first_bin - 8}")

    widths = _WIDTHS if stressed.seconds is None else (*_WIDTHS, *_MORE_WIDTHS)
    return Sheet("Stress", widths, rows, len(rows), header=header, tab=DEEP, finish=finish)


def strays_in_words(spread: Spread | None) -> str:
    """How a figure strays, for people."""
    if spread is None:
        return "as the week says"
    low, high, centre = canonical(spread.low), canonical(spread.high), canonical(spread.centre)
    alike = ", all alike" if spread.together else ", each by itself"
    match spread.shape:
        case "triangular":
            return f"triangular from {low} % over {centre} % to {high} %{alike}"
        case "normal":
            deviation = canonical(spread.deviation)
            return f"normal around {centre} %, deviation {deviation} %, within {low} % and {high} %{alike}"
    return f"even between {low} % and {high} %{alike}"


def _about(stressed: Stressed) -> list[Row]:
    rules, quiet = stressed.plan.week.rules, [Style("quiet")]
    return [
        Row([f"Stress of {rules.week}"], [Style("title")], height=26),
        Row(
            [
                f"Money in {rules.currency}, exact and before rounding; quantities in {rules.unit}. Every "
                "case is a plan of its own"
                + (", proved." if stressed.seconds is None else f", searched for {stressed.seconds:g} s.")
            ],
            quiet,
        ),
        *(Row([sentence], quiet) for sentence in _searched(stressed)),
        Row(
            [
                "Dearer by: freight and charges beside today. Where less is delivered, freight may fall: "
                "read it with what goes short."
            ],
            quiet,
        ),
        *(Row([sentence], quiet) for sentence in stressed.unchanged),
        *([Row([f"Stopped early: {len(stressed.outcomes):,} of {stressed.asked:,} cases were done."],
               [Style("strong")])] if stressed.stopped else []),
        Row([]),
    ]  # fmt: skip


def _searched(stressed: Stressed) -> list[str]:
    """What the figures are where vehicles are whole."""
    if stressed.seconds is None:
        return []
    said = [
        "Dearer by holds the best plan found against today's. At least dearer by is proved: by so much or "
        "more the least cost rises, service as good.",
    ]
    if stressed.today.gap:
        said.append(f"Today's plan itself is at most {canonical(stressed.today.gap)} above the least cost.")
    open_ended = [one.case.words for one in stressed.ranked() if one.may_serve_better]
    if open_ended:
        said.append(f"Perhaps less would go short, which is not proved: {', '.join(open_ended)}.")
    return said


def _cases(stressed: Stressed) -> list[Row]:
    money, quantity = _formats(stressed)
    styles = [Style(), quantity, money, money, money, money, quantity, Style()]
    names = ["Case", "More short", "Dearer by", "Freight", "Charge for short", "Charge for unsent",
             "Goes another way", "Who is hit"]  # fmt: skip
    today = stressed.today
    first: list[Value] = ["Today", None, None, today.freight, today.short_charge, today.unsent_charge, None,
                          _who(today.short)]  # fmt: skip
    if stressed.seconds is not None:
        names += ["At least dearer by", "Charge for opening"]
        styles, first = [*styles, money, money], [*first, None, today.opening_charge]
    rows = [_headings(*names), Row(first, [style._replace(kind="total") for style in styles])]
    rows += [Row(_cells(stressed, one), styles) for one in stressed.ranked()]
    return rows


def _cells(stressed: Stressed, one: Outcome) -> list[Value]:
    name = one.case.words[:1].upper() + one.case.words[1:]
    if one.why:
        return [name, None, None, None, None, None, None, f"Cannot be planned. {one.why}"]
    proved = [] if stressed.seconds is None else [stressed.surely_dearer(one), one.opening_charge]
    return [
        name, stressed.more_short(one), stressed.dearer(one), one.freight, one.short_charge,
        one.unsent_charge, one.moved, _who(one.hit), *proved,
    ]  # fmt: skip


def _drawn(stressed: Stressed) -> list[Row]:
    """The part on drawn weeks."""
    drawn, draws = stressed.drawn, stressed.draws
    if not drawn or draws is None:
        return []
    money, quantity = _formats(stressed)
    count, quiet = Style(number=_COUNT, align="right"), [Style("quiet")]
    totals = [one.total for one in drawn]
    spread, bins = spreading(totals), histogram(totals)
    short = sum(bool(one.short) for one in drawn)
    rows = [
        Row([]),
        Row([f"{len(drawn):,} drawn weeks", *[None] * 3], [Style("part")] * 4),
        Row([f"Seed {draws.seed}: the same seed draws the same weeks."], quiet),
        *(
            Row([f"{what}: {strays_in_words(one)}."], quiet)
            for what, one in (("Orders", draws.orders), ("Stock", draws.stock), ("Rates", draws.rates))
        ),
        Row([f"Something goes short in {short:,} of them."], [Style("strong")]),
    ]
    if spread is not None:
        rows += [
            _headings("Freight and charges", "Amount"),
            *(
                Row([what, amount], [Style(), money])
                for what, amount in (
                    ("Least", spread.least),
                    ("A tenth of the weeks up to", spread.tenth),
                    ("Half of the weeks up to", spread.middle),
                    ("Nine tenths of the weeks up to", spread.ninetieth),
                    ("Most", spread.most),
                )
            ),
            Row([]),
        ]
    rows.append(_headings("From", "to", "Drawn weeks"))
    left = money._replace(align="left")
    rows += [Row([one.low, one.high, one.count], [left, money, count]) for one in bins]
    often = short_often(drawn)
    if often:
        rows += [Row([]), _headings("Goes short", "Drawn weeks", "At most", "On average over all")]
        rows += [
            Row([one.customer, one.weeks, one.most, float(f"{float(one.sum) / len(drawn):.6g}")],
                [Style(), count, quantity, Style(number="#,##0.00", align="right")])
            for one in often
        ]  # fmt: skip
    return rows


def _formats(stressed: Stressed) -> tuple[Style, Style]:
    """Styles of money and of quantities."""
    minor = minor_places(stressed.plan.week.rules.currency)
    quantities: list[Decimal | None] = [
        figure for one in (stressed.today, *stressed.outcomes) for figure in (one.missing, one.moved)
    ]
    return (
        Style(number=number_format(minor), align="right"),
        Style(number=number_format(places_of(quantities)), align="right"),
    )


def _who(hit: Sequence[tuple[str, Decimal]]) -> str | None:
    if not hit:
        return None
    line = sorted(hit, key=lambda one: -one[1])
    more = f" and {len(line) - _MOST_NAMED} more" if len(line) > _MOST_NAMED else ""
    return ", ".join(f"{name} {canonical(quantity)}" for name, quantity in line[:_MOST_NAMED]) + more


def _headings(*names: str) -> Row:
    styles = [
        Style("heading", align="right" if place and name != "Who is hit" else "left", wrap=True)
        for place, name in enumerate(names)
    ]
    return Row(names, styles, 30)
