"""The files in deploy/, each read by the tool that it is for, or by the published schema."""

import json
import re
import subprocess

import dockerfile
import kubernetes_validate
import pytest
import yaml

from service import BINARY, ROOT

DEPLOY = ROOT / "deploy"
MANIFESTS = list(yaml.safe_load_all((DEPLOY / "kubernetes.yaml").read_text()))
BY_KIND = {manifest["kind"]: manifest for manifest in MANIFESTS}


@pytest.mark.parametrize("version", ["1.31", "1.37"])
@pytest.mark.parametrize("kind", BY_KIND)
def test_manifests_follow_the_published_schemas(kind, version):
    kubernetes_validate.validate(BY_KIND[kind], version, strict=True)


def test_manifests_name_each_other_rightly():
    assert set(BY_KIND) == {"Deployment", "Service", "HorizontalPodAutoscaler", "PodDisruptionBudget", "NetworkPolicy"}
    spec = BY_KIND["Deployment"]["spec"]
    labels = spec["template"]["metadata"]["labels"]
    for selector in (spec["selector"]["matchLabels"], BY_KIND["Service"]["spec"]["selector"],
                     BY_KIND["PodDisruptionBudget"]["spec"]["selector"]["matchLabels"],
                     BY_KIND["NetworkPolicy"]["spec"]["podSelector"]["matchLabels"]):
        assert selector.items() <= labels.items()
    scaled = BY_KIND["HorizontalPodAutoscaler"]["spec"]["scaleTargetRef"]
    assert (scaled["kind"], scaled["name"]) == ("Deployment", BY_KIND["Deployment"]["metadata"]["name"])
    container, = spec["template"]["spec"]["containers"]
    port, = container["ports"]
    assert BY_KIND["Service"]["spec"]["ports"][0]["targetPort"] == port["name"]
    assert BY_KIND["NetworkPolicy"]["spec"]["ingress"][0]["ports"][0]["port"] == port["containerPort"]


def test_the_pod_is_asked_where_the_service_answers(openapi, tmp_path):
    container, = BY_KIND["Deployment"]["spec"]["template"]["spec"]["containers"]
    for probe in ("readinessProbe", "livenessProbe"):
        assert container[probe]["httpGet"]["path"] in openapi["paths"]
    # The settings are ones that the service knows, and they ask for tokens.
    settings = {entry["name"]: entry["value"] for entry in container["env"]}
    tokens = tmp_path / "tokens"
    tokens.write_text(subprocess.run([BINARY, "token", "pod"], check=True, capture_output=True, text=True).stdout)
    mounted = container["volumeMounts"][0]["mountPath"]
    assert settings["LODEFRAME_TOKENS"].startswith(mounted + "/")
    settings["LODEFRAME_TOKENS"] = str(tokens)
    shown = subprocess.run([BINARY, *container["args"], "--print-config"], env=settings, check=True, capture_output=True, text=True)
    assert f"LODEFRAME_LISTEN={settings['LODEFRAME_LISTEN']}\n" in shown.stdout


def test_the_image_is_one_static_binary_without_rights():
    commands = dockerfile.parse_file(str(DEPLOY / "Containerfile"))
    stages = [i for i, command in enumerate(commands) if command.cmd.upper() == "FROM"]
    assert commands[stages[-1]].value == ("scratch",)
    last = {command.cmd.upper(): command for command in commands[stages[-1]:]}
    assert last["COPY"].flags == ("--from=build",)
    assert re.fullmatch(r"[1-9]\d*:[1-9]\d*", last["USER"].value[0])
    pod = BY_KIND["Deployment"]["spec"]["template"]["spec"]["securityContext"]
    assert last["USER"].value[0] == f"{pod['runAsUser']}:{pod['runAsGroup']}"
    assert last["ENTRYPOINT"].value == ("/lodeframe",)


def test_the_units_are_understood_and_exposed_to_little(tmp_path):
    for unit in (DEPLOY / "systemd").iterdir():
        (tmp_path / unit.name).write_text(unit.read_text().replace("/usr/local/bin/lodeframe", str(BINARY)))
    tool = ["systemd-analyze"]
    units = ["lodeframe@7410.service", "lodeframe@7410.socket"]
    verified = subprocess.run([*tool, "verify", "--man=no", *units], env={"SYSTEMD_UNIT_PATH": f"{tmp_path}:"},
                              capture_output=True, text=True)
    assert (verified.returncode, verified.stdout + verified.stderr) == (0, "")
    # 0 is nothing, 10 everything; the tool itself fails past the threshold, given as ten times that.
    judged = subprocess.run([*tool, "security", "--offline=yes", "--threshold=5", "--json=short", DEPLOY / "systemd" / "lodeframe@.service"],
                            capture_output=True, text=True)
    assert judged.returncode == 0, judged.stdout
    assert json.loads(judged.stdout)
