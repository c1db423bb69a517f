"""Replicas that die under load: nothing is lost, and all answer alike."""

import http.client
import json
import random
import threading
import time

import pytest

from cluster import REPLICAS, Cluster
import regimes
import ways

JSON = {"Content-Type": "application/json"}
AGAIN = {502, 503, 504}


class Client(threading.Thread):
    """Asks one question after another until told to stop, and again where it got no answer."""

    def __init__(self, cluster, stop, asked, expected, first):
        super().__init__()
        self.cluster, self.stop, self.asked, self.expected, self.next = cluster, stop, asked, expected, first
        self.answered = self.repeated = 0
        self.wrong, self.lost = [], []
        self.slowest = 0.0
        self.connection = None

    def run(self):
        while not self.stop.is_set():
            i = self.next = (self.next + 1) % len(self.asked)
            begun = time.monotonic()
            for _ in range(20):
                status, body = self.once(self.asked[i])
                if status is not None and status not in AGAIN:
                    break
                self.repeated += 1
                time.sleep(0.05)
            else:
                self.lost.append(body)
                continue
            self.slowest = max(self.slowest, time.monotonic() - begun)
            self.answered += 1
            if (status, body) != self.expected[i]:
                self.wrong.append((status, body[:300]))

    def once(self, question):
        """Status and body; no status when the connection broke."""
        try:
            if self.connection is None:
                self.connection = http.client.HTTPSConnection(
                    "127.0.0.1", self.cluster.port, timeout=30, context=self.cluster.trust())
            self.connection.request("POST", "/v1/transform", question, JSON)
            answer = self.connection.getresponse()
            body = answer.read()
            if answer.will_close:
                self.connection.close()
                self.connection = None
            return answer.status, body
        except (http.client.HTTPException, OSError) as error:
            if self.connection:
                self.connection.close()
            self.connection = None
            return None, repr(error)


@pytest.fixture
def asked():
    """Questions in regimes that take every path through the arithmetic, big floats too."""
    rng = random.Random(1)
    makers = [regimes.fast, regimes.near_c, regimes.gamma_form, regimes.motional_cancels, regimes.plane_wave,
              regimes.turning_body, regimes.mixed_scales]
    questions = [make(rng) for make in makers for _ in range(20)]
    questions += [regimes.comparable(rng) | ways.chain(rng) for _ in range(20)]
    return [json.dumps(question).encode() for question in questions]


def test_nothing_is_lost_while_replicas_are_killed(tmp_path, asked, long, figure):
    kills, clients = (60, 16) if long else (6, 4)
    with Cluster(tmp_path, rate=(100_000, 100_000, 1000)) as cluster:
        expected = [answer(cluster.replicas[0], question) for question in asked]
        for replica in cluster.replicas[1:]:
            assert [answer(replica, question) for question in asked] == expected, "replicas differ"
        stop = threading.Event()
        threads = [Client(cluster, stop, asked, expected, n * 17) for n in range(clients)]
        for thread in threads:
            thread.start()
        begun = time.monotonic()
        for kill in range(kills):
            time.sleep(1)
            cluster.kill(kill % REPLICAS)
        seconds = time.monotonic() - begun
        stop.set()
        for thread in threads:
            thread.join()
        complaints = cluster.complaints()
    total = sum(thread.answered for thread in threads)
    repeated = sum(thread.repeated for thread in threads)
    figure(f"{kills} kills in {seconds:.0f} s: {total} answers through nginx, {repeated} asked again by the client, "
           f"slowest {max(thread.slowest for thread in threads):.2f} s")
    assert [loss for thread in threads for loss in thread.lost] == []
    assert [fault for thread in threads for fault in thread.wrong] == []
    assert complaints == []
    assert total > 10 * kills


def answer(replica, question):
    reply = replica.request("POST", "/v1/transform", question, JSON)
    return reply.status, reply.body


def test_one_client_is_held_to_its_rate(tmp_path):
    with Cluster(tmp_path, rate=(5, 10, 4)) as cluster:
        connection = http.client.HTTPSConnection("127.0.0.1", cluster.port, timeout=30, context=cluster.trust())
        seen = []
        for _ in range(40):
            connection.request("GET", "/health/ready")
            reply = connection.getresponse()
            seen.append((reply.status, reply.headers["Retry-After"], reply.headers["Content-Type"], reply.read()))
        connection.close()
    assert {status for status, *_ in seen} == {200, 429}
    status, again, kind, body = next(reply for reply in seen if reply[0] == 429)
    assert (again, kind) == ("1", "application/problem+json")
    assert json.loads(body)["type"] == "/problems/too_many_requests"


def test_what_nginx_refuses_is_a_problem_of_ours(tmp_path):
    with Cluster(tmp_path) as cluster:
        codes = {entry["code"] for entry in cluster.replicas[0].get("/problems").json}

        def ask(method, path, body=None):
            connection = http.client.HTTPSConnection("127.0.0.1", cluster.port, timeout=30, context=cluster.trust())
            connection.request(method, path, body, JSON)
            reply = connection.getresponse()
            problem = json.loads(reply.read())
            connection.close()
            assert reply.headers["Content-Type"] == "application/problem+json"
            assert problem["status"] == reply.status
            assert problem["type"].removeprefix("/problems/") in codes
            return reply.status

        assert ask("GET", "/metrics") == 404
        assert ask("POST", "/v1/transform", b" " * (1 << 20) + b"  ") == 413
        assert ask("GET", "/v1/transform?e=1") == 400
        for replica in cluster.replicas:
            replica.stop()
        assert ask("GET", "/health/ready") == 503
        cluster.replicas = []
