"""What all tests share: a skipped test can be made to fail the run, so that a missing tool is never silent."""

import pytest


def pytest_addoption(parser):
    parser.addoption("--fail-on-skip", action="store_true", help="end with a failure when any test was skipped")


@pytest.hookimpl(trylast=True)
def pytest_sessionfinish(session, exitstatus):
    reporter = session.config.pluginmanager.get_plugin("terminalreporter")
    if reporter is None or not session.config.getoption("--fail-on-skip"):
        return
    if reporter.stats.get("skipped") and session.exitstatus == 0:
        session.exitstatus = pytest.ExitCode.TESTS_FAILED
