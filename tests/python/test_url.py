"""A question in the URL is the same question: the same bytes come back, and caches can keep them."""

import random

import regimes
import ways
from service import by_url

QUESTIONS = [
    {"e": [0, 1.2, 0], "b": [0, 0, 45000], "velocity": [7.6, 0, 0],
     "units": {"e": "mV/m", "b": "nT", "velocity": "km/s"}},
    {"e": [1, 2, 3], "b": [4e-9, 5e-9, 6e-9], "rotation": {"axis": [0, 0, 1], "angle": 30},
     "units": {"angle": "deg"}, "include": ["tensor", "matrix", "energy", "parallel_frame"]},
    {"e": [1, 2, 3], "b": [4, 5, 6], "boost": {"direction": [1, 0, 0], "gamma": 2000},
     "include": ["matrix"], "signature": "mostly_plus", "inverse": True},
    {"e": [1, 2, 3], "b": [4, 5, 6], "answer_units": {"e": "statV/cm", "b": "G"},
     "steps": [{"rotate": {"euler": {"axes": "zyx", "angles": [1, 2, 3], "about": "moving"}}},
               {"boost": {"beta": [0.1, 0.2, 0.3], "inverse": True}}]},
    {"e": [1, 2, 3], "b": None, "rotation": {"quaternion": {"w": 1, "x": 0, "y": 0, "z": 0}}},
    {"e": [1e-300, 2e300, -0.0], "b": [5e-324, 0, 1.7976931348623157e308], "velocity": [0, 0, 0]},
]


def random_questions():
    rng = random.Random("by url")
    makers = [make for make, _ in ways.WAYS.values() if make not in (ways.long_chain, ways.up_and_down)]
    makers += regimes.BOOSTS.values()
    return [make(rng) for make in makers for _ in range(4)]


def test_by_url_and_by_body_give_the_same_bytes(service):
    for question in QUESTIONS + random_questions():
        by_body, url = service.post(question), service.get(by_url(question))
        assert by_body.status == url.status == 200, f"{question}\n{by_body.body} {url.body}"
        assert by_body.body == url.body, question


def test_an_entity_tag_saves_the_answer(service):
    """RFC 9110 § 13.1.2 and § 15.4.5: If-None-Match with the tag is answered 304, without a body."""
    url = by_url(QUESTIONS[0])
    first = service.get(url)
    tag = first.headers["etag"]
    again = service.get(url, If_None_Match=tag)
    assert again.status == 304 and again.body == b"" and again.headers["etag"] == tag
    for other in (f'"x", {tag}', f"W/{tag}", "*"):
        assert service.get(url, If_None_Match=other).status == 304
    assert service.get(url, If_None_Match='"another"').body == first.body
    assert "max-age" in first.headers["cache-control"]
    assert "accept" in first.headers["vary"].lower()


def test_the_tag_is_that_of_the_question_not_of_its_spelling(service):
    """The order of parameters and the spelling of numbers do not matter; a value does."""
    tags = [service.get(f"/v1/transform?{query}").headers["etag"] for query in (
        "e=0,1,0&b=0,0,1&velocity=100,0,0",
        "velocity=1e2,0,0&b=0,0,1.0&e=0,1,0",
        "e=0,1,0&b=0,0,1&velocity=101,0,0",
    )]
    assert tags[0] == tags[1] != tags[2]


def test_a_problem_is_not_kept(service):
    reply = service.get("/v1/transform?e=0,1,0&b=0,0,1&velocity=4e8,0,0")
    assert reply.status == 422 and "no-store" in reply.headers["cache-control"]
    assert "etag" not in reply.headers
