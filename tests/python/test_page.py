"""The page in a real browser: Chromium, driven as a user would drive it. Screenshots stay in the target folder."""

import json
import math
import re
import urllib.parse

import pytest

from service import ROOT, Service
from workbench import EXAMPLE, SHOTS, answered, enter_reading, enter_uncertain, shown, violations


def test_from_the_empty_page_to_an_answer_with_its_picture(page, service):
    page.screenshot(SHOTS / "1-empty.png")
    assert "Enter E, B or both" in page.text("#waiting")
    enter_reading(page)
    page.until_text("#waiting", "Fill in step 1")
    page.choose('select[data-unit="velocity"]', "km/s")
    page.type('[data-path="velocity/0"]', "7.6")
    answered(page)
    answer = service.ask({"e": [0, 1.2, 0], "b": [0, 0, 45000], "velocity": [7.6, 0, 0],
                          "units": {"e": "mV/m", "b": "nT", "velocity": "km/s"}})
    e, b = shown(page)
    for text, value in zip(e + b, answer["e"] + answer["b"]):
        assert math.isclose(float(text), value, rel_tol=1e-5), (text, value)
    invariant = page.run("return document.querySelector('#invariants tbody td').textContent")
    assert math.isclose(float(invariant), answer["invariants"]["e2_minus_c2b2"], rel_tol=1e-5)
    page.screenshot(SHOTS / "2-answer.png")
    assert page.complaints() == []


def test_all_digits_are_there_on_demand(page, service):
    page.click("#example")
    answered(page)
    page.click("#full")
    e, b = shown(page)
    answer = service.ask(EXAMPLE)
    assert [float(text.split(" ±")[0]) for text in e + b] == answer["e"] + answer["b"]


@pytest.mark.parametrize("line", [
    "0, 1.2, 0, 0, 0, 45000", "0;1.2;0;0;0;45000", "0\t1.2\t0\t0\t0\t45000", "0 1.2 0 0 0 45000",
    "time,ex,ey,ez,bx,by,bz\n5,0,1.2,0,0,0,45000\n", "bz,by,bx,ez,ey,ex\n45000,0,0,0,1.2,0"])
def test_a_line_is_taken_apart(page, line):
    paste(page, line)
    values = page.run("return [...document.querySelectorAll('#reading-fields > .field input')].map(input => input.value)")
    assert values == ["0", "1.2", "0", "0", "0", "45000"]


def paste(page, text):
    page.run("const box = document.querySelector('#paste'); box.value = arguments[0];"
             "box.dispatchEvent(new ClipboardEvent('paste', {bubbles: true}))", text)
    page.until("return document.querySelector('#paste-note').textContent !== ''")


def test_a_question_in_json_is_taken_over_whole(page):
    paste(page, json.dumps(EXAMPLE))
    answered(page)
    assert page.run("return document.querySelectorAll('.step').length") == 2
    assert page.run("return document.querySelector('select[data-unit=angle]').value") == "deg"


@pytest.mark.parametrize("line, words", [
    ("1, 2", "There are 2 numbers"), ("{\"e\": [1,", "not well-formed JSON"), ("a, b, c", "neither three or six numbers")])
def test_a_line_that_makes_no_sense_is_said_to(page, line, words):
    paste(page, line)
    assert words in page.text("#paste-note")


# The form, what is typed into its fields, and the same step as it is asked.
FORMS = [
    ("boost", "velocity", {"velocity/0": "10", "velocity/1": "20"}, {"boost": {"velocity": [10, 20, 0]}}),
    ("boost", "beta", {"beta/0": "0.1"}, {"boost": {"beta": [0.1, 0, 0]}}),
    ("boost", "speed", {"direction/1": "2", "beta": ".5"}, {"boost": {"direction": [1, 2, 0], "beta": 0.5}}),
    ("boost", "gamma", {"gamma": "2000"}, {"boost": {"direction": [1, 0, 0], "gamma": 2000}}),
    ("boost", "rapidity", {"rapidity": "-3"}, {"boost": {"direction": [1, 0, 0], "rapidity": -3}}),
    ("boost", "kinetic_energy", {"kinetic_energy": "1e-13"},
     {"boost": {"direction": [1, 0, 0], "kinetic_energy": 1e-13, "particle": "electron"}}),
    ("boost", "rest_energy", {"kinetic_energy": "2", "particle/rest_energy": "3"},
     {"boost": {"direction": [1, 0, 0], "kinetic_energy": 2, "particle": {"rest_energy": 3}}}),
    ("boost", "angular_velocity", {"angular_velocity/2": "3", "position/0": "2"},
     {"boost": {"angular_velocity": [0, 0, 3], "position": [2, 0, 0]}}),
    ("rotate", "axis", {"angle": "0.5"}, {"rotate": {"axis": [0, 0, 1], "angle": 0.5}}),
    ("rotate", "quaternion", {"quaternion/w": "0.6", "quaternion/x": "0", "quaternion/y": "0.8", "quaternion/z": "0"},
     {"rotate": {"quaternion": {"w": 0.6, "x": 0, "y": 0.8, "z": 0}}}),
    ("rotate", "matrix", {f"matrix/{i}/{j}": "010001100"[3 * i + j] for i in range(3) for j in range(3)},
     {"rotate": {"matrix": [[0, 1, 0], [0, 0, 1], [1, 0, 0]]}}),
    ("rotate", "euler", {"euler/angles/0": "1", "euler/angles/1": "2", "euler/angles/2": "3"},
     {"rotate": {"euler": {"axes": "zyx", "angles": [1, 2, 3], "about": "moving"}}}),
]


