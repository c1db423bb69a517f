"""Every command of the README is run as it stands, and answers what the README shows below it."""

import csv
import io
import json
import re
import subprocess

import pyarrow
import pytest

from service import BINARY, ROOT

ADDRESS = "http://127.0.0.1:7410"
README = (ROOT / "README.md").read_text()

# A curl command in its fence, and the answer in the next one: JSON, or rows that are shown as they are.
EXAMPLES = re.findall(r"```sh\n(curl [^`]*)```\n```json\n([^`]*)```", README)
ROWS = re.findall(r"```sh\n(curl [^`]*)```\n```(?:ndjson|csv)\n([^`]*)```", README)
# Two whose answers are not shown: a stream of columns, and a long table.
COLUMNS = re.search(r"```sh\n(curl [^`]*flight\.arrow[^`]*)```\n\n", README).group(1)
FLIGHT = re.search(r"```sh\n(curl [^`]*readings\.csv[^`]*)```\n\n", README).group(1)


def forget_ids(answer):
    """Request ids differ from answer to answer."""
    return answer | ({"instance": ""} if "instance" in answer else {})


def test_every_curl_command_of_the_readme_shows_its_answer():
    assert len(EXAMPLES) + len(ROWS) + 2 == README.count("```sh\ncurl ")
    assert len(EXAMPLES) >= 5 and len(ROWS) >= 2


@pytest.mark.parametrize("command, shown", ROWS, ids=["ndjson", "csv"])
def test_rows_are_answered_as_shown(service, command, shown):
    done = subprocess.run(command.replace(ADDRESS, service.url), shell=True, check=True,
                          capture_output=True, text=True, timeout=30)
    assert done.stdout == shown


def test_columns_are_restated(service, tmp_path):
    columns = {"station": ["mast"], "ex": [0.0], "ey": [0.34], "ez": [0.0], "bx": [0.0], "by": [0.0], "bz": [4.47e-5]}
    table = pyarrow.table(columns)
    with pyarrow.ipc.new_stream(tmp_path / "flight.arrow", table.schema) as stream:
        stream.write_table(table)
    subprocess.run(COLUMNS.replace(ADDRESS, service.url), shell=True, check=True, cwd=tmp_path, timeout=30)
    answer = pyarrow.ipc.open_stream((tmp_path / "ground.arrow").read_bytes()).read_all().to_pydict()
    # ey - v bz, to first order in v/c.
    assert answer["ey"] == [pytest.approx(0.34 - 7600 * 4.47e-5)]
    assert answer["station"] == ["mast"] and answer["problem"] == [None]


def test_the_tree_of_the_demonstration_is_as_shown():
    shown = re.search(r"```console\n\$ lodeframe (check [^\n]*)\n([^`]*)```", README)
    done = subprocess.run([BINARY, *shown.group(1).split()], check=True, cwd=ROOT, capture_output=True, text=True, timeout=30)
    assert done.stdout == shown.group(2)


def test_the_flight_is_restated(demo):
    done = subprocess.run(FLIGHT.replace(ADDRESS, demo.url), shell=True, check=True, cwd=ROOT,
                          capture_output=True, text=True, timeout=30)
    rows = list(csv.DictReader(io.StringIO(done.stdout)))
    with open(ROOT / "deploy" / "demo" / "readings.csv") as file:
        assert len(rows) == sum(1 for line in file) - 1
    # The field that make.py put on the ground. A count is 1.9 nT, so an axis is off by at most 1 nT, three axes
    # by 1.7 nT, and the track's attitude, interpolated over two seconds, by as much again.
    for row in rows:
        assert not row["problem"]
        assert float(row["ex"]) == pytest.approx(12.0, abs=0.01)
        assert float(row["bz"]) == pytest.approx(-53000.0, abs=4)


@pytest.mark.parametrize("command, shown", EXAMPLES, ids=[f"example {i + 1}" for i in range(len(EXAMPLES))])
def test_an_example_answers_as_shown(service, demo, command, shown):
    asked = demo if "/v1/frames/" in command else service
    done = subprocess.run(command.replace(ADDRESS, asked.url), shell=True, check=True,
                          capture_output=True, text=True, timeout=30)
    assert forget_ids(json.loads(done.stdout)) == forget_ids(json.loads(shown))
