"""Pictures: well-formed SVG without scripts, with the right numbers at the right places."""

import math
import re
import xml.etree.ElementTree as ET

import pytest

from service import by_url

READING = {"e": [12.5, 340, -3.75], "b": [1200, -450, 44700],
           "units": {"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"}}
WAYS = {
    "motion": {"velocity": [7.6, 0, 0], "inverse": True},
    "turn": {"rotation": {"axis": [0, 0, 1], "angle": 30}},
    "both": {"steps": [{"rotate": {"axis": [0, 0, 1], "angle": 30}}, {"boost": {"beta": [0, 3e-5, 0]}}]},
}
SVG = "{http://www.w3.org/2000/svg}"
# The elements that a picture is made of; none of them can run or load anything.
HARMLESS = {"svg", "title", "desc", "style", "g", "rect", "line", "polyline", "polygon", "circle", "text", "ellipse"}


def draw(service, question, path="/v1/transform"):
    reply = service.get(by_url(question, path), Accept="image/svg+xml")
    assert reply.status == 200, reply.body.decode()
    assert reply.headers["content-type"] == "image/svg+xml"
    return ET.fromstring(reply.body)


def texts(picture):
    return ["".join(text.itertext()).strip() for text in picture.iter(f"{SVG}text")]


def six(value):
    return f"{value:.6g}"


@pytest.mark.parametrize("way", WAYS)
def test_the_table_of_a_reading_shows_the_answer(service, way):
    question = READING | WAYS[way]
    answer, words = service.ask(question), texts(draw(service, question))
    for row, vector in (("E", question["e"]), ("E′", answer["e"]), ("B", question["b"]), ("B′", answer["b"])):
        # The letter stands at the arrow and again before its row of four numbers.
        start = len(words) - 1 - words[::-1].index(row)
        shown = [float(word) for word in words[start + 2:start + 5]]
        assert [six(x) for x in shown] == [six(x) for x in vector], row


def test_the_table_has_the_digits_that_the_uncertainties_support(service):
    """To the second digit of the standard uncertainty (JCGM 100:2008, 7.2.6); what was read stays as it was read."""
    question = READING | WAYS["motion"] | {"uncertainty": {"e": [0.34, 20, 9], "b": [12, 5000, 30]}}
    answer, words = service.ask(question), texts(draw(service, question))
    shown = {}
    for field, row in (("e", "E′"), ("b", "B′")):
        start = len(words) - 1 - words[::-1].index(row)
        values = [*answer[field], math.hypot(*answer[field])]
        known = [*answer["uncertainty"][field], answer["uncertainty"]["magnitudes"][field]["uncertainty"]]
        shown[field] = words[start + 2:start + 6]
        for word, value, u in zip(shown[field], values, known):
            assert float(word) == round(value, 1 - math.floor(math.log10(u))), (word, value, u)
    start = len(words) - 1 - words[::-1].index("B")
    assert words[start + 2:start + 5] == ["1200", "-450", "44700"]
    assert shown["e"][0] == "12.5" and shown["b"][2] == "44700"


@pytest.mark.parametrize("way", WAYS)
def test_arrows_point_where_the_field_does(service, way):
    """A parallel projection is linear: the same field twice as large is drawn twice as long on one scale.

    The axes themselves tell where unit vectors end; tips must be the same sums of them.
    """
    question = READING | WAYS[way]
    answer, picture = service.ask(question), draw(service, question)
    axes = [line for line in picture.iter(f"{SVG}line") if line.get("class") == "axis"]
    assert len(axes) == 6
    reach = next(word for word in texts(picture) if word.startswith("Each half axis"))
    scales = {word.split()[0]: float(word.split()[1]) for word in reach.split(": ")[1].split(", ")}
    tips = {}
    for arrow in picture.iter(f"{SVG}g"):
        labels = [text for text in arrow.findall(f"{SVG}text") if "bold" in text.get("class")]
        heads = arrow.findall(f"{SVG}polygon")
        if len(labels) == len(heads) == 1:
            tip = heads[0].get("points").split()[0].split(",")
            tips["".join(labels[0].itertext()).strip()] = [float(x) for x in tip]
    for name, vector, panel in (("E", question["e"], axes[:3]), ("E′", answer["e"], axes[3:]),
                                ("B", question["b"], axes[:3]), ("B′", answer["b"], axes[3:])):
        for end, origin, tip in (("x2", "x1", tips[name][0]), ("y2", "y1", tips[name][1])):
            along = sum(x / scales[name[0]] * (float(axis.get(end)) - float(axis.get(origin)))
                        for x, axis in zip(vector, panel))
            assert abs(float(panel[0].get(origin)) + along - tip) < 0.1, name


