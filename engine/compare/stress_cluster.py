"""A stress run on a Dask cluster: its workers as an executor like any other."""

from collections.abc import Iterator
from concurrent.futures import Executor
from contextlib import contextmanager
from typing import Any

LONGEST_WAIT = 60
"""Seconds in which a scheduler must answer."""


class NoCluster(ConnectionError):
    """The cluster cannot be used; the message says why and what to do."""


@contextmanager
def cluster(address: str) -> Iterator[tuple[Executor, int]]:
    """The executor of the cluster whose scheduler listens at `address`, and how many parts it works on.

    Its workers need this package in the same version. A part whose worker dies is done again by another.

    Raises:
        NoCluster: Dask is not installed here, nothing answers at the address, or no worker is there.
    """
    try:
        import distributed

        connect: Any = distributed.Client
    except ImportError:
        raise NoCluster("Dask is not installed here: pip install 'hithe[cluster]'.") from None
    try:
        client = connect(address, timeout=LONGEST_WAIT, set_as_default=False)
    except (OSError, ValueError) as failure:
        raise NoCluster(f"No Dask scheduler answers at {address} ({type(failure).__name__}).") from failure
    try:
        threads = sum(client.nthreads().values())
        if not threads:
            raise NoCluster(f"The cluster at {address} has no workers: start some and try again.")
        executor: Any = client.get_executor(pure=False)
        yield executor, threads
        executor.shutdown(wait=False)
    finally:
        client.close()
