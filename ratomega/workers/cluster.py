"""The executor of a dask cluster, by the address of its scheduler. Needs the optional extra ``cluster``."""

from __future__ import annotations

import importlib
import socket
from collections.abc import Iterator
from contextlib import contextmanager

from ratomega.case.wording import quoted
from ratomega.errors import InputError
from ratomega.workers.hands import LentExecutor

__all__ = ["cluster_hands"]

WAIT = 10.0
PLAIN = ("tcp://", "tls://")


@contextmanager
def cluster_hands(address: str) -> Iterator[LentExecutor]:
    """Hands on the cluster whose scheduler listens at ``address``; the connection is closed at the end, no more.

    Raises ``InputError`` when dask is not installed, nobody answers, or the cluster has no workers.
    """
    try:
        distributed = importlib.import_module("distributed")
    except ImportError:
        message = "a cluster needs dask, which is not installed: pip install 'ratomega[cluster]'"
        raise InputError.single(message, "--cluster") from None
    try:
        # A client that cannot connect goes on trying for long, and longer when it is closed; this fails at once.
        if address.startswith(PLAIN) or "://" not in address:
            socket.create_connection(distributed.comm.get_address_host_port(address), timeout=WAIT).close()
        client = distributed.Client(address, timeout=WAIT, set_as_default=False)
    except (OSError, ValueError) as error:
        message = f"no dask scheduler answers at {quoted(address)} ({type(error).__name__})"
        raise InputError.single(message, "--cluster") from None
    with client:
        if not client.nthreads():
            raise InputError.single(f"the scheduler at {quoted(address)} has no workers", "--cluster")
        # pure=False: dask must not take two equal calls for one, which the same case run twice would make.
        executor = client.get_executor(pure=False)
        yield LentExecutor(executor, lambda: sum(client.nthreads().values()))
