"""A search by whole loads on the command line: a line of progress on stderr, Ctrl-C keeps the best plan."""

import signal
import sys
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from types import FrameType

import click

from engine.exact import canonical
from engine.money import minor_places, round_half_up
from engine.planning.load_plan import Improving

EVERY_SECONDS = 1.0


@contextmanager
def stopped_by_keyboard() -> Iterator[threading.Event]:
    """An event that the first Ctrl-C sets; a second one interrupts as usual."""
    stop = threading.Event()
    if threading.current_thread() is not threading.main_thread():  # signals reach the main thread alone
        yield stop
        return
    before = signal.getsignal(signal.SIGINT)

    def on_interrupt(number: int, frame: FrameType | None) -> None:
        stop.set()
        signal.signal(signal.SIGINT, before)
        click.echo("\nStopping: the best plan so far is kept.", err=True)

    signal.signal(signal.SIGINT, on_interrupt)
    try:
        yield stop
    finally:
        signal.signal(signal.SIGINT, before)


def progress_line(currency: str) -> Callable[[Improving], None]:
    """Tells of every better plan and bound: on one line of a terminal, else a line a second at most."""
    on_terminal = sys.stderr.isatty()
    last: list[float] = []

    def tell(news: Improving) -> None:
        now = time.monotonic()
        if not on_terminal and last and now - last[0] < EVERY_SECONDS:
            return
        last[:] = [now]
        cost, bound, gap = (
            canonical(round_half_up(amount, minor_places(currency)))
            for amount in (news.cost, news.lower_bound, news.gap)
        )
        short = f", {canonical(news.short)} short" if news.short else ""
        line = f"{news.seconds:.0f} s: best so far {cost} {currency}{short}, at least {bound}, gap {gap}"
        click.echo(f"\r{line:<100}" if on_terminal else line, err=True, nl=not on_terminal)

    return tell


def end_line() -> None:
    """Leave the line of progress as it is."""
    if sys.stderr.isatty():
        click.echo(err=True)