def test_ellipses_are_the_outlines_of_the_coverage_ellipsoids(service):
    """The outline of an ellipsoid reaches, in every direction u of the sheet, √Σ(u·Paᵢ)² from its middle,

    its half axes aᵢ projected by P, which the drawn axes tell (support function of an ellipsoid: Boyd and
    Vandenberghe, Convex Optimization, 2004, §8.4).
    """
    question = READING | {"boost": {"beta": [0, 3e-5, 0], "uncertainty": [3e-6, 1e-6, 2e-6]},
                          "uncertainty": {"e": [30, 20, 50], "b": {"covariance": [
                              [9e6, 4e6, 0], [4e6, 2.5e7, -3e6], [0, -3e6, 1e7]]}}}
    answer, picture = service.ask(question), draw(service, question)
    axes = [line for line in picture.iter(f"{SVG}line") if line.get("class") == "axis"]
    reach = next(word for word in texts(picture) if word.startswith("Each half axis"))
    assert reach.endswith("; ellipses: 95 % coverage")
    scales = {word.split()[0]: float(word.split()[1]) for word in reach.split(": ")[1].split("; ")[0].split(", ")}
    ellipses = [element for element in picture.iter(f"{SVG}ellipse")]
    assert len(ellipses) == 4
    # Before and after, E and B.
    for element, (name, panel, prime) in zip(ellipses, [("e", 0, ""), ("e", 3, "′"), ("b", 0, ""), ("b", 3, "′")]):
        if not prime:
            continue
        columns = [[float(axis.get(a)) - float(axis.get(b)) for axis in axes[panel:panel + 3]]
                   for a, b in (("x2", "x1"), ("y2", "y1"))]
        ellipsoid = answer["uncertainty"]["coverage"][name]
        angle = math.radians(float(element.get("transform").split("(")[1].split()[0]))
        rx, ry = float(element.get("rx")), float(element.get("ry"))
        for k in range(8):
            u = (math.cos(k * math.pi / 8), math.sin(k * math.pi / 8))
            expected = math.sqrt(sum(
                (half / scales[name.upper()] * sum(u[i] * sum(x * y for x, y in zip(direction, columns[i]))
                                                   for i in range(2))) ** 2
                for half, direction in zip(ellipsoid["half_axes"], ellipsoid["directions"])))
            along = u[0] * math.cos(angle) + u[1] * math.sin(angle)
            aside = -u[0] * math.sin(angle) + u[1] * math.cos(angle)
            assert abs(math.hypot(rx * along, ry * aside) - expected) < 0.05


@pytest.mark.parametrize("scale", ["linear", "log"])
def test_curves_pass_where_the_columns_say(service, scale):
    """Pixels are a straight line against values, or against their logarithms."""
    question = READING | {"boost": {"direction": [1, 2, -2]}, "over": "beta", "start": 0.1, "stop": 0.9,
                          "points": 9, "scale": scale}
    columns = service.get(by_url(question, "/v1/sweep")).json
    picture = draw(service, question, "/v1/sweep")
    curves = [line for line in picture.iter(f"{SVG}polyline")]
    assert len(curves) == 8
    place = (lambda x: math.log10(abs(x))) if scale == "log" else float
    for field, own in (("e", curves[:4]), ("b", curves[4:])):
        points = []
        for name, curve in zip(["magnitude", "x", "y", "z"], own):
            values = columns[field][name]
            pixels = [float(point.split(",")[1]) for point in curve.get("points").split()]
            assert len(pixels) == len(values)
            points += [(place(value), pixel) for value, pixel in zip(values, pixels)]
        (low, bottom), (high, top) = min(points), max(points)
        assert top < bottom
        for value, pixel in points:
            expected = bottom + (value - low) / (high - low) * (top - bottom)
            assert abs(pixel - expected) < 0.05


UNCERTAIN = READING | {"boost": {"direction": [1, 2, -2]}, "over": "beta", "start": 0.1, "stop": 0.9, "points": 9,
                       "uncertainty": {"e": [40, 300, 2], "b": [200, 500, 900],
                                       "boost": {"value": 0.03, "direction": 0.02}}}


