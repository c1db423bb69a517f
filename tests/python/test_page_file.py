"""A file restated by the page, as a user drops one: sent slice by slice, and whole when it comes back."""

import csv
import io
import json
import random
import time

import pytest

from browser import Browser
from service import Service
from workbench import SHOTS, violations

STEP = {"boost": {"velocity": [7600, 0, 0]}}


@pytest.fixture(scope="module")
def downloads(tmp_path_factory):
    return tmp_path_factory.mktemp("downloads")


@pytest.fixture(scope="module")
def chromium(downloads):
    with Browser(downloads=downloads) as browser:
        yield browser


@pytest.fixture
def page(page):
    """The page with a way entered, and no reading."""
    page.type('[data-path="velocity/0"]', "7600")
    return page


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


def refused(page):
    return page.run("return [...document.querySelectorAll('#file-refused li')].map(row => row.textContent)")


def stored(page, count):
    """The sizes of the answers that the browser keeps for this service, once there are so many."""
    end = time.monotonic() + 15
    while True:
        sizes = page.run_async("const done = arguments[0]; (async () => {"
                               "const root = await navigator.storage.getDirectory(), sizes = [];"
                               "const folder = await root.getDirectoryHandle('restated', { create: true });"
                               "for await (const file of folder.values()) sizes.push((await file.getFile()).size);"
                               "return sizes })().then(done)")
        if len(sizes) == count:
            return sizes
        assert time.monotonic() < end, sizes
        time.sleep(0.05)


def readings(count):
    """Invented readings, one of them impossible to read."""
    numbers = random.Random(7)
    return [[repr(numbers.uniform(-1, 1)) for _ in range(3)] + [repr(numbers.uniform(-5e-5, 5e-5)) for _ in range(3)]
            for _ in range(count)]


@pytest.mark.parametrize("place", ["on disk", "in memory"])
def test_a_csv_file_of_many_slices_comes_back_whole(page, service, downloads, tmp_path, place):
    if place == "in memory":  # as where the page comes over plain HTTP from another machine
        page.run("delete StorageManager.prototype.getDirectory")
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
    # The number is that of the row in the file, whatever slice it went in.
    assert refused(page) == ['Row 8,001: wrong_type (ey): expected a number or nothing, got "east"']
    text = saved(page, downloads)
    if place == "on disk":
        assert stored(page, 1) == [len(text.encode())]
    answer = list(csv.DictReader(io.StringIO(text, newline="")))
    assert len(answer) == 9000
    assert [i for i, row in enumerate(answer) if row["problem"]] == [8000]
    for i in (0, 1, 4500, 8999):
        asked = service.ask({"e": [float(x) for x in rows[i][:3]], "b": [float(x) for x in rows[i][3:]], "steps": [STEP]})
        assert [float(answer[i][name]) for name in ("ex", "ey", "ez", "bx", "by", "bz")] == asked["e"] + asked["b"]
        assert answer[i]["note"] == f"row {i},\n\"{'x' * 40}\""
    page.screenshot(SHOTS / "file.png")
    assert violations(page) == []
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
    assert refused(page) == ["Row 5,001: expected three numbers [x, y, z], got 2 of them"]


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


def small(tmp_path, rows, name="small.csv"):
    path = tmp_path / name
    path.write_text("ex,ey,ez,bx,by,bz\n" + "".join(row + "\n" for row in rows))
    return path


def test_the_first_refused_rows_are_shown_and_all_are_counted(page, tmp_path):
    # A quote and a comma in what is refused, as a field of a CSV row may hold them (RFC 4180).
    path = small(tmp_path, ['0,"5"" north, or so",0,0,0,5e-5', "0,1,0,0,0,5e-5", *["0,1,0,0,0,x"] * 7])
    assert drop(page, path) == "9 rows restated, 8 of them refused."
    shown = refused(page)
    assert shown[0] == 'Row 1: wrong_type (ey): expected a number or nothing, got "5\\" north, or so"'
    assert [row.split(":")[0] for row in shown] == ["Row 1", "Row 3", "Row 4", "Row 5", "Row 6"]


def test_answers_do_not_pile_up(page, service, tmp_path):
    """One is kept at a time; what a closed page leaves goes with the next file, what an open one has stays."""
    path = small(tmp_path, ["0,1,0,0,0,5e-5"])
    for _ in range(3):
        drop(page, path)
    stored(page, 1)
    page.open("about:blank")
    page.open(service.url)
    page.until("return document.querySelectorAll('.step').length === 1")
    page.type('[data-path="velocity/0"]', "7600")
    drop(page, path)
    stored(page, 1)
    with page.tab(service.url):
        page.until("return document.querySelectorAll('.step').length === 1")
        page.type('[data-path="velocity/0"]', "7600")
        drop(page, path)
        stored(page, 2)


