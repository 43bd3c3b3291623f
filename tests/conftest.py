"""What all tests share: the same examples in each run, and a skipped test that can be made to fail the run."""

import os

import pytest
from hypothesis import settings

# The same examples each time, so that a change is judged by itself; look for new ones with EXPLORE=1.
settings.register_profile("repeatable", derandomize=True, deadline=None)
settings.register_profile("explore", max_examples=1000, deadline=None)
settings.load_profile("explore" if os.environ.get("EXPLORE") else "repeatable")


def pytest_addoption(parser):
    parser.addoption("--fail-on-skip", action="store_true", help="end with a failure when any test was skipped")


@pytest.hookimpl(trylast=True)
def pytest_sessionfinish(session, exitstatus):
    reporter = session.config.pluginmanager.get_plugin("terminalreporter")
    if reporter is None or not session.config.getoption("--fail-on-skip"):
        return
    if reporter.stats.get("skipped") and session.exitstatus == 0:
        session.exitstatus = pytest.ExitCode.TESTS_FAILED
