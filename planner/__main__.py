"""Command line: python -m planner plan | demo | batch | outcomes | export | import | profiles.

Exit status: 0 done; 1 something in a batch failed; 2 bad input, with a sentence on standard error.
"""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from planner.errors import PlannerError

if TYPE_CHECKING:
    from planner.case import Case

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small arrays: more threads only cost; set before numpy loads
DEMO_NAMES = ("copd_layover", "fibrosis_mountain_hotel", "neuromuscular_car_and_plane")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and give its exit status."""
    chosen = _parser().parse_args(arguments)
    try:
        return int(chosen.run(chosen))
    except PlannerError as error:
        print(f"planner: {error}", file=sys.stderr)
        return 2
    except OSError as error:
        print(f"planner: {error.filename or 'a file'} cannot be used: {error.strerror}", file=sys.stderr)
        return 2


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="python -m planner",
        description="Home-oxygen and altitude planner. Estimate only. Confirm with prescriber.",
    )
    commands = parser.add_subparsers(required=True, metavar="COMMAND")

    plan = commands.add_parser("plan", help="plan one case: the plan as JSON and the papers as PDF")
    plan.add_argument("case", type=Path, metavar="CASE.json")
    plan.add_argument("--out", type=Path, required=True, metavar="FOLDER")
    plan.set_defaults(run=_run_plan)

    demo = commands.add_parser("demo", help="the same for an invented demo case")
    demo.add_argument("--out", type=Path, required=True, metavar="FOLDER")
    demo.add_argument("--case", choices=DEMO_NAMES, default=DEMO_NAMES[0], help="which demo (default: %(default)s)")
    demo.set_defaults(run=_run_demo)

    batch = commands.add_parser("batch", help="plan many cases, one JSON case a line; can be stopped and resumed")
    batch.add_argument("cases", type=Path, metavar="CASES.jsonl")
    batch.add_argument("--out", type=Path, required=True, metavar="FOLDER")
    batch.add_argument("--papers", action="store_true", help="write the PDF papers of each case too")
    batch.add_argument("--forecast-only", action="store_true", help="without flows, decisions, kit and papers: faster")
    batch.add_argument("--workers", type=int, default=1, metavar="N", help="processes (default: %(default)s)")
    batch.set_defaults(run=_run_batch)

    outcomes = commands.add_parser("outcomes", help="predicted against measured for cases with a recorded outcome")
    outcomes.add_argument("cases", type=Path, metavar="CASES.jsonl")
    outcomes.set_defaults(run=_run_outcomes)

    export = commands.add_parser("export", help="one file of cases, without name and birth date; or FHIR measurements")
    export.add_argument("cases", type=Path, nargs="+", metavar="CASE.json")
    export.add_argument("--out", type=Path, required=True, metavar="FILE")
    export.add_argument("--fhir", action="store_true", help="measurements of one case as a FHIR R4 Bundle")
    export.add_argument("--with-identity", action="store_true", help="keep name and birth date")
    export.set_defaults(run=_run_export)

    taken = commands.add_parser("import", help="cases from files or folders: cases, exports, FHIR Bundles")
    taken.add_argument("files", type=Path, nargs="+", metavar="FILE_OR_FOLDER")
    taken.add_argument("--out", type=Path, required=True, metavar="FOLDER")
    taken.set_defaults(run=_run_import)

    profiles = commands.add_parser("profiles", help="list and check the profiles: the packaged and the service's own")
    profiles.set_defaults(run=_run_profiles)
    return parser


def _run_plan(chosen: argparse.Namespace) -> int:
    from planner.records.reading import read_case

    _write_plan(read_case(chosen.case.read_bytes()), chosen.out)
    return 0


def _run_demo(chosen: argparse.Namespace) -> int:
    from planner.catalogue import profile_text
    from planner.records.reading import read_case

    _write_plan(read_case(profile_text(f"demo/{chosen.case}.json").encode()), chosen.out)
    return 0


def _write_plan(case: Case, folder: Path) -> None:
    from planner import plan
    from planner.papers import make_papers
    from planner.plan_file import plan_as_json
    from planner.records.reading import write_atomically, write_case

    result = plan(case)
    folder.mkdir(parents=True, exist_ok=True)
    files = {"case.json": write_case(case).encode(), "plan.json": plan_as_json(result).encode()}
    files |= {f"{name}.pdf": content for name, content in make_papers(case, result).items()}
    for name, content in files.items():
        write_atomically(folder / name, content)
        print(folder / name)
    print(f"State: {result.state}. Estimate only. Confirm with prescriber.")


def _run_batch(chosen: argparse.Namespace) -> int:
    from planner.batch.runner import run_batch

    return run_batch(
        chosen.cases,
        chosen.out,
        papers=chosen.papers,
        forecast_only=chosen.forecast_only,
        workers=chosen.workers,
    )


def _run_outcomes(chosen: argparse.Namespace) -> int:
    from planner.batch.outcomes import outcomes_report, read_cases

    print(outcomes_report(read_cases(chosen.cases)))
    return 0


def _run_export(chosen: argparse.Namespace) -> int:
    from planner.errors import InputError
    from planner.records.exchange import export_cases, export_fhir
    from planner.records.reading import content_of, read_case, write_atomically

    if chosen.fhir and chosen.with_identity:
        raise InputError("with_identity", "A FHIR Bundle carries the local reference only, never name and birth date.")
    cases = [read_case(content_of(path)) for path in chosen.cases]
    if chosen.fhir and len(cases) != 1:
        raise InputError("cases", f"A FHIR Bundle holds one case; {len(cases)} were named.")
    content, said = export_fhir(cases[0]) if chosen.fhir else export_cases(cases, with_identity=chosen.with_identity)
    write_atomically(chosen.out, content)
    print(*said, chosen.out, sep="\n")
    return 0


def _run_import(chosen: argparse.Namespace) -> int:
    from planner.errors import InputError
    from planner.records.exchange import import_path, save_cases

    found = [taken for path in chosen.files for taken in import_path(path)]
    for one in found:
        for sentence in one.said:
            print(f"{one.name}: {sentence}")
    cases = [case for one in found for case in one.cases]
    if not cases:
        raise InputError("files", "No case was taken: nothing named is or holds a case, an export or a FHIR Bundle.")
    print(*save_cases(cases, chosen.out), sep="\n")
    return 0


def _run_profiles(_: argparse.Namespace) -> int:
    from planner.profile_check import check_profiles

    faults = 0
    for name, fault in check_profiles():
        print(f"{name}: {fault or 'ok'}")
        faults += fault is not None
    return 2 if faults else 0


if __name__ == "__main__":
    sys.exit(main())
