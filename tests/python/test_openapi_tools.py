"""The OpenAPI document in the hands of public tools: a linter, a client generator, a fuzzer."""

import importlib
import json
import os
import re
import subprocess
import sys

import pytest

from service import ROOT, TARGET

SEED = "7410"
CHECKS = ["not_a_server_error", "status_code_conformance", "content_type_conformance", "response_schema_conformance"]


def run(*command, cwd, **variables):
    """Runs a tool of the same environment and fails with all it said."""
    path = os.pathsep.join([os.path.dirname(sys.executable), os.environ["PATH"]])
    done = subprocess.run(command, cwd=cwd, env=os.environ | {"PATH": path} | variables,
                          stdin=subprocess.DEVNULL, capture_output=True, text=True, timeout=300)
    assert done.returncode == 0, f"{' '.join(map(str, command))}\n{done.stdout}\n{done.stderr}"
    return done.stdout + done.stderr


def test_the_linter_finds_no_error(tmp_path):
    """Redocly's `recommended` rules; it must not ask any outside host."""
    run(TARGET / "tests/npm/node_modules/.bin/redocly", "lint", ROOT / "openapi/openapi.json",
        "--extends", "recommended", cwd=tmp_path, REDOCLY_TELEMETRY="off", REDOCLY_SUPPRESS_UPDATE_NOTICE="true")


# The generator has to be told that OpenMetrics is plain text of a stricter form, and that rows go as they are.
BYTES = ["application/x-ndjson", "text/csv", "application/vnd.apache.arrow.stream"]
GENERATOR = {"content_type_overrides": {"application/openmetrics-text": "text/plain"}
             | dict.fromkeys(BYTES, "application/octet-stream")}


@pytest.fixture(scope="module")
def client_package(tmp_path_factory):
    """The client that openapi-python-client makes from the committed document."""
    folder = tmp_path_factory.mktemp("client")
    (folder / "config.json").write_text(json.dumps(GENERATOR))
    run("openapi-python-client", "generate", "--path", ROOT / "openapi/openapi.json", "--meta", "none",
        "--config", "config.json", "--output-path", folder / "lodeframe_client", "--fail-on-warning", cwd=folder)
    sys.path.insert(0, str(folder))
    yield importlib.import_module("lodeframe_client")
    sys.path.remove(str(folder))


QUESTION = {
    "e": [0, 1.2, 0], "b": [0, 0, 45000],
    "units": {"e": "mV/m", "b": "nT", "velocity": "km/s", "angle": "deg"},
    "steps": [{"rotate": {"axis": [0, 0, 1], "angle": 30}}, {"boost": {"velocity": [7.6, 0, 0]}}],
    "include": ["tensor", "matrix", "energy", "parallel_frame"],
}


def operation(openapi, method, path):
    """The generated module of an operation: its tag and its id name it."""
    entry = openapi["paths"][path][method]
    tag = entry["tags"][0].replace("-", "_").replace(" ", "_").lower()
    return importlib.import_module(f"lodeframe_client.api.{tag}.{entry['operationId']}")


@pytest.fixture
def transform(service, openapi, client_package):
    """Asks a question through the generated client."""
    module = operation(openapi, "post", "/v1/transform")
    content = openapi["paths"]["/v1/transform"]["post"]["requestBody"]["content"]
    name = content["application/json"]["schema"]["$ref"].rsplit("/", 1)[-1]
    model = getattr(importlib.import_module("lodeframe_client.models"), name)
    client = client_package.Client(base_url=service.url)
    return lambda question: module.sync_detailed(client=client, body=model.from_dict(question))


def test_a_generated_client_asks_and_understands_the_answer(service, transform):
    reply, answer = transform(QUESTION), service.ask(QUESTION)
    assert reply.status_code == 200
    assert reply.parsed.to_dict() == answer
    assert list(reply.parsed.e) == answer["e"]


def test_a_generated_client_understands_a_problem(transform):
    reply = transform({"e": [1, 2, 3], "b": [1, 2, 3], "velocity": [4e8, 0, 0]})
    assert reply.status_code == 422
    assert [fault.code for fault in reply.parsed.errors] == ["faster_than_light"]


def test_a_generated_client_reads_units_and_constants(service, openapi, client_package):
    client = client_package.Client(base_url=service.url)
    for path in ("/v1/units", "/v1/constants"):
        reply = operation(openapi, "get", path).sync_detailed(client=client)
        assert reply.status_code == 200
        assert [entry.to_dict() for entry in reply.parsed] == service.get(path).json


def test_a_fuzzer_finds_no_answer_that_the_document_does_not_describe(service, tmp_path):
    """Schemathesis: documented examples, boundary values and random requests, right and wrong ones."""
    # Rows have no schema that it could fill in; tests/fuzz and test_series_stream.py are for them.
    said = run("schemathesis", "run", f"{service.url}/openapi.json", "--checks", ",".join(CHECKS),
               "--exclude-path", "/v1/series", "--phases", "examples,coverage,fuzzing", "--mode", "all", "--seed", SEED,
               "--max-examples", "100", "--workers", "2", cwd=tmp_path)
    counted = re.search(r"(\d+) generated, (\d+) passed", said)
    assert counted and counted[1] == counted[2] and int(counted[1]) > 500, said
