"""The page for everybody: with the keyboard alone, with a screen reader, on a small screen, without other hosts."""

import pytest

from browser import ENTER, SPACE, TAB, Browser
from service import ROOT
from workbench import SHOTS, answered, violations


def test_the_keyboard_alone_is_enough(page):
    """WCAG 2.2, 2.1.1 and 2.4.7: every part is reached with Tab, and what has the focus is seen."""
    reached = []
    page.run("document.body.focus()")
    for _ in range(100):
        page.keys(TAB)
        at = page.run("const f = document.activeElement; return [f.dataset.path || f.dataset.unit || f.id || f.textContent.trim(),"
                      "getComputedStyle(f).outlineStyle]")
        if reached and (at[0] == reached[0] or page.run("return document.activeElement === document.body")):
            break  # once around
        reached.append(at[0])
        assert at[1] != "none", at[0]
        if at[0] == "example":
            page.keys(ENTER)
            answered(page)
        if at[0] == "full":
            page.keys(SPACE)
            page.until("return document.querySelector('#full').checked")
        if at[0] == "Draw the answer over a range":
            page.keys(ENTER)
            page.until("return document.querySelector('#range').open")
            page.until("return !document.querySelector('#range-picture').hidden")
    for part in ("e/0", "b/2", "e", "paste", "axis/0", "angle", "inverse", "velocity/0", "Remove", "add-boost", "add-rotate",
                 "copy-curl", "copy-link", "range-over", "start", "range-save"):
        assert part in reached, reached


@pytest.mark.parametrize("dark", [False, True], ids=["light", "dark"])
@pytest.mark.parametrize("size", [(1280, 1000), (390, 844), (320, 640)], ids=["desk", "phone", "small phone"])
def test_no_rule_of_accessibility_is_broken(service, dark, size):
    """axe-core, in both colour schemes and down to the width that WCAG 2.2, 1.4.10 asks for."""
    with Browser(dark=dark, size=size) as page:
        page.open(service.url)
        page.until("return document.querySelectorAll('.step').length === 1")
        assert violations(page) == []
        page.click("#example")
        answered(page)
        page.click("#range summary")
        page.until("return !document.querySelector('#range-picture').hidden")
        assert violations(page) == []
        page.screenshot(SHOTS / f"{'dark' if dark else 'light'}-{size[0]}.png")
        page.type('[data-path="e/0"]', "x")
        page.until("return document.querySelector('.fault')")
        assert violations(page) == []
        # Where the answer is below the fields, its sentence is in sight beside them.
        if size[0] < 800:
            page.click("#example")
            answered(page)
            page.run("scrollTo(0, 0)")
            box = page.run("const b = document.querySelector('#status').getBoundingClientRect(); return [b.top, b.bottom, b.height]")
            assert 0 < box[0] < box[1] <= size[1] and box[2] > 20
        # Nothing makes the page wider than the screen.
        assert page.run("return document.documentElement.scrollWidth") <= size[0]
        assert page.run("return matchMedia('(prefers-color-scheme: dark)').matches") is dark


def test_it_is_small_and_asks_no_other_host(page, service):
    page.click("#example")
    answered(page)
    loads = page.run("return performance.getEntriesByType('resource').map(entry => entry.name)")
    assert all(load.startswith((service.url, "blob:", "data:")) for load in loads), loads
    names = [load.removeprefix(service.url) for load in loads if "/page/" in load]
    scripts = {path.name for path in (ROOT / "src/page").glob("*.js")} - {"reference.js"}  # which is of another page
    assert {name.removeprefix("/page/") for name in names} == scripts | {"style.css"}
    size = sum(len(service.get(name).body) for name in ["/", *names])
    assert size < 100 * 1024
    policy = service.get("/").headers["content-security-policy"]
    assert "unsafe" not in policy and "default-src 'none'" in policy and "http" not in policy
    assert page.complaints() == []


def test_it_says_that_results_are_no_safety_clearance(page):
    words = " ".join(page.text("footer").split())
    assert "not a safety clearance" in words and "local codes and licensed practice" in words
