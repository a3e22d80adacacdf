"""`hithe compare`: why does one week, or one plan, cost more than another?"""

import sys
from dataclasses import replace
from decimal import Decimal
from pathlib import Path

import click

import engine
from app.compare_sides import sides
from app.json_out import write_json
from engine.compare.bridge import Bridge, Side, bridge
from engine.compare.bridge_words import paragraph
from engine.compare.effects import STATED_ORDER
from engine.compare.mixed import NotComparable
from engine.compare.service import saving
from engine.compare.usual import NoRule, Rule, UsualPlan, rules_possible, usual_plan
from engine.exact import TooLarge, canonical
from engine.findings import Finding, Severity
from engine.money import minor_places, round_half_up
from engine.report.bridge_json import bridge_as_json
from engine.report.bridge_sheet import bridge_sheet
from engine.report.compare_sheet import compare_sheet
from engine.report.workbook import header_of

SHORT = 3


@click.command()
@click.argument("first", metavar="A")
@click.argument("second", metavar="B")
@click.option("--order", default="", metavar="EFFECT,…",
              help=f"Effects to take first, in this order. They are: {', '.join(STATED_ORDER)}.")  # fmt: skip
@click.option("--average", is_flag=True, help="The average over all orders (Shapley 1953), not one order.")
@click.option("--usual", type=click.Choice([Rule.NEAREST.value, Rule.CHEAPEST.value]),
              help="With --out: the usual plan that B is held against.")  # fmt: skip
@click.option("--json", "as_json", type=click.Path(dir_okay=False, allow_dash=True), metavar="FILE",
              help="Write the comparison as JSON; - is stdout.")  # fmt: skip
@click.option("--out", type=click.Path(dir_okay=False, path_type=Path), metavar="PLAN.xlsx",
              help="Write the plan of B as a workbook, with the sheets Compare and Bridge.")  # fmt: skip
@click.option("--records", envvar="HITHE_RECORDS", metavar="URL", show_envvar=True,
              help="Where named weeks are kept: a file, or postgresql://USER@HOST/DATABASE.")  # fmt: skip
@click.pass_context
def compare(
    ctx: click.Context,
    first: str,
    second: str,
    order: str,
    average: bool,
    usual: str | None,
    as_json: str | None,
    out: Path | None,
    records: str | None,
) -> None:
    """Say why B costs more than A, or less: each is a week, or the workbook of a plan.

    A and B are files, or weeks in the records by their name or id: 'Week 6' is the week as it stands now,
    'Week 6#2' its plan 2 as it was issued.

    A plan is taken as it was sent; a week is planned. Exit status: 0 all orders met in both, 3 something is
    short in one of them, 2 the figures cannot be used.
    """
    from app.command import _refuse

    one, two = sides(ctx, first, second, records)
    if one.name == two.name:  # 'Week 6 costs more than Week 6' would say nothing
        one, two = replace(one, name=f"{one.name} ({first})"), replace(two, name=f"{two.name} ({second})")
    wanted = [effect.strip() for effect in order.split(",") if effect.strip()]
    try:
        found = bridge(one, two, wanted, average, _progress)
    except (NotComparable, TooLarge) as refused:
        _refuse(ctx, [Finding(Severity.STOPS, "not comparable", str(refused))])
    except engine.NotPlannable as stopped:
        _refuse(ctx, stopped.findings)
    if out is not None:
        _write(ctx, two, found, usual, out)
    if as_json is not None:
        write_json(bridge_as_json(found), as_json)
    else:
        click.echo("\n".join(_lines(found)))
    ctx.exit(SHORT if one.plan.short or two.plan.short else 0)


def _write(ctx: click.Context, side: Side, found: Bridge, rule: str | None, out: Path) -> None:
    plan = side.plan if isinstance(side.plan, engine.Plan) else engine.plan_week(side.week)
    header = header_of(plan)
    sheets = [bridge_sheet(found, header)]
    try:
        usual: UsualPlan = usual_plan(plan.week, Rule(rule) if rule else rules_possible(plan.week)[0])
        sheets.insert(0, compare_sheet(plan, usual, saving(plan, usual.costs), header))
    except (NoRule, engine.NotPlannable) as refused:
        click.echo(f"No sheet Compare: {refused}", err=True)
    engine.write_workbook(plan, out, more=sheets)
    click.echo(f"Wrote {out}", err=True)


def _lines(found: Bridge) -> list[str]:
    places = minor_places(found.currency)

    def money(value: Decimal) -> str:
        return f"{round_half_up(value, places):.{places}f}"

    lines = [paragraph(found, money=lambda value: f"{money(value)} {found.currency}"), ""]
    width = max([len(step.name) for step in found.steps] + [len(found.first), len(found.second), 8])
    lines.append(f"{'':{width}}  {'freight':>14}  {'then':>14}  {'charges':>12}  {'short':>10}")
    lines.append(f"{found.first:{width}}  {'':>14}  {money(found.first_freight):>14}")
    for step in found.steps:
        then = "" if step.after is None else money(step.after)
        lines.append(
            f"{step.name:{width}}  {money(step.freight):>14}  {then:>14}  "
            f"{money(step.charges):>12}  {canonical(step.short):>10}"
        )
    lines.append(
        f"{found.second:{width}}  {money(found.freight):>14}  {money(found.second_freight):>14}  "
        f"{money(found.charges):>12}  {canonical(found.short):>10}"
    )
    return [*lines, *(["", *found.remarks] if found.remarks else [])]


def _progress(done: int, of: int) -> None:
    if sys.stderr.isatty():
        click.echo(f"\rPlanning step {done} of {of} …", err=True, nl=done == of)
