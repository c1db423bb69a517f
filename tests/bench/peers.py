"""What a laboratory would write instead of asking the service: the same boost in plain doubles.

`python peers.py NAME INPUT OUTPUT` answers a file and prints the seconds it took, imports aside.
Each reads rows of ex ey ez bx by bz and vx vy vz in SI units and writes the restated field.
"""

import gc
import sys
import time

import numpy as np

C = 299_792_458.0
FIELD = ["ex", "ey", "ez", "bx", "by", "bz"]
COLUMNS = [*FIELD, "vx", "vy", "vz"]
CHUNK = 65_536


def boost(ex, ey, ez, bx, by, bz, vx, vy, vz):
    """E' and B' of columns: Jackson, Classical Electrodynamics, 3rd ed., eq. 11.149."""
    beta_x, beta_y, beta_z = vx / C, vy / C, vz / C
    gamma = 1 / np.sqrt(1 - (beta_x * beta_x + beta_y * beta_y + beta_z * beta_z))
    k = gamma * gamma / (gamma + 1)
    along_e = k * (beta_x * ex + beta_y * ey + beta_z * ez)
    along_b = k * (beta_x * bx + beta_y * by + beta_z * bz)
    return (
        gamma * (ex + vy * bz - vz * by) - along_e * beta_x,
        gamma * (ey + vz * bx - vx * bz) - along_e * beta_y,
        gamma * (ez + vx * by - vy * bx) - along_e * beta_z,
        gamma * (bx - (beta_y * ez - beta_z * ey) / C) - along_b * beta_x,
        gamma * (by - (beta_z * ex - beta_x * ez) / C) - along_b * beta_y,
        gamma * (bz - (beta_x * ey - beta_y * ex) / C) - along_b * beta_z,
    )


def ndjson_orjson(source, target):
    """orjson + NumPy: chunks of rows, the garbage collector off."""
    import orjson

    gc.disable()
    with open(source, "rb") as rows, open(target, "wb") as out:
        while lines := rows.readlines(CHUNK * 240):
            parsed = [orjson.loads(line) for line in lines]
            columns = [np.array([row[name] for row in parsed]).T for name in ("e", "b", "velocity")]
            answer = np.array(boost(*columns[0], *columns[1], *columns[2])).T.tolist()
            for row, values in zip(parsed, answer):
                row["e"], row["b"] = values[:3], values[3:]
            out.write(b"\n".join(map(orjson.dumps, parsed)) + b"\n")


def ndjson_polars(source, target):
    """polars read_ndjson + NumPy + write_ndjson, on all cores; columns of lists."""
    import polars as pl

    schema = dict.fromkeys(("e", "b", "velocity"), pl.List(pl.Float64))
    frame = pl.read_ndjson(source, schema=schema)
    columns = [frame[name].list.get(i).to_numpy() for name in schema for i in range(3)]
    answer = boost(*columns)
    three = {"e": answer[:3], "b": answer[3:]}
    restated = [
        pl.Series(name, np.stack(parts, axis=1)).cast(pl.List(pl.Float64)) for name, parts in three.items()
    ]
    frame.with_columns(restated).write_ndjson(target)


def csv_polars(source, target):
    """polars read_csv + NumPy + write_csv, on all cores."""
    import polars as pl

    frame = pl.read_csv(source)
    answer = boost(*(frame[name].to_numpy() for name in COLUMNS))
    frame.with_columns(**dict(zip(FIELD, answer))).write_csv(target)


def csv_pyarrow(source, target):
    """PyArrow read_csv + NumPy + write_csv, on all cores."""
    import pyarrow as pa
    from pyarrow import csv

    table = csv.read_csv(source)
    answer = boost(*(table[name].to_numpy() for name in COLUMNS))
    rest = [table[name] for name in COLUMNS[6:]]
    csv.write_csv(pa.table([*answer, *rest], names=COLUMNS), target)


def csv_pandas(source, target):
    """pandas read_csv + NumPy + to_csv."""
    import pandas as pd

    frame = pd.read_csv(source)
    answer = boost(*(frame[name].to_numpy() for name in COLUMNS))
    frame[FIELD] = np.array(answer).T
    frame.to_csv(target, index=False)


def arrow_pyarrow(source, target):
    """PyArrow IPC stream + NumPy, batch by batch."""
    import pyarrow as pa

    with pa.memory_map(source) as rows, pa.OSFile(target, "wb") as out:
        reader = pa.ipc.open_stream(rows)
        with pa.ipc.new_stream(out, reader.schema) as writer:
            for batch in reader:
                answer = boost(*(batch[name].to_numpy() for name in COLUMNS))
                rest = [batch[name] for name in COLUMNS[6:]]
                writer.write_batch(pa.record_batch([*answer, *rest], names=COLUMNS))


PEERS = {
    peer.__name__: peer
    for peer in (ndjson_orjson, ndjson_polars, csv_polars, csv_pyarrow, csv_pandas, arrow_pyarrow)
}

if __name__ == "__main__":
    name, source, target = sys.argv[1:]
    peer = PEERS[name]
    # Imported before the clock starts.
    import orjson  # noqa: F401
    import pandas  # noqa: F401
    import polars  # noqa: F401
    import pyarrow.csv  # noqa: F401

    begin = time.perf_counter()
    peer(source, target)
    print(time.perf_counter() - begin)
