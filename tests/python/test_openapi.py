"""The OpenAPI document: valid, complete, and true, down to every example in it."""

import json
import random
import re
import urllib.parse

import pytest
from jsonschema import Draft202012Validator, FormatChecker
from openapi_spec_validator import OpenAPIV31SpecValidator
from referencing import Registry, Resource
from referencing.jsonschema import DRAFT202012

import regimes
import ways
from service import JSON, ROOT

METHODS = {"get", "post", "put", "delete", "patch", "head", "options"}
DOCUMENT = "urn:openapi"
POST = ("paths", "/v1/transform", "post")


@pytest.fixture(scope="module")
def validator(openapi):
    """A validator of values against a schema at a JSON Pointer into the document."""
    resource = Resource.from_contents(openapi, default_specification=DRAFT202012)
    registry = Registry().with_resource(DOCUMENT, resource)

    def check(value, pointer):
        schema = {"$ref": f"{DOCUMENT}#{pointer}"}
        faults = Draft202012Validator(schema, registry=registry, format_checker=FormatChecker()).iter_errors(value)
        assert not [f"{fault.json_path}: {fault.message}"[:500] for fault in faults]

    return check


def pointer_to(*parts):
    escaped = (urllib.parse.quote(part.replace("~", "~0").replace("/", "~1"), safe="~$") for part in parts)
    return "".join(f"/{part}" for part in escaped)


def operations(openapi):
    for path, item in openapi["paths"].items():
        for method in METHODS & item.keys():
            yield path, method, item[method]


def examples_of(media):
    """Name → value of the examples of a media type or parameter."""
    named = {name: entry["value"] for name, entry in media.get("examples", {}).items()}
    return named | ({"": media["example"]} if "example" in media else {})


def forget_ids(value):
    """Request ids differ from answer to answer."""
    return json.loads(re.sub(r"urn:uuid:[0-9a-f-]{36}", "urn:uuid:", json.dumps(value)))


def test_it_is_valid_openapi_3_1(openapi):
    assert openapi["openapi"].startswith("3.1.")
    OpenAPIV31SpecValidator(openapi).validate()


def test_the_committed_document_is_the_served_one(openapi):
    assert json.loads((ROOT / "openapi" / "openapi.json").read_bytes()) == openapi


def test_every_schema_and_property_is_described_and_every_schema_shows_an_example(openapi):
    for name, schema in openapi["components"]["schemas"].items():
        assert schema.get("description"), name
        # Words and alternatives show themselves; an object needs an instance.
        assert "example" in schema or "examples" in schema or schema.keys() & {"enum", "oneOf"}, name
        for branch in [schema, *schema.get("oneOf", []), *schema.get("allOf", [])]:
            for member, content in branch.get("properties", {}).items():
                # What may be null is described beside the schema it refers to.
                choices = [content, *content.get("oneOf", [])]
                assert any(choice.get("description") for choice in choices), f"{name}.{member}"


def test_every_operation_and_parameter_is_described(openapi):
    ids = [operation["operationId"] for _, _, operation in operations(openapi)]
    assert len(ids) == len(set(ids))
    for path, method, operation in operations(openapi):
        assert operation.get("summary") or operation.get("description"), f"{method} {path}"
        for parameter in operation.get("parameters", []):
            assert parameter.get("description"), f"{method} {path} {parameter['name']}"


def test_examples_of_schemas_are_instances_of_them(openapi, validator):
    for name, schema in openapi["components"]["schemas"].items():
        for value in schema.get("examples", [schema["example"]] if "example" in schema else []):
            validator(value, pointer_to("components", "schemas", name))


def test_every_example_of_a_request_is_answered_as_its_example_of_an_answer_says(service, openapi, validator):
    """The example of a body is sent; the answer is the documented one of the same name."""
    executed = 0
    for path, method, operation in operations(openapi):
        for kind, media in operation.get("requestBody", {}).get("content", {}).items():
            for name, value in examples_of(media).items():
                # Rows are shown as the text that they are.
                body = json.dumps(value) if kind == "application/json" else value
                address = path + example_query(operation)
                reply = service.request(method.upper(), address, body.encode(), {"Content-Type": kind})
                check_reply(reply, path, method, operation, validator, name)
                executed += 1
    assert executed >= 1


