"""A large file through the page: how long it takes, and how much memory its tab needs.

    CARGO_TARGET_DIR=.. python tests/bench/page_file.py [GIGABYTES]

Makes an invented CSV file of that size (1 by default), drops it on the page of the release binary in
headless Chromium, and prints the largest resident size of any of the browser's renderers meanwhile.
"""

import pathlib
import sys
import tempfile
import time

HERE = pathlib.Path(__file__).resolve()
sys.path.insert(0, str(HERE.parents[1] / "python"))

from browser import Browser  # noqa: E402
from service import Service  # noqa: E402

ROW = "%.17g,%.17g,%.17g,%.17g,%.17g,%.17g,payload %d\n"


def write(path, size):
    """Rows of about 130 bytes until the file has `size` of them."""
    block = "".join(ROW % (i / 7, -i / 11, 1 / (i + 1), 1e-5 * i / 13, 4.5e-5, -1e-5 / (i + 3), i) for i in range(10_000))
    with open(path, "w") as file:
        file.write("ex,ey,ez,bx,by,bz,note\n")
        while file.tell() < size:
            file.write(block)


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


def main():
    size = float(sys.argv[1] if len(sys.argv) > 1 else 1) * 1e9
    with tempfile.TemporaryDirectory() as folder, Service(pathlib.Path(folder) / "log.txt") as service, Browser() as page:
        path = pathlib.Path(folder) / "archive.csv"
        write(path, size)
        page.open(service.url)
        page.until("return document.querySelectorAll('.step').length === 1")
        page.type('[data-path="velocity/0"]', "7600")
        idle = max(resident())
        begun = time.monotonic()
        page.send("#file-input", str(path))
        most, words = idle, ""
        while "restated" not in words:
            time.sleep(0.5)
            most = max([most, *resident()])
            words = page.text("#file-status")
        taken = time.monotonic() - begun
        print(f"{path.stat().st_size / 1e9:.2f} GB in {taken:.0f} s: {words}")
        print(page.text("#file-faults"))
        print(f"largest renderer: {most:.0f} MiB resident, {idle:.0f} MiB before")


main()
