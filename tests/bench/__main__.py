# SPDX-License-Identifier: Apache-2.0
"""``python -m tests.bench [NAME …]``: the speed table, as ratios timed in one run. Nothing is asserted."""

from __future__ import annotations

import sys

from . import rows


def main(names: list[str]) -> int:
    """Print a Markdown table of the chosen rows."""
    unknown = [n for n in names if n not in rows.ROWS]
    if unknown:
        print(f"no row {unknown[0]!r}; the rows are {', '.join(rows.ROWS)}", file=sys.stderr)
        return 2
    print("| work | beside | median | least to largest | target | met |\n| --- | --- | ---: | ---: | ---: | --- |", flush=True)
    told = []
    for name in names or rows.ROWS:
        for row in rows.ROWS[name]():
            print(f"| {row.work} | {row.yardstick} | {row.ratio:.2f} | {row.low:.2f} to {row.high:.2f} | {row.target} | {'yes' if row.met else 'no'} |", flush=True)
            told.append(f"- {row.work}: {row.where}")
    print("\n" + "\n".join(told))
    return 0


if __name__ == "__main__":
    raise SystemExit(main(sys.argv[1:]))