@pytest.mark.parametrize("kind, form, typed, step", FORMS, ids=[form for _, form, _, _ in FORMS])
def test_every_form_of_a_step_asks_what_it_says(page, service, kind, form, typed, step):
    for i, value in enumerate("123"):
        page.type(f'[data-path="e/{i}"]', value)
        page.type(f'[data-path="b/{i}"]', value)
    if kind == "rotate":
        page.click(".step [aria-label='remove this step']")
        page.click("#add-rotate")
    page.choose(".step .field select", form)
    for path, value in typed.items():
        page.type(f'.step [data-path="{path}"]', value)
    answered(page)
    page.click("#full")
    for inverse in ("false", "true"):
        page.choose('.step [data-path="inverse"]', inverse)
        body = next(iter(step.values())) | ({"inverse": True} if inverse == "true" else {})
        answer = service.ask({"e": [1, 2, 3], "b": [1, 2, 3], "steps": [{kind: body}]})
        page.until("return [...document.querySelectorAll('#answer-fields tbody td:nth-child(2)')].slice(0, 3)"
                   ".every((cell, i) => Number(cell.textContent) === arguments[0][i])", answer["e"])


def test_steps_are_moved_and_removed(page, service):
    page.click("#example")
    answered(page)
    page.click("#full")
    page.click(".step:nth-child(2) [aria-label='move this step earlier']")
    swapped = EXAMPLE | {"steps": EXAMPLE["steps"][::-1]}
    wanted = "return Number(document.querySelector('#answer-fields tbody td').textContent) === arguments[0]"
    page.until(wanted, service.ask(swapped)["e"][0])
    page.click(".step:nth-child(1) [aria-label='remove this step']")
    page.until(wanted, service.ask(EXAMPLE | {"steps": EXAMPLE["steps"][:1]})["e"][0])
    page.click('#whole input')
    page.until(wanted, service.ask(EXAMPLE | {"steps": EXAMPLE["steps"][:1], "inverse": True})["e"][0])


def test_the_way_may_be_given_by_names(chromium, tmp_path):
    """With the invented catalogue of deploy/demo, whose frames move and turn."""
    with Service(tmp_path / "log.txt", "--frames", ROOT / "deploy/demo/frames.toml") as service:
        chromium.open(service.url)
        chromium.until("return !document.querySelector('#way-choice').hidden")
        enter_reading(chromium)
        chromium.choose("#way-form", "names")
        chromium.choose('[data-path="from"]', "boom")
        chromium.until_text("#sensor-note", "its raw numbers")
        chromium.choose('[data-path="from"]', "spinning")
        chromium.choose('[data-path="to"]', "ground")
        # Without the time there is no answer, and the fault says so beside the time.
        chromium.until("return document.querySelector('[data-path=time]').closest('.field').querySelector('.fault')")
        chromium.type('[data-path="time"]', "120.25")
        answered(chromium)
        chromium.click("#full")
        answer = service.ask({"e": [0, 1.2, 0], "b": [0, 0, 45000], "units": {"e": "mV/m", "b": "nT"},
                              "from": "spinning", "to": "ground", "time": 120.25})
        e, b = shown(chromium)
        assert [float(text.split(" ±")[0]) for text in e + b] == answer["e"] + answer["b"]
        assert violations(chromium) == []
        chromium.screenshot(SHOTS / "4-names.png")


def test_the_answer_comes_in_other_units(page, service):
    page.click("#example")
    answered(page)
    page.choose('[data-answer="e"]', "statV/cm")
    page.until_text("#answer-fields", "statV/cm")
    answer = service.ask(EXAMPLE | {"answer_units": {"e": "statV/cm"}})
    assert math.isclose(float(shown(page)[0][1]), answer["e"][1], rel_tol=1e-5)


