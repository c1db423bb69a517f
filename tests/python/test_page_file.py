"""A file restated by the page, as a user drops one: sent slice by slice, and whole when it comes back."""

import csv
import io
import json
import random
import time

import pytest

from browser import Browser
from test_page import SHOTS

STEP = {"boost": {"velocity": [7600, 0, 0]}}


@pytest.fixture(scope="module")
def downloads(tmp_path_factory):
    return tmp_path_factory.mktemp("downloads")


@pytest.fixture(scope="module")
def chromium(downloads):
    with Browser(downloads=downloads) as browser:
        yield browser


@pytest.fixture
def page(chromium, service):
    """The page with a way entered, and no reading."""
    chromium.open("about:blank")
    chromium.open(service.url)
    chromium.until("return document.querySelectorAll('.step').length === 1")
    chromium.complaints()
    chromium.type('[data-path="velocity/0"]', "7600")
    return chromium


def drop(page, path):
    page.run("document.querySelector('#file-status').textContent = ''")
    page.send("#file-input", str(path))
    page.until("return /restated/i.test(document.querySelector('#file-status').textContent)", seconds=60)
    return page.text("#file-status")


def saved(page, downloads):
    """What the link at the end saves."""
    path = downloads / page.run("return document.querySelector('#file-result a').download")
    path.unlink(missing_ok=True)
    page.click("#file-result a")
    end = time.monotonic() + 30
    while not path.exists():
        assert time.monotonic() < end, list(downloads.iterdir())
        time.sleep(0.05)
    return path.read_bytes().decode()


def readings(count):
    """Invented readings, one of them impossible to read."""
    numbers = random.Random(7)
    return [[repr(numbers.uniform(-1, 1)) for _ in range(3)] + [repr(numbers.uniform(-5e-5, 5e-5)) for _ in range(3)]
            for _ in range(count)]


def test_a_csv_file_of_many_slices_comes_back_whole(page, service, downloads, tmp_path):
    rows = readings(9000)
    rows[8000][1] = "east"
    out = io.StringIO()
    table = csv.writer(out)
    table.writerow(["ex", "ey", "ez", "bx", "by", "bz", "note"])
    # A quoted line end must not be taken for the end of a row.
    table.writerows([*row, f"row {i},\n\"{'x' * 40}\""] for i, row in enumerate(rows))
    path = tmp_path / "flight.csv"
    path.write_bytes(out.getvalue().encode())
    assert path.stat().st_size > 4 * 256 * 1024  # several slices
    assert drop(page, path) == "9,000 rows restated, 1 of them refused."
    assert page.text("#file-result") == "Save flight-restated.csv"
    answer = list(csv.DictReader(io.StringIO(saved(page, downloads), newline="")))
    assert len(answer) == 9000
    assert [i for i, row in enumerate(answer) if row["problem"]] == [8000]
    for i in (0, 1, 4500, 8999):
        asked = service.ask({"e": [float(x) for x in rows[i][:3]], "b": [float(x) for x in rows[i][3:]], "steps": [STEP]})
        assert [float(answer[i][name]) for name in ("ex", "ey", "ez", "bx", "by", "bz")] == asked["e"] + asked["b"]
        assert answer[i]["note"] == f"row {i},\n\"{'x' * 40}\""
    page.screenshot(SHOTS / "file.png")
    assert page.complaints() == []


def test_an_ndjson_file_keeps_the_numbers_of_its_refused_rows(page, downloads, tmp_path):
    rows = [json.dumps({"e": [float(x) for x in row[:3]], "b": [float(x) for x in row[3:]]}) for row in readings(6000)]
    rows[5000] = '{"e": [1, 2], "b": [0, 0, 0]}'
    path = tmp_path / "stream.ndjson"
    path.write_text("\n".join(rows) + "\n")
    assert path.stat().st_size > 2 * 256 * 1024
    assert drop(page, path) == "6,000 rows restated, 1 of them refused."
    lines = [json.loads(line) for line in saved(page, downloads).splitlines()]
    assert len(lines) == 6001 and lines[-1] == {"end": {"read": 6000, "answered": 5999, "refused": 1}}
    assert [line["row"] for line in lines[:-1] if "problem" in line] == [5001]


def test_each_row_may_bring_its_own_motion(page, service, downloads, tmp_path):
    path = tmp_path / "own.csv"
    path.write_text("ex,ey,ez,bx,by,bz,vx,vy,vz\n0,1,0,0,0,5e-5,7600,0,0\n0,1,0,0,0,5e-5,0,0,0\n")
    page.choose("#file-way", "row")
    drop(page, path)
    answer = list(csv.DictReader(io.StringIO(saved(page, downloads))))
    asked = service.ask({"e": [0, 1, 0], "b": [0, 0, 5e-5], "velocity": [7600, 0, 0]})
    assert [float(answer[0][name]) for name in ("ex", "ey", "ez")] == asked["e"]
    assert float(answer[1]["ey"]) == 1


def test_a_header_that_is_refused_is_said_in_the_words_of_the_problem(page, tmp_path):
    path = tmp_path / "slip.csv"
    path.write_text("Ex,ey,ez,bx,by,bz\n0,1,0,0,0,5e-5\n")
    page.run("document.querySelector('#file-status').textContent = ''")
    page.send("#file-input", str(path))
    page.until("return document.querySelector('#file-faults .fault')")
    assert "Ex" in page.text("#file-faults")
    assert page.text("#file-result") == ""


def test_an_empty_file_is_said_to_be_empty(page, tmp_path):
    path = tmp_path / "none.csv"
    path.write_text("ex,ey,ez,bx,by,bz\n")
    page.run("document.querySelector('#file-status').textContent = ''")
    page.send("#file-input", str(path))
    page.until_text("#file-faults", "holds no rows")
