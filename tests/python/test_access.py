"""Tokens and TLS, with Python's ssl module (OpenSSL) and a browser as independent clients."""

import http.client
import json
import re
import socket
import ssl
import subprocess

import pytest

from browser import Browser
from service import BINARY, Service


@pytest.fixture(scope="module")
def certificate(tmp_path_factory):
    """A certificate for the loopback address, made by OpenSSL, and its key."""
    folder = tmp_path_factory.mktemp("tls")
    chain, key = folder / "chain.pem", folder / "key.pem"
    subprocess.run(
        ["openssl", "req", "-x509", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256", "-nodes", "-days", "2",
         "-subj", "/CN=localhost", "-addext", "subjectAltName=IP:127.0.0.1", "-keyout", key, "-out", chain],
        check=True, capture_output=True)
    return chain, key


@pytest.fixture(scope="module")
def token(tmp_path_factory):
    """A file of one token, and the token."""
    made = subprocess.run([BINARY, "token", "logger-3"], check=True, capture_output=True, text=True)
    file = tmp_path_factory.mktemp("tokens") / "tokens"
    file.write_text(made.stdout)
    return file, re.search(r"^[0-9a-f]{64}$", made.stderr, re.MULTILINE)[0]


@pytest.fixture(scope="module")
def guarded(tmp_path_factory, certificate, token):
    chain, key = certificate
    log = tmp_path_factory.mktemp("guarded") / "log.txt"
    with Service(log, "--tls-cert", chain, "--tls-key", key, "--tokens", token[0]) as running:
        yield running


QUESTION = json.dumps({"e": [0, 123.456789, 0], "b": [0, 0, 45678.9], "velocity": [7.654321, 0, 0]})


def ask(service, context, token):
    headers = {"Content-Type": "application/json", "Authorization": f"Bearer {token}"}
    connection = http.client.HTTPSConnection(service.host, service.port, timeout=30, context=context)
    connection.request("POST", "/v1/transform", QUESTION, headers)
    answer = connection.getresponse()
    body = answer.read()
    connection.close()
    return answer.status, body


@pytest.mark.parametrize("version", [ssl.TLSVersion.TLSv1_2, ssl.TLSVersion.TLSv1_3])
def test_a_client_that_trusts_the_certificate_is_answered(guarded, certificate, token, service, version):
    context = ssl.create_default_context(cafile=certificate[0])
    context.minimum_version = context.maximum_version = version
    status, body = ask(guarded, context, token[1])
    assert status == 200
    assert json.loads(body) == service.ask(json.loads(QUESTION)), "the same answer as without TLS"
    assert ask(guarded, context, token[1][:-1] + "x")[0] == 401


def test_older_tls_and_plain_http_are_not_spoken(guarded, certificate):
    context = ssl.create_default_context(cafile=certificate[0])
    with pytest.warns(DeprecationWarning):
        context.minimum_version = ssl.TLSVersion.TLSv1
        context.maximum_version = ssl.TLSVersion.TLSv1_1
    context.set_ciphers("ALL:@SECLEVEL=0")
    with pytest.raises(ssl.SSLError, match="(?i)alert"):
        ask(guarded, context, "x")
    with socket.create_connection((guarded.host, guarded.port), timeout=30) as plain:
        plain.sendall(b"GET /health/live HTTP/1.1\r\nhost: localhost\r\n\r\n")
        assert not plain.recv(100).startswith(b"HTTP"), "a TLS alert or the end"


def test_a_strange_handshake_harms_nobody(guarded, certificate, token):
    for rubbish in (b"", b"\x16", b"\x16\x03\x01\x40\x00" + b"\xff" * 500, b"\x16\x03\x01\xff\xff" + b"\0" * 70000):
        with socket.create_connection((guarded.host, guarded.port), timeout=30) as plain:
            try:
                plain.sendall(rubbish)
            except ConnectionError:
                pass  # It need not read more than it understands.
    context = ssl.create_default_context(cafile=certificate[0])
    assert ask(guarded, context, token[1])[0] == 200


def test_the_page_asks_for_the_token_when_it_needs_one(tmp_path, token):
    with Service(tmp_path / "log.txt", "--tokens", token[0]) as service, Browser() as page:
        page.open(service.url)
        opened = "return document.querySelector('#token-dialog').open"
        page.until(opened)
        page.type("#token", "f" * 64)
        page.click("#token-dialog button")
        page.until_text("#token-note", "not known")
        page.until(opened)
        page.type("#token", token[1])
        page.click("#token-dialog button")
        page.until("return document.querySelectorAll('.step').length === 1")
        page.click("#example")
        page.until("return !document.querySelector('#answer-parts').hidden")
        page.until("const p = document.querySelector('#picture'); return p.complete && p.naturalWidth > 0")
    assert token[1] not in (tmp_path / "log.txt").read_text()


def test_no_secret_and_no_value_in_log_metrics_or_problems(guarded, certificate, token):
    context = ssl.create_default_context(cafile=certificate[0])
    wrong = token[1][::-1]
    status, problem = ask(guarded, context, wrong)
    assert status == 401
    assert ask(guarded, context, token[1])[0] == 200
    connection = http.client.HTTPSConnection(guarded.host, guarded.port, timeout=30, context=context)
    connection.request("GET", "/metrics", headers={"Authorization": f"Bearer {token[1]}"})
    metrics = connection.getresponse().read()
    connection.close()
    log = guarded.log.read_bytes()
    assert b"route=/v1/transform status=200" in log and b"token_of=logger-3" in log
    for place in (problem, metrics, log):
        for secret in (token[1], wrong, "123.456789", "45678.9", "7.654321"):
            assert secret.encode() not in place
