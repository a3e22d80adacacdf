"""The command line: `hithe` opens the desk; its commands plan, check and hand out workbooks without one."""

import socket
import sys
from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING, NoReturn

import click

import engine
from app.compare_command import compare
from app.json_out import write_json
from app.search_line import end_line, progress_line, stopped_by_keyboard
from app.stress_command import stress
from engine.exact import canonical
from engine.findings import Finding, Severity, by_gravity, stops
from engine.planning.planner import USUAL_SECONDS

if TYPE_CHECKING:
    from app.sign_in import SignIn

SHORT = 3
UNUSABLE = 2
FAULT = 1


class _Faults(click.Group):
    """Turns what only we can mend into exit status 1, with a sentence instead of a traceback."""

    def invoke(self, ctx: click.Context) -> object:
        try:
            return super().invoke(ctx)
        except click.ClickException as wrong:
            if isinstance(wrong, click.UsageError) and wrong.ctx is not None:
                click.echo(wrong.ctx.get_usage(), err=True)
            click.echo(wrong.format_message(), err=True)
            ctx.exit(wrong.exit_code)
        except (click.exceptions.Exit, click.Abort):
            raise
        except Exception as fault:
            if ctx.params.get("trace"):
                raise
            click.echo(f"This is a fault of ours: {type(fault).__name__}: {fault}", err=True)
            click.echo("Run `hithe --trace …` again and send us what it prints.", err=True)
            ctx.exit(FAULT)


@click.group(cls=_Faults, invoke_without_command=True)
@click.option("--trace", is_flag=True, help="Show where a fault of ours comes from.")
@click.version_option(package_name="hithe")
@click.pass_context
def main(ctx: click.Context, trace: bool) -> None:
    """Plan a freight desk's week at least cost.

    Without a command it opens the desk in the browser. Exit status: 0 all orders met, 3 planned but
    something is short, 2 the figures cannot be used (every finding is on stderr, nothing is written),
    1 a fault of ours.
    """
    if ctx.invoked_subcommand is None:
        ctx.invoke(desk)


WEEK = click.argument(
    "week", nargs=-1, required=True, type=click.Path(exists=True, dir_okay=False, path_type=Path)
)


@main.command()
@click.argument("week", nargs=-1, type=click.Path(exists=True, dir_okay=False, path_type=Path))
@click.option("--sample", is_flag=True, help="Open the sample week.")
@click.option("--port", default=8507, show_default=True, help="The port that the desk listens on.")
@click.option(
    "--host",
    default="127.0.0.1",
    show_default=True,
    metavar="ADDRESS",
    help="The address it listens on; any but this machine's own needs --sign-in.",
)
@click.option(
    "--name",
    "names",
    multiple=True,
    metavar="NAME",
    help="A name that browsers reach it by, where --host is not one; may be given again.",
)
@click.option(
    "--sign-in",
    "sign_in_file",
    envvar="HITHE_SIGN_IN",
    metavar="FILE",
    show_envvar=True,
    type=click.Path(exists=True, dir_okay=False, path_type=Path),
    help="Who may come in: a TOML file, yours alone (chmod 600); the README shows one.",
)
@click.option(
    "--no-sign-in", is_flag=True, help="Let in whoever reaches the desk; weeks open by their addresses only."
)
@click.option("--browser/--no-browser", default=True, help="Open a browser window.")
@click.option(
    "--records",
    envvar="HITHE_RECORDS",
    metavar="URL",
    show_envvar=True,
    help="Where weeks are kept: a file, or postgresql://USER@HOST/DATABASE.",
)
@click.pass_context
def desk(
    ctx: click.Context,
    week: tuple[Path, ...] = (),
    sample: bool = False,
    port: int = 8507,
    browser: bool = True,
    records: str | None = None,
    host: str = "127.0.0.1",
    names: tuple[str, ...] = (),
    sign_in_file: Path | None = None,
    no_sign_in: bool = False,
) -> None:
    """Open the desk in the browser, with the week in these files if any are given."""
    from app.serve import ANY, is_this_machine, serve
    from engine.records import NotSaved, open_records

    sign_in = None if sign_in_file is None else _sign_in(sign_in_file)
    if sign_in is not None and no_sign_in:
        raise click.UsageError("--sign-in and --no-sign-in contradict each other: leave one out.")
    if sign_in is None and not is_this_machine(host):
        if not no_sign_in:
            raise click.UsageError(
                f"On {host} others can reach the desk, so it needs --sign-in FILE. Say --no-sign-in to let "
                f"in whoever reaches it: without names, and without a list of weeks."
            )
        if week:
            raise click.UsageError(
                "Without sign-in a desk on a network opens no files of yours at the start: whoever reaches "
                "it would get them. Open them in the browser and hand on the week's address."
            )
    reached = [*names, *([] if host in ANY or is_this_machine(host) else [host])]
    if sign_in is None and host in ANY and not names:
        reached = _names_of_this_machine()
    if records is not None:  # a place that was named and will not do is said before the desk opens
        try:
            open_records(records).close()
        except NotSaved as failure:
            click.echo(str(failure), err=True)
            ctx.exit(UNUSABLE)
    serve(port, browser, week, sample, records, host, reached, sign_in)


