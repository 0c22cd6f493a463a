"""One block of solved rows as a file: Parquet that says whose it is, sealed over all its bytes.

The seal is a hash of the whole file with the seal's own place blank, so that a bit that turned
anywhere, in the numbers or in what describes them, is noticed before a number is believed.
"""

from __future__ import annotations

import hashlib
import io
import os
from collections.abc import Sequence
from pathlib import Path

import pandas as pd

from sweeps.folders import RunError, naming

_BLANK = "0" * 32


class BlockFault(Exception):
    """A block that cannot be trusted; says in words what is wrong with it."""


def write_block(path: Path, rows: pd.DataFrame, owner: str) -> None:
    """Put rows on disk, whole or not at all.

    owner : what run and which of its rows they are, in one line.
    """
    data = _sealed(rows, owner)
    scratch = path.with_name(f"{path.name}.part{os.getpid()}")
    with naming(path):
        scratch.write_bytes(data)
        os.replace(scratch, path)


def read_block(path: Path, owner: str, columns: Sequence[str] | None = None) -> pd.DataFrame:
    """Rows from disk, as they were written.

    columns : only these are taken out of the file; all when not given.

    Raises
    ------
    BlockFault
        The file is damaged, or holds rows of another run.
    RunError
        It has no such columns, or may not be read.
    """
    with naming(path):
        data = bytearray(path.read_bytes())
    mark = b"twistfront block, sealed "
    place = data.rfind(mark) + len(mark)
    seal = bytes(data[place : place + len(_BLANK)])
    data[place : place + len(_BLANK)] = _BLANK.encode()
    if place < len(mark) or seal != _seal(data):
        raise BlockFault("damaged")
    start = place + len(_BLANK) + 1
    if data[start : start + len(owner) + 1] != f"{owner};".encode():
        raise BlockFault("of another run")
    wanted = None if columns is None else list(columns)
    try:
        return pd.read_parquet(io.BytesIO(data), columns=wanted)
    except (KeyError, ValueError):
        raise RunError(
            f"{path}: lacks one of {', '.join(columns or ())}; sweep into a new folder"
        ) from None


def _sealed(rows: pd.DataFrame, owner: str) -> bytearray:
    import pyarrow as pa
    import pyarrow.parquet as pq

    table = pa.Table.from_pandas(rows, preserve_index=False)
    mark = f"twistfront block, sealed {_BLANK} {owner};"
    table = table.replace_schema_metadata({**table.schema.metadata, b"block": mark.encode()})
    sink = io.BytesIO()
    pq.write_table(table, sink)
    data = bytearray(sink.getbuffer())
    place = data.rfind(mark.encode()) + mark.index(_BLANK)
    data[place : place + len(_BLANK)] = _seal(data)
    return data


def _seal(data: bytes | bytearray) -> bytes:
    return hashlib.blake2b(data, digest_size=len(_BLANK) // 2).hexdigest().encode()
