"""What a batch says while it runs."""

import io

from planner.batch.progress import Progress, StreamReporter, duration_text


class Terminal(io.StringIO):
    """A stream that says it is a terminal."""

    def isatty(self):
        return True


def test_rate_and_remaining_time_count_only_the_work_of_this_run():
    progress = Progress(kept=500, planned=90, failed=10, total=1000, seconds=50.0)
    assert progress.finished == 600
    assert progress.rate_per_s == 2.0
    assert progress.remaining_s == 200.0
    assert progress.text() == "600 of 1000 cases, 500 kept from before, 10 failed, 2 cases/s, 3 min 20 s left"


def test_before_the_first_case_no_rate_is_claimed():
    assert Progress(0, 0, 0, 10, 0.0).text() == "0 of 10 cases"


def test_a_span_of_time_is_said_in_the_units_it_needs():
    assert [duration_text(seconds) for seconds in (0.2, 59.4, 60.0, 3599.0, 7260.0)] == [
        "0 s",
        "59 s",
        "1 min 0 s",
        "59 min 59 s",
        "2 h 1 min",
    ]


def test_on_a_terminal_the_bar_moves_in_its_line_and_a_sentence_gets_its_own():
    stream = Terminal()
    reporter = StreamReporter(stream)
    reporter.progress(Progress(0, 1, 0, 4, 1.0))
    reporter.sentence("Line 2: bad.")
    reporter.progress(Progress(0, 4, 0, 4, 4.0))
    text = stream.getvalue()
    assert text.startswith("[######..................] 1 of 4 cases")
    bar, rest = text.split("\r")
    assert rest.startswith("Line 2: bad.")
    assert len(rest.split("\n")[0]) >= len(bar)  # nothing of the bar is left behind the sentence
    assert text.endswith("[########################] 4 of 4 cases, 1 cases/s, 0 s left\n")


def test_in_a_file_only_now_and_then_a_whole_line_is_written():
    stream = io.StringIO()
    reporter = StreamReporter(stream)
    for done in range(1, 101):
        reporter.progress(Progress(0, done, 0, 100, float(done)))
    lines = stream.getvalue().splitlines()
    assert len(lines) == 2
    assert "\r" not in stream.getvalue()
    assert lines[-1].startswith("[########################] 100 of 100 cases")
