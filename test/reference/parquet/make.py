"""Small Parquet files, and the CSV they are the same table as, written by pyarrow 25.0.1.

    python3 make.py

Tracks are text, frames 64-bit whole numbers, x in double and y in single precision (so that both are exact in the CSV),
error columns with values that repeat (dictionaries), a note that nobody reads with missing values, several row groups.
"""

import pyarrow as pa
import pyarrow.parquet as pq

ROWS = [(track, frame) for track in ("north", "south", "ü") for frame in range(12) if frame != 5]
table = pa.table(
    {
        "track": pa.array([track for track, _ in ROWS]),
        "frame": pa.array([frame for _, frame in ROWS], pa.int64()),
        "note": pa.array([None if frame % 2 else {"a": [frame]} for _, frame in ROWS], pa.struct({"a": pa.list_(pa.int64())})),
        "x": pa.array([frame * 0.125 + len(track) for track, frame in ROWS], pa.float64()),
        "y": pa.array([(frame * frame) / 16 - 2 for _, frame in ROWS], pa.float32()),
        "error_x": pa.array([0.25] * len(ROWS), pa.float64()),
        "error_y": pa.array([0.5] * len(ROWS), pa.float64()),
    }
)
for compression in ("none", "snappy", "gzip", "zstd", "brotli", "lz4"):
    pq.write_table(table, f"tracks-{compression}.parquet", compression=compression, row_group_size=10)
with open("tracks.csv", "w", encoding="utf-8") as out:
    out.write("track,frame,x,y,error_x,error_y\n")
    for i in range(table.num_rows):
        row = [table[name][i].as_py() for name in ("track", "frame", "x", "y", "error_x", "error_y")]
        out.write(",".join(str(cell) for cell in row) + "\n")
gaps = pa.table({"time": [0.0, 1.0, 2.0, 3.0], "x": pa.array([1.0, None, 3.5, float("nan")])})
pq.write_table(gaps, "gaps.parquet")
