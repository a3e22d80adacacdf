"""`hithe stress`: what each loss would do to a week, and how its cost is distributed if figures stray."""

import signal
import sys
import threading
from collections.abc import Callable, Iterator
from concurrent.futures import Executor
from contextlib import ExitStack, contextmanager
from decimal import Decimal, InvalidOperation
from pathlib import Path
from typing import Any

import click

import engine
from app.json_out import write_json
from engine.compare.frontier import Emissions, Frontier, NoTradeOff, frontier
from engine.compare.stress import Stressed, short_often, spreading, stressed
from engine.compare.stress_cases import Case, all_by, depots_lost, drawn, hauliers_lost, lanes_lost
from engine.compare.stress_cluster import NoCluster, cluster
from engine.compare.stress_draws import Draws, Spread, spread_of
from engine.compare.stress_ground import is_no_network
from engine.compare.stress_run import processes
from engine.compare.stress_whole import SECONDS_A_CASE, NotDrawn, dearest_lanes_lost
from engine.exact import canonical
from engine.money import minor_places, round_half_up
from engine.report.stress_json import stress_as_json
from engine.report.stress_sheet import stress_sheet
from engine.report.trade_off_sheet import trade_off_sheet
from engine.report.workbook import header_of

SHORT, UNUSABLE, STOPPED = 3, 2, 130
LOSSES = ("depots", "hauliers", "lanes")


class Percent(click.ParamType[Any]):
    """A number of percent, exactly as typed."""

    name = "percent"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> Decimal:
        try:
            found = Decimal(str(value).rstrip("% "))
        except InvalidOperation:
            found = Decimal("NaN")
        if not found.is_finite() or found < -100:
            self.fail(f"'{value}' is no change in percent: type a number, such as 10 or -7.5.", param, ctx)
        return found


class Amount(click.ParamType[Any]):
    """A number above 0, exactly as typed."""

    name = "amount"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> Decimal:
        try:
            found = Decimal(str(value))
        except InvalidOperation:
            found = Decimal("NaN")
        if not found.is_finite() or found <= 0:
            self.fail(f"'{value}' is no number above 0.", param, ctx)
        return found


class Strays(click.ParamType[Any]):
    """How a figure strays in drawn weeks."""

    name = "spread"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> Spread:
        try:
            return value if isinstance(value, Spread) else spread_of(str(value))
        except ValueError as wrong:
            self.fail(str(wrong), param, ctx)


FILE = click.Path(exists=True, dir_okay=False, path_type=Path)


@click.command()
@click.argument("week", nargs=-1, required=True, type=FILE)
@click.option("--lose", multiple=True, type=click.Choice([*LOSSES, "nothing"]), default=LOSSES,
              show_default=True, help="What is lost, one by one; lanes: those the plan uses.")  # fmt: skip
@click.option("--orders", multiple=True, type=Percent(), help="All orders changed by so many percent.")
@click.option("--rates", multiple=True, type=Percent(), help="All rates changed by so many percent.")
@click.option("--draw", type=click.IntRange(0), default=0, metavar="N", help="Draw so many weeks.")
@click.option("--seed", type=click.IntRange(0, 2**63 - 1), default=1, show_default=True,
              help="The same seed draws the same weeks.")  # fmt: skip
@click.option("--orders-stray", type=Strays(), metavar="HOW",
              help="In drawn weeks, for example 'triangular -20 0 30', 'normal 0 5 -15 15', 'even -10 5'; "
              "in percent, each customer by itself, or all alike with 'together' behind.")  # fmt: skip
@click.option("--stock-stray", type=Strays(), metavar="HOW", help="Likewise what depots have available.")
@click.option("--rates-stray", type=Strays(), metavar="HOW", help="Likewise the rates, haulier by haulier.")
@click.option("--workers", type=click.IntRange(1, 256), metavar="N", help="Work on so many processes.")
@click.option("--cluster", "address", metavar="ADDRESS", help="Work on the Dask cluster of this scheduler.")
@click.option("--time-limit", type=click.FloatRange(min=0), default=SECONDS_A_CASE, show_default=True,
              metavar="SECONDS", help="With whole loads: how long to search for each case.")  # fmt: skip
@click.option("--emission-factor", type=Amount(), metavar="KG",
              help="Also trade cost off against emissions: your own kg CO2e per tonne-km.")  # fmt: skip
