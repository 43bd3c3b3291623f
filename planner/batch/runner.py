"""Plans every line of a file into a folder: streamed, in one or several processes, resumable after a kill.

Folder: cases/NNNNNN-digest/ holds plan.json, row.json and the papers of one line; it appears whole or not at all.
cases/NNNNNN-digest.failed holds the sentence of a line that failed and is tried again next time. summary.csv has one
row a line. One batch at a time works in a folder.

On a cluster: pass the executor of a dask.distributed client,
    run_batch(path, folder, executor=client.get_executor(pure=False), workers=number_of_workers)
where every worker has this package and the same profiles; the result is the same byte for byte.
"""

from __future__ import annotations

import os
import shutil
import time
from collections.abc import Callable, Iterator
from concurrent.futures import FIRST_COMPLETED, CancelledError, Executor, Future, ProcessPoolExecutor, wait
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from dataclasses import replace
from functools import partial
from multiprocessing import get_context
from pathlib import Path

from planner.batch.lines import Line, fingerprint, read_lines
from planner.batch.progress import Progress, Reporter, StreamReporter
from planner.batch.summary import write_summary
from planner.batch.worker import Worked, work_on
from planner.errors import InputError, StoreError

CASES_FOLDER, SUMMARY_FILE = "cases", "summary.csv"
PART_SUFFIX, FAILED_SUFFIX = ".part", ".failed"
MOST_WORKERS = 64
WAITING_PER_WORKER = 3  # lines handed out ahead, so that memory stays the same for any length of file
TOO_LONG = "The line is longer than the 5 MB a case may have."
# Linear algebra in one thread, so that processes do not jam; freed memory is kept for the next arrays instead of going
# back to the system each time, which costs a fifth of the work (GNU C library; others take no notice).
WORKER_SETTINGS = {
    "OPENBLAS_NUM_THREADS": "1",
    "OMP_NUM_THREADS": "1",
    "MALLOC_MMAP_THRESHOLD_": "33554432",
    "MALLOC_TRIM_THRESHOLD_": "268435456",
}
Work = Callable[[int, str, bytes], Worked]
KILLED = "The process planning this case ended twice; the case may need more memory than there is."


def run_batch(
    cases_path: Path,
    out_dir: Path,
    *,
    papers: bool = False,
    forecast_only: bool = False,
    workers: int = 1,
    progress: Reporter | None = None,
    executor: Executor | None = None,
) -> int:
    """Plan every case of cases_path (JSON lines) into out_dir; 0 when all are done, 1 when some failed.

    Cases done before with the same planner, profiles and choices are kept. forecast_only: the same forecast, without
    flows, decisions and kit. progress: who is told, standard error where None. executor: another engine than this
    machine's processes. Raises InputError for an empty or unreadable file, or papers without the whole plan; StoreError
    for a folder that cannot be written.
    """
    if papers and forecast_only:
        raise InputError("papers", "The papers need the whole plan; leave out either the papers or the forecast only.")
    if not 1 <= workers <= MOST_WORKERS:
        raise InputError("workers", f"{workers} workers were asked for; 1 to {MOST_WORKERS} are allowed.")
    told = progress or StreamReporter()
    work = partial(work_on, papers=papers, through="forecast" if forecast_only else "kit")
    mark = fingerprint(papers, work.keywords["through"])
    cases = _prepared(out_dir)
    total, kept = _counted(cases_path, cases, mark)
    state = Progress(kept, 0, 0, total, 0.0)
    told.progress(state)
    started = time.monotonic()
    for worked in _worked_lines(_open_lines(cases_path, cases, mark), work, workers, executor, told):
        _keep(cases, worked)
        if worked.failure is None:
            state = replace(state, planned=state.planned + 1)
        else:
            told.sentence(f"Line {worked.number}: {worked.failure}")
            state = replace(state, failed=state.failed + 1)
        state = replace(state, seconds=time.monotonic() - started)
        told.progress(state)
    rows = ((line.number, cases / line.name(mark)) for line in read_lines(cases_path))
    for sentence in write_summary(out_dir / SUMMARY_FILE, rows):
        told.sentence(sentence)
    if state.failed:
        told.sentence(f"{state.failed} of {total} cases failed; their lines and reasons stand in {SUMMARY_FILE}.")
    return 1 if state.failed else 0


def _prepared(out_dir: Path) -> Path:
    """The folder of the cases, made and shown to be writable, without what an interrupted run left half-written."""
    cases = out_dir / CASES_FOLDER
    try:
        cases.mkdir(parents=True, exist_ok=True)
        for left in cases.glob(f"*{PART_SUFFIX}"):
            shutil.rmtree(left)
        probe = cases / f"probe{PART_SUFFIX}"
        probe.mkdir()
        probe.rmdir()
    except OSError as error:
        raise StoreError(f"The folder {out_dir} cannot be written: {error.strerror}.") from error
    return cases