def _sign_in(file: Path) -> "SignIn":
    """What the sign-in file says; ends the command where it cannot be used."""
    from streamlit.auth_util import is_authlib_installed

    from app.sign_in import NoSignIn, read_sign_in

    try:
        found = read_sign_in(file)
    except NoSignIn as failure:
        raise click.UsageError(str(failure)) from None
    if not is_authlib_installed():
        raise click.UsageError("Signing in needs one package more: pip install 'hithe[sign-in]'.")
    return found


def _names_of_this_machine() -> list[str]:
    """What browsers on the network may call this machine."""
    own = socket.gethostname()
    try:
        addresses = [str(found[4][0]) for found in socket.getaddrinfo(own, None)]
    except OSError:
        addresses = []
    return list(dict.fromkeys([own, socket.getfqdn(), *addresses]))


PRODUCT = click.option("--product", metavar="NAME", help="Which one, where a column Product names several.")


@main.command()
@WEEK
@PRODUCT
@click.option("--near", type=click.Path(exists=True, dir_okay=False, path_type=Path), metavar="PLAN.xlsx",
              help="Among plans of equal cost, stay nearest to this earlier one.")  # fmt: skip
@click.option("--out", type=click.Path(dir_okay=False, path_type=Path), metavar="PLAN.xlsx",
              help="Write the plan as a workbook.")  # fmt: skip
@click.option("--json", "as_json", type=click.Path(dir_okay=False, allow_dash=True), metavar="FILE",
              help="Write the plan as JSON; - is stdout.")  # fmt: skip
@click.option("--values", "detail", type=click.Choice(["brief", "full"]), default="brief",
              show_default=True,
              help="full: the JSON also says how far values hold, and rates to stay within.")  # fmt: skip
@click.option("--time-limit", type=click.FloatRange(min=0), default=USUAL_SECONDS,
              show_default=True, metavar="SECONDS",
              help="With whole loads: how long to search; Ctrl-C keeps the best.")  # fmt: skip
@click.pass_context
def plan(
    ctx: click.Context,
    week: tuple[Path, ...],
    product: str | None,
    near: Path | None,
    out: Path | None,
    as_json: str | None,
    detail: str,
    time_limit: float,
) -> None:
    """Plan the week in these files (one workbook, or separate tables)."""
    reading = _read(ctx, week, product)
    earlier = None if near is None else _earlier(ctx, near)
    try:
        with stopped_by_keyboard() as stop:
            made = engine.plan_week(
                reading.week,
                near=earlier,
                progress=_progress,
                improved=progress_line(reading.week.rules.currency),
                should_stop=stop,
                time_limit=time_limit,
            )
    except engine.NotPlannable as stopped:
        _refuse(ctx, _together(reading.findings, stopped.findings))
    except engine.TooLarge as too_large:
        _refuse(ctx, [*reading.findings, Finding(Severity.STOPS, "too large", str(too_large))])
    if made.whole is not None:
        end_line()
    made = engine.with_findings(made, reading.findings)
    if out is not None:
        engine.write_workbook(made, out)
        click.echo(f"Wrote {out}", err=True)
    if as_json is not None:
        write_json(engine.plan_as_json(made, full=detail == "full"), as_json)
    else:
        click.echo(_summary(made))
    _tell(made.findings)
    ctx.exit(SHORT if made.status == "short" else 0)


