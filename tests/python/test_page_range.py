"""A range drawn by the page."""

import json
import urllib.parse

from workbench import SHOTS, answered, enter_uncertain, violations


def test_a_range_is_drawn_and_its_faults_stand_beside_their_fields(page):
    page.click("#example")
    answered(page)
    page.click("#range summary")
    drawn = "const p = document.querySelector('#range-picture'); return !p.hidden && p.complete && p.naturalWidth > 0"
    page.until(drawn)
    page.screenshot(SHOTS / "3-range.png")
    options = page.run("return [...document.querySelector('#range-over').options].map(o => o.value)")
    assert options == ["0 angle", "1 beta", "1 rapidity"]
    page.choose("#range-over", "1 beta")
    assert page.run("return document.querySelector('#range-stop').value") == "0.99"
    for field, value, words in (("#range-stop", "1", "slower than c"), ("#range-points", "1", "takes from 2")):
        before = page.run("return document.querySelector(arguments[0]).value", field)
        page.type(field, value)
        page.until("return document.querySelector(arguments[0]).closest('.field').querySelector('.fault')"
                   "?.textContent.includes(arguments[1])", field, words)
        page.type(field, before)
        page.until(drawn)
    page.choose("#range-scale", "log")
    page.until(drawn)


def test_a_range_has_bands_of_the_uncertainties_that_still_hold(page, service):
    """It says when one does not hold: that of the speed that runs."""
    enter_uncertain(page)
    page.run("window.copied = []; navigator.clipboard.writeText = async text => { copied.push(text) }")
    page.until("const p = document.querySelector('#range-picture'); return !p.hidden && p.complete && p.naturalWidth > 0")
    assert not page.run("return document.querySelector('#range-note').hidden")
    page.click("#range-copy")
    address = page.until("return copied[0]").removeprefix(service.url)
    assert "class=\"band" in service.get(address, Accept="image/svg+xml").body.decode()
    asked = urllib.parse.parse_qs(urllib.parse.urlsplit(address).query)
    assert asked["uncertainty.e"] == ["0.1,0.1,0.1"] and "uncertainty" not in asked["steps"][0]
    page.screenshot(SHOTS / "uncertain-range.png")
    assert violations(page) == []
    # A speed that is given over c has an uncertainty over c, which stays as it runs over β, not over rapidity.
    page.choose(".step .field select", "speed")
    page.type('.step [data-path="beta"]', "0.5")
    page.run("for (const part of document.querySelectorAll('.step details')) part.open = true")
    page.type('.step [data-path="uncertainty/value"]', "0.01")
    page.type('.step [data-path="uncertainty/direction"]', "0.02")
    for over, kept in (("0 beta", {"value": 0.01, "direction": 0.02}), ("0 rapidity", {"direction": 0.02})):
        page.choose("#range-over", over)
        page.until("return document.querySelector('#range-note').hidden === arguments[0]", "value" in kept)
        page.run("copied.length = 0")
        page.click("#range-copy")
        query = urllib.parse.urlsplit(page.until("return copied[0]")).query
        assert json.loads(urllib.parse.parse_qs(query)["steps"][0])[0]["boost"]["uncertainty"] == kept
