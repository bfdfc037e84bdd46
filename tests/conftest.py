"""What holds for all tests."""

import signal

import pytest
from newton_cases import PROPERTY, summary

from lamwright.app.threads import hold_threads

# Two test processes on two cores: a second BLAS thread in each only doubles the processor time.
hold_threads()
# Started in the background of a script a process ignores the interrupt key, and so would those
# that the tests of that key start.
signal.signal(signal.SIGINT, signal.default_int_handler)


def pytest_terminal_summary(terminalreporter: pytest.TerminalReporter) -> None:
    """Show the hardest of the random solves, if there were any."""
    reports = terminalreporter.getreports("passed") + terminalreporter.getreports("failed")
    records = [value for one in reports for key, value in one.user_properties if key == PROPERTY]
    lines = summary(record for record in records if isinstance(record, str))
    if lines:
        terminalreporter.section("Newton from zero on random machines")
        for line in lines:
            terminalreporter.line(line)
