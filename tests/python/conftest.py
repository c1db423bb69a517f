"""What all tests share: one running service, and the table of worst errors at the end."""

import json

import pytest

from browser import Browser
from service import ROOT, Service

ERRORS = []


@pytest.fixture(scope="session")
def service(tmp_path_factory):
    """The release binary, started once; its end must be a clean one."""
    with Service(tmp_path_factory.mktemp("service") / "log.txt") as running:
        yield running


@pytest.fixture(scope="session")
def demo(tmp_path_factory):
    """The same with the demonstration's catalogue of frames."""
    catalogue = ROOT / "deploy" / "demo" / "frames.toml"
    with Service(tmp_path_factory.mktemp("demo") / "log.txt", "--frames", catalogue) as running:
        yield running


@pytest.fixture(scope="module")
def chromium():
    with Browser() as browser:
        yield browser


@pytest.fixture
def page(chromium, service):
    """The page, just opened."""
    chromium.open("about:blank")
    chromium.open(service.url)
    chromium.until("return document.querySelectorAll('.step').length === 1")
    chromium.complaints()  # of tests before
    return chromium


@pytest.fixture
def start(tmp_path):
    """Starts the service with a catalogue and its tracks."""
    running = []

    def with_catalogue(text, **tracks):
        folder = tmp_path / f"catalogue{len(running)}"
        folder.mkdir()
        (folder / "frames.toml").write_text(text)
        for name, rows in tracks.items():
            (folder / f"{name}.csv").write_text(rows)
        running.append(Service(folder / "log.txt", "--frames", folder / "frames.toml"))
        return running[-1]

    yield with_catalogue
    assert [service.stop() for service in running] == [0] * len(running)


@pytest.fixture(scope="session")
def openapi(service):
    """The OpenAPI document as the service serves it."""
    return json.loads(service.get("/openapi.json").body)


@pytest.fixture(scope="session")
def constants(service):
    """`GET /v1/constants` as name → value, in SI units."""
    return {entry["name"]: entry["value"] for entry in service.get("/v1/constants").json}


@pytest.fixture
def report_error():
    """Notes a line for the table of worst errors: regime, number of vectors, worst in u."""
    return lambda *line: ERRORS.append(line)


def pytest_terminal_summary(terminalreporter):
    if ERRORS:
        terminalreporter.section("worst error per regime, u = 2^-53 of each vector's exact length")
        for regime, vectors, worst in ERRORS:
            terminalreporter.write_line(f"{regime:<44}{vectors:>7} vectors {worst:>9.4f} u")
