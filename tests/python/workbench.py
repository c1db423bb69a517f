"""The page as its tests use it: what is entered, what is waited for, what is shown."""

from service import TARGET

SHOTS = TARGET / "tests" / "screenshots"
AXE = TARGET / "tests/npm/node_modules/axe-core/axe.min.js"

# What the example on the page asks. Invented.
EXAMPLE = {
    "e": [12.5, 340, -3.75], "b": [1200, -450, 44700],
    "units": {"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"},
    "steps": [{"rotate": {"axis": [0, 0, 1], "angle": 30, "inverse": True}},
              {"boost": {"velocity": [7.6, 0, 0], "inverse": True}}],
}


def answered(page):
    """Waits for an answer, and for the picture that belongs to it."""
    page.until("const p = document.querySelector('#picture');"
               "return !document.querySelector('#answer-parts').hidden && !p.hidden && p.complete && p.naturalWidth > 0")


def shown(page):
    """The components shown, of E' and of B'."""
    rows = page.run("return [...document.querySelectorAll('#answer-fields tbody tr')]"
                    ".map(row => [...row.querySelectorAll('td')].map(cell => cell.textContent))")
    e, b = zip(*rows[:3])
    return list(e), list(b)


def enter_reading(page, e=("0", "1.2", "0"), b=("0", "0", "45000")):
    page.choose('select[data-unit="e"]', "mV/m")
    page.choose('select[data-unit="b"]', "nT")
    for field, values in (("e", e), ("b", b)):
        for i, value in enumerate(values):
            page.type(f'[data-path="{field}/{i}"]', value)


def enter_uncertain(page):
    """A reading and a motion, all of whose numbers are uncertain, with every part opened."""
    enter_reading(page)
    page.choose('select[data-unit="velocity"]', "km/s")
    page.type('[data-path="velocity/0"]', "7.6")
    page.run("for (const part of document.querySelectorAll('details')) part.open = true")
    for path, value in (("uncertainty/e", "0.1"), ("uncertainty/b", "5")):
        for i in range(3):
            page.type(f'[data-path="{path}/{i}"]', value)
    for i in range(3):
        page.type(f'.step [data-path="uncertainty/{i}"]', "0.01")
    page.until("return /±/.test(document.querySelector('#answer-fields').textContent)")


def violations(page):
    """What the rules of WCAG 2.2 A and AA and the best practices of axe-core find wrong."""
    page.run(AXE.read_text())
    found = page.run_async(
        "const done = arguments[arguments.length - 1];"
        "axe.run(document).then(r => done(r.violations.map("
        "v => v.id + ': ' + v.nodes.map(n => n.target.join(' ') + ' ' + n.failureSummary).join(' | '))))")
    return found
