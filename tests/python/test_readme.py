"""Every command of the README is run as it stands, and answers what the README shows below it."""

import json
import re
import subprocess

import pytest

from service import ROOT

ADDRESS = "http://127.0.0.1:7410"
README = (ROOT / "README.md").read_text()

# A curl command in its fence, and the answer in the next one.
EXAMPLES = re.findall(r"```sh\n(curl [^`]*)```\n```json\n([^`]*)```", README)


def forget_ids(answer):
    """Request ids differ from answer to answer."""
    return answer | ({"instance": ""} if "instance" in answer else {})


def test_every_curl_command_of_the_readme_shows_its_answer():
    assert len(EXAMPLES) == README.count("```sh\ncurl ") >= 5


@pytest.mark.parametrize("command, shown", EXAMPLES, ids=[f"example {i + 1}" for i in range(len(EXAMPLES))])
def test_an_example_answers_as_shown(service, command, shown):
    done = subprocess.run(command.replace(ADDRESS, service.url), shell=True, check=True,
                          capture_output=True, text=True, timeout=30)
    assert forget_ids(json.loads(done.stdout)) == forget_ids(json.loads(shown))
