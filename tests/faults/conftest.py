"""Faults come in a short form, which CI runs, and a long one: `pytest tests/faults --long`."""

import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "python"))

FIGURES = []


def pytest_addoption(parser):
    parser.addoption("--long", action="store_true", help="as many clients and as much time as DEVELOPERS.md gives figures for")


@pytest.fixture
def long(request):
    """Whether to run the long form."""
    return request.config.getoption("--long")


@pytest.fixture
def figure():
    """Notes a line for the end of the report."""
    return FIGURES.append


def pytest_terminal_summary(terminalreporter):
    if FIGURES:
        terminalreporter.section("faults survived")
        for line in FIGURES:
            terminalreporter.write_line(line)
