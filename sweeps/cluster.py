"""Blocks solved by a dask.distributed cluster; the run folder stays with the process that asks."""

from __future__ import annotations

from collections.abc import Iterator
from concurrent.futures import Executor
from contextlib import contextmanager
from importlib import import_module

from model.errors import InputError

PATIENCE = 10.0
"""Seconds that a scheduler has to answer in."""


@contextmanager
def cluster(address: str) -> Iterator[Executor]:
    """The workers of a scheduler, as the executor of ``sweeps.jobs.carry_out``.

    address : of a running scheduler, such as ``tcp://10.0.0.5:8786``. Its workers need this
        program in the same version; a block whose worker ends is given to another one.

    Raises
    ------
    InputError
        The library is not there, or no scheduler answers.
    """
    try:
        distributed = import_module("distributed")  # optional
    except ImportError:
        raise InputError(
            "scheduler", repr(address), "install the library distributed first"
        ) from None
    try:
        client = distributed.Client(address, timeout=PATIENCE)
    except (OSError, ValueError, TimeoutError) as fault:
        raise InputError(
            "scheduler", repr(address), f"give the address of one that runs ({fault})"
        ) from None
    with client:
        yield client.get_executor(retries=3)
