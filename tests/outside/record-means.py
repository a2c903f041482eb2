#!/usr/bin/env python3
"""record-means.py RECORD: the mean of every column of the Parquet draws, by DuckDB and by PyArrow, beside the value
that summary.json states; and as many rows as it says. Exits 1 where they are further apart than sums in another order can be."""
import json
import math
import sys
from pathlib import Path

import duckdb
import pyarrow.compute as compute
import pyarrow.parquet as parquet

NEAR = 1e-11  # of the mean of the sizes; sums of millions of terms in any order agree far closer


def main():
    record = Path(sys.argv[1])
    summary = json.loads((record / "data/summary.json").read_text())
    plan = json.loads((record / "data/plan.json").read_text())
    if plan["keep"] != "draws":
        print("  the record keeps no draws")
        return 0
    places = {point["key"]: index for index, point in enumerate(plan["points"], 1)}
    compared, wrong, furthest = 0, 0, 0.0
    for point in summary["points"]:
        path = record / f"data/draws/point-{places[point['key']]}.parquet"
        table = parquet.read_table(path)
        ensemble = plan["points"][places[point["key"]] - 1].get("ensemble") or plan["base"]["ensemble"]
        rows = point["draws_per_chain"] * ensemble["chains"]
        if table.num_rows != rows:
            print(f"  {path.name}: {table.num_rows} rows, and the summary has {rows} draws")
            wrong += 1
        for estimand in point["estimands"]:
            name, value = estimand["name"], estimand["value"]
            if value is None or isinstance(value, str):
                continue
            # The two columns that every file has keep their names.
            column = f"{name} (quantity)" if name in ("chain", "draw") else name
            quoted = '"' + column.replace('"', '""') + '"'
            sql = f"select avg({quoted}), avg(abs({quoted})) from read_parquet(?)"
            by_duckdb, size = duckdb.execute(sql, [str(path)]).fetchone()
            by_pyarrow = compute.mean(table[column]).as_py()
            for reader, mean in (("DuckDB", by_duckdb), ("PyArrow", by_pyarrow)):
                apart = abs(mean - value) / size if size else abs(mean - value)
                furthest = max(furthest, apart)
                compared += 1
                if not apart <= NEAR or math.isnan(apart):
                    print(f"  {path.name}, {name}: {reader} has {mean!r}, the summary {value!r}")
                    wrong += 1
    print(f"  means                      {compared} compared, furthest apart {furthest:.1e}; {wrong} differ")
    return 1 if wrong or not compared else 0


sys.exit(main())