@click.option("--source", default="", metavar="TEXT", help="Where that factor is from; it is printed.")
@click.option("--tonnes-per-unit", type=Amount(), metavar="T", help="Weight of a unit that is not a weight.")
@click.option("--json", "as_json", type=click.Path(dir_okay=False, allow_dash=True), metavar="FILE",
              help="Write every case as JSON; - is stdout.")  # fmt: skip
@click.option("--out", type=click.Path(dir_okay=False, path_type=Path), metavar="PLAN.xlsx",
              help="Write the plan as a workbook, with a sheet Stress.")  # fmt: skip
@click.pass_context
def stress(
    ctx: click.Context,
    week: tuple[Path, ...],
    lose: tuple[str, ...],
    orders: tuple[Decimal, ...],
    rates: tuple[Decimal, ...],
    draw: int,
    seed: int,
    orders_stray: Spread | None,
    stock_stray: Spread | None,
    rates_stray: Spread | None,
    workers: int | None,
    address: str | None,
    time_limit: float,
    emission_factor: Decimal | None,
    source: str,
    tonnes_per_unit: Decimal | None,
    as_json: str | None,
    out: Path | None,
) -> None:
    """Stress the week in these files: what if a depot, a haulier or a lane is lost, or figures stray?

    Every case is a plan of its own, proved. With whole loads it is searched for, and what is proved stands
    beside it; of the lanes only the dearest are lost, and no weeks are drawn. Ctrl-C stops, keeps what is
    done and exits with 130. Otherwise the exit status is 0 if nobody goes short in any case, 3 if somebody
    does, 2 if the figures cannot be used.
    """
    from app.command import _read, _refuse, _tell, _together

    draws = Draws(seed, orders_stray, stock_stray, rates_stray)
    if draw and draws.is_empty:
        raise click.UsageError(
            "Drawn weeks need to stray: give --orders-stray, --stock-stray or --rates-stray."
        )
    if emission_factor is not None and not source.strip():
        raise click.UsageError("Say where the emission factor is from: give --source.")
    if workers and address:
        raise click.UsageError("Give --workers or --cluster, not both.")
    reading = _read(ctx, week)
    try:
        plan = engine.plan_week(reading.week)
    except engine.NotPlannable as stopped:
        _refuse(ctx, _together(reading.findings, stopped.findings))
    cases: list[Case] = []
    whole = is_no_network(plan)
    lanes = dearest_lanes_lost if whole else lanes_lost
    if whole and (workers or address):
        click.echo("With whole loads cases are searched for one after the other, on this machine.", err=True)
        workers = address = None
    for what, cases_of in (("depots", depots_lost), ("hauliers", hauliers_lost), ("lanes", lanes)):
        if what in lose:
            cases += cases_of(plan)
    cases += [*all_by("orders", orders), *all_by("rates", rates), *drawn(draws, draw)]
    try:
        found = _run(plan, cases, workers, address, time_limit)
        traded = None
        if emission_factor is not None:
            traded = frontier(plan, Emissions(emission_factor, source.strip(), tonnes_per_unit))
    except (NoCluster, NoTradeOff, NotDrawn, engine.TooLarge) as missing:
        click.echo(str(missing), err=True)
        ctx.exit(UNUSABLE)
    if out is not None:
        made = engine.with_findings(plan, reading.findings)
        sheets = [stress_sheet(found, header_of(plan))]
        sheets += [] if traded is None else [trade_off_sheet(traded, header_of(plan))]
        engine.write_workbook(made, out, more=sheets)
        click.echo(f"Wrote {out}", err=True)
    if as_json is not None:
        write_json(stress_as_json(found), as_json)
    else:
        click.echo("\n".join([*_lines(found), *([] if traded is None else _trade_off(traded))]))
    _tell(reading.findings)
    if found.stopped:
        click.echo(f"Stopped: {len(found.outcomes):,} of {found.asked:,} cases are done.", err=True)
        ctx.exit(STOPPED)
    ctx.exit(SHORT if any(one.short for one in (found.today, *found.outcomes)) else 0)


def _run(
    plan: engine.Plan, cases: list[Case], workers: int | None, address: str | None, seconds: float
) -> Stressed:
    """The stressed plan, with progress on stderr; Ctrl-C stops it and keeps what is done."""
    with ExitStack() as stack:
        stop = stack.enter_context(_stopping())
        bar = stack.enter_context(
            click.progressbar(
                length=len(cases), label="Cases", file=sys.stderr, hidden=not sys.stderr.isatty()
            )
        )
        executor: Executor | None = None
        renew: Callable[[], Executor] | None = None
        count = workers or 1
        if address is not None:
            executor, count = stack.enter_context(cluster(address))
        elif workers is not None:
            renew = lambda: stack.enter_context(processes(min(workers, max(1, len(cases)))))  # noqa: E731
            executor = renew()
        return stressed(
            plan,
            cases,
            executor,
            workers=count,
            progress=lambda done, _: bar.update(done - bar.pos),
            stop=stop.is_set,
            renew=renew,
            seconds=seconds,
        )