@pytest.mark.parametrize("scale", ["linear", "log"])
def test_bands_reach_as_far_as_the_standard_uncertainties(service, scale):
    """Their edges stand at the values less and plus u, on the scale that the curves themselves tell."""
    question = UNCERTAIN | {"scale": scale}
    columns = service.get(by_url(question, "/v1/sweep")).json
    picture = draw(service, question, "/v1/sweep")
    lines = list(picture.iter(f"{SVG}polyline"))
    curves = [line for line in lines if line.get("class").startswith("line ")]
    edges = [line for line in lines if line.get("class").startswith("edge ")]
    bands = [area for area in picture.iter(f"{SVG}polygon") if area.get("class").startswith("band ")]
    frames = [frame for frame in picture.iter(f"{SVG}rect") if frame.get("class") == "frame"]
    assert (len(curves), len(edges), len(bands), len(frames)) == (8, 16, 8, 2)
    logarithmic = scale == "log"
    place = (lambda x: math.log10(abs(x))) if logarithmic else float
    heights = lambda line: [float(point.split(",")[1]) for point in line.get("points").split()]  # noqa: E731
    names, below = ["magnitude", "x", "y", "z"], 0
    for n, (field, frame) in enumerate(zip("eb", frames)):
        values = [columns[field][name] for name in names]
        known = [(place(v), pixel) for column, curve in zip(values, curves[4 * n:4 * n + 4])
                 for v, pixel in zip(column, heights(curve))]
        (low, bottom), (high, top) = min(known), max(known)
        pixel = lambda v: bottom + (place(v) - low) / (high - low) * (top - bottom)  # noqa: E731
        floor = float(frame.get("y")) + float(frame.get("height"))
        for k, name in enumerate(names):
            lower, upper = heights(edges[8 * n + 2 * k]), heights(edges[8 * n + 2 * k + 1])
            around = bands[4 * n + k].get("points").split()
            assert around[:9] == edges[8 * n + 2 * k].get("points").split()
            assert around[:8:-1] == edges[8 * n + 2 * k + 1].get("points").split()
            for i, (v, u) in enumerate(zip(values[k], columns["uncertainty"][field][name])):
                assert u > 0
                ends = [v - u, v + u]
                if logarithmic:
                    ends = sorted(map(abs, ends))
                if logarithmic and u >= abs(v):  # zero is within reach, and no power of ten is low enough
                    below += 1
                    ends[0] = None
                expected = [floor if end is None else min(pixel(end), floor) for end in ends]
                assert abs(lower[i] - expected[0]) < 0.1 and abs(upper[i] - expected[1]) < 0.1, (field, name, i)
    assert (below > 0) == logarithmic, "the question no longer has a value within its uncertainty of zero"


def test_bands_are_said_in_words_and_differ_by_their_edges(service):
    picture = draw(service, UNCERTAIN, "/v1/sweep")
    columns = service.get(by_url(UNCERTAIN, "/v1/sweep")).json
    assert "bands: ± one standard uncertainty" in texts(picture)
    about = next("".join(child.itertext()) for child in picture if child.tag == f"{SVG}desc")
    value, known = re.search(r"E′ in mV/m:.*? y from \S+ ± \S+ to (\S+) ± ([^\s,]+),", about).groups()
    v, u = columns["e"]["y"][-1], columns["uncertainty"]["e"]["y"][-1]
    last = 1 - math.floor(math.log10(u))
    assert [float(value), float(known)] == [round(v, last), round(u, last)]
    assert "one standard uncertainty" in about
    edges = [line.get("class").split()[1:] for line in picture.iter(f"{SVG}polyline") if line.get("class").startswith("edge")]
    assert len({tuple(words[1:]) for words in edges[:8]}) == 4
    certain = draw(service, {name: value for name, value in UNCERTAIN.items() if name != "uncertainty"}, "/v1/sweep")
    assert not any("band" in word for word in texts(certain))


@pytest.mark.parametrize("question, path", [
    (READING | WAYS["both"], "/v1/transform"),
    (READING | {"boost": {"direction": [1, 0, 0]}, "over": "rapidity", "start": 0, "stop": 5}, "/v1/sweep"),
    (UNCERTAIN, "/v1/sweep")])
def test_a_picture_is_complete_in_itself(service, question, path):
    """It runs nothing, loads nothing, and has words for those who do not see it (SVG-AAM 1.0)."""
    picture = draw(service, question, path)
    assert {element.tag.removeprefix(SVG) for element in picture.iter()} <= HARMLESS
    for element in picture.iter():
        assert not any(name.startswith("on") or "href" in name for name in element.keys())
    assert picture.get("role") == "img"
    ids = picture.get("aria-labelledby").split()
    assert [child.get("id") for child in picture if child.tag in (f"{SVG}title", f"{SVG}desc")] == ids
    assert all("".join(child.itertext()).strip() for child in picture if child.get("id") in ids)
    style = "".join(picture.find(f"{SVG}style").itertext())
    assert "url(" not in style and "@import" not in style and "prefers-color-scheme:dark" in style


def test_lines_differ_by_more_than_colour(service):
    """No two curves of a plot share both dashes and marks, and each is named at its end."""
    question = READING | {"boost": {"direction": [1, 0, 0]}, "over": "beta", "start": 0, "stop": 0.9}
    picture = draw(service, question, "/v1/sweep")
    classes = [line.get("class").split()[2:] for line in picture.iter(f"{SVG}polyline")][:4]
    assert len({tuple(sorted(words)) for words in classes}) == 4
    for name in ("|E′|", "E′x", "E′y", "E′z", "|B′|", "B′x", "B′y", "B′z"):
        assert name in texts(picture)