def test_every_example_by_url_is_answered_as_its_example_of_an_answer_says(service, demo, openapi, validator):
    """The examples of all parameters of an operation make one request."""
    for path, method, operation in operations(openapi):
        if method != "get":
            continue
        asked = demo if path.startswith("/v1/frames") else service
        address = path
        for parameter in operation.get("parameters", []):
            example = parameter.get("example", parameter.get("schema", {}).get("example"))
            if parameter["in"] == "path":
                assert example is not None, f"{path}: a path parameter needs an example"
                address = address.replace(f"{{{parameter['name']}}}", urllib.parse.quote(str(example)))
        check_reply(asked.get(address + example_query(operation)), path, method, operation, validator, "")


def example_query(operation):
    """The examples of all parameters of a query, as a query."""
    query = []
    for parameter in operation.get("parameters", []):
        example = parameter.get("example", parameter.get("schema", {}).get("example"))
        if parameter["in"] == "query" and example is not None:
            text = ",".join(map(str, example)) if isinstance(example, list) else str(example)
            query.append((parameter["name"], text))
    return f"?{urllib.parse.urlencode(query)}" if query else ""


def check_reply(reply, path, method, operation, validator, name):
    """Success, of a documented type and schema, equal to the documented example of this name."""
    where = f"{method} {path} {name}"
    assert reply.status == 200, f"{where}: {reply.body.decode()}"
    kind = reply.headers["content-type"].split(";")[0]
    media = operation["responses"]["200"]["content"][kind]
    if kind != "application/json":
        # Pictures and counters differ from time to time; rows do not.
        documented = examples_of(media)
        if method == "post" and name in documented:
            assert reply.body.decode() == documented[name], where
        return
    if "schema" in media:
        validator(reply.json, pointer_to("paths", path, method, "responses", "200", "content", kind, "schema"))
    documented = examples_of(media)
    if name in documented:
        assert forget_ids(reply.json) == forget_ids(documented[name]), where


def test_examples_of_answers_belong_to_a_request(openapi):
    """An answer shown without the question that it answers could not be checked."""
    for path, method, operation in operations(openapi):
        for kind, media in operation["responses"]["200"].get("content", {}).items():
            asked = {name for body in operation.get("requestBody", {}).get("content", {}).values()
                     for name in examples_of(body)} or {""}
            if kind == "application/json":
                assert set(examples_of(media)) <= asked, f"{method} {path}"


MAKERS = [*regimes.BOOSTS.values(), ways.one_rotation, ways.chain, ways.any_units]


def test_real_answers_are_instances_of_their_schema(service, validator):
    pointer = pointer_to(*POST, "responses", "200", "content", "application/json", "schema")
    rng = random.Random("schema")
    for make in MAKERS:
        question = make(rng) | {"include": ["tensor", "matrix", "energy", "parallel_frame"]}
        validator(service.ask(question), pointer)
    turn = {"e": [1, 2, 3], "b": [1, 2, 3], "rotation": {"axis": [0, 0, 1], "angle": 1}}
    for partial in ({"e": None}, {"b": [None, 1, 2]}):
        validator(service.ask(turn | partial), pointer)


def test_real_questions_are_instances_of_their_schema(validator):
    pointer = pointer_to(*POST, "requestBody", "content", "application/json", "schema")
    rng = random.Random("question")
    for make in MAKERS:
        validator(make(rng), pointer)


@pytest.mark.parametrize("body", [
    b"{", b"{}", b'{"e": 1, "f": 2}', b'{"e": [1, 2, 3], "b": [1, 2, 3], "velocity": [4e8, 0, 0]}'])
def test_real_problems_are_instances_of_their_schema(service, openapi, validator, body):
    reply = service.request("POST", "/v1/transform", body, JSON)
    assert str(reply.status) in openapi["paths"]["/v1/transform"]["post"]["responses"]
    content = ("content", "application/problem+json", "schema")
    validator(reply.json, pointer_to(*POST, "responses", str(reply.status), *content))
