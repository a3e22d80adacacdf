"""Twenty dispatchers at once on one desk: is a change lost, does memory grow, how long does an edit take?

    python -m tests.load --minutes 10

A real server, and real sessions that speak Streamlit's own protocol (`tests/browserless.py`): each opens a
week of 20 x 500, types charges into the grid of depots, sees the price, makes the change, and looks every
two seconds whether others changed the week, as a page does. Afterwards every change that was acknowledged
is looked for in the records.
"""

import random
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import click
import psutil

import engine
import sample_data
from engine.records import create_week, open_records, open_week
from tests.browser.conftest import environment, free_port, wait_until_open
from tests.browserless import Lost, Visitor, together

CHARGE = "Charge if unsent"
LOOKS = 2.0


class Dispatcher:
    """One session that edits its own depot of a week until the time is over."""

    def __init__(self, address: str, week_id: str, number: int, pause: float) -> None:
        self.address, self.week_id, self.number, self.pause = address, week_id, number, pause
        self.priced: list[float] = []
        self.made: list[float] = []
        self.acknowledged: list[str] = []
        self.unsure: list[str] = []
        self.fault = ""
        self.count = 0
        self.visitor: Visitor | None = None

    def open(self) -> None:
        self.visitor = Visitor(self.address, f"week={self.week_id}&who=Dispatcher {self.number}")
        self.visitor.run()

    def work(self, end: float) -> None:
        chance = random.Random(f"{self.number} {self.count}")
        time.sleep(min(chance.uniform(0, self.pause), max(0.0, end - time.monotonic())))
        try:
            while time.monotonic() < end:
                self.count += 1
                self._edit(f"{self.number}.{self.count:05}1")
                until = time.monotonic() + chance.uniform(0.5, 1.5) * self.pause
                while time.monotonic() < min(until, end):
                    time.sleep(min(LOOKS, max(0.0, until - time.monotonic())))
                    self.here.look()
        except (Lost, OSError, TimeoutError) as fault:
            self.fault = f"{type(fault).__name__}: {fault}"

    @property
    def here(self) -> Visitor:
        if self.visitor is None:
            raise Lost("Not opened yet.")
        return self.visitor

    def _edit(self, value: str) -> None:
        begun = time.monotonic()
        self.here.edit("depots-", self.number % 20, CHARGE, value)
        shown = time.monotonic()
        self.unsure.append(value)
        self.here.press("accept")
        done = time.monotonic()
        if self.here.has("button", "accept"):
            raise Lost("The change is still not made.")
        self.unsure.pop()
        self.acknowledged.append(value)
        self.priced.append(shown - begun)
        self.made.append(done - shown)


def memory(process: psutil.Process) -> float:
    """MB that the desk holds."""
    return float(process.memory_info().rss) / 1e6


def percentile(times: list[float], share: float) -> float:
    return sorted(times)[min(len(times) - 1, int(share * len(times)))] if times else float("nan")


@click.command()
@click.option("--minutes", default=10.0, show_default=True)
@click.option("--dispatchers", default=20, show_default=True)
@click.option("--weeks", default=20, show_default=True, help="Fewer than dispatchers: they share weeks.")
@click.option(
    "--pause", default=10.0, show_default=True, help="Seconds between two edits of one, on average."
)
@click.option("--records", "place", default=None, help="A PostgreSQL URL; SQLite in a new folder otherwise.")
def main(minutes: float, dispatchers: int, weeks: int, pause: float, place: str | None) -> None:
    """Load a desk for some minutes and say what happened."""
    with tempfile.TemporaryDirectory() as folder:
        where = place or str(Path(folder) / "records.sqlite")
        records = open_records(where)
        reading = engine.read_week(sample_data.path("large_week.xlsx"))
        ids = [create_week(records, reading).listed.id for _ in range(weeks)]
        port = free_port()
        address = f"http://127.0.0.1:{port}"
        with (Path(folder) / "desk.log").open("wb") as log:
            command = [sys.executable, "-m", "app.command", "desk", "--no-browser", "--port", str(port)]
            desk = subprocess.Popen(
                command, cwd=folder, stdout=log, stderr=log, env={**environment(), "HITHE_RECORDS": where}
            )
        try:
            wait_until_open(address, desk)
            process = psutil.Process(desk.pid)
            at_start = memory(process)
            first = Dispatcher(address, ids[0], 0, pause)
            first.open()  # the solver is ready once this has a page
            work = [Dispatcher(address, ids[n % weeks], n, pause) for n in range(dispatchers)]
            begun = time.monotonic()
            together([one.open for one in work])
            opened = time.monotonic() - begun
            first.here.close()
            held = [memory(process)]
            click.echo(f"{dispatchers} sessions on {weeks} weeks of 20 x 500 opened in {opened:.1f} s")
            click.echo(f"memory: {at_start:.0f} MB at the start, {held[0]:.0f} MB with all open")
            busy, begun = sum(process.cpu_times()[:2]), time.monotonic()
            for part in range(1, 5):
                end = begun + minutes * 60 * part / 4
                together([lambda one=one, end=end: one.work(end) for one in work if not one.fault])
                held.append(memory(process))
                click.echo(f"  after {(time.monotonic() - begun) / 60:.1f} min: {held[-1]:.0f} MB, "
                           f"{sum(len(one.acknowledged) for one in work)} changes")  # fmt: skip
            cores = (sum(process.cpu_times()[:2]) - busy) / (time.monotonic() - begun)
            told(work, cores)
            lost = missing(records, ids, work)
            for one in work:
                one.here.close()
            time.sleep(3)
            click.echo(f"memory: {memory(process):.0f} MB after all have left")
        finally:
            desk.terminate()
            desk.wait(30)
            records.close()
    if lost or any(one.fault for one in work):
        sys.exit(1)


def told(work: list[Dispatcher], cores: float) -> None:
    """How long edits took, and who met a fault."""
    for what, times in (
        ("edit to price", [t for one in work for t in one.priced]),
        ("made and on disk", [t for one in work for t in one.made]),
        ("both together", [a + b for one in work for a, b in zip(one.priced, one.made, strict=False)]),
    ):
        middle = statistics.median(times) if times else 0
        most = f"95th percentile {percentile(times, 0.95):.2f} s, longest {max(times, default=0):.2f} s"
        click.echo(f"{what}: median {middle:.2f} s, {most}")
    click.echo(f"the desk kept {cores:.2f} cores busy")
    for one in work:
        if one.fault:
            click.echo(f"dispatcher {one.number}: {one.fault}")


def missing(records: engine.records.Records, ids: list[str], work: list[Dispatcher]) -> int:  # type: ignore[name-defined]
    """How many acknowledged changes are not in the records, or are there twice."""
    found: list[str] = []
    for week_id in ids:
        entries = open_week(records, week_id).history.entries
        found += [str(getattr(entry.change, "value", "")) for entry in entries]
    wanted = [value for one in work for value in one.acknowledged]
    unsure = {value for one in work for value in one.unsure}
    lost = [value for value in wanted if found.count(value) != 1]
    strange = [value for value in found if value not in unsure and value not in set(wanted)]
    click.echo(
        f"{len(wanted)} changes acknowledged, {len(lost)} lost or doubled, {len(strange)} never asked for"
    )
    return len(lost) + len(strange)


if __name__ == "__main__":
    main()
