"""Rows for the benchmark of series: invented readings, each with a velocity of its own."""

import numpy as np
import pyarrow as pa
from pyarrow import csv

from peers import COLUMNS

SEED = 7
BATCH = 65_536


def table(count):
    """`count` rows as an Arrow table: E in V/m, B in T, velocities in m/s up to 0.6 c."""
    rng = np.random.default_rng(SEED)
    sizes = [1e3] * 3 + [5e-5] * 3 + [1e8] * 3
    return pa.table([size * rng.uniform(-1, 1, count) for size in sizes], names=COLUMNS)


def write(count, folder):
    """The same rows in each format: paths by name of the format."""
    rows = table(count)
    paths = {name: folder / f"rows.{name}" for name in ("ndjson", "csv", "arrow")}
    with pa.OSFile(str(paths["arrow"]), "wb") as out, pa.ipc.new_stream(out, rows.schema) as stream:
        stream.write_table(rows, BATCH)
    csv.write_csv(rows, paths["csv"], csv.WriteOptions(quoting_style="none"))
    columns = [rows[name].to_pylist() for name in COLUMNS]
    with paths["ndjson"].open("w") as out:
        for row in zip(*columns):
            e, b, v = ([*map(repr, row[i : i + 3])] for i in (0, 3, 6))
            out.write(f'{{"e":[{",".join(e)}],"b":[{",".join(b)}],"velocity":[{",".join(v)}]}}\n')
    return paths