def fails(page, path, words):
    """Drops a file whose answer does not come back whole, and gives what is said."""
    page.run("document.querySelector('#file-status').textContent = ''")
    page.send("#file-input", str(path))
    page.until_text("#file-faults", words)
    page.until("return document.querySelector('#file-running').hidden")
    assert page.text("#file-result") == ""
    return page.text("#file-status")


def test_an_answer_that_the_disk_has_no_room_for_says_so(page, service, tmp_path):
    path = small(tmp_path, ["0,1,0,0,0,5e-5"] * 60_000)
    page.devtools("Storage.overrideQuotaForOrigin", {"origin": service.url, "quotaSize": 2_000_000})
    try:
        assert "not the whole file" in fails(page, path, "has no room for so long an answer")
    finally:
        page.devtools("Storage.overrideQuotaForOrigin", {"origin": service.url})
    assert stored(page, 0) == []
    assert "60,000 rows restated" in drop(page, path)


def test_a_row_that_is_too_long_is_said_in_the_words_of_the_problem(page, tmp_path):
    path = tmp_path / "long.csv"
    path.write_text("ex,ey,ez,bx,by,bz,note\n0,1,0,0,0,5e-5,\n0,1,0,0,0,5e-5," + "x" * 3_000_000 + "\n")
    fails(page, path, "reads rows of at most 1048576 bytes")


def test_a_service_that_ends_is_said_to_be_gone(chromium, tmp_path):
    with Service(tmp_path / "log.txt") as service:
        chromium.open(service.url)
        chromium.until("return document.querySelectorAll('.step').length === 1")
        chromium.type('[data-path="velocity/0"]', "7600")
    assert fails(chromium, small(tmp_path, ["0,1,0,0,0,5e-5"]), "is the service still running?") == "Nothing was restated."


def test_a_file_may_be_stopped(page, tmp_path):
    # The third slice waits until it is stopped.
    page.run("const real = window.fetch; let n = 0;"
             "window.fetch = (path, options) => path.startsWith('/v1/series') && ++n > 2"
             " ? new Promise((_, failed) => options.signal.addEventListener('abort', () => failed(options.signal.reason)))"
             " : real(path, options)")
    path = small(tmp_path, ["0,1,0,0,0,5e-5"] * 60_000)
    page.run("document.querySelector('#file-status').textContent = ''")
    page.send("#file-input", str(path))
    page.until("return document.querySelector('#file-progress').value > .4")
    assert violations(page) == []
    page.click("#file-stop")
    page.until_text("#file-status", "not the whole file")
    assert page.text("#file-faults") == page.text("#file-result") == ""
    assert stored(page, 0) == []


def test_a_file_waits_for_the_way(page, tmp_path):
    page.type('[data-path="velocity/0"]', "")
    page.send("#file-input", str(small(tmp_path, ["0,1,0,0,0,5e-5"])))
    page.until_text("#file-faults", "Fill in step 1 of the way")
    page.type('[data-path="velocity/0"]', "7600")
    assert drop(page, small(tmp_path, ["0,1,0,0,0,5e-5"])) == "1 row restated, 0 of them refused."
    assert page.text("#file-faults") == ""


def test_a_service_with_too_much_to_do_gets_the_slice_again(page, downloads, tmp_path):
    # In place of the second slice's answer comes what a service sends that is overloaded (RFC 9110, 10.2.3).
    page.run("const real = window.fetch; let n = 0;"
             "window.fetch = (path, options) => path.startsWith('/v1/series') && ++n === 2"
             " ? Promise.resolve(new Response('{}', { status: 503, headers: { 'Retry-After': '0' } })) : real(path, options)")
    assert drop(page, small(tmp_path, ["0,1,0,0,0,5e-5"] * 40_000)) == "40,000 rows restated, 0 of them refused."
    assert saved(page, downloads).count("\n") == 40_001


def test_a_service_that_stays_overloaded_is_said_to_be(page, tmp_path):
    problem = json.dumps({"type": "/problems/overloaded", "title": "Overloaded", "status": 503, "errors": [],
                          "detail": "the service has as much to do as it takes on"})
    page.run("const [problem] = arguments; window.asked = 0;"
             "window.fetch = () => { asked += 1; return Promise.resolve(new Response(problem,"
             " { status: 503, headers: { 'Retry-After': '0', 'Content-Type': 'application/problem+json' } })) }", problem)
    fails(page, small(tmp_path, ["0,1,0,0,0,5e-5"]), "as much to do as it takes on")
    assert page.run("return asked") == 10
