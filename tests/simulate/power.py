# SPDX-License-Identifier: Apache-2.0
"""Power of each test at 5 %: `python -m tests.simulate.power [records]`. Log-linear growth by so many doublings over the window."""

from __future__ import annotations

import sys

from chronos_acc.trend.power import power, smallest_shown


def main(count: int) -> None:
    """Two tables."""
    sizes, doublings = (10, 30, 100), (0.0, 1.0, 2.0, 4.0, -2.0)
    print(f"Shares of {count} records in which a test gives p < 0.05, %\n")
    print("| test | doublings | n = 10 | n = 30 | n = 100 |\n|---|---|---|---|---|")
    results = [{(r.test, r.doublings): r.power for r in power(n, doublings=doublings, replicates=count).rows} for n in sizes]
    for test, d in results[0]:
        print(f"| {test} | {d:g} | " + " | ".join(f"{100 * r[test, d]:.1f}" for r in results) + " |")
    print("\nSmallest growth that Laplace's test shows in four cases of five\n\n| n | doublings |\n|---|---|")
    for n in (3, 5, 8, 10, 15, 20, 30, 50, 100):
        print(f"| {n} | {smallest_shown(n):.1f} |")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 4000)