# What is typed where, the field beside which the fault appears, and words of the problem document.
FAULTS = [
    ({'[data-path="e/1"]': "1,5"}, '[data-path="e/1"]', "expected a number"),
    ({'[data-path="b/2"]': "1e999"}, '[data-path="b/2"]', "1.8e308"),
    ({'.step:nth-child(2) [data-path="velocity/0"]': "4e8"}, '.step:nth-child(2) [data-path="velocity/0"]', "slower than c"),
    ({'.step:nth-child(2) [data-path="velocity/1"]': " "}, '.step:nth-child(2) [data-path="velocity/1"]', "expected a number"),
    ({'[data-path="axis/2"]': "0"}, '[data-path="axis/0"]', "points nowhere"),
    ({'[data-path="angle"]': "north"}, '[data-path="angle"]', "expected a number"),
]


@pytest.mark.parametrize("typed, field, words", FAULTS, ids=[words for *_, words in FAULTS])
def test_a_fault_stands_beside_its_field(page, typed, field, words):
    page.click("#example")
    answered(page)
    for selector, value in typed.items():
        page.type(selector, value)
    page.until("return document.querySelector('.fault')")
    beside = page.run("return document.querySelector(arguments[0]).closest('.field').querySelector('.fault')?.textContent", field)
    assert words.lower() in beside.lower()
    described = page.run("const f = document.querySelector(arguments[0]);"
                         "return [f.getAttribute('aria-invalid'), document.getElementById(f.getAttribute('aria-describedby'))?.textContent]", field)
    assert described[0] == "true" and words.lower() in described[1].lower()
    page.screenshot(SHOTS / f"fault-{re.sub('[^a-z]+', '-', words.lower())}.png")


def test_several_faults_are_shown_at_once_and_go_when_mended(page):
    page.click("#example")
    answered(page)
    page.type('[data-path="e/0"]', "x")
    page.type('.step:nth-child(2) [data-path="velocity/0"]', "4e8")
    page.until("return document.querySelectorAll('.fault').length === 2")
    assert "2 things must be mended" in page.text("#waiting")
    page.type('[data-path="e/0"]', "1")
    page.type('.step:nth-child(2) [data-path="velocity/0"]', "1")
    answered(page)
    page.until("return document.querySelectorAll('.fault, [aria-invalid]').length === 0")


def test_the_question_is_copied_as_curl_and_as_a_link_that_reopens_it(page, service):
    page.run("window.copied = []; navigator.clipboard.writeText = async text => { copied.push(text) }")
    page.click("#example")
    answered(page)
    for button in ("#copy-curl", "#copy-link", "#copy-picture"):
        page.click(button)
    page.until("return copied.length === 3")
    curl, link, picture = page.run("return copied")
    url, body = re.fullmatch(r"curl -s (\S+) --json '(.*)'", curl).groups()
    assert url == f"{service.url}/v1/transform" and json.loads(body) == EXAMPLE
    assert service.get(picture.removeprefix(service.url)).json["e"] == service.ask(EXAMPLE)["e"]
    assert json.loads(urllib.parse.unquote(link.split("#", 1)[1])) == EXAMPLE
    before = shown(page)
    page.open("about:blank")
    page.open(link)
    answered(page)
    assert shown(page) == before


def test_uncertainties_are_entered_beside_what_they_belong_to(page, service):
    enter_uncertain(page)
    answer = service.ask({"e": [0, 1.2, 0], "b": [0, 0, 45000], "units": {"e": "mV/m", "b": "nT", "velocity": "km/s"},
                          "steps": [{"boost": {"velocity": [7.6, 0, 0], "uncertainty": [0.01, 0.01, 0.01]}}],
                          "uncertainty": {"e": [0.1, 0.1, 0.1], "b": [5, 5, 5]}})
    u = answer["uncertainty"]["e"][1]
    decimals = 1 - math.floor(math.log10(u))
    page.until_text("#answer-fields", f"{answer['e'][1]:.{decimals}f} ± {u:.{decimals}f}")
    page.screenshot(SHOTS / "uncertainty.png")
    page.type('[data-path="uncertainty/e/1"]', "-1")
    page.until("return document.querySelector('.fault')")
    group = page.run("return document.querySelector('.fault').closest('.field').getAttribute('aria-label')")
    assert group == "of E, in its unit"


def test_digits_are_sent_as_they_were_typed(page):
    """A browser would turn 0.1000000000000000055511151231257827 into 0.1."""
    page.run("window.copied = []; navigator.clipboard.writeText = async text => { copied.push(text) }")
    page.click("#example")
    answered(page)
    page.type('[data-path="e/0"]', "+0.10000000000000000000001")
    page.until("return document.querySelector('#answer-fields tbody td').textContent !== '-159.175'")
    page.click("#copy-curl")
    page.until("return copied.length === 1")
    assert "[0.10000000000000000000001, 340, -3.75]" in page.run("return copied[0]")
