"""The whole table of measurements as the README holds it, by one command.

Run:  python tests/benchmarks/table.py [NAME ...]     (names of parts, such as kernels or kit; all where none is given)
Every ratio is to a baseline of the same run. Times are medians, with the least and the most in brackets; here and
baseline run in turn, so that a machine that slows down slows both. No time is a promise for another machine.
"""

from __future__ import annotations

import importlib
import os
import subprocess
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import HEADER

HERE = Path(__file__).resolve().parent
PARTS = ("kernels", "lung", "titration", "kit", "trip", "records", "papers", "batch", "screens")


def main() -> int:
    """Each part in a process of its own, so that none warms another; 1 where one failed."""
    wanted = sys.argv[1:] or PARTS
    unknown = [name for name in wanted if name not in PARTS]
    if unknown:
        print(f"There is no part {', '.join(unknown)}; there are {', '.join(PARTS)}.", file=sys.stderr)
        return 2
    print(HEADER, flush=True)
    failed = 0
    for name in wanted:
        call = f"import sys; sys.path.insert(0, {str(HERE)!r}); from table import print_rows; print_rows({name!r})"
        environment = os.environ | {"OPENBLAS_NUM_THREADS": "1"}
        failed += subprocess.run([sys.executable, "-c", call], cwd=HERE.parents[1], env=environment).returncode != 0
    return 1 if failed else 0


def print_rows(part: str) -> None:
    """The rows of one part, without the heading."""
    for row in importlib.import_module(f"bench_{part}").rows():
        print(row.text(), flush=True)


if __name__ == "__main__":
    sys.exit(main())