@contextmanager
def _stopping() -> Iterator[threading.Event]:
    """Ctrl-C asks for a stop; a second one ends the command at once."""
    stop = threading.Event()
    if threading.current_thread() is not threading.main_thread():
        yield stop
        return
    before = signal.getsignal(signal.SIGINT)

    def ask(number: int, frame: object) -> None:
        stop.set()
        signal.signal(signal.SIGINT, before)

    signal.signal(signal.SIGINT, ask)
    try:
        yield stop
    finally:
        signal.signal(signal.SIGINT, before)


def _trade_off(found: Frontier) -> list[str]:
    rules, emissions = found.plan.week.rules, found.emissions
    minor, first = minor_places(rules.currency), found.points[0]
    lines = [
        "",
        f"Cost against emissions, {canonical(emissions.factor)} kg CO2e per tonne-kilometre "
        f"({emissions.source})",
        f"{rules.currency:>16}  {'kg CO2e':>16}  {'each kg less':>14}",
    ]
    for point in found.points:
        each = "" if point.per_kg is None else f"{float(point.per_kg):.4f}"
        cost = canonical(round_half_up(point.cost, minor))
        lines.append(f"{cost:>16}  {canonical(round_half_up(point.emissions, 1)):>16}  {each:>14}".rstrip())
    if len(found.points) == 1:
        lines.append("The cheapest plan is also the one that emits least.")
    if found.today.emissions != first.emissions:
        lines.append(f"The plan as it stands emits {canonical(found.today.emissions)} kg at the same cost.")
    return lines


def _lines(found: Stressed) -> list[str]:
    rules = found.plan.week.rules
    minor = minor_places(rules.currency)
    lines = [
        f"{rules.week}: {canonical(round_half_up(found.today.total, minor))} {rules.currency} "
        f"freight and charges today, {canonical(found.today.missing)} {rules.unit} short",
    ]
    ranked = found.ranked()
    if ranked:
        width = max(len(one.case.words) for one in ranked)
        proved = "" if found.seconds is None else f"{'at least':>14}  "
        lines += ["", f"{'':{width}}  {'more short':>12}  {'dearer by':>14}  {proved}".rstrip()]
        for one in ranked:
            if one.why:
                lines.append(f"{one.case.words:{width}}  cannot be planned: {one.why}")
                continue
            hit = ", ".join(f"{name} {canonical(quantity)}" for name, quantity in one.hit[:3])
            more = f" and {len(one.hit) - 3} more" if len(one.hit) > 3 else ""
            short = canonical(found.more_short(one))
            dearer, surely = (
                canonical(round_half_up(amount, minor))
                for amount in (found.dearer(one), found.surely_dearer(one))
            )
            proved = "" if found.seconds is None else f"{surely:>14}  "
            lines.append(f"{one.case.words:{width}}  {short:>12}  {dearer:>14}  {proved}{hit}{more}".rstrip())
    lines += found.unchanged
    if found.seconds is not None:
        lines += [
            f"With whole loads each case was searched for {found.seconds:g} s. Dearer by: the best plan "
            "found against today's. At least: proved, by so much or more the least cost rises.",
            f"Today's plan is at most {canonical(found.today.gap)} {rules.currency} above the least cost.",
        ]
        lines += [
            f"{one.case.words}: perhaps less would go short, which is not proved."
            for one in ranked
            if one.may_serve_better
        ]
    spread = spreading([one.total for one in found.drawn])
    if spread is not None:
        often = short_often(found.drawn)
        most = ", most often: " + ", ".join(f"{one.customer} ({one.weeks:,})" for one in often[:5])
        least, tenth, half, nine, top = (
            canonical(round_half_up(amount, minor))
            for amount in (spread.least, spread.tenth, spread.middle, spread.ninetieth, spread.most)
        )
        lines += [
            "",
            f"{len(found.drawn):,} drawn weeks, freight and charges in {rules.currency}: least {least}, "
            f"a tenth up to {tenth}, half up to {half}, nine tenths up to {nine}, most {top}",
            f"Something goes short in {sum(bool(one.short) for one in found.drawn):,} of them"
            + (most if often else ""),
        ]
    return lines