def _counted(cases_path: Path, cases: Path, mark: str) -> tuple[int, int]:
    total = kept = 0
    for line in read_lines(cases_path):
        total += 1
        kept += (cases / line.name(mark)).is_dir()
    if total == 0:
        raise InputError("cases", f"The file {cases_path} has no cases; one JSON case a line is expected.")
    return total, kept


def _open_lines(cases_path: Path, cases: Path, mark: str) -> Iterator[tuple[Line, str]]:
    for line in read_lines(cases_path):
        name = line.name(mark)
        if not (cases / name).is_dir():
            yield line, name


def _worked_lines(
    lines: Iterator[tuple[Line, str]], work: Work, workers: int, executor: Executor | None, told: Reporter
) -> Iterator[Worked]:
    """Every line's result in the order they are ready."""
    if executor is not None:
        yield from _through(executor, lines, work, workers)
    elif workers == 1:
        for line, name in lines:
            yield _too_long(line, name) or work(line.number, name, line.text or b"")
    else:
        yield from _in_processes(lines, work, workers, told)


def _in_processes(lines: Iterator[tuple[Line, str]], work: Work, workers: int, told: Reporter) -> Iterator[Worked]:
    """In processes of this machine. When one is killed, the lines then in work are done again, each on its own."""
    with _worker_settings():
        lost: list[tuple[Line, str]] = []
        ended = False
        while not ended:
            with _pool(workers) as pool:
                yield from _through(pool, lines, work, workers, lost.append)
            ended = not lost
            if lost:
                told.sentence("A worker process ended unexpectedly; the cases it had are planned again.")
            for line, name in lost:
                yield _alone(line, name, work)
            lost.clear()


def _alone(line: Line, name: str, work: Work) -> Worked:
    with _pool(1) as pool:
        try:
            return pool.submit(work, line.number, name, line.text or b"").result()
        except BrokenProcessPool:
            return Worked(line.number, name, {}, KILLED)


def _through(
    executor: Executor,
    lines: Iterator[tuple[Line, str]],
    work: Work,
    workers: int,
    on_lost: Callable[[tuple[Line, str]], None] | None = None,
) -> Iterator[Worked]:
    """Lines handed to an executor, a few ahead. on_lost takes the lines of a broken pool; without it they fail."""
    running: dict[Future[Worked], tuple[Line, str]] = {}
    broken = False
    while True:
        while not broken and len(running) < WAITING_PER_WORKER * workers:
            taken = next(lines, None)
            if taken is None:
                break
            line, name = taken
            too_long = _too_long(line, name)
            if too_long is not None:
                yield too_long
                continue
            try:
                running[executor.submit(work, line.number, name, line.text or b"")] = taken
            except BrokenProcessPool:
                if on_lost is None:
                    raise
                on_lost(taken)
                broken = True
        if not running:
            return
        for future in wait(running, return_when=FIRST_COMPLETED).done:
            line, name = taken = running.pop(future)
            try:
                yield future.result()
            except (BrokenProcessPool, CancelledError) as error:
                broken = True
                if on_lost is None:
                    yield Worked(line.number, name, {}, f"The engine lost this case ({type(error).__name__}).")
                else:
                    on_lost(taken)
            except Exception as error:  # an engine's own fault, such as a worker killed too often
                yield Worked(line.number, name, {}, f"The engine lost this case ({type(error).__name__}: {error}).")


def _too_long(line: Line, name: str) -> Worked | None:
    return Worked(line.number, name, {}, TOO_LONG) if line.text is None else None


def _pool(workers: int) -> ProcessPoolExecutor:
    return ProcessPoolExecutor(workers, mp_context=get_context("spawn"))


@contextmanager
def _worker_settings() -> Iterator[None]:
    """Processes started meanwhile take WORKER_SETTINGS."""
    before = {name: os.environ.get(name) for name in WORKER_SETTINGS}
    os.environ.update(WORKER_SETTINGS)
    try:
        yield
    finally:
        for name, value in before.items():
            if value is None:
                os.environ.pop(name, None)
            else:
                os.environ[name] = value


def _keep(cases: Path, worked: Worked) -> None:
    """Write the result so that it is there whole or not at all."""
    final = cases / worked.name
    failed = cases / f"{worked.name}{FAILED_SUFFIX}"
    try:
        if worked.failure is not None:
            failed.write_text(worked.failure, encoding="utf-8")
            return
        part = cases / f"{worked.name}{PART_SUFFIX}"
        part.mkdir()
        for name, content in worked.files.items():
            with (part / name).open("wb") as file:
                file.write(content)
                file.flush()
                os.fsync(file.fileno())
        part.rename(final)
        failed.unlink(missing_ok=True)
    except OSError as error:
        raise StoreError(
            f"The result of line {worked.number} cannot be written to {cases}: {error.strerror}."
        ) from error
