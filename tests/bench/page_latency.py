"""How long the page takes from a keystroke to its answer, on loopback.

    CARGO_TARGET_DIR=.. python tests/bench/page_latency.py [KEYSTROKES]

Types digits into a field of the example on the page of the release binary in headless Chromium. The time runs
from the keystroke, as the browser stamps it, to the new numbers in the document, and to the frame that shows
them; the wait of the page for more keystrokes is part of it. Every keystroke waits for the answer to the last.
"""

import pathlib
import statistics
import sys
import tempfile

HERE = pathlib.Path(__file__).resolve()
sys.path.insert(0, str(HERE.parents[1] / "python"))

from browser import Browser  # noqa: E402
from service import Service  # noqa: E402

WATCH = """
window.times = [];
let begun = null;
document.addEventListener("input", event => { begun = event.timeStamp }, true);
new MutationObserver(() => {
  if (begun === null) return;
  const [from, answered] = [begun, performance.now()];
  begun = null;
  requestAnimationFrame(() => setTimeout(() => times.push([answered - from, performance.now() - from])));
}).observe(document.querySelector("#answer-fields"), { childList: true });
"""


def main():
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    with tempfile.TemporaryDirectory() as folder, Service(pathlib.Path(folder) / "log.txt") as service, Browser() as page:
        page.open(service.url)
        page.until("return document.querySelectorAll('.step').length === 1")
        page.click("#example")
        page.until("return !document.querySelector('#picture').hidden")
        page.run(WATCH)
        page.type('[data-path="e/0"]', "1.")
        page.until("return times.length > 0")
        page.run("times.length = 0; document.querySelector(arguments[0]).focus()", '[data-path="e/0"]')
        for i in range(count):
            if i % 12 == 0:
                page.run("document.activeElement.value = '1.'")
            page.keys(str(i % 9 + 1))
            page.until("return times.length > arguments[0]", i)
        times = page.run("return times")
    for what, values in zip(("numbers in the document", "frame shown"), zip(*times)):
        values = sorted(values)
        print(f"{what}: median {statistics.median(values):.0f} ms, 95 % within {values[int(0.95 * count)]:.0f} ms, "
              f"longest {values[-1]:.0f} ms, {count} keystrokes")


main()
