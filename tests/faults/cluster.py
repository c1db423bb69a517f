"""Three replicas behind nginx with TLS, as deploy/nginx.conf describes them, on free ports."""

import contextlib
import os
import re
import signal
import socket
import ssl
import subprocess
import time

from service import ROOT, Service

REPLICAS = 3


def free_ports(count):
    with contextlib.ExitStack() as held:
        sockets = [held.enter_context(socket.socket()) for _ in range(count)]
        for one in sockets:
            one.bind(("127.0.0.1", 0))
        return [one.getsockname()[1] for one in sockets]


def certificate(folder):
    """A certificate for the loopback address, and its key."""
    chain, key = folder / "chain.pem", folder / "key.pem"
    subprocess.run(
        ["openssl", "req", "-x509", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256", "-nodes", "-days", "2",
         "-subj", "/CN=localhost", "-addext", "subjectAltName=IP:127.0.0.1", "-keyout", key, "-out", chain],
        check=True, capture_output=True)
    return chain, key


class Cluster:
    """nginx on `port`, and the replicas that it asks."""

    def __init__(self, folder, *, rate=None, flags=()):
        self.folder, self.flags = folder, flags
        self.port, *self.ports = free_ports(1 + REPLICAS)
        self.chain, key = certificate(folder)
        text = (ROOT / "deploy" / "nginx.conf").read_text()
        changes = {"listen 443": f"listen 127.0.0.1:{self.port}", "/etc/lodeframe/chain.pem": self.chain,
                   "/etc/lodeframe/key.pem": key, "/var/log/nginx/lodeframe.log": folder / "access.log"}
        changes |= {f"127.0.0.1:{7411 + i}": f"127.0.0.1:{port}" for i, port in enumerate(self.ports)}
        if rate:
            changes |= {"rate=500r/s": f"rate={rate[0]}r/s", "burst=1000": f"burst={rate[1]}",
                        "lodeframe_connections 128": f"lodeframe_connections {rate[2]}"}
        for old, new in changes.items():
            assert text.count(old) == 1, f"{old} in deploy/nginx.conf"
            text = text.replace(old, str(new))
        temporary = "".join(f"{kind}_temp_path {folder}/{kind};" for kind in
                            ("client_body", "proxy", "fastcgi", "uwsgi", "scgi"))
        user = "user root;" if os.geteuid() == 0 else ""
        conf = folder / "nginx.conf"
        conf.write_text(f"{user} daemon off; pid {folder}/nginx.pid; error_log {folder}/error.log;"
                        f" events {{ worker_connections 4096; }} http {{ {temporary}\n{text} }}")
        self.command = ["nginx", "-p", folder, "-c", conf, "-e", folder / "error.log"]
        self.log = folder / "replicas.txt"

    def __enter__(self):
        self.replicas = [self._replica(i) for i in range(REPLICAS)]
        self.nginx = subprocess.Popen(self.command, stdout=subprocess.DEVNULL)
        end = time.monotonic() + 10
        while time.monotonic() < end:
            with contextlib.suppress(OSError), socket.create_connection(("127.0.0.1", self.port), timeout=1):
                return self
            time.sleep(0.02)
        raise AssertionError(f"nginx did not start: {(self.folder / 'error.log').read_text()}")

    def __exit__(self, *_):
        self.nginx.send_signal(signal.SIGQUIT)
        self.nginx.wait(30)
        for replica in self.replicas:
            assert replica.stop() == 0

    def _replica(self, i):
        log = self.folder / f"replica-{i}-{time.monotonic_ns()}.txt"
        return Service(log, *self.flags, port=self.ports[i])

    def kill(self, i):
        """Ends a replica as a power cut would, and starts it anew."""
        self.replicas[i].process.kill()
        self.replicas[i].process.wait()
        self.replicas[i] = self._replica(i)

    def trust(self):
        """What a client needs to believe nginx."""
        return ssl.create_default_context(cafile=self.chain)

    def complaints(self):
        """What stands in the logs of the replicas and is no answered request."""
        lines = "".join(log.read_text() for log in self.folder.glob("replica-*.txt")).splitlines()
        return [line for line in lines if re.search(r"level=(error|warn)|panic", line)]