@main.command()
@WEEK
@PRODUCT
@click.pass_context
def check(ctx: click.Context, week: tuple[Path, ...], product: str | None) -> None:
    """Read the figures in these files and list every finding; nothing is planned."""
    reading = _read(ctx, week, product, all_the_same=True)
    click.echo(reading.summary)
    found = _together(reading.findings, engine.contradictions(reading.week))
    _tell(found)
    if stops(found):
        ctx.exit(UNUSABLE)


@main.command()
@click.argument("out", type=click.Path(dir_okay=False, path_type=Path), metavar="OUT.xlsx")
@click.pass_context
def blank(ctx: click.Context, out: Path) -> None:
    """Write a workbook with the headings and no figures yet; a file that is there is left alone."""
    if out.exists():
        click.echo(f"{out} is there already and may hold figures: name another file.", err=True)
        ctx.exit(UNUSABLE)
    engine.write_blank(out)
    click.echo(f"Wrote {out}", err=True)


main.add_command(compare)
main.add_command(stress)


def _read(
    ctx: click.Context, files: tuple[Path, ...], product: str | None = None, all_the_same: bool = False
) -> engine.Reading:
    """The week in these files; ends the command where they cannot be used, unless asked for all the same."""
    try:
        reading = engine.read_week(list(files), product=product)
    except engine.Unreadable as refused:
        _refuse(ctx, [refused.finding])
    if stops(reading.findings) and not (all_the_same and not reading.week.is_empty):
        if len(reading.products) > 1 and reading.week.is_empty:
            click.echo(f"Name the product: --product '{reading.products[0]}'", err=True)
        _refuse(ctx, reading.findings)
    return reading


def _earlier(ctx: click.Context, file: Path) -> engine.Quantities:
    try:
        return engine.read_quantities(file)
    except engine.Unreadable as refused:
        _refuse(ctx, [refused.finding])


def _refuse(ctx: click.Context, findings: Iterable[Finding]) -> NoReturn:
    _tell(findings)
    ctx.exit(UNUSABLE)


def _together(first: Iterable[Finding], second: Iterable[Finding]) -> list[Finding]:
    """Both lists without what says the same twice."""
    return by_gravity(dict.fromkeys([*first, *second]))


def _tell(findings: Iterable[Finding]) -> None:
    for finding in by_gravity(findings):
        place = f"{finding.place}: " if finding.place else ""
        mend = f" {finding.mend}" if finding.mend else ""
        click.echo(f"{finding.severity.word}: {place}{finding.message}{mend}", err=True)


def _progress(what: str) -> None:
    if sys.stderr.isatty():
        click.echo(f"{what} …", err=True)


def _summary(made: engine.Plan) -> str:
    rules = made.week.rules
    lines = [
        f"{rules.week}: {'all orders met' if made.status == 'met' else 'something is short'}",
        f"Freight payable {canonical(made.freight_payable)} {rules.currency}",
        f"Charges: short {canonical(made.short_cost)}, unsent {canonical(made.unsent_cost)} {rules.currency}",
    ]
    lines += _of_loads(made)
    lines += [f"Short: {one.customer} {canonical(one.quantity)} {rules.unit}" for one in made.short]
    lines += [f"Unsent: {one.depot} {canonical(one.quantity)} {rules.unit}" for one in made.unsent]
    return "\n".join(lines)


def _of_loads(made: engine.Plan) -> list[str]:
    """With whole loads: how far the plan may be above the least cost, and what is opened."""
    if made.whole is None:
        return []
    currency = made.week.rules.currency
    lines = [f"Opened: {one.depot} {canonical(one.charge)} {currency}" for one in made.openings]
    bound, gap = (canonical(amount) for amount in (made.proof.lower_bound, made.proof.gap))
    lines.append(f"All costs {canonical(made.total_cost)} {currency}, at least {bound}: gap {gap}")
    return [*lines, made.whole.how(made.proof.exact)]


if __name__ == "__main__":
    main()
