"""The work on one line of a batch: pure, picklable, the same bytes on any process or machine."""

from __future__ import annotations

import json
from dataclasses import dataclass

from planner.batch.summary import summary_row
from planner.errors import PlannerError
from planner.results import Through

PLAN_FILE, ROW_FILE = "plan.json", "row.json"


@dataclass(frozen=True)
class Worked:
    """What became of one line: its files by name, or the sentence that says why there are none."""

    number: int
    name: str
    files: dict[str, bytes]
    failure: str | None


def work_on(number: int, name: str, text: bytes, papers: bool, through: Through = "kit") -> Worked:
    """Plan the case of one line. Never raises: a bad case or a fault in planning it is a sentence in the result.

    through: "forecast" leaves out all that comes after the forecast.
    """
    from planner import plan
    from planner.plan_file import plan_as_json
    from planner.records.reading import read_case

    try:
        case = read_case(text)
        result = plan(case, through=through)
        row = json.dumps(summary_row(case, result), ensure_ascii=False)
        files = {PLAN_FILE: plan_as_json(result, compact=True).encode(), ROW_FILE: row.encode()}
        if papers:
            from planner.papers import make_papers

            files |= {f"{paper}.pdf": content for paper, content in make_papers(case, result).items()}
    except PlannerError as error:
        return Worked(number, name, {}, " ".join(str(error).split("\n")))
    except Exception as error:  # one case must not stop the others; it is reported with its line
        return Worked(number, name, {}, f"The planner failed on this case ({type(error).__name__}: {error}).")
    return Worked(number, name, files, None)
