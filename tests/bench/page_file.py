"""A large file through the page: how long it takes, and how much memory its tab needs.

    CARGO_TARGET_DIR=.. python tests/bench/page_file.py [GIGABYTES] [--ndjson] [--in-memory]

Makes an invented CSV or NDJSON file of that size (1 by default), drops it on the page of the release binary in
headless Chromium, saves what comes back, and compares it with what curl gets for the whole file at once.
Prints the largest resident size of any of the browser's renderers meanwhile. `--in-memory` takes the
browser's private files away, as it has none for a page over plain HTTP from another machine.
"""

import filecmp
import pathlib
import subprocess
import sys
import tempfile
import time
import urllib.parse

HERE = pathlib.Path(__file__).resolve()
sys.path.insert(0, str(HERE.parents[1] / "python"))

from browser import Browser  # noqa: E402
from service import Service  # noqa: E402

# Format → its media type, its header, its rows, and a row to be refused.
FORMATS = {
    "csv": ("text/csv", "ex,ey,ez,bx,by,bz,note\n", "%.17g,%.17g,%.17g,%.17g,%.17g,%.17g,payload %d\n",
            "east,0,0,0,0,0,refused\n"),
    "ndjson": ("application/x-ndjson", "", '{"e":[%.17g,%.17g,%.17g],"b":[%.17g,%.17g,%.17g],"note":"payload %d"}\n',
               '{"e":["east",0,0],"b":[0,0,0],"note":"refused"}\n'),
}
WAY = '[{"boost": {"velocity": [7600, 0, 0]}}]'


def write(path, size, header, row, refused):
    """Rows of 100 to 150 bytes until the file has `size` of them; every 10,000th is refused."""
    rows = [row % (i / 7, -i / 11, 1 / (i + 1), 1e-5 * i / 13, 4.5e-5, -1e-5 / (i + 3), i) for i in range(9_999)]
    block = "".join(rows) + refused
    with open(path, "w") as file:
        file.write(header)
        blocks = 0
        while file.tell() < size:
            file.write(block)
            blocks += 1
    return blocks


def resident():
    """Resident sizes in MiB of all renderers on this machine."""
    sizes = []
    for process in pathlib.Path("/proc").glob("[0-9]*"):
        try:
            command = (process / "cmdline").read_text()
            if "--type=renderer" in command:
                status = dict(line.split(":", 1) for line in (process / "status").read_text().splitlines() if ":" in line)
                sizes.append(int(status["VmRSS"].split()[0]) / 1024)
        except OSError:
            continue  # It has just ended.
    return sizes


def save(page, folder):
    """Saves the answer and waits until it is there."""
    path = folder / page.run("return document.querySelector('#file-result a').download")
    page.click("#file-result a")
    while not path.exists():
        time.sleep(0.2)
    return path


def main():
    options = sys.argv[1:]
    sizes = [float(option) for option in options if not option.startswith("--")]
    size = (sizes or [1])[0] * 1e9
    ending = "ndjson" if "--ndjson" in options else "csv"
    kind, *rows = FORMATS[ending]
    with tempfile.TemporaryDirectory() as name, Service(pathlib.Path(name) / "log.txt") as service:
        folder = pathlib.Path(name)
        path, downloads, whole = folder / f"archive.{ending}", folder / "downloads", folder / "whole"
        downloads.mkdir()
        blocks = write(path, size, *rows)
        with Browser(downloads=downloads) as page:
            page.open(service.url)
            page.until("return document.querySelectorAll('.step').length === 1")
            if "--in-memory" in options:
                page.run("delete StorageManager.prototype.getDirectory")
            page.type('[data-path="velocity/0"]', "7600")
            idle = max(resident())
            begun = time.monotonic()
            page.send("#file-input", str(path))
            most, words = idle, ""
            while not words or words.endswith("on its way."):
                time.sleep(0.2)
                most = max([most, *resident()])
                words = page.text("#file-status")
            taken = time.monotonic() - begun
            print(f"{path.stat().st_size / 1e9:.2f} GB in {taken:.0f} s: {words} {page.text('#file-faults')}")
            print(f"written with {10_000 * blocks:,} rows, {blocks} of them to be refused")
            print(f"largest renderer: {most:.0f} MiB resident, {idle:.0f} MiB before")
            if not page.text("#file-result"):
                return
            saved = save(page, downloads)
            url = f"{service.url}/v1/series?steps={urllib.parse.quote(WAY)}"
            subprocess.run(["curl", "-sS", "-X", "POST", "-H", f"content-type: {kind}", "-T", path, "-o", whole, url], check=True)
            same = filecmp.cmp(saved, whole, shallow=False)
            print(f"saved: {saved.stat().st_size:,} bytes, {'equal to' if same else 'NOT equal to'} what curl gets")


main()
