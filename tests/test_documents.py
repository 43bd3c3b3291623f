"""The guide and the README hold what they promise: the tests named exist, the tables are those that the code gives."""

import re
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent


def test_every_hazard_names_a_test_that_exists():
    guide = (ROOT / "DEVELOPERS.md").read_text("utf-8")
    table = guide.split("## Hazards", 1)[1]
    rows = [line for line in table.splitlines() if line.startswith("| ") and not line.startswith(("| hazard", "| ---"))]
    assert len(rows) > 40
    written = set()
    for path in (ROOT / "tests").rglob("test_*.py"):
        written.update(re.findall(r"^ *def (test_\w+)", path.read_text("utf-8"), re.M))
    for row in rows:
        hazard, harm, control, proof = (cell.strip() for cell in row.strip("|").split(" | "))
        named = re.findall(r"`(test_\w+)`", proof)
        assert all((hazard, harm, control, named)), row
        assert set(named) <= written, row


def test_the_pictures_of_the_readme_exist_and_are_small():
    for name in re.findall(r"!\[[^]]*\]\(([^)]+)\)", (ROOT / "README.md").read_text("utf-8")):
        assert 5_000 < (ROOT / name).stat().st_size < 80_000, name


def test_the_accuracy_tables_of_the_readme_are_what_the_planner_gives():
    printed = subprocess.run(
        [sys.executable, "tests/benchmarks/accuracy_groups.py"], cwd=ROOT, capture_output=True, text=True, check=True
    ).stdout.strip()
    tables = printed.split("\n\n")
    assert [len(table.splitlines()) for table in tables] == [11, 9, 12]
    readme = (ROOT / "README.md").read_text("utf-8")
    assert [table in readme for table in tables] == [True, True, True]
